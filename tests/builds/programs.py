"""Run a chain as exported C."""

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from tests.compiling import compile_c
from tonebench.builds import export_text
from tonebench.core.chain import Chain
from tonebench.target.arithmetic import parse_target


def run_export(
    folder: Path, chain: Chain, target_name: str, samples: NDArray[np.float64], *, is_forced: bool = False
) -> NDArray[np.float64]:
    """Export a chain, compile it with all warnings as errors, and return what it makes of the samples, as doubles."""
    target = parse_target(target_name)
    header = folder / "hum.h"
    text = export_text(chain, target, "c", "hum", is_forced=is_forced)
    header.write_text(text, encoding="ascii", newline="\n")
    return compile_c(header, "hum", is_float=target.number_format.word_bits == 32).process(samples)
