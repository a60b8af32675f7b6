"""The chart widgets in a running application."""

import asyncio
import re
from typing import TYPE_CHECKING

import numpy as np
import pytest
from textual.app import App, ComposeResult

from tests.screen.charts.reading import lit_dots
from tonebench.errors import InvalidValueError
from tonebench.screen.charts.chart import Chart
from tonebench.screen.charts.levels import Curve
from tonebench.screen.charts.marks import MARK_SETS
from tonebench.screen.charts.response import ResponseChart
from tonebench.screen.charts.rim import RimChart
from tonebench.screen.charts.rim_marks import RimLeader, RimMark, RimPicture
from tonebench.screen.charts.spectrum import SpectrumChart

if TYPE_CHECKING:
    from collections.abc import Awaitable, Callable

    from textual.pilot import Pilot

RATE_HZ = 48_000.0
PICTURE = RimPicture(
    RATE_HZ,
    (
        RimMark(1, "pole", 49.96, 0.99967, is_selected=True),
        RimMark(1, "zero", 50.02, 1.0),
        RimMark(2, "pole", 0.0, 0.5),
    ),
    (RimLeader(1, 50.02),),
)


class Bench(App[None]):
    """The three charts as the screen stacks them."""

    def __init__(self) -> None:
        super().__init__()
        self.clicks: list[Chart.Clicked] = []

    def compose(self) -> ComposeResult:
        """One of each."""
        yield RimChart()
        yield ResponseChart()
        yield SpectrumChart()

    def on_chart_clicked(self, message: Chart.Clicked) -> None:
        """Keep every click."""
        self.clicks.append(message)

    def fill(self) -> None:
        """Show a notch."""
        self.query_one(RimChart).show(PICTURE)
        response = self.query_one(ResponseChart)
        frequency_hz = response.frequencies_hz([50.02])
        level_db = np.where(frequency_hz == 50.02, -np.inf, 0.0)
        chain = Curve(frequency_hz, level_db)
        response.show(chain, chain, section_number=1, f0_hz=50.02)
        bins = np.linspace(0.0, 24_000.0, 4000)
        self.query_one(SpectrumChart).show(Curve(bins, np.full(4000, -60.0)), Curve(bins, np.full(4000, -90.0)))


def _run(act: "Callable[[Bench, Pilot[None]], Awaitable[None]]", size: tuple[int, int] = (120, 40)) -> None:
    async def go() -> None:
        app = Bench()
        async with app.run_test(size=size) as pilot:
            app.fill()
            await pilot.pause()
            await act(app, pilot)

    asyncio.run(go())


def _charts(app: Bench) -> list[Chart]:
    return list(app.query(Chart).results(Chart))


def test_charts_share_one_axis_and_refresh() -> None:
    """All three put a frequency in one column; what Textual shows is what the chart drew."""

    async def act(app: Bench, _pilot: "Pilot[None]") -> None:
        assert len({chart.axis.column(50.02) for chart in _charts(app)}) == 1
        for chart in _charts(app):
            rows = [chart.render_line(y).text for y in range(chart.content_size.height)]
            assert rows == chart.text_rows()
        rim = app.query_one(RimChart)
        column, row = rim.mark_cell(PICTURE.marks[0])
        assert rim.text_rows()[row][column - 1 : column + 3] == "[×1]"
        assert "20k" in app.query_one(SpectrumChart).text_rows()[-1]

    _run(act)


@pytest.mark.parametrize("name", list(MARK_SETS))
def test_response_notch_and_spectrum_heights_read_back(name: str) -> None:
    """The notch reaches the bottom beside its f0 mark, the flat spectrum stands at its level within one dot."""

    async def act(app: Bench, pilot: "Pilot[None]") -> None:
        for chart in _charts(app):
            chart.marks = name
        app.fill()
        response = app.query_one(ResponseChart)
        response.show(Curve(response.frequencies_hz([1003.0]), _notch(response.frequencies_hz([1003.0]))))
        await pilot.pause()
        axis = response.axis
        rows = [row[axis.plot_left : axis.plot_right] for row in response.text_rows()]
        lit = lit_dots(rows, name)
        across = lit.shape[1] // axis.plot_width
        cell = (axis.column(1003.0) - axis.plot_left) * across
        assert lit[-1, cell : cell + across].any()
        spectrum = app.query_one(SpectrumChart)
        spectrum.show(None, Curve(np.linspace(0.0, 24_000.0, 4000), np.full(4000, -77.0)))
        await pilot.pause()
        rows = [row[axis.plot_left : axis.plot_right] for row in spectrum.text_rows()[:-1]]
        lit = lit_dots(rows, name)
        low, high = spectrum.limits_db
        place = int((high + 77.0) / (high - low) * len(lit))
        assert lit[place].all()

    _run(act)


def _notch(frequency_hz: "np.typing.NDArray[np.float64]") -> "np.typing.NDArray[np.float64]":
    return np.where(frequency_hz == 1003.0, -np.inf, 0.0)


