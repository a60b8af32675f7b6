"""Reading drawn charts back: decoders that share no code with the drawing."""

import numpy as np
from hypothesis import settings
from numpy.typing import NDArray

# No deadline: the machine is shared, and a slow draw is a matter for the benchmark.
QUICK = settings(deadline=None, max_examples=60)

# Unicode 15.0, chapter 21.1: dots 1 to 8 of a braille cell as (column, row), bit 0 first.
_BRAILLE_DOTS = ((0, 0), (0, 1), (0, 2), (1, 0), (1, 1), (1, 2), (0, 3), (1, 3))
_BLOCKS = {" ": (False, False), "▀": (True, False), "▄": (False, True), "█": (True, True)}


def lit_dots(rows: list[str], marks: str, letters: str = "*") -> NDArray[np.bool_]:
    """Return the lit dots of a block of text, one row of the result per row of dots."""
    height, width = len(rows), len(rows[0])
    down, across = {"braille": (4, 2), "half-block": (2, 1), "ascii": (1, 1)}[marks]
    lit = np.zeros((height * down, width * across), dtype=np.bool_)
    for row, text in enumerate(rows):
        for column, letter in enumerate(text):
            for x, y in _dots(letter, marks, letters):
                lit[row * down + y, column * across + x] = True
    return lit


def _dots(letter: str, marks: str, letters: str) -> list[tuple[int, int]]:
    if marks == "ascii":
        return [(0, 0)] if letter in letters else []
    if marks == "half-block":
        return [(0, y) for y, is_lit in enumerate(_BLOCKS.get(letter, ())) if is_lit]
    bits = ord(letter) - 0x2800
    return [dot for bit, dot in enumerate(_BRAILLE_DOTS) if 0 <= bits < 256 and bits >> bit & 1]
