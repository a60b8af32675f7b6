"""The main job on a real recording: what the notches take away, and what they leave alone."""

import subprocess
import sys
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
import soundfile
from numpy.typing import NDArray
from scipy import signal

from tests.builds.noise_model import predicted_noise_rms
from tests.compiling import compile_c, needs_compiler
from tests.jobs.recordings import SAMPLE_RATE_HZ, hum, speech

SECONDS = 8.0
HUM_HZ = 50.0
AMPLITUDES = (0.1,)
TYPED_LINES = ("notch 50 Hz radius 0.9995", "1 name hum")


def _tonebench(*arguments: str, cwd: Path) -> subprocess.CompletedProcess[str]:
    """Run the program as its users do."""
    return subprocess.run(
        [sys.executable, "-m", "tonebench", *arguments],
        cwd=cwd,
        check=False,
        capture_output=True,
        text=True,
        timeout=120,
    )


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder with speech.wav, both.wav, hum.toml and what render made of them."""
    place = tmp_path_factory.mktemp("job")
    voice = speech(SECONDS, seed=1)
    soundfile.write(place / "speech.wav", voice, SAMPLE_RATE_HZ, subtype="DOUBLE")
    soundfile.write(place / "both.wav", voice + hum(SECONDS, HUM_HZ, AMPLITUDES), SAMPLE_RATE_HZ, subtype="DOUBLE")
    edited = _tonebench("edit", "hum.toml", *TYPED_LINES, cwd=place)
    assert edited.returncode == 0, edited.stderr
    rendered = _tonebench("render", "hum.toml", "speech.wav", "both.wav", "-o", "out", cwd=place)
    assert rendered.returncode == 0, rendered.stderr
    return place


def _read(path: Path) -> NDArray[np.float64]:
    samples, rate_hz = soundfile.read(path, dtype="float64")
    assert rate_hz == SAMPLE_RATE_HZ
    return np.asarray(samples, dtype=np.float64)


def _rms(samples: NDArray[np.float64]) -> float:
    return float(np.sqrt(np.mean(samples * samples)))


def test_hum_is_forty_decibels_down_in_the_last_half_second(folder: Path) -> None:
    """The chain is linear, so the difference of both renders is the hum through the notches."""
    left = _read(folder / "out" / "both.wav") - _read(folder / "out" / "speech.wav")
    last = SAMPLE_RATE_HZ // 2
    put_in = hum(SECONDS, HUM_HZ, AMPLITUDES)
    down_db = 20.0 * np.log10(_rms(put_in[-last:]) / _rms(left[-last:]))
    assert down_db >= 40.0


def test_speech_is_left_alone_above_100_hz(folder: Path) -> None:
    """In every third octave above 100 Hz (IEC 61260-1 midbands, base ten) the speech changes by at most 0.1 dB."""
    before = np.abs(np.fft.rfft(_read(folder / "speech.wav"))) ** 2
    after = np.abs(np.fft.rfft(_read(folder / "out" / "speech.wav"))) ** 2
    frequency_hz = np.fft.rfftfreq(int(SECONDS * SAMPLE_RATE_HZ), 1.0 / SAMPLE_RATE_HZ)
    edges_hz = 1000.0 * 10.0 ** ((np.arange(-9, 14) - 0.5) / 10.0)  # lowest band 112 to 141 Hz, highest to 22.4 kHz
    for low_hz, high_hz in pairwise(edges_hz):
        band = (frequency_hz >= low_hz) & (frequency_hz < high_hz)
        change_db = 10.0 * np.log10(after[band].sum() / before[band].sum())
        assert abs(change_db) <= 0.1, f"{low_hz:.0f} to {high_hz:.0f} Hz changed by {change_db:.3f} dB"


@needs_compiler
@pytest.mark.parametrize("structure", ["tdf2", "df1"])
def test_exported_header_gives_the_same_output(folder: Path, structure: str) -> None:
    """The C header, compiled with every warning an error, matches the double-precision recursion on the recording.

    f64 within 1e-9 of full scale, the amplified rounding of a direct form near 0 Hz. f32 within the arithmetic's own
    error: at most 4 dB over the white round-off model, worked on this very signal (its bracket in float32).
    """
    samples = _read(folder / "both.wav")
    for target in (f"f64/{structure}", f"f32/{structure}"):
        header = folder / f"hum_{target.replace('/', '_')}.h"
        exported = _tonebench(
            "export", "hum.toml", "--to", "c", "--target", target, "--prefix", "hum", "-o", header.name, cwd=folder
        )
        assert exported.returncode == 0, exported.stderr
        is_float = target.startswith("f32")
        given = samples.astype(np.float32) if is_float else samples
        got = compile_c(header, "hum", is_float=is_float).process(given).astype(np.float64)
        row = _published_row(is_float=is_float)
        heard = given.astype(np.float64)
        error = got - signal.sosfilt(row[None, :], heard)
        if is_float:
            expected = predicted_noise_rms(row[None, :], structure, 1.0, heard)
            assert _rms(error) <= 10.0 ** (4.0 / 20.0) * expected
        else:
            assert np.max(np.abs(error)) <= 1e-9


def _published_row(*, is_float: bool) -> NDArray[np.float64]:
    """Return the published notch (Audio EQ Cookbook, W3C Note) at this radius, in the target's words.

    What rounding the coefficients does to the filter is a finding, not an error of the code.
    """
    radius, omega = 0.9995, 2.0 * np.pi * HUM_HZ / SAMPLE_RATE_HZ
    alpha = (1.0 - radius**2) / (1.0 + radius**2)
    turn = -2.0 * np.cos(omega) / (1.0 + alpha)
    row = np.array([1.0 / (1.0 + alpha), turn, 1.0 / (1.0 + alpha), 1.0, turn, radius**2])
    return row.astype(np.float32).astype(np.float64) if is_float else row
