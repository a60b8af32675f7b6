"""Numbers as C reads them: the shortest decimal that reads back to the same float."""

from fractions import Fraction

import numpy as np

from tonebench.builds.build import Build
from tonebench.target.arithmetic import Target


def type_name(target: Target) -> str:
    """Return the C type of a floating-point target."""
    return "float" if target.number_format.word_bits == 32 else "double"


def literal(value: float | Fraction, target: Target) -> str:
    """Return a C constant of the target's type; the value is one of its words already."""
    if type_name(target) == "float":
        return f"{np.float32(float(value))!s}f"
    return repr(float(value))


def table_rows(build: Build) -> list[str]:
    """Return one line per section, each with its number."""
    rows = []
    for (number, _), rounded in zip(build.sections, build.rounded.sections, strict=True):
        words = ", ".join(literal(word, build.target) for word in rounded.words)
        rows.append(f"    {{{words}}}, /* {number} */")
    return rows
