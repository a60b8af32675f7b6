"""The guard: whatever comes in, what goes out is finite and at most the ceiling."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from tonebench.engine.guard import FADE_IN_S, LOOK_AHEAD_S, Guard, float32_ceiling

RATE_HZ = 48000
LOOK_AHEAD = int(LOOK_AHEAD_S * RATE_HZ)
FADE_IN = int(FADE_IN_S * RATE_HZ)
HOSTILE = (0.0, 1.0, -1.0, 0.4, 5e-324, 1e-40, 1e30, -1e30, 1e308, math.inf, -math.inf, math.nan, 31.0, 40.0)


def _opened(ceiling_db: float = -6.0) -> Guard:
    """Return a guard that is fully open, after its fade-in on silence."""
    guard = Guard(RATE_HZ, 2, ceiling_db)
    guard.open()
    guard.process_block(np.zeros((FADE_IN + LOOK_AHEAD, 2)))
    return guard


def _in_parts(guard: Guard, signal: NDArray[np.float64], sizes: list[int]) -> NDArray[np.float32]:
    parts, start = [], 0
    for size in [*sizes, signal.shape[0]]:
        stop = min(start + size, signal.shape[0])
        if stop > start:
            parts.append(guard.process_block(signal[start:stop]))
        start = stop
    return np.concatenate(parts)


@st.composite
def _signals(draw: st.DrawFn) -> NDArray[np.float64]:
    """Noise of any loudness with hostile samples and stretches in it."""
    generator = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    frames = draw(st.integers(1, 3000))
    signal = generator.standard_normal((frames, 2)) * 10.0 ** draw(st.floats(-6.0, 3.0))
    for value in draw(st.lists(st.sampled_from(HOSTILE), max_size=6)):
        start = draw(st.integers(0, frames - 1))
        signal[start : start + draw(st.integers(1, 600)), draw(st.integers(0, 1))] = value
    return np.asarray(signal)


@settings(max_examples=150, deadline=None)
@given(_signals(), st.floats(-60.0, 0.0), st.lists(st.integers(1, 700), max_size=8))
def test_nothing_over_the_ceiling_leaves_and_blocks_do_not_matter(
    signal: NDArray[np.float64], ceiling_db: float, sizes: list[int]
) -> None:
    """Any signal, any ceiling, any cut into blocks: finite, at most the ceiling, and the same samples."""
    whole = _opened(ceiling_db).process_block(signal)
    parts = _in_parts(_opened(ceiling_db), signal, sizes)
    assert np.isfinite(whole).all()
    assert float(np.abs(whole).max()) <= 10.0 ** (ceiling_db / 20.0)
    assert np.array_equal(whole, parts)


def test_ceiling_is_the_largest_float_that_is_not_over() -> None:
    """The next float32 is over the exact ceiling."""
    for ceiling_db in (-6.0, -0.1, 0.0, -13.37):
        value = float32_ceiling(ceiling_db)
        exact = 10.0 ** (ceiling_db / 20.0)
        assert float(value) <= exact < float(np.nextafter(value, np.float32(2.0)))


def test_idle_guard_only_delays() -> None:
    """Under the ceiling and after the fade-in, every sample leaves as it came, rounded once to float32."""
    guard = _opened()
    signal = np.random.default_rng(3).uniform(-0.5, 0.5, (5000, 2))
    out = guard.process_block(signal)
    assert np.array_equal(out[LOOK_AHEAD:], signal[:-LOOK_AHEAD].astype(np.float32))
    assert not guard.is_limiting


def test_limiter_lowers_the_gain_instead_of_clipping() -> None:
    """A loud sine comes out as a sine: its third harmonic stays 60 dB down, where clipping would put it at 20."""
    time_s = np.arange(RATE_HZ) / RATE_HZ
    sine = 2.0 * np.sin(2.0 * np.pi * 1000.0 * time_s)
    guard = _opened()
    out = guard.process_block(np.column_stack([sine, sine]))[RATE_HZ // 2 :, 0].astype(np.float64)
    spectrum = np.abs(np.fft.rfft(out * np.hanning(out.size)))
    assert 20.0 * np.log10(spectrum[500] / spectrum[1500]) > 60.0
    assert guard.is_limiting
    assert not guard.is_tripped


def test_limiter_lets_go_exactly() -> None:
    """Some time after a peak the gain is exactly 1 again."""
    guard = _opened()
    guard.process_block(np.full((100, 2), 2.0))
    guard.process_block(np.zeros((3 * RATE_HZ, 2)))
    signal = np.random.default_rng(4).uniform(-0.5, 0.5, (1000, 2))
    out = guard.process_block(signal)
    assert np.array_equal(out[LOOK_AHEAD:], signal[:-LOOK_AHEAD].astype(np.float32))


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
def test_no_number_trips_and_is_silent_until_armed(bad: float) -> None:
    """What came before fades out over the look-ahead; then zeros, whatever comes; then a fade-in after rearm."""
    guard = _opened()
    signal = np.full((1000, 2), 0.25)
    signal[500, 1] = bad
    out = guard.process_block(signal)
    assert guard.is_tripped
    assert "number" in guard.reason
    assert (out[LOOK_AHEAD:500] == np.float32(0.25)).all()
    assert (np.diff(out[500 : 500 + LOOK_AHEAD, 0]) <= 0.0).all()
    assert not out[500 + LOOK_AHEAD :].any()
    assert not guard.process_block(np.full((1000, 2), 0.25)).any()
    guard.rearm()
    again = guard.process_block(np.full((FADE_IN + 500, 2), 0.25))[:, 0]
    assert (np.diff(again) >= 0.0).all()
    assert again[0] < 0.001
    assert again[-1] == np.float32(0.25)


def test_run_away_trips_after_ten_milliseconds_and_a_click_does_not() -> None:
    """Over +30 dBFS for 10 ms trips, for 9 ms it does not; a low tone counts though it crosses zero."""
    for milliseconds, is_tripped in ((9.0, False), (10.5, True)):
        guard = _opened()
        frames = int(milliseconds * RATE_HZ / 1000.0)
        guard.process_block(np.full((frames, 2), 32.0))
        assert guard.is_tripped is is_tripped
    guard = _opened()
    tone = 100.0 * np.sin(2.0 * np.pi * 100.0 * np.arange(2400) / RATE_HZ)
    guard.process_block(np.column_stack([tone, tone]))
    assert guard.is_tripped
    assert "ran away" in guard.reason


def test_close_is_silent_within_five_milliseconds() -> None:
    """Mute and stop fade out over the look-ahead, 1.5 ms."""
    guard = _opened()
    guard.process_block(np.full((200, 2), 0.25))
    guard.close()
    out = guard.process_block(np.full((1000, 2), 0.25))
    assert not out[int(0.005 * RATE_HZ) :].any()
    assert np.abs(np.diff(out[:, 0])).max() < 0.25 * np.pi / 2.0 / LOOK_AHEAD * 1.01  # slope of a raised cosine


def test_nothing_leaves_a_guard_that_was_not_opened() -> None:
    """A new guard is closed."""
    guard = Guard(RATE_HZ)
    assert guard.is_closed
    assert not guard.process_block(np.full((5000, 2), 0.25)).any()


def test_shut_is_silent_at_once_and_fades_in_again() -> None:
    """After a fault of the device the next sound rises from nothing, as at the start."""
    guard = _opened()
    guard.process_block(np.full((2000, 2), 0.25))
    guard.shut()
    guard.open()
    out = guard.process_block(np.full((FADE_IN + 10, 2), 0.25))[:, 0]
    assert out[0] < 1e-5
    assert (np.diff(out) >= 0.0).all()
    tenth = FADE_IN // 10
    assert out[tenth] <= 0.25 * (0.5 - 0.5 * np.cos(np.pi * 0.102))
