"""Synthesise the demo clips: everything in them is invented and made here.

    python clips/synthesise.py [FOLDER]

writes ``boathouse.flac``, ``workshop.flac`` and ``chime.flac``, 48 kHz mono, the same samples every time. Length and
hum frequency are chosen together, so that the hum goes on without a step where a looped clip starts again.
"""

import sys
from pathlib import Path

import numpy as np
import soundfile
from numpy.typing import NDArray
from scipy import signal
from voice import speak

Samples = NDArray[np.float64]

SAMPLE_RATE_HZ = 48000

# 750 periods in 719,712 samples: 50.020008 Hz, the mains a little fast, and whole periods in the loop.
BOATHOUSE_FRAMES, BOATHOUSE_PERIODS = 719_712, 750
# Levels of the charger's hum by harmonic, dB of full scale (invented: a falling series, odd ones a little stronger).
BOATHOUSE_LEVELS_DB = (-31.0, -41.0, -40.0, -50.0, -47.0, -56.0, -53.0, -60.0, -58.0, -64.0, -62.0, -67.0)

# 840 periods in 672,224 samples: 59.980007 Hz.
WORKSHOP_FRAMES, WORKSHOP_PERIODS = 672_224, 840
WORKSHOP_SECOND_DB = -30.0  # of the second harmonic, the strongest; the even ones follow the rectifier's law
WORKSHOP_ODD_DB = {1: -54.0, 3: -62.0}  # a trace of the unrectified mains

CHIME_FRAMES = 528_000
CHIME_ONSET_FRAMES = 16_800
# Ratios, levels in dB and decay times (T60) of the struck bar's partials, all invented.
CHIME_HZ = 587.0
CHIME_PARTIALS = ((1.0, -9.0, 4.6), (2.41, -15.0, 2.9), (3.87, -20.0, 1.7), (5.63, -24.0, 1.0), (7.92, -28.0, 0.6))

DESCRIPTIONS = {
    "boathouse": "An interview in a boathouse (a synthesised voice) over a battery charger's hum at 50.02 Hz.",
    "workshop": "Taps and scrapes in a workshop over the hum of a 60 Hz rectifier, strongest at 120 Hz.",
    "chime": "One strike on a metal bar and its decay, clean and dry, for EQ and resonators.",
}


def rectifier_amplitude(number: int) -> float:
    """Return the amplitude of harmonic ``2·number`` of a full-wave rectified sine of amplitude 1 (Fourier series)."""
    return 4.0 / (np.pi * (4.0 * number**2 - 1.0))


def hum(frames: int, periods: int, amplitudes: dict[int, float]) -> Samples:
    """Return whole periods of a hum: amplitude by harmonic number, each with a phase of its own."""
    phase = 2.0 * np.pi * periods / frames * np.arange(frames)
    total = np.zeros(frames)
    for number, amplitude in amplitudes.items():
        total += amplitude * np.sin(number * phase + 1.3 * number * number)
    return total


def level(decibel: float) -> float:
    """Return a linear amplitude."""
    return float(10.0 ** (decibel / 20.0))


def edges(samples: Samples, seconds: float = 0.005) -> Samples:
    """Fade both ends, so that a loop does not click."""
    count = int(seconds * SAMPLE_RATE_HZ)
    ramp = 0.5 - 0.5 * np.cos(np.pi * (np.arange(count) + 0.5) / count)
    faded = samples.copy()
    faded[:count] *= ramp
    faded[-count:] *= ramp[::-1]
    return faded


def band(generator: np.random.Generator, frames: int, low_hz: float, high_hz: float) -> Samples:
    """Return noise of one band, root mean square 1."""
    sos = signal.butter(2, (low_hz, high_hz), "bandpass", fs=SAMPLE_RATE_HZ, output="sos")
    noise: Samples = signal.sosfilt(sos, generator.standard_normal(frames))
    loudness: float = np.sqrt(np.mean(noise**2))
    return noise / loudness


def boathouse() -> Samples:
    """Return the interview: voice, room, water, and the charger."""
    generator = np.random.default_rng(5002)
    voice = speak(generator, BOATHOUSE_FRAMES, SAMPLE_RATE_HZ)
    tail = generator.standard_normal(12_000) * np.exp(-np.arange(12_000) / 2_600.0)
    room = signal.fftconvolve(voice, tail / np.sqrt(np.sum(tail**2)))[:BOATHOUSE_FRAMES]
    dry = voice + level(-16.0) * room
    dry *= level(-8.0) / np.max(np.abs(dry))
    seconds = np.arange(BOATHOUSE_FRAMES) / SAMPLE_RATE_HZ
    lap = 0.5 + 0.5 * np.sin(2.0 * np.pi * 0.37 * seconds) * np.sin(2.0 * np.pi * 0.11 * seconds + 1.0)
    water = level(-66.0) * lap**2 * band(generator, BOATHOUSE_FRAMES, 300.0, 1500.0)
    amplitudes = {number: level(db) for number, db in enumerate(BOATHOUSE_LEVELS_DB, start=1)}
    charger = hum(BOATHOUSE_FRAMES, BOATHOUSE_PERIODS, amplitudes)
    return edges(dry + water) + charger


