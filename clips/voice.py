"""A synthesised voice: glottal pulses through moving formants, with breaths and consonants of noise.

It says nothing; it has the pitch, vowels, consonants and pauses of somebody who tells a story. Vowel formants are
round numbers of our own choosing within the range of an adult voice (common practice, no source).
"""

import numpy as np
from numpy.typing import NDArray
from scipy import signal

Samples = NDArray[np.float64]

# Three formants in Hz per vowel.
_VOWELS = {
    "a": (740.0, 1220.0, 2600.0),
    "e": (500.0, 1850.0, 2500.0),
    "i": (290.0, 2250.0, 2950.0),
    "o": (480.0, 860.0, 2450.0),
    "u": (320.0, 740.0, 2300.0),
    "schwa": (520.0, 1450.0, 2450.0),
}
_BANDWIDTHS_HZ = (75.0, 95.0, 130.0)
_UPDATE_FRAMES = 240  # formants move every 5 ms


def speak(generator: np.random.Generator, frames: int, sample_rate_hz: int) -> Samples:
    """Return a voice of this many samples, in phrases with pauses of random length."""
    total = np.zeros(frames)
    start = int(0.9 * sample_rate_hz)
    while True:
        phrase = _phrase(generator, sample_rate_hz)
        if start + phrase.size > frames - int(0.5 * sample_rate_hz):
            return total
        total[start : start + phrase.size] += phrase
        start += phrase.size + int(generator.uniform(0.35, 1.0) * sample_rate_hz)


def _phrase(generator: np.random.Generator, sample_rate_hz: int) -> Samples:
    """Return some syllables under one falling line of pitch."""
    count = int(generator.integers(4, 11))
    names = list(_VOWELS)
    lengths = (generator.uniform(0.11, 0.27, count) * sample_rate_hz).astype(int)
    lengths[-1] = int(1.5 * lengths[-1])
    vowels = [names[int(index)] for index in generator.integers(0, len(names), count)]
    frames = int(lengths.sum())
    position = np.arange(frames) / frames
    accents = np.repeat(generator.uniform(-1.0, 1.0, count), lengths)
    drift = signal.lfilter([0.0004], [1.0, -0.9996], generator.standard_normal(frames) * 6.0 + accents * 9.0)
    pitch_hz = generator.uniform(118.0, 132.0) - 24.0 * position + drift
    loudness = _loudness(generator, lengths)
    voiced = _formants(_glottis(generator, pitch_hz, sample_rate_hz), vowels, lengths, sample_rate_hz) * loudness
    voiced /= np.max(np.abs(voiced))
    return voiced + _consonants(generator, lengths, sample_rate_hz)


def _loudness(generator: np.random.Generator, lengths: NDArray[np.int_]) -> Samples:
    parts = []
    for length in lengths:
        rise = np.sin(np.pi * np.clip(np.arange(length) / length, 0.0, 1.0)) ** 0.5
        parts.append(generator.uniform(0.45, 1.0) * (0.12 + 0.88 * rise))
    smooth = signal.windows.hann(960)
    shape = np.convolve(np.concatenate(parts), smooth / smooth.sum(), "same")
    ends = np.minimum(1.0, np.minimum(np.arange(shape.size), np.arange(shape.size)[::-1]) / 1200.0)
    return np.asarray(shape * ends)


def _glottis(generator: np.random.Generator, pitch_hz: Samples, sample_rate_hz: int) -> Samples:
    """Return the derivative of a smooth glottal pulse: rise over 40 %, fall over 20 % of the period, with breath."""
    jitter = 1.0 + 0.008 * signal.lfilter([0.02], [1.0, -0.98], generator.standard_normal(pitch_hz.size)) * 7.0
    phase = np.cumsum(pitch_hz * jitter / sample_rate_hz) % 1.0
    rise = 0.5 - 0.5 * np.cos(np.pi * phase / 0.4)
    fall = np.cos(0.5 * np.pi * (phase - 0.4) / 0.2)
    flow = np.where(phase < 0.4, rise, np.where(phase < 0.6, fall, 0.0))
    breath = 0.012 * generator.standard_normal(phase.size) * (0.3 + flow)
    return np.asarray(np.diff(flow, prepend=0.0) + 0.05 * breath)


def _formants(source: Samples, vowels: list[str], lengths: NDArray[np.int_], sample_rate_hz: int) -> Samples:
    """Filter through three resonances in series that glide from vowel to vowel."""
    centres = np.cumsum(lengths) - lengths // 2
    times = np.arange(0, source.size, _UPDATE_FRAMES)
    result = source
    for index, bandwidth_hz in enumerate(_BANDWIDTHS_HZ):
        targets = np.array([_VOWELS[vowel][index] for vowel in vowels])
        tracks_hz = np.interp(times, centres, targets)
        radius = np.exp(-np.pi * bandwidth_hz / sample_rate_hz)
        output = np.empty(source.size)
        state = np.zeros(2)
        for first, hz in zip(times, tracks_hz, strict=True):
            a1, a2 = -2.0 * radius * np.cos(2.0 * np.pi * hz / sample_rate_hz), radius**2
            block = result[first : first + _UPDATE_FRAMES]
            output[first : first + block.size], state = signal.lfilter([1.0 + a1 + a2], [1.0, a1, a2], block, zi=state)
        result = output
    return result


def _consonants(generator: np.random.Generator, lengths: NDArray[np.int_], sample_rate_hz: int) -> Samples:
    """Return hisses and bursts at some of the syllables' starts."""
    total = np.zeros(int(lengths.sum()))
    for first in (np.cumsum(lengths) - lengths)[generator.uniform(size=lengths.size) < 0.55]:
        is_hiss = generator.uniform() < 0.6
        seconds = generator.uniform(0.05, 0.1) if is_hiss else 0.018
        size = min(int(seconds * sample_rate_hz), total.size - int(first))
        low, high = (3200.0, 7800.0) if is_hiss else (1200.0, 5000.0)
        sos = signal.butter(2, (low, high), "bandpass", fs=sample_rate_hz, output="sos")
        noise = signal.sosfilt(sos, generator.standard_normal(size))
        shape = np.sin(np.pi * np.arange(size) / size) ** (1.0 if is_hiss else 0.5)
        total[first : first + size] += 0.11 * noise * shape
    return total
