"""The shared frequency axis and the decibel ticks."""

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.screen.charts.reading import QUICK
from tonebench.errors import InvalidValueError
from tonebench.screen.charts.axis import (
    LABEL_COLUMNS,
    FrequencyAxis,
    decibel_ticks,
    default_axis,
    nice_frequencies_hz,
)
from tonebench.screen.charts.marks import MARK_SETS, mark_set
from tonebench.screen.charts.raster import Raster

WIDTHS = st.integers(60, 200)


def _value(label: str) -> float:
    return float(label.rstrip("k")) * (1000 if label.endswith("k") else 1)


def test_columns_by_hand() -> None:
    """With 60 columns for 3 decades, 100 Hz stands 20 columns and 1 kHz 40 columns right of 10 Hz."""
    axis = FrequencyAxis(LABEL_COLUMNS + 5 + 60 + 5, 48_000.0, 10.0, 10_000.0)
    assert axis.plot_width == 60
    # A whisker above each frequency keeps the check off the border between two columns.
    assert [axis.column(f * 1.001) - axis.plot_left for f in (10, 100, 1000)] == [0, 20, 40]
    assert axis.column(0.0) == axis.zero_column < axis.plot_left
    assert axis.column(24_000.0) == axis.pi_column > axis.plot_right


@QUICK
@given(WIDTHS, st.floats(0.0, 1.0), st.sampled_from([8000.0, 44_100.0, 48_000.0, 192_000.0]))
def test_frequency_and_column_agree(width: int, part: float, rate_hz: float) -> None:
    """The frequency at the middle of a column lies in that column, and any frequency within half a column of it."""
    axis = default_axis(width, rate_hz)
    column = axis.plot_left + min(axis.plot_width - 1, int(part * axis.plot_width))
    assert axis.column(axis.frequency_hz(column)) == column
    frequency_hz = axis.low_hz * (axis.high_hz / axis.low_hz) ** min(part, 0.999)
    middle_hz = axis.frequency_hz(axis.column(frequency_hz))
    columns = axis.plot_width / math.log(axis.high_hz / axis.low_hz)
    # 1e-6 of a column for rounding at a border.
    assert abs(math.log(middle_hz / frequency_hz)) * columns <= 0.5 + 1e-6


@QUICK
@given(WIDTHS, st.sampled_from(list(MARK_SETS)))
def test_edges_of_dots_span_the_plot(width: int, name: str) -> None:
    """There is one limit more than dot columns, from the lowest to the highest frequency."""
    axis = default_axis(width, 48_000.0)
    edges = axis.edges_hz(mark_set(name))
    assert len(edges) == axis.plot_width * mark_set(name).dot_columns + 1
    assert edges[0] == pytest.approx(20.0)
    assert edges[-1] == pytest.approx(24_000.0)


@QUICK
@given(WIDTHS, st.floats(-2.0, 4.0), st.floats(0.02, 6.0), st.sampled_from(list(MARK_SETS)))
def test_labels_stand_at_their_frequency(width: int, log_low: float, decades: float, name: str) -> None:
    """Every label is a whole number with a blank on each side, over the column of that frequency, whatever the zoom."""
    low_hz = 10**log_low
    high_hz = min(low_hz * 10**decades, 24_000.0)
    axis = FrequencyAxis(width, 48_000.0, low_hz, high_hz)
    raster = Raster(width, 1, mark_set(name))
    axis.draw_labels(raster, 0)
    text = raster.row_text(0)
    labels = list(re.finditer(r"\S+", text[axis.plot_left - 1 : axis.plot_right + 1]))
    known = [tick.value for tick in axis.grid_ticks()]
    for label in labels:
        value = _value(label.group())
        assert any(value == pytest.approx(tick, rel=1e-6) for tick in known)
        start = label.start() + axis.plot_left - 1
        assert start <= axis.column(value) <= start + len(label.group()) - 1


def test_default_labels_at_120_columns() -> None:
    """The usual width shows the frequencies that the trade is used to (common practice, no source)."""
    axis = default_axis(118, 48_000.0)
    raster = Raster(118, 1, mark_set("braille"))
    axis.draw_labels(raster, 0)
    assert " ".join(raster.row_text(0).split()) == "Hz 0 20 50 100 200 500 1k 2k 5k 10k 20k π"


@QUICK
@given(st.floats(-2.0, 4.0), st.floats(0.01, 6.0))
def test_nice_frequencies_lie_in_range(log_low: float, decades: float) -> None:
    """Every range has a nice frequency or more, all of them inside it and different."""
    low_hz, high_hz = 10**log_low, 10 ** (log_low + decades)
    found = nice_frequencies_hz(low_hz, high_hz)
    assert found
    assert len(set(found)) == len(found)
    assert all(low_hz * (1 - 1e-6) <= value <= high_hz * (1 + 1e-6) for value in found)


@pytest.mark.parametrize("limits_hz", [(0.0, 100.0), (100.0, 50.0), (20.0, 25_000.0)])
def test_impossible_ranges_are_refused(limits_hz: tuple[float, float]) -> None:
    """The message says what a range must be."""
    with pytest.raises(
        InvalidValueError, match=r"the frequency range must be above 0, ascending, and at most 24000 Hz"
    ):
        FrequencyAxis(100, 48_000.0, *limits_hz)


def test_zoomed_range_holds_outsiders_at_its_edge() -> None:
    """Below and above the range marks stand in the outermost columns, and that can be told."""
    axis = FrequencyAxis(100, 48_000.0, 40.0, 60.0)
    assert (axis.column(10.0), axis.pinned(10.0)) == (axis.plot_left, -1)
    assert (axis.column(100.0), axis.pinned(100.0)) == (axis.plot_right - 1, 1)
    assert (axis.pinned(50.0), axis.pinned(0.0), axis.pinned(24_000.0)) == (0, 0, 0)


@QUICK
@given(st.integers(-20, -1), st.integers(1, 20), st.integers(1, 40))
def test_decibel_ticks_hold_zero_and_stand_apart(low: int, high: int, rows: int) -> None:
    """0 dB is always a tick, each tick stands in the row of its level, and no two share a row from 3 rows on."""
    limits = (low * 6.0, high * 6.0)
    ticks = decibel_ticks(limits, rows)
    assert [tick.label for tick in ticks if tick.value == 0] == ["0"]
    for tick in ticks:
        place = (limits[1] - tick.value) / (limits[1] - limits[0]) * rows
        assert tick.cell == min(rows - 1, math.floor(place))
    if rows >= 3:
        assert len({tick.cell for tick in ticks}) == len(ticks)
