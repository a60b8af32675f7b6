"""The rim chart: where radii stand, and what is drawn read back."""

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.screen.charts.reading import QUICK
from tonebench.errors import InvalidValueError
from tonebench.screen.charts.axis import LABEL_COLUMNS, default_axis
from tonebench.screen.charts.marks import MARK_SETS, mark_set
from tonebench.screen.charts.rim_drawing import draw_rim, rim_scale
from tonebench.screen.charts.rim_marks import RimLeader, RimMark, RimPicture, clusters, number_texts
from tonebench.screen.charts.rim_scale import RimScale, Zone, ring_s
from tonebench.screen.charts.rim_words import describe_rim

RATE_HZ = 48_000.0


def _radius(log_ring: float) -> float:
    return math.exp(-math.log(1000) / (10**log_ring * RATE_HZ))


RADII = st.one_of(
    st.floats(-4.5, 2.0).map(_radius),
    st.floats(-4.5, 2.0).map(lambda ring: 1 / _radius(ring)),
    st.sampled_from([0.0, 1.0, 1 - 5e-8, 1 + 5e-8, 0.5, 3.0]),
)
FREQUENCIES_HZ = st.one_of(
    st.floats(1.3, 4.38).map(lambda log: float(10**log)), st.sampled_from([0.0, 24_000.0, 5.0]), st.floats(50.0, 60.0)
)
MARKS = st.builds(
    RimMark, st.integers(1, 128), st.sampled_from(["pole", "zero"]), FREQUENCIES_HZ, RADII, st.booleans(), st.booleans()
)
PICTURES = st.builds(
    lambda marks, feet: RimPicture(RATE_HZ, tuple(marks), tuple(RimLeader(n, f) for n, f in feet)),
    st.lists(MARKS, max_size=24),
    st.lists(st.tuples(st.integers(1, 8), st.floats(20.0, 20_000.0)), max_size=8),
)


@pytest.mark.parametrize("radius", [0.99, 0.9995, 0.999])
def test_ring_time_by_running_the_pole(radius: float) -> None:
    """The ring time is that after which radius**n has fallen by 60 dB, counted sample by sample."""
    level, frames = 1.0, 0
    while level > 1e-3:
        level *= radius
        frames += 1
    # The count is of whole samples.
    assert ring_s(radius, RATE_HZ) * RATE_HZ == pytest.approx(frames, abs=1)


def test_rows_by_hand() -> None:
    """With 22 rows inside for 5.5 decades (0.1 ms to 31.6 s), one row is a quarter of a decade."""
    scale = RimScale(26, RATE_HZ, low_s=1e-4, high_s=10**1.5)
    assert (scale.outside_rows, scale.rim_row, scale.inside_rows, scale.floor_row) == (2, 2, 22, 25)
    # 1.05 times the decade keeps off the border between two rows.
    assert [scale.row(_radius(math.log10(1.05 * t))) for t in (10, 1, 0.1, 0.01, 0.001)] == [4, 8, 12, 16, 20]
    assert (scale.row(1.0), scale.row(0.0), scale.row(1e-9)) == (2, 25, 25)


def test_outside_mirrors_above_the_rim() -> None:
    """Slow growth stands next to the rim, fast growth at the top."""
    scale = RimScale(40, RATE_HZ, has_outside=True)
    assert scale.outside_rows == 10
    rows = [scale.row(1 / _radius(log)) for log in (1.4, 0.0, -2.0, -3.9)]
    assert rows == sorted(rows, reverse=True)
    assert (rows[0], rows[-1]) == (scale.rim_row - 1, 0)


def test_the_rim_is_a_row_of_its_own() -> None:
    """Closer to the unit circle than 1e-7 in ln r stands on the rim; a little farther stands beside it."""
    scale = RimScale(30, RATE_HZ, has_outside=True)
    for sign in (-1, 1):
        assert scale.zone(math.exp(sign * 0.9e-7)) is Zone.RIM
        assert scale.row(math.exp(sign * 1.2e-7)) == scale.rim_row - sign


@QUICK
@given(st.integers(1, 60), RADII, st.booleans())
def test_row_and_radius_agree(rows: int, radius: float, has_outside: bool) -> None:
    """Every radius has a row in the chart, and the middle of a row is in that row and zone."""
    scale = RimScale(rows, RATE_HZ, has_outside)
    row = scale.row(radius)
    assert 0 <= row < rows
    if rows >= 5:
        assert scale.zone_of_row(row) is scale.zone(radius)
        assert scale.row(scale.radius(row)) == row


