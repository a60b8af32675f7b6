"""What the charts are given, against the numbers of core and against sums made by hand."""

import math

import numpy as np
import pytest

from tests.screen.opening import hum_clip, make_bench, small_chain
from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.response import chain_response
from tonebench.core.section import by_kind
from tonebench.screen import pictures, spectra


def test_rim_shows_every_root_of_every_section() -> None:
    """One mark per conjugate pair; the selected section's poles are selected; f0 is not the pole's angle."""
    bench = make_bench()
    picture = pictures.rim_picture(bench)
    poles = [mark for mark in picture.marks if mark.role == "pole"]
    assert [mark.section_number for mark in poles] == [1, 2, 3]
    assert [mark.is_selected for mark in poles] == [True, False, False]
    assert poles[0].radius == 0.9995
    assert poles[0].frequency_hz < 50.0
    assert [leader.f0_hz for leader in picture.leaders] == [50.0, 320.0, 120.0]


def test_bypassed_section_is_marked_and_out_of_the_curve() -> None:
    """Its marks stay, in parentheses; the chain's curve is that of the others."""
    bench = make_bench()
    bench.session.toggle_bypass()
    assert pictures.rim_picture(bench).marks[0].is_bypassed
    curve = pictures.chain_curve(bench, np.array([50.0, 1000.0]))
    rest = small_chain().with_sections(small_chain().sections[1:])
    expected = 20 * np.log10(np.abs(chain_response(rest, curve.frequency_hz)))
    assert curve.level_db == pytest.approx(expected, abs=1e-9)  # the same formula on the same sections


def test_rate_of_the_clip_keeps_hz_and_seconds_and_numbers() -> None:
    """A section that the clip's rate cannot hold is left out, the others keep their numbers."""
    sections = (by_kind(Kind.PEAK, 9000.0, ("q", 1.0), 2.0), *small_chain().sections)
    bench = make_bench(Chain("four", 48000.0, sections), hum_clip(16000.0))
    picture = pictures.rim_picture(bench)
    assert picture.sample_rate_hz == 16000.0
    assert sorted({mark.section_number for mark in picture.marks}) == [2, 3, 4]
    assert pictures.section_curve(bench, np.array([100.0])) is None
    assert "not at this rate" in pictures.chain_rows(bench)[0].last
    assert "section 1: left out" in bench.rate_words()


def test_a_chart_never_gets_an_infinity() -> None:
    """A pole on the circle at the very frequency asked for."""
    bench = make_bench(Chain("edge", 48000.0))
    bench.session.type_line("free poles 1 at 7.5 deg")
    curve = pictures.chain_curve(bench, np.array([1000.0]))
    assert np.isfinite(curve.level_db).all()
    assert "unstable" in bench.hearing_words()


def test_long_term_spectrum_of_a_sine_reads_its_level() -> None:
    """0.1 at 50.2 Hz is -20 dBFS. The window reads up to 0.21 dB low between bins, and the noise is far below."""
    curve = spectra.long_term_curve(hum_clip(seconds=3.0).frames, 48000.0)
    assert curve is not None
    top = int(np.argmax(curve.level_db))
    assert curve.level_db[top] == pytest.approx(20 * math.log10(0.1), abs=0.25)
    assert curve.frequency_hz[top] == pytest.approx(50.2, abs=3.0)  # bins are 2.9 Hz apart
    assert len(curve.frequency_hz) < 1200
    assert (np.diff(curve.frequency_hz) > 0).all()


def test_thinning_keeps_every_highest_bin() -> None:
    """A naive loop over the same 96ths of an octave finds the same levels."""
    frequency = np.linspace(0.0, 24000.0, 8193)
    level = np.random.default_rng(5).normal(-60.0, 10.0, frequency.size)
    found = spectra.thinned(frequency, level)
    groups: dict[int, float] = {}
    for f, one in zip(frequency.tolist(), level.tolist(), strict=True):
        key = math.floor(math.log2(max(f, 1e-3)) * 96)
        groups[key] = max(groups.get(key, -math.inf), one)
    assert found.level_db.tolist() == list(groups.values())


def test_a_clip_too_short_for_a_spectrum_has_none() -> None:
    """Under 64 frames."""
    assert spectra.long_term_curve(np.zeros((10, 1), np.float32), 48000.0) is None


def test_hearing_words_say_what_the_bench_cannot_know() -> None:
    """Always; and a loud chain with its tone and by how much."""
    assert "cannot know" in make_bench().hearing_words()
    loud = make_bench(Chain("loud", 48000.0, (by_kind(Kind.PEAK, 1000.0, ("q", 3.0), 15.0),)))
    assert "1000 Hz 15.0 dB louder" in loud.hearing_words()
    assert "cannot know" in loud.hearing_words()