def test_resizing_and_changing_marks_never_fails() -> None:
    """Forty sizes from 1x1 to 200x60 and all marks: every chart is drawn at its size."""
    rng = np.random.default_rng(5)
    sizes = [(1, 1), (12, 5), (20, 3), (80, 24), (200, 60)]
    sizes += [(int(w), int(h)) for w, h in zip(rng.integers(1, 200, 35), rng.integers(1, 60, 35), strict=True)]

    async def act(app: Bench, pilot: "Pilot[None]") -> None:
        for index, size in enumerate(sizes):
            await pilot.resize_terminal(*size)
            for chart in _charts(app):
                chart.marks = list(MARK_SETS)[index % 3]
                chart.show_axis = bool(index % 2)
            app.fill()
            await pilot.pause()
            for chart in _charts(app):
                rows = chart.text_rows()
                if chart.content_size:
                    assert len(rows) == chart.content_size.height
                    assert {len(row) for row in rows} == {chart.content_size.width}

    _run(act)


def test_click_is_handed_on_in_the_charts_units() -> None:
    """Clicks on a pole, on the response and in the gutter carry frequency and ring or level."""

    async def act(app: Bench, pilot: "Pilot[None]") -> None:
        rim, response = app.query_one(RimChart), app.query_one(ResponseChart)
        column, row = rim.mark_cell(PICTURE.marks[0])
        # One cell of border at the left and at the top.
        await pilot.click(rim, offset=(column + 1, row + 1))
        await pilot.click(response, offset=(rim.axis.column(1000.0) + 1, 1))
        await pilot.click(rim, offset=(rim.axis.zero_column + 1, row + 1))
        await pilot.pause()
        pole, level, gutter = app.clicks
        assert (pole.control, pole.column, pole.row) == (rim, column, row)
        # Half a column of the 100 is 3.6 % in frequency; half a row of 15 is 52 % in time.
        assert pole.place.frequency_hz == pytest.approx(49.96, rel=0.04)
        assert pole.place.ring_s == pytest.approx(0.436, rel=0.55)
        assert rim.marks_near(pole.column, pole.row)[0] == PICTURE.marks[0]
        assert level.place.level_db is not None
        assert 0 < level.place.level_db < 6
        assert gutter.place.frequency_hz == 0.0
        assert app.focused is None

    _run(act)


def test_only_changed_rows_are_refreshed(monkeypatch: pytest.MonkeyPatch) -> None:
    """The same picture again refreshes nothing; a moved pole refreshes some rows, not all."""

    async def act(app: Bench, pilot: "Pilot[None]") -> None:
        rim = app.query_one(RimChart)
        regions: list[int] = []
        monkeypatch.setattr(rim, "refresh", lambda *rows: regions.append(len(rows)))
        rim.show(PICTURE)
        assert regions == []
        rim.show(RimPicture(RATE_HZ, (*PICTURE.marks, RimMark(3, "pole", 3000.0, 0.99))))
        assert len(regions) == 1
        assert 0 < regions[0] < rim.content_size.height
        monkeypatch.undo()
        await pilot.pause()

    _run(act)


def test_zoom_to_a_hundredth_of_a_hertz() -> None:
    """Frequency and ring time zoom out to 0.01 Hz and 1000 s; impossible ranges are refused and change nothing."""

    async def act(app: Bench, pilot: "Pilot[None]") -> None:
        rim = app.query_one(RimChart)
        rim.show_axis = True
        rim.set_frequency_range((0.01, 100.0))
        rim.set_ring_span((1e-3, 1000.0))
        await pilot.pause()
        assert {"0.01", "0.1", "1", "10", "100"} <= set(rim.text_rows()[-1].split())
        assert any(row.startswith("100 s") for row in rim.text_rows())
        with pytest.raises(InvalidValueError, match="the frequency range must be above 0"):
            rim.set_frequency_range((0.0, 100.0))
        with pytest.raises(InvalidValueError, match="the span of ring times must be above 0"):
            rim.set_ring_span((1.0, 0.1))
        assert rim.axis.low_hz == 0.01

    _run(act)


def test_no_color_shows_the_same_text_in_grey(monkeypatch: pytest.MonkeyPatch) -> None:
    """With NO_COLOR every colour is a grey, and the characters are the same."""
    seen: list[list[str]] = []
    pictures: list[str] = []

    async def act(app: Bench, _pilot: "Pilot[None]") -> None:
        seen.append([row for chart in _charts(app) for row in chart.text_rows()])
        pictures.append(app.export_screenshot())

    _run(act)
    monkeypatch.setenv("NO_COLOR", "1")
    _run(act)
    assert seen[0] == seen[1]
    coloured, grey = (set(re.findall(r"fill: #(\w\w)(\w\w)(\w\w)", picture)) for picture in pictures)
    # c5c8c6 is not on the screen: the picture's own default, in Rich's SVG_EXPORT_THEME.
    assert all(red == green == blue for red, green, blue in grey - {("c5", "c8", "c6")})
    assert not all(red == green == blue for red, green, blue in coloured)


def test_words_for_every_chart() -> None:
    """Each chart says in words what it shows, also when it shows nothing."""

    async def act(app: Bench, _pilot: "Pilot[None]") -> None:
        rim, response, spectrum = _charts(app)
        assert "Section 1, selected" in rim.describe()
        assert "lowest under −200 dB at 50.02 Hz" in response.describe()
        assert "after the chain, highest −90.0 dBFS" in spectrum.describe()
        assert isinstance(spectrum, SpectrumChart)
        spectrum.show(None, None)
        assert spectrum.describe() == "Spectrum: nothing is playing."
        assert ResponseChart().describe() == "Response: nothing to show."

    _run(act)
