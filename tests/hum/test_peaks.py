"""The nearest spectral peak: on hum whose frequency is known, on the demo clips, and where there is nothing."""

import math
from pathlib import Path

import numpy as np
import pytest
import soundfile
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import signal

from tonebench.hum.peaks import LONGEST_FRAMES, SHORTEST_FRAMES, STANDS_OUT_DB, Peak, nearest_peak

RATE_HZ = 48000.0
CLIPS = Path(__file__).resolve().parents[2] / "clips"
BOATHOUSE_HZ = 750 * 48000 / 719_712  # clips/synthesise.py: 750 whole periods in the loop
WORKSHOP_HZ = 840 * 48000 / 672_224


def tone(frequency_hz: float, seconds: float, amplitude: float = 1.0, phase_rad: float = 0.0) -> NDArray[np.float64]:
    """Return a sine."""
    time_s = np.arange(round(seconds * RATE_HZ)) / RATE_HZ
    return amplitude * np.sin(2.0 * np.pi * frequency_hz * time_s + phase_rad)


def noise(frames: int, sigma: float, seed: int) -> NDArray[np.float64]:
    """Return white noise, the same for the same seed."""
    return np.asarray(np.random.default_rng(seed).normal(0.0, sigma, frames), dtype=np.float64)


def found(samples: NDArray[np.floating], near_hz: float, rate_hz: float = RATE_HZ) -> Peak:
    """Return the peak, which must be there."""
    peak = nearest_peak(samples, rate_hz, near_hz)
    assert peak is not None
    return peak


def least_deviation_hz(amplitude: float, sigma: float, frames: int) -> float:
    """Return the Cramér-Rao bound of a tone's frequency.

    D. C. Rife and R. R. Boorstyn, IEEE Trans. Inf. Theory IT-20 (1974), 591-598, with frequency, phase and amplitude
    unknown; for a real tone of amplitude A in noise of variance sigma², 24 sigma²/(A² N (N² − 1)) in (rad/sample)².
    """
    variance = 24.0 * sigma**2 / (amplitude**2 * frames * (frames**2 - 1.0))
    return math.sqrt(variance) * RATE_HZ / (2.0 * math.pi)


@pytest.mark.parametrize("snr_db", [40.0, 0.0, -10.0])
def test_error_follows_the_bound_of_noise(snr_db: float) -> None:
    """Root mean square over 24 seeds within 3.1 bounds.

    A Blackman-Harris window costs a factor of 2.16 (sqrt(Σw²t²·Σt²)/Σwt²), for it hides the ends, which tell most of a
    frequency; 24 seeds scatter a root mean square by 1/sqrt(48), of which three are allowed. A thousandth of a bin, at
    which the search stops, comes on top.
    """
    frequency_hz, seconds = 50.0217, 1.0
    frames = round(seconds * RATE_HZ)
    sigma = math.sqrt(0.5 / 10.0 ** (snr_db / 10.0))
    errors = [
        found(tone(frequency_hz, seconds, phase_rad=seed) + noise(frames, sigma, seed), 52.0).frequency_hz
        - frequency_hz
        for seed in range(24)
    ]
    rms_hz = math.sqrt(sum(error**2 for error in errors) / len(errors))
    assert rms_hz <= 3.1 * least_deviation_hz(1.0, sigma, frames) + 1e-3 * RATE_HZ / frames


@settings(derandomize=True, deadline=None, max_examples=40)
@given(st.floats(math.log(30.0), math.log(20000.0)), st.floats(-80.0, 0.0), st.floats(0.0, 6.28), st.floats(0.9, 1.11))
def test_any_clean_tone_is_found_from_nearby(pitch: float, level_db: float, phase_rad: float, aside: float) -> None:
    """Two seconds: within 0.001 Hz and 0.1 dB, wherever it lies between the bins.

    The search stops at a thousandth of a bin, 0.0005 Hz; the image at the negative frequency lies 60 bins and more
    away, 92 dB down.
    """
    frequency_hz = math.exp(pitch)
    peak = found(tone(frequency_hz, 2.0, 10.0 ** (level_db / 20.0), phase_rad), frequency_hz * aside)
    assert peak.frequency_hz == pytest.approx(frequency_hz, abs=1e-3)
    assert peak.level_dbfs == pytest.approx(level_db, abs=0.1)
    assert peak.height_db > STANDS_OUT_DB


