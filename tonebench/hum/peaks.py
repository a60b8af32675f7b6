"""The spectral peak nearest to a frequency: what the key ``p`` pulls a pole onto.

A windowed transform of a long part finds the candidates; the chosen one is refined by maximising the transform itself
between the bins, which no interpolation formula has to be trusted for.
"""

import itertools
import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

LONGEST_FRAMES = 1 << 19  # 11 s at 48 kHz: bins of 0.09 Hz
SHORTEST_FRAMES = 256
# The power of a noise bin is exponentially distributed: the largest of n stands 10·log10(ln n/ln 2) over the median,
# 12.6 dB for the 2^18 bins of the longest part. What stands higher is no accident of noise.
STANDS_OUT_DB = 14.0
WITHIN_DB = 70.0  # of the strongest: what lies deeper is a skirt or a trace that nobody means (judgement)
FARTHEST_OCTAVES = 1.0  # a pole that jumps farther was not meant (judgement)
_LOBE_BINS = 4  # the Blackman–Harris window's main lobe reaches four bins to each side
_AROUND_OCTAVES = 0.25
_FLOOR_SLACK_DB = 3.0  # the surroundings of a bin cover parts of cells, whose medians scatter
_ENOUGH_BINS = 4096  # for a median that scatters by 0.1 dB
_SILENCE = 1e-9  # −180 dBFS


@dataclass(frozen=True, slots=True)
class Peak:
    """A spectral peak.

    Attributes
    ----------
    frequency_hz : float
    level_dbfs : float
        A sine that just reaches full scale has 0 dBFS.
    height_db : float
        Over the median of the spectrum around it, its own lobe left out.

    """

    frequency_hz: float
    level_dbfs: float
    height_db: float


def nearest_peak(samples: NDArray[np.floating], sample_rate_hz: float, near_hz: float) -> Peak | None:
    """Return the peak nearest to a frequency, by ratio.

    Parameters
    ----------
    samples : ndarray, shape (n,) or (n, channels)
        Channels are averaged; of a long clip the last ``LONGEST_FRAMES`` samples are used.
    sample_rate_hz : float
    near_hz : float

    Returns
    -------
    Peak or None
        None where nothing within ``WITHIN_DB`` of the strongest stands out by ``STANDS_OUT_DB``, or the part is
        shorter than ``SHORTEST_FRAMES``; nor from farther away than ``FARTHEST_OCTAVES``.

    """
    mono = np.asarray(samples, dtype=np.float64)
    if mono.ndim == 2:
        mono = mono.mean(axis=1)
    mono = mono[-LONGEST_FRAMES:]
    if mono.size < SHORTEST_FRAMES or near_hz <= 0.0:
        return None
    windowed = _blackman_harris(mono.size)
    scale = 2.0 / windowed.sum()
    windowed *= mono
    level_db = 20.0 * np.log10(np.maximum(np.abs(np.fft.rfft(windowed)) * scale, _SILENCE))
    step_hz = sample_rate_hz / mono.size
    lowest_db = max(float(level_db.max()) - WITHIN_DB, 20.0 * math.log10(_SILENCE) + STANDS_OUT_DB)
    for bin_number in _candidates(level_db, near_hz / step_hz, lowest_db):
        if abs(math.log2(bin_number * step_hz / near_hz)) > FARTHEST_OCTAVES:
            return None  # they come nearest first
        if level_db[bin_number] - _around_db(level_db, bin_number) >= STANDS_OUT_DB:
            frequency_hz, amplitude = _refined(windowed, sample_rate_hz, bin_number)
            level = 20.0 * math.log10(max(amplitude * scale, _SILENCE))
            return Peak(frequency_hz, level, float(level - _around_db(level_db, bin_number)))
    return None


def _blackman_harris(size: int) -> NDArray[np.float64]:
    """Return the four-term window with side lobes at −92 dB (F. J. Harris, Proc. IEEE 66, 1978, table 1)."""
    phase = 2.0 * np.pi * np.arange(size) / size
    terms = (0.35875, -0.48829, 0.14128, -0.01168)
    return np.asarray(sum(term * np.cos(order * phase) for order, term in enumerate(terms)), dtype=np.float64)


def _candidates(level_db: NDArray[np.float64], near_bin: float, lowest_db: float) -> list[int]:
    """Return the bins that are the largest within a main lobe and may stand out, the nearest by ratio first."""
    middle = np.arange(_LOBE_BINS, level_db.size - _LOBE_BINS)
    windows = np.lib.stride_tricks.sliding_window_view(level_db, 2 * _LOBE_BINS + 1)
    tops = middle[windows.argmax(axis=1) == _LOBE_BINS]
    may_stand_out = level_db[tops] - _low_floor_db(level_db)[tops] >= STANDS_OUT_DB - _FLOOR_SLACK_DB
    tops = tops[may_stand_out & (level_db[tops] > lowest_db)]
    order = np.argsort(np.abs(np.log(tops / near_bin)), kind="stable")
    return [int(one) for one in tops[order]]


def _low_floor_db(level_db: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return for each bin a level under the median around it: the lowest of the medians of the cells around.

    A median for each of the many tops of a noise would take seconds; this leaves a handful of them.
    """
    edges = [0]
    while edges[-1] < level_db.size:
        edges.append(min(edges[-1] + _reach_bins(edges[-1]), level_db.size))
    medians = np.array([np.median(level_db[low:high]) for low, high in itertools.pairwise(edges)])
    padded = np.pad(medians, 2, mode="edge")
    return np.repeat(np.lib.stride_tricks.sliding_window_view(padded, 5).min(axis=1), np.diff(edges))


def _reach_bins(bin_number: int) -> int:
    """Return how far to each side the surroundings of a bin reach."""
    return max(int(bin_number * (2.0**_AROUND_OCTAVES - 1.0)), 8 * _LOBE_BINS)


def _around_db(level_db: NDArray[np.float64], bin_number: int) -> float:
    """Return the median level around a bin, its main lobe left out; a wide band is thinned evenly."""
    reach = _reach_bins(bin_number)
    low, high = max(bin_number - reach, 1), min(bin_number + reach + 1, level_db.size)
    around = np.concatenate([level_db[low : bin_number - _LOBE_BINS], level_db[bin_number + _LOBE_BINS + 1 : high]])
    around = around[:: around.size // _ENOUGH_BINS + 1]
    return float(np.median(around)) if around.size else float(level_db[bin_number])


def _refined(windowed: NDArray[np.float64], sample_rate_hz: float, bin_number: int) -> tuple[float, float]:
    """Maximise the magnitude of the windowed transform within a bin to each side, by golden section."""
    frames = np.arange(windowed.size)

    def magnitude(position: float) -> float:
        turned = np.exp(-2j * np.pi * position / windowed.size * frames)
        return float(abs(np.dot(windowed, turned)))

    ratio = (math.sqrt(5.0) - 1.0) / 2.0
    low, high = bin_number - 1.0, bin_number + 1.0
    left, right = high - ratio * (high - low), low + ratio * (high - low)
    at_left, at_right = magnitude(left), magnitude(right)
    while high - low > 1e-3:
        if at_left > at_right:
            high, right, at_right = right, left, at_left
            left = high - ratio * (high - low)
            at_left = magnitude(left)
        else:
            low, left, at_left = left, right, at_right
            right = low + ratio * (high - low)
            at_right = magnitude(right)
    position = 0.5 * (low + high)
    return position * sample_rate_hz / windowed.size, max(at_left, at_right)
