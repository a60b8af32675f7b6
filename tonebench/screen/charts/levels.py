"""The decibel plots: limits that do not jump, grid and labels, and the reading of a curve's height."""

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np

from tonebench.screen.charts.axis import LABEL_COLUMNS, FrequencyAxis, decibel_ticks
from tonebench.screen.charts.curves import Spans, dot_row, draw_spans
from tonebench.screen.charts.marks import Dash, Ink, MarkSet
from tonebench.screen.charts.raster import Area, Raster

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

STEP_DB: Final = 6.0
WIDEST_DB: Final = 120.0


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """A curve as data.

    Attributes
    ----------
    frequency_hz : ndarray of float64, shape (n,)
        Ascending and positive, in any density; see `Chart.frequencies_hz`.
    level_db : ndarray of float64, shape (n,)
        -inf is allowed.
    """

    frequency_hz: "NDArray[np.float64]"
    level_db: "NDArray[np.float64]"


def level_limits_db(
    high_db: "NDArray[np.float64]", low_db: "NDArray[np.float64]", before: tuple[float, float] | None
) -> tuple[float, float]:
    """Choose the limits of a response: multiples of 6 dB, 0 dB inside, narrow notches cut, not all else squeezed.

    Parameters
    ----------
    high_db, low_db : ndarray of float64
        Greatest and least level in each dot column; NaN is passed over.
    before : tuple of float or None
        The limits in use. They stay unless the curve leaves them or no longer needs them by far.

    Returns
    -------
    tuple of float
        Level at the lower and at the upper limit.
    """
    known = high_db[np.isfinite(high_db)]
    if known.size == 0:
        return before or (-24.0, 6.0)
    peak = max(0.0, float(known.max()))
    # A notch of a few columns takes no more than 18 dB below the level that nine tenths of the columns exceed.
    usual = float(np.quantile(known, 0.1)) - 18.0
    depth = min(0.0, max(float(np.nanmin(low_db)), usual))
    top = _upward(peak, None if before is None else before[1])
    bottom = -_upward(-depth, None if before is None else -before[0])
    return min(-12.0, max(bottom, top - WIDEST_DB)), top


def _upward(level_db: float, before_db: float | None) -> float:
    """Return the multiple of 6 dB over a level, with 1 dB of room; the one in use stays while it is not far off."""
    wanted = max(STEP_DB, math.ceil((level_db + 1.0) / STEP_DB) * STEP_DB)
    if before_db is None or level_db > before_db - 0.25 or wanted < before_db - STEP_DB:
        return wanted
    return before_db if level_db > before_db - STEP_DB - 4.0 else wanted


def plot_area(axis: FrequencyAxis, rows: int) -> Area:
    """Return the cells of a decibel plot."""
    return Area(axis.plot_left, 0, axis.plot_width, max(0, rows))


def draw_levels(
    axis: FrequencyAxis, shape: tuple[int, int], limits_db: tuple[float, float], unit: str, marks: MarkSet
) -> Raster:
    """Draw the background of a decibel plot: grid, labels, unit.

    Parameters
    ----------
    axis : FrequencyAxis
        Sets the width.
    shape : tuple of int
        Rows of the plot, rows of the raster.
    limits_db : tuple of float
        Levels at the lower and upper limit.
    unit : str
        "dB" or "dBFS".
    marks : MarkSet
        Characters to use.

    Returns
    -------
    Raster
        A copy to draw on: the background itself is drawn once per size and range.
    """
    return _background(axis, shape, limits_db, unit, marks).copy()


@lru_cache(maxsize=8)
def _background(
    axis: FrequencyAxis, shape: tuple[int, int], limits_db: tuple[float, float], unit: str, marks: MarkSet
) -> Raster:
    rows, height = shape
    raster = Raster(axis.width, height, marks)
    if rows <= 0 or axis.plot_right > axis.width:
        return raster
    ticks = decibel_ticks(limits_db, rows)
    # A dot in the middle of a cell beside the dots of a level's line would look like a step in it.
    axis.draw_grid(raster, rows, {tick.cell for tick in ticks})
    for tick in sorted(ticks, key=lambda tick: abs(tick.value)):
        _draw_level_line(raster, axis, rows, limits_db, tick.value)
        label = tick.label if tick.cell else f"{tick.label} {unit}"
        raster.text(0, tick.cell, label[: LABEL_COLUMNS + 1], Ink.LABEL)
    raster.text(0, 0, unit, Ink.LABEL)
    raster.forget_dots()
    return raster


def draw_curves(
    raster: Raster,
    axis: FrequencyAxis,
    rows: int,
    limits_db: tuple[float, float],
    curves: "Iterable[tuple[Spans, Ink, Dash]]",
) -> None:
    """Draw curves over the background of `draw_levels`, the later over the earlier.

    Parameters
    ----------
    raster : Raster
        The background.
    axis, rows, limits_db
        As the background was drawn with.
    curves : iterable of tuple
        Spans, style and interruption of each.
    """
    area = plot_area(axis, rows)
    if area.left + area.width > raster.width or area.height > raster.height:
        return
    for spans, ink, dash in curves:
        draw_spans(raster, area, spans, limits_db, (ink, dash))


def _draw_level_line(
    raster: Raster, axis: FrequencyAxis, rows: int, limits_db: tuple[float, float], level_db: float
) -> None:
    """Draw one faint line of dots at its exact height; that of 0 dB is denser."""
    marks = raster.marks
    area = plot_area(axis, rows)
    lit = np.zeros((rows * marks.dot_rows, area.width * marks.dot_columns), dtype=np.bool_)
    spacing = marks.dot_columns * (1 if level_db == 0 else 3)
    row = int(dot_row(np.array([level_db]), limits_db, rows * marks.dot_rows)[0])
    if 0 <= row < len(lit):
        lit[row, ::spacing] = True
        raster.dots(area, lit, Ink.GRID, is_faint=True)


def level_at(row: int, rows: int, limits_db: tuple[float, float]) -> float:
    """Return the level at the middle of a row of cells."""
    low_db, high_db = limits_db
    return high_db - (row + 0.5) / max(1, rows) * (high_db - low_db)
