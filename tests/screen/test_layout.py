"""The shell at every size: nothing falls over, what is promised for a size is there, nothing is cut in words."""

import asyncio
import math
import random

import pytest

from tests.screen.opening import make_bench, opened, small_chain
from tonebench.core.chain import Chain
from tonebench.core.design import realise
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import by_kind
from tonebench.screen.bench import Bench
from tonebench.screen.keys import hints
from tonebench.screen.panels.chain import ChainPanel, ChainRow, columns
from tonebench.screen.panels.findings import FindingWords
from tonebench.screen.panels.pole import refilled
from tonebench.screen.panels.rows import Fact, fitted
from tonebench.screen.shell import layout_for


@pytest.mark.parametrize("size", [(80, 24), (120, 40), (200, 60)])
def test_what_a_size_promises_is_there(size: tuple[int, int]) -> None:
    """Status, chart or charts, chain, pole, findings, typed line, keys; all charts from 120 by 40 up."""

    async def run() -> None:
        async with opened(size=size) as one:
            text = one.text()
            rows = text.splitlines()
            assert len(rows) == size[1]
            assert all(len(row) == size[0] for row in rows)
            assert "small" in rows[0]
            assert "stopped" in rows[0]
            assert "quit" in rows[-1]
            for word in ("rim", "chain", "pole of section 1", "pole radius 0.999 500", "50 Hz", " >"):
                assert word in text
            assert ("response" in text) == (size[1] >= 40)
            assert ("spectrum" in text) == (size[1] >= 40)
            assert "low shelf" in text

    asyncio.run(run())


def test_g_shows_the_next_chart_where_there_is_one_at_a_time() -> None:
    """Rim, response, spectrum, and round again, each with the frequencies under it."""

    async def run() -> None:
        async with opened(size=(80, 24)) as one:
            for title in ("response", "spectrum", "rim"):
                await one.press("g")
                text = one.text()
                assert f"─ {title}" in text
                assert "500" in text
        async with opened(size=(120, 40)) as one:
            await one.press("g")
            assert one.message == "all three charts are in sight"

    asyncio.run(run())


def test_a_storm_of_resizes() -> None:
    """Sizes from 1 by 1 to 200 by 60, with keys in between: no exception, no lost edit."""
    sizes = random.Random(3)  # noqa: S311 - seeded on purpose

    async def run() -> None:
        async with opened() as one:
            start_hz = _pole_hz(one.bench)
            for _ in range(12):
                await one.pilot.resize_terminal(sizes.randint(1, 200), sizes.randint(1, 60))
                await one.pilot.press("right", "g")
            await one.pilot.resize_terminal(120, 40)
            await one.settled()
            assert "response" in one.text()
            # 12 steps of 10 cents, solved back into f0 and radius 12 times in double precision.
            assert _pole_hz(one.bench) == pytest.approx(start_hz * 2 ** (120 / 1200), rel=1e-9)

    asyncio.run(run())


def test_128_sections_scroll() -> None:
    """The selected section is always in sight, and the title says which are."""
    chain = Chain("long", 48000.0, tuple(by_kind(Kind.PEAK, 100.0 + n, ("q", 2.0), 1.0) for n in range(128)))

    async def run() -> None:
        async with opened(make_bench(chain)) as one:
            await one.press("shift+tab")
            assert ">128" in one.text()
            assert "of 128" in one.text()
            await one.press("tab")
            assert "> 1  peak" in one.text()

    asyncio.run(run())


def test_click_selects() -> None:
    """A click on a row of the list, and one on a pole of the rim chart."""

    async def run() -> None:
        async with opened() as one:
            await one.pilot.click(ChainPanel, offset=(5, 4))
            await one.settled()
            assert one.session.selected == 2
            mark = next(mark for mark in one.app.rim.picture.marks if mark.section_number == 2 and mark.role == "pole")
            column, row = one.app.rim.mark_cell(mark)
            await one.pilot.click("#rim", offset=(column + 1, row + 1))
            await one.settled()
            assert one.session.selected == 1
            column = one.app.response.axis.column(50.0)
            await one.pilot.click("#response", offset=(column + 1, 3))
            await one.settled()
            assert one.session.selected == 0

    asyncio.run(run())


def test_ascii_mode_writes_ascii_only(monkeypatch: pytest.MonkeyPatch) -> None:
    """Nothing on the screen, help and findings included, needs more than ASCII."""
    monkeypatch.setenv("TONEBENCH_MARKS", "ascii")

    async def run() -> None:
        async with opened() as one:
            await one.press("m", "d", "tab")
            assert {c for c in one.text() if ord(c) > 127} == set()
            await one.press("question_mark")
            assert {c for c in one.text() if ord(c) > 127} <= set("█▁▂▃▄▅▆▇▔ ")  # the scroll bar is Textual's own
            assert "<-" in one.text()

    asyncio.run(run())


