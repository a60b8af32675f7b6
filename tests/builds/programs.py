"""Run an exported header: a main function around it, samples in, samples out."""

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from tests.compiling import EXACT, compile_program, run_program
from tonebench.builds import export_text
from tonebench.core.chain import Chain
from tonebench.target.arithmetic import Target, parse_target

# Blocks of odd sizes, every other one in place: neither may change a bit.
_MAIN = """
#include <stdio.h>
#include <string.h>
#include "{name}.h"

int main(void)
{{
    static {name}_state state;
    static {kind} in[257];
    static {kind} out[257];
    size_t got;
    size_t size = 1;
    memset(&state, 0x55, sizeof state);
    {name}_reset(&state);
    while ((got = fread(in, sizeof in[0], size, stdin)) != 0) {{
        {kind} *to = (size % 2 == 0) ? in : out;
        {name}_process(&state, in, to, got);
        if (fwrite(to, sizeof to[0], got, stdout) != got) {{
            return 1;
        }}
        size = size % 257 + 1;
    }}
    return 0;
}}
"""


def dtype_of(target: Target) -> type[np.floating]:
    """Return numpy's type for a floating-point target."""
    return np.float32 if target.number_format.word_bits == 32 else np.float64


def run_export(
    folder: Path, chain: Chain, target_name: str, samples: NDArray[np.float64], *, is_forced: bool = False
) -> NDArray[np.float64]:
    """Export a chain, compile it with all warnings as errors, and return what it makes of the samples, as doubles."""
    target = parse_target(target_name)
    kind = "float" if dtype_of(target) is np.float32 else "double"
    sources = {
        "hum.h": export_text(chain, target, "c", "hum", is_forced=is_forced),
        "main.c": _MAIN.format(name="hum", kind=kind),
    }
    program = compile_program(folder, sources, EXACT)
    made = run_program(program, samples.astype(dtype_of(target)).tobytes())
    return np.frombuffer(made, dtype=dtype_of(target)).astype(np.float64)