@QUICK
@given(st.integers(5, 40), st.floats(-3.99, 1.47))
def test_ring_of_a_row_is_within_half_a_row(rows: int, log_ring: float) -> None:
    """Reading a pole's ring time off its row errs by half a row at most."""
    scale = RimScale(rows, RATE_HZ)
    read = scale.time_s(scale.row(_radius(log_ring)))
    per_row = math.log10(scale.high_s / scale.low_s) / scale.inside_rows
    # 1e-6 of a row for rounding at a border.
    assert abs(math.log10(read) - log_ring) <= per_row * (0.5 + 1e-6)


@QUICK
@given(PICTURES, st.integers(60, 200), st.integers(5, 40), st.sampled_from(list(MARK_SETS)))
def test_every_mark_is_drawn_in_its_cell(picture: RimPicture, width: int, rows: int, name: str) -> None:
    """At the cell of every pole and zero stands its sign, or the sign of a pole and a zero in one cell."""
    axis, scale, marks = default_axis(width, RATE_HZ), rim_scale(picture, rows), mark_set(name)
    text = draw_rim(picture, axis, scale, rows, marks).text_rows()
    roles: dict[tuple[int, int], set[str]] = {}
    for mark in picture.marks:
        roles.setdefault((axis.column(mark.frequency_hz), scale.row(mark.radius)), set()).add(mark.role)
    for (column, row), present in roles.items():
        sign = "⊗" if len(present) == 2 else "×" if "pole" in present else "○"
        assert text[row][column] == marks.spell(sign)


@QUICK
@given(PICTURES, st.integers(60, 200), st.integers(5, 40))
def test_numbers_are_whole_and_beside_their_mark(picture: RimPicture, width: int, rows: int) -> None:
    """Every number in the plot is the whole name of a mark within reach; labels of rows are whole too."""
    axis, scale = default_axis(width, RATE_HZ), rim_scale(picture, rows)
    text = draw_rim(picture, axis, scale, rows, mark_set("ascii")).text_rows()
    groups = clusters(picture.marks, axis, scale)
    ticks = {tick.label for tick in scale.ticks()} | {"", "outside", "rim", "<0.1 ms"}
    for row, line in enumerate(text):
        # The rim's row has no number at the left that a section's could be taken for.
        first = 0 if row == scale.rim_row else LABEL_COLUMNS
        assert line[:first].strip() in ticks
        for found in re.finditer(r"\d[\d,+-]*", line[first:]):
            start, end = (first + edge for edge in found.span())
            # Brackets and an arrow may stand between sign and number.
            owners = [
                group
                for group in groups
                if found.group() in group.texts and abs(group.row - row) <= 1 and start - 3 <= group.column <= end + 2
            ]
            assert owners
            # Between two signs a number belongs to the left one: x1x2, never x1x with the 1 of the right one.
            if line[start - 1] in "xo*" and line[end : end + 1] in {"x", "o", "*"}:
                assert start - 1 in {group.column for group in owners}


def test_number_moves_to_the_free_side() -> None:
    """Two poles with one cell between them: each number stands on the outer side, where it cannot be mixed up."""
    axis = default_axis(118, RATE_HZ)
    columns = [axis.plot_left + 30, axis.plot_left + 32]
    marks = tuple(RimMark(n, "pole", axis.frequency_hz(c), 0.99) for n, c in enumerate(columns, start=1))
    picture = RimPicture(RATE_HZ, marks)
    scale = rim_scale(picture, 19)
    line = draw_rim(picture, axis, scale, 19, mark_set("ascii")).text_rows()[scale.row(0.99)]
    assert line[columns[0] - 1 : columns[1] + 2] == "1x.x2"


def test_selected_pole_is_bracketed_and_numbered() -> None:
    """One selected notch pole reads [×1] with × in its cell, its zero on the rim above it."""
    marks = (RimMark(1, "pole", 49.96, 0.99967, is_selected=True), RimMark(1, "zero", 50.02, 1.0))
    picture = RimPicture(RATE_HZ, marks, (RimLeader(1, 50.02),))
    axis, scale = default_axis(118, RATE_HZ), rim_scale(picture, 20)
    text = draw_rim(picture, axis, scale, 20, mark_set("braille")).text_rows()
    column, row = axis.column(49.96), scale.row(0.99967)
    assert text[row][column - 1 : column + 3] == "[×1]"
    assert text[scale.rim_row][axis.column(50.02)] == "○"
    assert text[scale.floor_row][axis.column(50.02)] == "▴"
    assert text[scale.rim_row].rstrip("━ ").endswith("unit circle")


def test_eight_crowded_notches_all_carry_their_number() -> None:
    """The harmonics 50 to 400 Hz at 120 columns: every section can be told."""
    marks = tuple(
        RimMark(n, role, 50.0 * n, radius, n == 3 and role == "pole")
        for n in range(1, 9)
        for role, radius in (("pole", 0.9995), ("zero", 1.0))
    )
    picture = RimPicture(RATE_HZ, marks)
    axis, scale = default_axis(118, RATE_HZ), rim_scale(picture, 19)
    line = draw_rim(picture, axis, scale, 19, mark_set("ascii")).text_rows()[scale.row(0.9995)]
    assert re.findall(r"\d", line[LABEL_COLUMNS:]) == list("12345678")
    assert "[x3]" in line


