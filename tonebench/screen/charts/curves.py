"""How numbers become dots: curves as one span per dot column, dashes, straight lines.

A curve is drawn as the span from the least to the greatest value that it takes within each dot column, so that a
peak or notch far narrower than a column still shows its whole height.
"""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from tonebench.screen.charts.marks import Dash, Ink, MarkSet
from tonebench.screen.charts.raster import Area, Raster

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

# Far below anything drawn, yet finite: an exact zero of a response is -inf dB, and -inf cannot be interpolated.
LOWEST = -1e4


@dataclass(frozen=True, slots=True, eq=False)
class Spans:
    """Least and greatest value of a curve in each dot column; NaN where the curve is not known.

    Attributes
    ----------
    low, high : ndarray of float64, shape (columns,)
        In the unit of the curve.
    """

    low: "NDArray[np.float64]"
    high: "NDArray[np.float64]"


def column_spans(x: "NDArray[np.float64]", y: "NDArray[np.float64]", edges: "NDArray[np.float64]") -> Spans:
    """Reduce a curve to its least and greatest value in each column.

    Parameters
    ----------
    x : ndarray of float64, shape (n,)
        Ascending positions, in any density.
    y : ndarray of float64, shape (n,)
        Values; -inf is allowed, NaN makes the columns it touches unknown.
    edges : ndarray of float64, shape (columns + 1,)
        Ascending limits of the columns, in the unit of x. Values at the limits are interpolated, so that the spans of
        neighbouring columns meet.
    """
    columns = len(edges) - 1
    if len(x) == 0:
        nothing = np.full(columns, np.nan)
        return Spans(nothing, nothing.copy())
    bounded = np.where(np.isnan(y), np.nan, np.clip(y, LOWEST, -LOWEST))
    # A grid that starts or ends a rounding error inside the outermost limit still reaches it.
    slack = (edges[-1] - edges[0]) * 1e-9
    reach = np.clip(edges, x[0], x[-1])
    at_edges = np.where(np.abs(reach - edges) <= slack, np.interp(reach, x, bounded), np.nan)
    low = np.fmin(at_edges[:-1], at_edges[1:])
    high = np.fmax(at_edges[:-1], at_edges[1:])
    column = np.searchsorted(edges, x, side="right") - 1
    is_within = (column >= 0) & (column < columns)
    np.fmin.at(low, column[is_within], bounded[is_within])
    np.fmax.at(high, column[is_within], bounded[is_within])
    return Spans(low, high)


def draw_spans(raster: Raster, area: Area, spans: Spans, limits: tuple[float, float], look: tuple[Ink, Dash]) -> None:
    """Draw a curve given by its spans.

    Parameters
    ----------
    raster : Raster
        To draw into.
    area : Area
        Cells of the plot; spans has one entry per dot column of it.
    spans : Spans
        The curve.
    limits : tuple of float
        Values at the lower and upper limit of the area; the curve is cut there.
    look : tuple of Ink and Dash
        Style and interruption of the curve.
    """
    marks = raster.marks
    dots = area.height * marks.dot_rows
    if dots == 0 or area.width == 0:
        return
    first, last = dot_row(spans.high, limits, dots), dot_row(spans.low, limits, dots)
    # NaN compares false, and so do spans wholly outside: both stay dark.
    is_seen = (spans.high >= limits[0]) & (spans.low <= limits[1])
    first = np.where(is_seen, np.clip(np.nan_to_num(first), 0, dots - 1), 1)
    last = np.where(is_seen, np.clip(np.nan_to_num(last), 0, dots - 1), 0)
    rows = np.arange(dots)[:, None]
    lit = (rows >= first) & (rows <= last)
    ink, dash = look
    raster.dots(area, lit & _dash_dots(marks, dash, first, last, rows), ink, dash)


def dot_row(values: "NDArray[np.float64]", limits: tuple[float, float], dots: int) -> "NDArray[np.float64]":
    """Row of dots, counted from the top, that holds each value; not limited to the area."""
    low, high = limits
    place = np.floor((high - values) / (high - low) * dots)
    # The lower limit itself belongs to the last row, not to one below it.
    return np.where(values == low, dots - 1, place)


def _dash_dots(
    marks: MarkSet,
    dash: Dash,
    first: "NDArray[np.float64]",
    last: "NDArray[np.float64]",
    rows: "NDArray[np.int_]",
) -> "NDArray[np.bool_]":
    """Dots that a dash leaves lit: by column, and by row where the curve is steep; the ends of a span stay."""
    columns = np.arange(len(first))
    is_lit = (columns // marks.dot_columns) % dash.period < dash.lit
    is_steep = last - first >= marks.dot_rows
    is_lit_row = rows // marks.dot_rows % dash.period < dash.lit
    is_end = (rows == first) | (rows == last)
    kept: NDArray[np.bool_] = np.where(is_steep, is_lit_row | is_end, is_lit)
    return kept


def draw_lines(raster: Raster, lines: "Iterable[tuple[tuple[int, int], tuple[int, int]]]", ink: Ink) -> None:
    """Draw sparse straight lines between the centres of cells, over blank cells and the grid only.

    Parameters
    ----------
    raster : Raster
        To draw into.
    lines : iterable of pairs of (column, row)
        First and last cell of each line.
    ink : Ink
        Of the lines.
    """
    down, across = raster.marks.dot_rows, raster.marks.dot_columns
    lit = np.zeros((raster.height * down, raster.width * across), dtype=np.bool_)
    for start, end in lines:
        ends = np.array([start, end], dtype=float) * (across, down) + ((across - 1) / 2, (down - 1) / 2)
        steps = max(1, int(np.abs(ends[1] - ends[0]).max()))
        # Every second dot: a leader is fainter than any curve, without the help of colour.
        along = np.arange(0, steps + 1, 2)[:, None] / steps
        points = np.floor(ends[0] + along * (ends[1] - ends[0])).astype(int)
        is_inside = ((points >= 0) & (points < (lit.shape[1], lit.shape[0]))).all(axis=1)
        lit[points[is_inside, 1], points[is_inside, 0]] = True
    raster.dots(Area(0, 0, raster.width, raster.height), lit, ink, is_faint=True)