def workshop() -> Samples:
    """Return the workshop: taps, scrapes, a bed of noise, and the rectifier."""
    generator = np.random.default_rng(6002)
    total: Samples = level(-62.0) * band(generator, WORKSHOP_FRAMES, 60.0, 900.0)
    start = 0.6
    while start < WORKSHOP_FRAMES / SAMPLE_RATE_HZ - 1.2:
        is_tap = generator.uniform() < 0.65
        event = _tap(generator) if is_tap else _scrape(generator)
        first = int(start * SAMPLE_RATE_HZ)
        total[first : first + event.size] += event
        start += generator.uniform(0.25, 1.1)
    scale = level(WORKSHOP_SECOND_DB) / rectifier_amplitude(1)
    amplitudes = {2 * number: scale * rectifier_amplitude(number) for number in range(1, 11)}
    amplitudes |= {number: level(db) for number, db in WORKSHOP_ODD_DB.items()}
    return edges(total) + hum(WORKSHOP_FRAMES, WORKSHOP_PERIODS, amplitudes)


def _tap(generator: np.random.Generator) -> Samples:
    """Return one blow on wood: three damped tones and a short burst."""
    seconds = np.arange(9_600) / SAMPLE_RATE_HZ
    total = np.zeros(seconds.size)
    for ratio, decay_s in ((1.0, 0.030), (2.3, 0.018), (4.1, 0.009)):
        hz = ratio * generator.uniform(380.0, 620.0)
        total += np.sin(2.0 * np.pi * hz * seconds) * np.exp(-seconds / decay_s) / ratio
    total += 0.4 * generator.standard_normal(seconds.size) * np.exp(-seconds / 0.002)
    loudest: float = np.max(np.abs(total))
    return total * (level(generator.uniform(-22.0, -12.0)) / loudest)


def _scrape(generator: np.random.Generator) -> Samples:
    """Return one stroke over a rough surface."""
    frames = int(generator.uniform(0.15, 0.5) * SAMPLE_RATE_HZ)
    rough: Samples = 0.6 + 0.4 * signal.sawtooth(
        2.0 * np.pi * generator.uniform(35.0, 55.0) * np.arange(frames) / SAMPLE_RATE_HZ
    )
    shape = np.sin(np.pi * np.arange(frames) / frames) ** 2
    return level(generator.uniform(-38.0, -30.0)) * shape * rough * band(generator, frames, 1800.0, 7000.0)


def chime() -> Samples:
    """Return the single strike."""
    generator = np.random.default_rng(587)
    frames = CHIME_FRAMES - CHIME_ONSET_FRAMES
    seconds = np.arange(frames) / SAMPLE_RATE_HZ
    total = np.zeros(frames)
    for ratio, db, t60_s in CHIME_PARTIALS:
        decay = np.exp(-np.log(1000.0) * seconds / t60_s)
        total += level(db) * decay * np.sin(2.0 * np.pi * CHIME_HZ * ratio * seconds)
    total += level(-20.0) * generator.standard_normal(frames) * np.exp(-seconds / 0.0015)
    total *= np.minimum(seconds / 0.0004, 1.0)
    total *= level(-6.5) / np.max(np.abs(total))
    return edges(np.concatenate([np.zeros(CHIME_ONSET_FRAMES), total]))


CLIPS = {"boathouse": boathouse, "workshop": workshop, "chime": chime}


def dithered(samples: Samples) -> Samples:
    """Add triangular dither of one 16-bit step each way, so that a decay ends in noise instead of distortion."""
    generator = np.random.default_rng(16)
    step = 1.0 / 32768.0
    return samples + step * (generator.uniform(-0.5, 0.5, samples.size) + generator.uniform(-0.5, 0.5, samples.size))


def write(folder: Path) -> None:
    """Write every clip as 16-bit FLAC with its description in the comment tag."""
    for name, make in CLIPS.items():
        path = folder / f"{name}.flac"
        with soundfile.SoundFile(path, "w", SAMPLE_RATE_HZ, 1, subtype="PCM_16", format="FLAC") as file:
            file.title = name
            file.comment = DESCRIPTIONS[name]
            file.write(dithered(make()))
        print(f"{path}: {path.stat().st_size // 1000} kB")


if __name__ == "__main__":
    write(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent)
