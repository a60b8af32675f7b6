"""Compile and run small C programs in tests: the outside judge of everything that is exported."""

import os
import shutil
import subprocess
from collections.abc import Mapping, Sequence
from pathlib import Path

import pytest

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
