"""The axes: the frequency axis that all charts share, and the ticks of decibel axes.

Equal width gives equal columns for equal frequencies in every chart. From the left: labels of the other axis, the
gutter for angle 0, the plot, the gutter for angle pi.
"""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from tonebench.errors import InvalidValueError, must_be
from tonebench.screen.charts.marks import Ink, MarkSet
from tonebench.screen.charts.words import frequency_label

if TYPE_CHECKING:
    from collections.abc import Collection

    from numpy.typing import NDArray

    from tonebench.screen.charts.raster import Raster

LABEL_COLUMNS: Final = 8
LOWEST_HZ: Final = 0.01
DEFAULT_LOW_HZ: Final = 20.0


@dataclass(frozen=True, slots=True)
class Tick:
    """One place on an axis: the value, its cell, and what it is called."""

    value: float
    cell: int
    label: str


@dataclass(frozen=True, slots=True)
class FrequencyAxis:
    """Frequencies over the width of a chart, on a logarithmic scale.

    Attributes
    ----------
    width : int
        Cells of the whole chart.
    sample_rate_hz : float
        Angle pi is half of it.
    low_hz, high_hz : float
        Limits of the plot, 0 < low < high <= sample_rate_hz / 2.
    """

    width: int
    sample_rate_hz: float
    low_hz: float
    high_hz: float

    def __post_init__(self) -> None:
        if not (math.isfinite(self.sample_rate_hz) and self.sample_rate_hz > 0):
            raise InvalidValueError(must_be("sample_rate_hz", "a positive number", self.sample_rate_hz))
        if not 0 < self.low_hz < self.high_hz <= self.nyquist_hz:
            rule = f"above 0, ascending, and at most {self.nyquist_hz:g} Hz"
            raise InvalidValueError(must_be("the frequency range", rule, (self.low_hz, self.high_hz)))

    @property
    def nyquist_hz(self) -> float:
        """Frequency of angle pi."""
        return self.sample_rate_hz / 2

    @property
    def gutter_columns(self) -> int:
        """Cells of each gutter, the separating line among them."""
        return 5 if self.width >= 50 else 3

    @property
    def plot_left(self) -> int:
        """First column of the plot."""
        return LABEL_COLUMNS + self.gutter_columns

    @property
    def plot_width(self) -> int:
        """Columns of the plot, at least one."""
        return max(1, self.width - LABEL_COLUMNS - 2 * self.gutter_columns)

    @property
    def plot_right(self) -> int:
        """First column right of the plot: the line that separates it from the gutter for angle pi."""
        return self.plot_left + self.plot_width

    @property
    def zero_column(self) -> int:
        """Column of marks at angle 0."""
        return LABEL_COLUMNS + 1

    @property
    def pi_column(self) -> int:
        """Column of marks at angle pi."""
        return self.plot_right + (2 if self.gutter_columns > 3 else 1)

    def column(self, frequency_hz: float) -> int:
        """Return the column of a frequency: a gutter for 0 and Nyquist, else the plot (its edge if out of range)."""
        if frequency_hz <= 0:
            return self.zero_column
        if frequency_hz >= self.nyquist_hz * (1 - 1e-9):
            return self.pi_column
        return self.plot_left + self._cell(frequency_hz, self.plot_width)

    def pinned(self, frequency_hz: float) -> int:
        """Return -1 or 1 if a frequency lies left or right of the plot and is held at its edge, else 0."""
        if self.low_hz <= frequency_hz <= self.high_hz or not 0 < frequency_hz < self.nyquist_hz * (1 - 1e-9):
            return 0
        return -1 if frequency_hz < self.low_hz else 1

    def frequency_hz(self, column: int) -> float:
        """Return the frequency at the middle of a column; 0 in the left gutter, Nyquist in the right one."""
        if column < self.plot_left:
            return 0.0
        if column >= self.plot_right:
            return self.nyquist_hz
        return self._at((column - self.plot_left + 0.5) / self.plot_width)

    def edges_hz(self, marks: MarkSet) -> "NDArray[np.float64]":
        """Return the limits of all dot columns of the plot, ascending, shape (plot_width * dot_columns + 1,)."""
        dots = self.plot_width * marks.dot_columns
        return np.asarray(np.geomspace(self.low_hz, self.high_hz, dots + 1), dtype=np.float64)

    def grid_ticks(self) -> list[Tick]:
        """Return every nice frequency of the range, the most important first, labels not yet sorted out."""
        return [
            Tick(value, self.plot_left + self._cell(value, self.plot_width), frequency_label(value))
            for value in nice_frequencies_hz(self.low_hz, self.high_hz)
        ]

    def draw_grid(self, raster: "Raster", rows: int, plain_rows: "Collection[int]" = ()) -> None:
        """Draw the gutters' lines and a faint dot at the nicest frequencies in each row but the plain ones."""
        inner = [tick for tick in self.spaced_ticks(4) if self.plot_left < tick.cell < self.plot_right - 1]
        for row in range(rows):
            raster.put(self.plot_left - 1, row, "│", Ink.GRID, is_reserved=False)
            raster.put(self.plot_right, row, "│", Ink.GRID, is_reserved=False)
            for tick in inner if row not in plain_rows else ():
                raster.put(tick.cell, row, "·", Ink.GRID, is_reserved=False)

    def spaced_ticks(self, least: int) -> list[Tick]:
        """Return the nice frequencies that stand at least so many cells apart, the important ones winning."""
        kept: list[Tick] = []
        for tick in self.grid_ticks():
            if all(abs(tick.cell - other.cell) >= least for other in kept):
                kept.append(tick)
        return kept

    def draw_labels(self, raster: "Raster", row: int) -> None:
        """Write the row of frequencies: unit, 0, the ticks that have room, pi."""
        raster.text(0, row, "Hz", Ink.LABEL)
        raster.text(self.zero_column, row, "0", Ink.LABEL)
        raster.text(self.pi_column, row, "π", Ink.LABEL)
        for tick in self.grid_ticks():
            start = tick.cell - (len(tick.label) - 1) // 2
            # One blank cell on each side keeps two labels from reading as one number.
            if raster.is_free(start - 1, row, min(len(tick.label) + 2, raster.width - start + 1)):
                raster.text(start, row, tick.label, Ink.LABEL)

    def _cell(self, frequency_hz: float, cells: int) -> int:
        place = math.log(frequency_hz / self.low_hz) / math.log(self.high_hz / self.low_hz)
        return min(cells - 1, max(0, math.floor(place * cells)))

    def _at(self, part: float) -> float:
        return self.low_hz * math.pow(self.high_hz / self.low_hz, part)


