"""The demo clips: made again by their script, and holding what is said of them."""

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import soundfile
from numpy.typing import NDArray

FOLDER = Path(__file__).resolve().parents[2] / "clips"
NAMES = ("boathouse", "workshop", "chime")
BOATHOUSE_HZ = 750 * 48000 / 719_712  # whole periods in the loop
WORKSHOP_HZ = 840 * 48000 / 672_224


def _read(path: Path) -> NDArray[np.float64]:
    samples, rate_hz = soundfile.read(path, dtype="float64", always_2d=True)
    assert rate_hz == 48000
    assert samples.shape[1] == 1
    return np.asarray(samples[:, 0], dtype=np.float64)


def _line(samples: NDArray[np.float64], frequency_hz: float) -> float:
    """Return the amplitude of a tone in a Hann-windowed clip, by direct projection (no FFT)."""
    window = np.hanning(samples.size)
    turned = np.exp(-2j * np.pi * frequency_hz / 48000 * np.arange(samples.size))
    return float(2.0 * abs(np.sum(samples * window * turned)) / window.sum())


def test_script_makes_the_same_samples(tmp_path: Path) -> None:
    """Within one 16-bit step: another numpy may round a sine or a filter differently in its last bit."""
    subprocess.run(
        [sys.executable, str(FOLDER / "synthesise.py"), str(tmp_path)], check=True, capture_output=True, timeout=120
    )
    for name in NAMES:
        again, kept = _read(tmp_path / f"{name}.flac"), _read(FOLDER / f"{name}.flac")
        assert again.shape == kept.shape
        assert np.max(np.abs(again - kept)) <= 1.0 / 32768.0


@pytest.mark.parametrize("name", NAMES)
def test_clip_is_short_small_and_below_full_scale(name: str) -> None:
    """10 to 20 s, under 800 kB, peak under -6 dBFS; the comment tag describes it."""
    path = FOLDER / f"{name}.flac"
    samples = _read(path)
    assert 10.0 <= samples.size / 48000 <= 20.0
    assert path.stat().st_size < 800_000
    assert np.max(np.abs(samples)) < 10.0 ** (-6.0 / 20.0)
    with soundfile.SoundFile(path) as file:
        assert len(file.comment) > 20


@pytest.mark.parametrize(("name", "expected_hz"), [("boathouse", BOATHOUSE_HZ), ("workshop", 2 * WORKSHOP_HZ)])
def test_hum_lies_where_it_is_said(name: str, expected_hz: float) -> None:
    """The strongest line near the hum peaks within 0.002 Hz of it (a grid of 0.001 Hz, a line 0.1 Hz wide)."""
    samples = _read(FOLDER / f"{name}.flac")
    grid_hz = expected_hz + np.arange(-20, 21) * 0.001
    levels = [_line(samples, hz) for hz in grid_hz]
    assert abs(grid_hz[int(np.argmax(levels))] - expected_hz) <= 0.002


def test_boathouse_fundamental_is_strongest_and_stands_out() -> None:
    """Over every other harmonic, and 25 dB over the spectrum 3 Hz beside it."""
    samples = _read(FOLDER / "boathouse.flac")
    levels = [_line(samples, number * BOATHOUSE_HZ) for number in range(1, 11)]
    assert max(levels) == levels[0]
    beside = max(_line(samples, BOATHOUSE_HZ - 3.0), _line(samples, BOATHOUSE_HZ + 3.0))
    assert 20.0 * np.log10(levels[0] / beside) >= 25.0


def test_workshop_second_harmonic_is_strongest_and_follows_the_rectifier() -> None:
    """Even harmonics 4/(pi(4k²-1)): Fourier series of a full-wave rectified sine, a textbook result.

    0.3 dB: the noise bed is 30 dB under the weakest of the three.
    """
    samples = _read(FOLDER / "workshop.flac")
    levels = {number: _line(samples, number * WORKSHOP_HZ) for number in range(1, 9)}
    assert max(levels, key=lambda number: levels[number]) == 2
    for k in (2, 3):
        expected_db = 20.0 * np.log10(3.0 / (4.0 * k * k - 1.0))
        assert abs(20.0 * np.log10(levels[2 * k] / levels[2]) - expected_db) <= 0.3
    assert 20.0 * np.log10(levels[1] / levels[2]) < -20.0


def test_chime_is_one_strike_without_hum() -> None:
    """The level rises once; nothing at 50 or 60 Hz."""
    samples = _read(FOLDER / "chime.flac")
    blocks = np.sqrt(np.mean(samples[: samples.size // 480 * 480].reshape(-1, 480) ** 2, axis=1))
    rises = np.flatnonzero(blocks[1:] > 4.0 * np.maximum(blocks[:-1], 1e-3))
    assert len(rises) == 1
    assert rises[0] * 480 / 48000 == pytest.approx(0.35, abs=0.02)  # the block of 10 ms before the onset
    for hz in (50.0, 60.0):
        assert 20.0 * np.log10(_line(samples, hz)) < -100.0
