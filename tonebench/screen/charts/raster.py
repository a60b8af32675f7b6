"""The cell buffer that every chart draws into, and nothing about what is drawn.

A `Raster` holds one code point and one ink per cell. Text reserves its cells: later text that would touch them is
refused whole, and curves pass under it, so labels never overlap and are never cut.
"""

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING, Self

import numpy as np
from rich.segment import Segment
from textual.strip import Strip

from tonebench.screen.charts.marks import SOLID, Dash, Ink, MarkSet

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray
    from rich.style import Style

BLANK = 32


@dataclass(frozen=True, slots=True)
class Area:
    """A rectangle of cells: left and top are its first column and row."""

    left: int
    top: int
    width: int
    height: int


class Raster:
    """Cells to draw into.

    Parameters
    ----------
    width, height : int
        Cells; negative counts as none.
    marks : MarkSet
        What the terminal can show.
    """

    def __init__(self, width: int, height: int, marks: MarkSet) -> None:
        self.width = max(0, width)
        self.height = max(0, height)
        self.marks = marks
        shape = (self.height, self.width)
        self.codes: NDArray[np.uint32] = np.full(shape, BLANK, dtype=np.uint32)
        self.inks: NDArray[np.uint8] = np.zeros(shape, dtype=np.uint8)
        self.is_taken: NDArray[np.bool_] = np.zeros(shape, dtype=np.bool_)
        self._patterns: NDArray[np.uint8] = np.zeros(shape, dtype=np.uint8)

    def copy(self) -> Self:
        """Copy this raster, to draw on over a background that is kept."""
        twin = type(self)(self.width, self.height, self.marks)
        twin.codes = self.codes.copy()
        twin.inks = self.inks.copy()
        twin.is_taken = self.is_taken.copy()
        twin._patterns = self._patterns.copy()  # noqa: SLF001 - the same class
        return twin

    def is_inside(self, column: int, row: int, length: int = 1) -> bool:
        """Whether a run of cells lies wholly in the raster."""
        return 0 <= row < self.height and column >= 0 and column + length <= self.width

    def is_free(self, column: int, row: int, length: int = 1) -> bool:
        """Whether a run of cells lies in the raster and no text or mark is in it."""
        return self.is_inside(column, row, length) and not self.is_taken[row, column : column + length].any()

    def text(self, column: int, row: int, text: str, ink: Ink) -> bool:
        """Write a text where it fits and nothing is reserved, else write nothing.

        Returns
        -------
        bool
            Whether it was written.
        """
        spelt = self.marks.spell(text)
        if not self.is_free(column, row, len(spelt)):
            return False
        run = slice(column, column + len(spelt))
        self.codes[row, run] = [ord(letter) for letter in spelt]
        self.inks[row, run] = ink
        self.is_taken[row, run] = True
        return True

    def reserve(self, area: Area) -> None:
        """Keep cells from whatever is drawn later."""
        self.is_taken[area.top : area.top + area.height, area.left : area.left + area.width] = True

    def put(self, column: int, row: int, glyph: str, ink: Ink, *, is_reserved: bool = True) -> None:
        """Set one cell unless text or a mark is in it; outside the raster nothing happens."""
        if not self.is_free(column, row):
            return
        self.codes[row, column] = ord(self.marks.spell(glyph)[0])
        self.inks[row, column] = ink
        self._patterns[row, column] = 0
        self.is_taken[row, column] = is_reserved

    def dots(
        self, area: Area, lit: "NDArray[np.bool_]", ink: Ink, dash: Dash = SOLID, *, is_faint: bool = False
    ) -> None:
        """Draw dots over an area, under its text.

        Parameters
        ----------
        area : Area
            Must lie inside the raster.
        lit : ndarray of bool, shape (area.height * dot_rows, area.width * dot_columns)
            The dots to light; those of earlier curves in the same cell stay lit.
        ink : Ink
            Of every cell touched.
        dash : Dash
            Chooses the letter where a cell is one dot.
        is_faint : bool
            Draw over blank cells and the grid only, and with a light letter where dots are large.
        """
        down, across = self.marks.dot_rows, self.marks.dot_columns
        cells = lit.reshape(area.height, down, area.width, across)
        patterns = np.einsum("rdca,da->rc", cells, self.marks.weights, dtype=np.uint8, casting="unsafe")
        window = (slice(area.top, area.top + area.height), slice(area.left, area.left + area.width))
        is_drawn = (patterns > 0) & ~self.is_taken[window]
        if is_faint:
            under = self.inks[window]
            is_drawn &= (self.codes[window] == BLANK) | (under == Ink.GRID) | (under == ink)
        joined = np.where(is_drawn, patterns | self._patterns[window], self._patterns[window])
        self._patterns[window] = joined
        glyphs = self.marks.faint_glyphs(ink) if is_faint else self.marks.curve_glyphs(dash)
        self.codes[window] = np.where(is_drawn, glyphs[joined], self.codes[window])
        self.inks[window] = np.where(is_drawn, np.uint8(ink), self.inks[window])

    def forget_dots(self) -> None:
        """Make what is drawn a background: later curves replace its dots instead of joining them."""
        self._patterns[:] = 0

    def row_text(self, row: int) -> str:
        """Return the characters of one row."""
        return bytes(self.codes[row].astype("<u4").data).decode("utf-32-le")

    def text_rows(self) -> list[str]:
        """Return the characters of every row, blanks at the right end kept."""
        return [self.row_text(row) for row in range(self.height)]

    def strip(self, row: int, styles: "Sequence[Style]") -> Strip:
        """Return one row for Textual; a blank cell takes the style to its left, which saves half the bytes.

        Parameters
        ----------
        row : int
            Row of the raster.
        styles : sequence of Style
            One per `Ink`. None may show on a blank cell (underline, reverse), since blanks carry it on.
        """
        if not self.width:
            return Strip([], 0)
        codes = self.codes[row]
        is_inked = codes != BLANK
        last = np.maximum.accumulate(np.where(is_inked, np.arange(self.width), -1))
        inks = np.where(last >= 0, self.inks[row][last], 0)
        starts = np.flatnonzero(np.diff(inks)) + 1
        bounds = [0, *starts.tolist(), self.width]
        text = self.row_text(row)
        segments = [Segment(text[a:b], styles[inks[a]]) for a, b in pairwise(bounds)]
        return Strip(segments, self.width)
