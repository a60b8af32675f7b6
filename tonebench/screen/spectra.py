"""The spectra on the screen: the clip's long-term one, and those of what is playing. No widgets."""

from typing import TYPE_CHECKING, Final

import numpy as np

from tonebench.screen.charts.analysis import spectrum_dbfs
from tonebench.screen.charts.levels import Curve

if TYPE_CHECKING:
    from numpy.typing import NDArray

STRETCH_FRAMES: Final = 8192  # 0.17 s at 48 kHz: 5.9 Hz between the bins, which tells the hum's harmonics apart
_MOST_STRETCHES: Final = 120
_SHORTEST: Final = 64
_PER_OCTAVE: Final = 96  # more points than a wide terminal has dot columns


def long_term_curve(frames: "NDArray[np.float32]", sample_rate_hz: float) -> Curve | None:
    """Return the mean power spectrum of a clip, in as many points as a chart can use.

    Welch's method: P. D. Welch, "The use of fast Fourier transform for the estimation of power spectra", IEEE Trans.
    Audio Electroacoust. 15(2), 1967; half-overlapped stretches, spread evenly if the clip is long. None for a clip
    of under 64 frames.
    """
    count = len(frames)
    length = min(STRETCH_FRAMES, count)
    if length < _SHORTEST:
        return None
    starts = np.unique(np.linspace(0, count - length, min(_MOST_STRETCHES, 2 * count // length)).astype(int))
    power: NDArray[np.float64] | None = None
    frequency = np.empty(0)
    for start in starts:
        frequency, level = spectrum_dbfs(frames[start : start + length], sample_rate_hz)
        one = np.power(10.0, level / 10.0)
        power = one if power is None else power + one
    if power is None:
        return None
    return thinned(frequency, 10.0 * np.log10(power / len(starts)))


def thinned(frequency_hz: "NDArray[np.float64]", level_db: "NDArray[np.float64]") -> Curve:
    """Keep the highest bin of each 96th of an octave; at low frequencies, where bins are wider, every bin."""
    place = np.floor(np.log2(np.maximum(frequency_hz, 1e-3)) * _PER_OCTAVE)
    starts = np.concatenate([[0], np.flatnonzero(np.diff(place)) + 1])
    highest = np.maximum.reduceat(level_db, starts)
    groups = np.repeat(np.arange(len(starts)), np.diff(np.append(starts, len(level_db))))
    best = np.flatnonzero(level_db == highest[groups])
    _, first = np.unique(groups[best], return_index=True)
    kept = best[first]
    return Curve(frequency_hz[kept], level_db[kept])


def playing_curves(
    before: "NDArray[np.float32]", after: "NDArray[np.float32]", sample_rate_hz: float
) -> tuple[Curve | None, Curve | None]:
    """Return the spectra of the last stretch that went into the chain and came out of it."""
    return _curve(before, sample_rate_hz), _curve(after, sample_rate_hz)


def _curve(frames: "NDArray[np.float32]", sample_rate_hz: float) -> Curve | None:
    return Curve(*spectrum_dbfs(frames, sample_rate_hz)) if len(frames) >= _SHORTEST else None
