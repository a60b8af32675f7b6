"""Compile and run small C programs in tests: the outside judge of everything that is exported."""

import os
import shutil
import subprocess
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

STRICT = ("-std=c99", "-Wall", "-Wextra", "-Wpedantic", "-Wconversion", "-Wshadow", "-Werror")
# Without it a compiler may join a product and a sum into one rounding, and the bits differ.
EXACT = (*STRICT, "-O2", "-ffp-contract=off")


def is_missing(program: str = "cc") -> bool:
    """Tell whether a compiler is absent and may be: where audio is required, so are compilers."""
    return shutil.which(program) is None and os.environ.get("TONEBENCH_REQUIRE_SOUND") != "1"


needs_compiler = pytest.mark.skipif(is_missing(), reason="no C compiler named cc; install gcc or clang")


def compile_program(
    folder: Path, sources: Mapping[str, str], flags: Sequence[str] = EXACT, compiler: str = "cc"
) -> Path:
    """Write sources into a folder, compile all that end in ``.c`` into one program, and return its path.

    Raises
    ------
    AssertionError
        With the compiler's own words, if it says anything at all.

    """
    for name, text in sources.items():
        (folder / name).write_text(text, encoding="ascii", newline="\n")
    program = folder / "program"
    units = [name for name in sources if name.endswith(".c")]
    command = [compiler, *flags, *units, "-o", str(program)]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stderr
    assert not done.stderr, done.stderr
    return program


def run_program(program: Path, given: bytes, arguments: Sequence[str] = ()) -> bytes:
    """Run a compiled program on bytes and return what it writes."""
    done = subprocess.run([str(program), *arguments], input=given, capture_output=True, timeout=60, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout


# Blocks of odd sizes, every other one in place: neither may change a bit. The state starts out as rubbish.
_MAIN = """
#include <stdio.h>
#include <string.h>
#include "{header}"

int main(void)
{{
    static {prefix}_state state;
    static {kind} in[257];
    static {kind} out[257];
    size_t got;
    size_t size = 1;
    memset(&state, 0x55, sizeof state);
    {prefix}_reset(&state);
    while ((got = fread(in, sizeof in[0], size, stdin)) != 0) {{
        {kind} *to = (size % 2 == 0) ? in : out;
        {prefix}_process(&state, in, to, got);
        if (fwrite(to, sizeof to[0], got, stdout) != got) {{
            return 1;
        }}
        size = size % 257 + 1;
    }}
    return 0;
}}
"""


@dataclass(frozen=True, slots=True)
class CompiledExport:
    """A program around an exported header: one channel in, one out."""

    program: Path
    is_float: bool

    def process(self, samples: NDArray[Any]) -> NDArray[np.float64]:
        """Return what the exported code makes of samples of shape (n,), from a state of rest, as doubles."""
        kind = np.float32 if self.is_float else np.float64
        made = run_program(self.program, samples.astype(kind).tobytes())
        return np.frombuffer(made, dtype=kind).astype(np.float64)


def compile_c(header: Path, prefix: str, *, is_float: bool) -> CompiledExport:
    """Compile an exported header into a program, with every warning an error and without contraction."""
    folder = header.parent / f"{header.stem}_build"
    folder.mkdir(exist_ok=True)
    main = _MAIN.format(header=header.name, prefix=prefix, kind="float" if is_float else "double")
    sources = {header.name: header.read_text(encoding="ascii"), "main.c": main}
    return CompiledExport(compile_program(folder, sources), is_float)