def test_other_rate_is_said_plainly() -> None:
    """A clip at another rate runs at its own, and status and read-out say so."""
    from tests.screen.opening import hum_clip  # noqa: PLC0415

    async def run() -> None:
        async with opened(make_bench(small_chain(), hum_clip(44100.0)), size=(160, 40)) as one:
            assert "44.1 kHz (preset 48 kHz)" in one.text().splitlines()[0]
            assert "at the clip's rate" in one.message
            assert "at 48000 Hz" in one.text()
            await one.press("right")
            assert one.engine.coefficients[-1].sample_rate_hz == 44100.0
            assert one.session.chain.sample_rate_hz == 48000.0

    asyncio.run(run())


def test_alarm_keeps_its_words_as_long_as_anything_can_give_way() -> None:
    """Rank 0 is shortened last and never left out."""
    left = [Fact("name", 0), Fact("48 kHz", 6), Fact("step 10 cents", 1, "step 10 c")]
    right = [Fact("GUARD TRIPPED, Space re-arms", 0, "TRIPPED"), Fact("0 underflows", 9)]
    for width in range(80):
        kept = fitted(left, right, width)
        texts = [one.text for row in kept for one in row]
        assert "name" in texts
        assert texts[-1] in ("GUARD TRIPPED, Space re-arms", "TRIPPED", "0 underflows")
        if "48 kHz" in texts:
            assert "GUARD TRIPPED, Space re-arms" in texts
    assert sum(len(row) for row in fitted(left, right, 200)) == 5


def test_columns_of_the_chain_fit_or_are_cut_last() -> None:
    """Names go before kinds are cut; no line is wider than the panel."""
    rows = [
        ChainRow(1, "hum", "notch", "50.02 Hz", "", "0.44 s"),
        ChainRow(12, "", "low shelf", "120 Hz", "-3.0 dB", "12 ms", is_bypassed=True),
    ]
    for width in range(20, 80):
        lines = columns(rows, 0, width)
        assert len(lines) == 3
        assert max(len(line) for line in lines) <= width
    assert "hum" in columns(rows, 0, 60)[1]
    assert "> 1" in columns(rows, 0, 60)[1]
    assert "bypassed" in columns(rows, 0, 60)[2]
    assert "low shelf" in columns(rows, 0, 42)[2]


def test_refilled_pole_keeps_every_fact() -> None:
    """Facts move between lines; none is lost, none is wider than the panel."""
    lines = ["pole radius 0.999 5  ring 0.288 s", "  angle 0.374 deg  49.87 Hz", "q 6.5  bandwidth 7.6 Hz",
             "bandwidth 0.22 oct  radius 0.999 5 (kept)", "zero on the rim"]  # fmt: skip
    found = refilled(lines, 36)
    assert max(len(line) for line in found) <= 36
    assert "bandwidth 7.6 Hz, 0.22 oct" in " ".join(found)
    assert sum(line.startswith(("pole", "zero")) for line in found) == 2


def test_accepted_finding_says_so() -> None:
    """In words, with its reason."""
    finding = FindingWords("caution", 2, "rings", "a q of 9", "nothing sings there")
    assert finding.lines[0] == "accepted caution, section 2: rings"
    assert finding.lines[-1] == "accepted because nothing sings there"


def test_help_and_quit_are_hinted_at_every_width() -> None:
    """The row of keys never loses them, and fits."""
    for width in range(16, 250):
        pairs = hints(width)
        assert [key for key, _ in pairs[-2:]] == ["?", "q"]
        assert sum(len(key) + len(word) + 3 for key, word in pairs) <= width


def test_layout_switches_where_it_says() -> None:
    """Two questions: narrow, and low."""
    assert layout_for(80, 24).is_narrow
    assert layout_for(80, 24).is_one_chart
    assert not layout_for(120, 40).is_narrow
    assert not layout_for(120, 40).is_one_chart
    assert layout_for(200, 24).is_one_chart
    assert not layout_for(80, 50).is_one_chart


def _pole_hz(bench: Bench) -> float:
    """Return where the selected section's pole pair lies."""
    section = bench.session.section
    assert section is not None
    poles = realise(section, bench.session.chain.sample_rate_hz).poles
    assert isinstance(poles, ConjugatePair)
    return poles.angle_rad * bench.session.chain.sample_rate_hz / (2.0 * math.pi)