def test_full_scale_sine_reads_nought() -> None:
    """A sine that just reaches 1.0 is 0 dBFS; 1e-4 dB: half a thousandth of a bin off the lobe's flat top."""
    assert found(tone(997.0, 3.0), 1000.0).level_dbfs == pytest.approx(0.0, abs=1e-4)


def test_level_holds_between_bins_where_a_plain_transform_would_sag() -> None:
    """Half a bin off, the window's own bins read 0.83 dB low (Harris 1978, table 1); the refined peak does not."""
    frames = 48000
    assert found(tone(1000.5, frames / RATE_HZ), 1000.0).level_dbfs == pytest.approx(0.0, abs=1e-3)


def test_height_is_over_the_noise_around() -> None:
    """A tone in white noise of known density: 1 dB, the scatter of a median of a few hundred bins and of the tone.

    The amplitude spectrum of white noise, scaled as a tone's, has a mean power of 4 sigma²·Σw²/(Σw)² = 4 sigma²·2.0/N
    per bin (an equivalent noise bandwidth of 2.0 bins, Harris 1978, table 1), and a median ln 2 times that.
    """
    seconds, sigma = 4.0, 0.01
    frames = round(seconds * RATE_HZ)
    peak = found(tone(1000.0, seconds, 0.1) + noise(frames, sigma, 5), 1010.0)
    floor_db = 10.0 * math.log10(math.log(2.0) * 4.0 * sigma**2 * 2.0044 / frames)
    assert peak.height_db == pytest.approx(-20.0 - floor_db, abs=1.0)


def test_nearest_is_by_ratio() -> None:
    """Of 100 and 400 Hz, 190 Hz is nearer to the lower by ratio and in Hz, 230 Hz only to the upper by ratio."""
    both = tone(100.0, 2.0, 0.1) + tone(400.0, 2.0, 0.3)
    assert found(both, 190.0).frequency_hz == pytest.approx(100.0, abs=1e-2)
    assert found(both, 230.0).frequency_hz == pytest.approx(400.0, abs=1e-2)


def test_what_lies_deep_under_the_strongest_is_passed_over() -> None:
    """A trace 80 dB under the strongest is nobody's hum; one 60 dB under it is taken."""
    strong = tone(1000.0, 2.0, 0.5)
    assert found(strong + tone(600.0, 2.0, 0.5e-4), 600.0).frequency_hz == pytest.approx(1000.0, abs=1e-2)
    assert found(strong + tone(600.0, 2.0, 0.5e-3), 600.0).frequency_hz == pytest.approx(600.0, abs=1e-2)


def test_a_peak_over_an_octave_away_is_not_meant() -> None:
    """From 52 Hz a tone at 100 Hz is found, from 48 Hz it is not; the same from above."""
    samples = tone(100.0, 4.0, 0.1) + noise(4 * 48000, 1e-4, 3)
    for near_hz, is_found in ((52.0, True), (48.0, False), (195.0, True), (205.0, False)):
        assert (nearest_peak(samples, RATE_HZ, near_hz) is not None) is is_found


def test_two_close_tones_are_told_apart() -> None:
    """1 Hz apart over eight seconds: eight bins, two main lobes that just touch."""
    both = tone(50.0, 8.0, 0.1) + tone(51.0, 8.0, 0.1)
    assert found(both, 49.0).frequency_hz == pytest.approx(50.0, abs=5e-3)
    assert found(both, 52.0).frequency_hz == pytest.approx(51.0, abs=5e-3)


def test_channels_are_averaged() -> None:
    """The same hum on both channels reads as on one; on one of two, 6.02 dB lower."""
    one = tone(50.0, 2.0, 0.1)
    both = np.stack([one, one], axis=1)
    half = np.stack([one, np.zeros_like(one)], axis=1)
    assert found(both, 50.0) == found(one, 50.0)
    assert found(half, 50.0).level_dbfs == pytest.approx(-26.02, abs=0.01)


