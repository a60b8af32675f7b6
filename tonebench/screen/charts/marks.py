"""Everything that depends on what a terminal can show lives here: dots per cell, glyphs, dash patterns.

Curves are told apart by their dashes and marks by their signs, never by colour alone; each set of marks has its own
way to do that with the characters that such a terminal has.
"""

from dataclasses import dataclass
from enum import IntEnum
from typing import TYPE_CHECKING, Final

import numpy as np

from tonebench.errors import InvalidValueError, must_be

if TYPE_CHECKING:
    from numpy.typing import NDArray


class Ink(IntEnum):
    """What a cell shows; the widget gives each its style. The order is that of `INK_CLASSES` in chart.py."""

    BASE = 0
    GRID = 1
    LABEL = 2
    CURVE = 3
    SECOND = 4
    THIRD = 5
    MARK = 6
    SELECTED = 7
    BYPASSED = 8
    RIM = 9
    LEADER = 10


@dataclass(frozen=True, slots=True)
class Dash:
    """One way to interrupt a curve.

    Attributes
    ----------
    name : str
        "solid", "dashed" or "dotted".
    lit, period : int
        Cells drawn, out of each period of cells.
    letter : str
        The character of the curve where a cell has one dot only.
    sample : str
        A character for a legend.
    """

    name: str
    lit: int
    period: int
    letter: str
    sample: str


SOLID: Final = Dash("solid", 1, 1, "*", "─")
DASHED: Final = Dash("dashed", 3, 4, "=", "┄")
DOTTED: Final = Dash("dotted", 1, 2, "+", "┈")


@dataclass(frozen=True, slots=True, eq=False)
class MarkSet:
    """The characters that a terminal can show.

    Attributes
    ----------
    name : str
        "braille", "half-block" or "ascii".
    dot_columns, dot_rows : int
        Dots across and down one cell.
    weights : ndarray of uint8, shape (dot_rows, dot_columns)
        Bit of each dot in a cell's pattern.
    glyphs : ndarray of uint32
        Code point of each pattern; pattern 0 is the blank.
    spelling : dict of int to str
        Replacements for characters that such a terminal may lack.
    """

    name: str
    dot_columns: int
    dot_rows: int
    weights: "NDArray[np.uint8]"
    glyphs: "NDArray[np.uint32]"
    spelling: dict[int, str]

    def spell(self, text: str) -> str:
        """Text in the characters of this set; the length may change (π becomes pi)."""
        return text.translate(self.spelling)

    def curve_glyphs(self, dash: Dash) -> "NDArray[np.uint32]":
        """Code point of each dot pattern for a curve drawn with a dash."""
        if len(self.glyphs) > 2:
            return self.glyphs
        return np.array([32, ord(dash.letter)], dtype=np.uint32)

    def faint_glyphs(self, ink: Ink) -> "NDArray[np.uint32]":
        """Code point of each dot pattern for leaders and grid lines."""
        if self.dot_columns > 1:
            return self.glyphs
        letter = ":" if ink is Ink.LEADER else self.spell("·")
        faint = np.full(len(self.glyphs), ord(letter), dtype=np.uint32)
        faint[0] = 32
        return faint

    def legend(self, dash: Dash) -> str:
        """One character that stands for a curve in a title."""
        return dash.letter if len(self.glyphs) == 2 else self.spell(dash.sample)


def _braille() -> MarkSet:
    # Unicode 15.0, chapter 21.1: U+2800 plus one bit per dot, in this order of columns and rows.
    weights = np.array([[1, 8], [2, 16], [4, 32], [64, 128]], dtype=np.uint8)
    glyphs = np.arange(0x2800, 0x2900, dtype=np.uint32)
    glyphs[0] = 32
    return MarkSet("braille", 2, 4, weights, glyphs, {})


def _half_block() -> MarkSet:
    # These terminals (16-colour consoles) have the characters of code page 437 at best.
    spelling = {"⊗": "*", "▴": "^", "‹": "<", "›": ">", "┈": "·", "┄": "-", "┊": "·", "━": "═", "−": "-", "π": "pi"}
    glyphs = np.array([ord(c) for c in " ▀▄█"], dtype=np.uint32)
    weights = np.array([[1], [2]], dtype=np.uint8)
    return MarkSet("half-block", 1, 2, weights, glyphs, str.maketrans(spelling))


def _ascii() -> MarkSet:
    spelling = {"⊗": "*", "▴": "^", "‹": "<", "›": ">", "┈": ".", "┄": "=", "┊": ":", "│": "|", "━": "=", "−": "-"}
    spelling |= {"×": "x", "○": "o", "π": "pi", "↑": "^", "↓": "v", "·": ".", "µ": "u", "─": "-", "–": "-"}
    glyphs = np.array([32, ord("*")], dtype=np.uint32)
    return MarkSet("ascii", 1, 1, np.array([[1]], dtype=np.uint8), glyphs, str.maketrans(spelling))


MARK_SETS: Final[dict[str, MarkSet]] = {marks.name: marks for marks in (_braille(), _half_block(), _ascii())}


def mark_set(name: str) -> MarkSet:
    """Look up a set of marks by its name.

    Raises
    ------
    InvalidValueError
        There is no set of that name.
    """
    if name not in MARK_SETS:
        raise InvalidValueError(must_be("marks", "one of " + ", ".join(MARK_SETS), name))
    return MARK_SETS[name]
