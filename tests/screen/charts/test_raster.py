"""The cell buffer: nothing overlaps, nothing is cut, blanks carry the style to their left."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.style import Style

from tests.screen.charts.reading import QUICK, lit_dots
from tonebench.errors import InvalidValueError
from tonebench.screen.charts.curves import Spans, column_spans, draw_lines, draw_spans
from tonebench.screen.charts.marks import DASHED, DOTTED, MARK_SETS, SOLID, Dash, Ink, mark_set
from tonebench.screen.charts.raster import Area, Raster

NAMES = list(MARK_SETS)


def test_decoder_reads_hand_made_cells() -> None:
    """The braille letter for dots 1 and 8, and both halves of a block, are read as such."""
    assert np.argwhere(lit_dots(["\u2881"], "braille")).tolist() == [[0, 0], [3, 1]]
    assert lit_dots(["▀▄"], "half-block").tolist() == [[True, False], [False, True]]
    assert lit_dots(["* "], "ascii").tolist() == [[True, False]]


@QUICK
@given(
    st.lists(
        st.tuples(st.integers(-5, 45), st.integers(-2, 4), st.text("abc123−π×", min_size=1, max_size=12)), max_size=30
    ),
    st.sampled_from(NAMES),
)
def test_texts_never_overlap_and_are_never_cut(texts: list[tuple[int, int, str]], name: str) -> None:
    """Every text that was accepted stands whole, whatever was asked for after it."""
    raster = Raster(40, 3, mark_set(name))
    written = [(c, r, raster.marks.spell(t)) for c, r, t in texts if raster.text(c, r, t, Ink.LABEL)]
    rows = raster.text_rows()
    for column, row, text in written:
        assert rows[row][column : column + len(text)] == text
    assert sum(len(text) for _, _, text in written) == sum(letter != " " for row in rows for letter in row)


def test_curves_pass_under_text() -> None:
    """A curve through a label leaves the label whole."""
    raster = Raster(10, 1, mark_set("braille"))
    raster.text(3, 0, "1k", Ink.LABEL)
    raster.dots(Area(0, 0, 10, 1), np.ones((4, 20), dtype=np.bool_), Ink.CURVE)
    assert raster.text_rows() == ["⣿⣿⣿1k⣿⣿⣿⣿⣿"]


def test_blanks_carry_the_style_to_their_left() -> None:
    """A row with one mark is two runs: what is before it, and the mark with all that follows."""
    raster = Raster(10, 1, mark_set("braille"))
    raster.put(4, 0, "×", Ink.MARK)
    styles = [Style(color=f"color({index})") for index in range(len(Ink))]
    segments = list(raster.strip(0, styles))
    assert [(segment.text, segment.style) for segment in segments] == [
        ("    ", styles[Ink.BASE]),
        ("×     ", styles[Ink.MARK]),
    ]


@pytest.mark.parametrize("name", NAMES)
@QUICK
@given(data=st.data())
def test_curve_read_back_is_within_one_dot(name: str, data: st.DataObject) -> None:
    """The span lit in each dot column is that of the numbers, found by a naive loop, to one dot."""
    seed = data.draw(st.integers(0, 2**32 - 1))
    rng = np.random.default_rng(seed)
    width, height = data.draw(st.integers(5, 60)), data.draw(st.integers(2, 20))
    raster = Raster(width, height, mark_set(name))
    down, across = raster.marks.dot_rows, raster.marks.dot_columns
    columns, dots = width * across, height * down
    x = np.linspace(0.0, columns, columns * 7 + 1)
    y = np.cumsum(rng.standard_normal(len(x)))
    limits = (float(y.min()) - 0.5, float(y.max()) + 0.5)
    spans = column_spans(x, y, np.arange(columns + 1.0))
    draw_spans(raster, Area(0, 0, width, height), spans, limits, (Ink.CURVE, SOLID))
    lit = lit_dots(raster.text_rows(), name)
    for column in range(columns):
        part = [float(v) for u, v in zip(x, y, strict=True) if column <= u <= column + 1]
        seen = np.flatnonzero(lit[:, column])
        top = (limits[1] - max(part)) / (limits[1] - limits[0]) * dots
        bottom = (limits[1] - min(part)) / (limits[1] - limits[0]) * dots
        # A dot covers one unit of `top`; its index is the whole part, so less than one dot apart.
        assert seen[0] == pytest.approx(top - 0.5, abs=1.0)
        assert seen[-1] == pytest.approx(bottom - 0.5, abs=1.0)
        assert len(seen) == seen[-1] - seen[0] + 1


@pytest.mark.parametrize("dash", [SOLID, DASHED, DOTTED], ids=lambda dash: dash.name)
@pytest.mark.parametrize("name", NAMES)
def test_narrow_notch_survives(name: str, dash: Dash) -> None:
    """A notch a thousandth of a column wide reaches the bottom row with every dash, wherever it falls."""
    for place in np.arange(0.5, 40.0):
        raster = Raster(40, 8, mark_set(name))
        x = np.unique(np.concatenate([np.linspace(0, 40, 81), place + np.array([-5e-4, 0, 5e-4])]))
        y = np.where(np.abs(x - place) < 1e-4, -np.inf, 0.0)
        edges = np.linspace(0, 40, 40 * raster.marks.dot_columns + 1)
        draw_spans(raster, Area(0, 0, 40, 8), column_spans(x, y, edges), (-24.0, 6.0), (Ink.CURVE, dash))
        assert lit_dots(raster.text_rows(), name, "*=+")[-1].any()


@pytest.mark.parametrize("name", NAMES)
def test_dashes_are_told_apart_without_colour(name: str) -> None:
    """A flat line is drawn in three different ways, and only the solid one has no gap."""
    drawn = set()
    for dash in (SOLID, DASHED, DOTTED):
        raster = Raster(12, 1, mark_set(name))
        columns = 12 * raster.marks.dot_columns
        flat = np.zeros(columns)
        draw_spans(raster, Area(0, 0, 12, 1), Spans(flat, flat), (-1.0, 1.0), (Ink.CURVE, dash))
        text = raster.row_text(0)
        assert (" " in text) is (dash is not SOLID)
        drawn.add(text)
    assert len(drawn) == 3


def test_curve_outside_the_limits_is_not_drawn() -> None:
    """A curve under, over, or of unknown level leaves the plot blank; one that crosses is cut."""
    for level in (-30.0, 30.0, np.nan):
        raster = Raster(5, 2, mark_set("braille"))
        flat = np.full(10, level)
        draw_spans(raster, Area(0, 0, 5, 2), Spans(flat, flat), (-10.0, 10.0), (Ink.CURVE, SOLID))
        assert raster.text_rows() == [" " * 5] * 2
    raster = Raster(5, 2, mark_set("braille"))
    draw_spans(
        raster, Area(0, 0, 5, 2), Spans(np.full(10, -99.0), np.full(10, 99.0)), (-10.0, 10.0), (Ink.CURVE, SOLID)
    )
    assert raster.text_rows() == ["⣿" * 5] * 2


def test_unknown_part_of_a_curve_stays_dark() -> None:
    """Columns that the data do not reach are NaN, and so are those that touch a NaN only."""
    spans = column_spans(np.array([1.0, 3.0]), np.array([5.0, 7.0]), np.arange(5.0))
    assert spans.low.tolist()[1:3] == [5.0, 6.0]
    assert spans.high.tolist()[1:3] == [6.0, 7.0]
    empty = column_spans(np.array([]), np.array([]), np.arange(5.0))
    assert np.isnan(empty.low).all()
    assert np.isnan(empty.high).all()


def test_line_joins_its_ends_and_keeps_off_marks() -> None:
    """A vertical leader has a dot in each row between its ends, and none on a mark in its way."""
    raster = Raster(5, 6, mark_set("braille"))
    raster.put(2, 3, "○", Ink.MARK)
    draw_lines(raster, [((2, 0), (2, 5))], Ink.LEADER)
    column = [row[2] for row in raster.text_rows()]
    assert column[3] == "○"
    assert all(letter not in " ○" for letter in column[:3] + column[4:])


def test_unknown_marks_are_refused() -> None:
    """The message names the sets that exist."""
    with pytest.raises(InvalidValueError, match=r"marks must be one of braille, half-block, ascii, got 'dots'"):
        mark_set("dots")
