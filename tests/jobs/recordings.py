"""Real speech for tests: alsa-utils' recordings, joined in random order with random gaps.

Never looped at a fixed period: a loop of 2.000 s has lines of its own at 50, 100 and 150 Hz.
"""

import os
from pathlib import Path

import numpy as np
import pytest
import soundfile
from numpy.typing import NDArray

SAMPLE_RATE_HZ = 48000
_FOLDER = Path("/usr/share/sounds/alsa")  # Debian package alsa-utils
_NAMES = (
    "Front_Center",
    "Front_Left",
    "Front_Right",
    "Rear_Center",
    "Rear_Left",
    "Rear_Right",
    "Side_Left",
    "Side_Right",
)


def speech(seconds: float, seed: int) -> NDArray[np.float64]:
    """Return mono speech of this length, shape (n,); skips the test where the recordings are not installed."""
    paths = [_FOLDER / f"{name}.wav" for name in _NAMES]
    if not all(path.exists() for path in paths):
        reason = "alsa-utils' recordings are not installed (Debian: apt install alsa-utils)"
        if os.environ.get("TONEBENCH_REQUIRE_SOUND") == "1":
            pytest.fail(reason)
        pytest.skip(reason)
    generator = np.random.default_rng(seed)
    wanted = int(seconds * SAMPLE_RATE_HZ)
    parts: list[NDArray[np.float64]] = []
    while sum(part.size for part in parts) < wanted:
        for index in generator.permutation(len(paths)):
            samples, rate_hz = soundfile.read(paths[index], dtype="float64")
            assert rate_hz == SAMPLE_RATE_HZ
            gap = np.zeros(int(generator.uniform(0.2, 1.2) * SAMPLE_RATE_HZ))
            parts += [np.asarray(samples, dtype=np.float64), gap]
    return np.concatenate(parts)[:wanted]


def hum(seconds: float, frequency_hz: float, amplitudes: tuple[float, ...]) -> NDArray[np.float64]:
    """Return a steady hum: amplitude by harmonic, from the first, each with a phase of its own; shape (n,)."""
    time_s = np.arange(int(seconds * SAMPLE_RATE_HZ)) / SAMPLE_RATE_HZ
    total = np.zeros(time_s.size)
    for number, amplitude in enumerate(amplitudes, start=1):
        total += amplitude * np.sin(2.0 * np.pi * number * frequency_hz * time_s + 0.7 * number)
    return total