def test_only_the_end_of_a_long_clip_is_looked_at() -> None:
    """What sounded before the last 2^19 frames does not count."""
    early = tone(70.0, 3.0, 0.9)
    late = tone(50.0, LONGEST_FRAMES / RATE_HZ + 0.1, 0.1)
    assert found(np.concatenate([early, late]), 70.0).frequency_hz == pytest.approx(50.0, abs=1e-3)


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize("near_hz", [30.0, 1000.0, 15000.0])
def test_noise_has_no_peak(seed: int, near_hz: float) -> None:
    """Neither white nor brown noise stands out anywhere."""
    white = noise(1 << 16, 0.1, seed)
    assert nearest_peak(white, RATE_HZ, near_hz) is None
    # A leaky sum: −6 dB an octave above 76 Hz, as a room's rumble has.
    brown = signal.lfilter([0.01], [1.0, -0.99], white)
    assert nearest_peak(brown, RATE_HZ, near_hz) is None


@pytest.mark.parametrize(
    "samples",
    [
        pytest.param(np.zeros(48000), id="silence"),
        pytest.param(np.full(48000, 0.25), id="direct current"),
        pytest.param(np.zeros(0), id="empty"),
        pytest.param(np.zeros((0, 2)), id="empty stereo"),
        pytest.param(tone(1000.0, 1.0)[: SHORTEST_FRAMES - 1], id="too short"),
        pytest.param(np.eye(1, 48000, 24000).ravel(), id="one click"),
    ],
)
def test_nothing_to_find(samples: NDArray[np.float64]) -> None:
    """Silence, a constant, a click and what is too short have no peak."""
    assert nearest_peak(samples, RATE_HZ, 50.0) is None


@pytest.mark.parametrize("near_hz", [0.0, -50.0])
def test_no_peak_is_nearest_to_nothing(near_hz: float) -> None:
    """A ratio to 0 Hz or below has no meaning."""
    assert nearest_peak(tone(50.0, 2.0), RATE_HZ, near_hz) is None


def test_float32_frames_as_the_bench_holds_them() -> None:
    """Same peak within 0.001 Hz from single-precision frames at another rate."""
    frames = tone(50.0, 2.0, 0.1).astype(np.float32)[:, np.newaxis]
    peak = found(frames, 60.0, 44100.0)
    assert peak.frequency_hz == pytest.approx(50.0 * 44100.0 / 48000.0, abs=1e-3)


@pytest.mark.parametrize(
    ("name", "near_hz", "expected_hz", "within_hz"),
    [
        ("boathouse", 51.0, BOATHOUSE_HZ, 1e-3),
        # The speaker's pitch glides across 100 Hz (94 to 132 Hz, clips/voice.py) and pulls at it: half a bin.
        ("boathouse", 110.0, 2.0 * BOATHOUSE_HZ, 0.5 * 48000.0 / LONGEST_FRAMES),
        ("workshop", 118.0, 2.0 * WORKSHOP_HZ, 1e-3),
        ("workshop", 250.0, 4.0 * WORKSHOP_HZ, 1e-3),
    ],
)
def test_hum_of_the_clips(name: str, near_hz: float, expected_hz: float, within_hz: float) -> None:
    """Where the clip's script puts it, within a hundredth of a bin (0.09 Hz)."""
    samples, rate_hz = soundfile.read(CLIPS / f"{name}.flac", dtype="float32", always_2d=True)
    peak = found(samples, near_hz, float(rate_hz))
    assert peak.frequency_hz == pytest.approx(expected_hz, abs=within_hz)


def test_hum_of_the_boathouse_in_numbers() -> None:
    """The issue's own example: 50.020 Hz from a pole at 51 Hz; its level against a direct projection, 0.1 dB."""
    samples, rate_hz = soundfile.read(CLIPS / "boathouse.flac", dtype="float64")
    peak = found(samples, 51.0, float(rate_hz))
    assert f"{peak.frequency_hz:.3f}" == "50.020"
    window = np.hanning(samples.size)
    turned = np.exp(-2j * np.pi * BOATHOUSE_HZ / rate_hz * np.arange(samples.size))
    level_db = 20.0 * math.log10(2.0 * abs(np.sum(samples * window * turned)) / window.sum())
    assert peak.level_dbfs == pytest.approx(level_db, abs=0.1)
    assert peak.level_dbfs == pytest.approx(-31.0, abs=0.5)
    assert peak.height_db > 25.0