def test_pole_over_its_zero_and_real_poles() -> None:
    """A bell at 0 dB shows ⊗ once; real roots stand in the gutters."""
    marks = (
        RimMark(2, "pole", 1000.0, 0.98),
        RimMark(2, "zero", 1000.0, 0.98),
        RimMark(3, "pole", 0.0, 0.9),
        RimMark(3, "pole", 24_000.0, 0.9),
    )
    picture = RimPicture(RATE_HZ, marks)
    axis, scale = default_axis(100, RATE_HZ), rim_scale(picture, 19)
    text = draw_rim(picture, axis, scale, 19, mark_set("braille")).text_rows()
    assert text[scale.row(0.98)][axis.column(1000.0) :].startswith("⊗2")
    assert text[scale.row(0.9)][axis.zero_column :].startswith("×3")
    assert text[scale.row(0.9)][axis.pi_column :].startswith("×3")


def test_line_of_convergence_passes_the_outermost_pole() -> None:
    """The dotted line stands at the outermost pole that is in the chain, bypassed ones left out."""
    marks = (
        RimMark(1, "pole", 100.0, 0.99),
        RimMark(2, "pole", 1000.0, 0.999),
        RimMark(3, "pole", 3000.0, 1.01, is_bypassed=True),
    )
    picture = RimPicture(RATE_HZ, marks)
    axis, scale = default_axis(100, RATE_HZ), rim_scale(picture, 19)
    text = draw_rim(picture, axis, scale, 19, mark_set("braille")).text_rows()
    assert [row for row, line in enumerate(text) if "┈┈┈" in line] == [scale.row(0.999)]


def test_marks_out_of_range_carry_an_arrow() -> None:
    """A pole below 20 Hz is held at the left edge with an arrow, one that rings for 40 s at the top with one."""
    picture = RimPicture(RATE_HZ, (RimMark(1, "pole", 10.0, 0.999), RimMark(2, "pole", 1000.0, _radius(1.6))))
    axis, scale = default_axis(100, RATE_HZ), rim_scale(picture, 19)
    text = draw_rim(picture, axis, scale, 19, mark_set("braille")).text_rows()
    assert "‹×1" in text[scale.row(0.999)]
    assert "×2↑" in text[scale.rim_row + 1]


def test_names_get_shorter() -> None:
    """Lists become ranges, then "and more"; in a selected cluster the selected number is the one that is kept."""
    assert number_texts([]) == ()
    assert number_texts([7]) == ("7",)
    assert number_texts([2, 5]) == ("2,5", "2+")
    assert number_texts([2, 3, 4]) == ("2-4", "2+")
    assert number_texts([2, 3, 4], [3]) == ("3+",)


def test_words_say_what_is_drawn() -> None:
    """The text names sections, rings in seconds, and whether the outermost pole is inside."""
    picture = RimPicture(
        RATE_HZ,
        (RimMark(1, "pole", 49.96, 0.9995, is_selected=True), RimMark(1, "zero", 50.02, 1.0)),
        (RimLeader(1, 50.02),),
    )
    words = describe_rim(picture)
    # ln(1000) / (-ln 0.9995 * 48000) = 0.2878 s.
    assert "Section 1, selected, f0 50.02 Hz: pole at 49.96 Hz, radius 0.9995, rings for 0.29 s" in words
    assert "zero at 50.02 Hz on the unit circle" in words
    assert "inside the unit circle" in words
    unstable = describe_rim(RimPicture(RATE_HZ, (RimMark(4, "pole", 900.0, 1.0004),)))
    assert "grows by 60 dB in" in unstable
    assert "section 4, not inside the unit circle" in unstable
    assert describe_rim(RimPicture(RATE_HZ)) == "Rim chart: no poles and no zeros."


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"role": "root"}, r'role must be "pole" or "zero", got \'root\''),
        ({"radius": math.nan}, "radius must be a finite number, 0 or more, got nan"),
        ({"radius": -0.1}, "radius must be a finite number, 0 or more, got -0.1"),
        ({"frequency_hz": math.inf}, "frequency_hz must be a finite number, 0 or more, got inf"),
    ],
)
def test_impossible_marks_are_refused(change: dict[str, object], message: str) -> None:
    """The message names the value and the rule."""
    fields: dict[str, object] = {"section_number": 1, "role": "pole", "frequency_hz": 50.0, "radius": 0.9}
    with pytest.raises(InvalidValueError, match=message):
        RimMark(**(fields | change))  # type: ignore[arg-type]