def default_axis(width: int, sample_rate_hz: float) -> FrequencyAxis:
    """Return the axis from 20 Hz to Nyquist (for very low rates, three decades up to Nyquist)."""
    nyquist_hz = sample_rate_hz / 2
    low_hz = DEFAULT_LOW_HZ if nyquist_hz > 10 * DEFAULT_LOW_HZ else nyquist_hz / 1000
    return FrequencyAxis(width, sample_rate_hz, low_hz, nyquist_hz)


def nice_frequencies_hz(low_hz: float, high_hz: float) -> list[float]:
    """Round frequencies within a range, the most important first.

    Whole decades come first, then 2 and 5 times; a range of less than a factor of 3 is divided into equal nice steps.
    """
    if high_hz / low_hz < 3:
        step = nice_step((high_hz - low_hz) / 6)
        first, last = math.ceil(low_hz / step - 1e-9), math.floor(high_hz / step + 1e-9)
        # 12 digits drop the rounding error of the product and keep every digit that is shown.
        return [float(f"{index * step:.12g}") for index in range(first, last + 1)]
    decades = range(math.floor(math.log10(low_hz)), math.ceil(math.log10(high_hz)) + 1)
    found = [float(f"{lead}e{decade}") for lead in (1, 2, 5) for decade in decades]
    return [value for value in found if low_hz * (1 - 1e-9) <= value <= high_hz * (1 + 1e-9)]


def nice_step(least: float) -> float:
    """Return the smallest of 1, 2, 5 times a power of ten that is at least a value."""
    power = 10.0 ** math.floor(math.log10(least))
    for lead in (1, 2, 5):
        if lead * power >= least * (1 - 1e-9):
            return lead * power
    return 10 * power


def decibel_ticks(limits_db: tuple[float, float], rows: int) -> list[Tick]:
    """Return the ticks of a decibel axis: multiples of one nice step, 0 dB among them, some two rows apart.

    Parameters
    ----------
    limits_db : tuple of float
        Values at the lower and upper limit of the rows.
    rows : int
        Rows of cells.

    Returns
    -------
    list of Tick
        From the top down; cell is the row.
    """
    low_db, high_db = limits_db
    least = (high_db - low_db) / max(1.0, rows / 1.7)
    step = next((nice for nice in (1, 2, 3, 6, 12, 18, 24, 30, 36, 48) if nice >= least), 96)
    first, last = math.ceil(low_db / step), math.floor(high_db / step)
    ticks = []
    for index in range(last, first - 1, -1):
        place = (high_db - index * step) / (high_db - low_db) * rows
        row = min(rows - 1, max(0, math.floor(place)))
        ticks.append(Tick(float(index * step), row, f"{index * step:+d}".replace("-", "−")))
    return [Tick(t.value, t.cell, "0") if t.value == 0 else t for t in ticks]
