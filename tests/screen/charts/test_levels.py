"""Decibel plots: limits, and the spectrum's numbers."""

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from tests.screen.charts.reading import QUICK
from tonebench.errors import InvalidValueError
from tonebench.screen.charts.analysis import column_maxima, spectrum_dbfs
from tonebench.screen.charts.axis import default_axis
from tonebench.screen.charts.levels import draw_levels, level_limits_db
from tonebench.screen.charts.marks import MARK_SETS, mark_set
from tonebench.screen.charts.spectrum import connected

RATE_HZ = 48_000.0


def _limits(peak_db: float, low_db: float, before: tuple[float, float] | None) -> tuple[float, float]:
    levels = np.linspace(low_db, peak_db, 50)
    return level_limits_db(levels, levels, before)


def test_limits_by_hand() -> None:
    """A notch in a flat response shows -24 to +6 dB; a boost of 10 dB shows -12 to +12 dB."""
    flat = np.zeros(100)
    low = flat.copy()
    low[10] = -300.0
    assert level_limits_db(flat, low, None) == (-24.0, 6.0)
    assert _limits(10.0, 0.0, None) == (-12.0, 12.0)
    assert level_limits_db(np.full(5, np.nan), np.full(5, np.nan), None) == (-24.0, 6.0)


@QUICK
@given(st.floats(-90.0, 300.0), st.floats(0.0, 100.0))
def test_limits_hold_zero_and_the_peak(peak_db: float, depth_db: float) -> None:
    """Limits are multiples of 6 dB with 0 dB between them, and the highest level is never cut."""
    low, high = _limits(peak_db, peak_db - depth_db, None)
    assert low % 6 == high % 6 == 0
    assert low < 0 < high
    assert peak_db <= high


@QUICK
@example(11.5, [-1.0])  # 12 dB would do for the second, 18 dB was chosen for the first
@given(st.floats(-40.0, 40.0), st.lists(st.floats(-1.0, 1.0), min_size=1, max_size=20))
def test_limits_do_not_jump_for_small_changes(peak_db: float, changes: list[float]) -> None:
    """While the peak stays within 1 dB of a level, the upper limit changes at most once, and only upwards."""
    before = _limits(peak_db, -10.0, None)
    seen = [before[1]]
    for change in changes:
        before = _limits(peak_db + change, -10.0, before)
        seen.append(before[1])
    steps = np.diff(seen)
    assert (steps >= 0).all()
    assert np.count_nonzero(steps) <= 1


def test_limits_shrink_when_far_too_wide() -> None:
    """After a boost of 30 dB is taken back, the range comes back too."""
    wide = _limits(30.0, 0.0, None)
    assert wide[1] == 36.0
    assert _limits(0.0, 0.0, wide)[1] == 6.0


@QUICK
@given(
    st.integers(60, 200), st.integers(1, 40), st.integers(-20, -2), st.integers(1, 20), st.sampled_from(list(MARK_SETS))
)
def test_level_labels_are_whole(width: int, rows: int, low: int, high: int, name: str) -> None:
    """What stands left of the plot is the unit or a whole level with its sign, 0 among them from 3 rows on."""
    axis = default_axis(width, RATE_HZ)
    raster = draw_levels(axis, (rows, rows), (low * 6.0, high * 6.0), "dB", mark_set(name))
    labels = [row[: axis.plot_left - 1].strip() for row in raster.text_rows()]
    for label in filter(None, labels):
        number = label.removesuffix(" dB").replace("−", "-")
        assert label == "dB" or low * 6 <= float(number) <= high * 6
    if rows >= 3:
        assert any(label in {"0", "0 dB"} for label in labels)


@pytest.mark.parametrize("frequency_hz", [50.0, 997.0, 12_345.6])
def test_full_scale_sine_reads_zero_dbfs(frequency_hz: float) -> None:
    """A sine of amplitude 1 reads 0 dBFS at its frequency, whatever its place between the bins."""
    time = np.arange(16_384) / RATE_HZ
    frequency, level = spectrum_dbfs(np.sin(2 * np.pi * frequency_hz * time), RATE_HZ)
    top = int(np.argmax(level))
    assert frequency[top] == pytest.approx(frequency_hz, abs=RATE_HZ / 16_384)
    # The window's loss a quarter of a bin off its middle: 0.21 dB (a direct sum over the window, in the next test).
    assert -0.22 <= level[top] <= 0.01


def test_level_between_bins_by_direct_sum() -> None:
    """The worst loss between bins is that of Harris's window a quarter of a bin off, summed term by term."""
    frames = np.arange(4096)
    terms = (0.35875, -0.48829, 0.14128, -0.01168)  # F. J. Harris, Proc. IEEE 66(1), 1978, table 1
    window = sum(a * np.cos(2 * np.pi * k * frames / 4096) for k, a in enumerate(terms))
    loss = abs(np.sum(window * np.exp(2j * np.pi * 0.25 * frames / 4096))) / np.sum(window)
    assert 20 * np.log10(loss) == pytest.approx(-0.21, abs=0.005)


def test_loudest_channel_counts() -> None:
    """A sine in the right channel alone reads the same as in one channel; NaN counts as silence."""
    time = np.arange(4096) / RATE_HZ
    sine = 0.5 * np.sin(2 * np.pi * 1500 * time)
    _, one = spectrum_dbfs(sine, RATE_HZ)
    _, two = spectrum_dbfs(np.stack([np.full(4096, np.nan), sine], axis=1), RATE_HZ)
    # The same sums in the same order: equal but for the last bits.
    np.testing.assert_allclose(two, one, atol=1e-9)
    with pytest.raises(InvalidValueError, match=r"samples must be 64 frames or more, got \(63,\)"):
        spectrum_dbfs(np.zeros(63), RATE_HZ)


@QUICK
@given(st.integers(0, 2**32 - 1), st.integers(2, 400), st.integers(2, 2000))
def test_column_maxima_against_a_loop(seed: int, columns: int, bins: int) -> None:
    """Columns with bins hold the largest of them; those without lie between the neighbouring bins."""
    rng = np.random.default_rng(seed)
    frequency = np.arange(bins + 1, dtype=np.float64) * (24_000.0 / bins)
    level = rng.uniform(-100, 0, bins + 1)
    edges = np.geomspace(20.0, 24_000.0, columns + 1)
    found = column_maxima(frequency, level, edges)
    for index in range(columns):
        upper = edges[index + 1] * (1 + 1e-9 * (index == columns - 1))
        inside = [lv for f, lv in zip(frequency, level, strict=True) if edges[index] <= f < upper]
        if inside:
            assert found[index] == max(inside)
        elif edges[index] > frequency[1]:
            right = int(np.searchsorted(frequency, edges[index]))
            low, high = sorted(level[right - 1 : right + 1])
            # One part in 1e9 for the rounding of the interpolation.
            assert low - 1e-7 <= found[index] <= high + 1e-7


def test_connected_spans_meet() -> None:
    """Neighbouring columns touch, and each holds its own level."""
    levels = np.array([0.0, -40.0, -10.0, np.nan, -5.0])
    spans = connected(levels)
    known = np.isfinite(levels)
    assert (spans.low[known] <= levels[known]).all()
    assert (levels[known] <= spans.high[known]).all()
    assert spans.low[0] <= spans.high[1]
    assert spans.low[2] <= -10.0
    assert np.isnan(spans.low[3])
