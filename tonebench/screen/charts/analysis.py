"""The spectrum of what is heard: numpy alone, no drawing."""

from functools import lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np

from tonebench.errors import InvalidValueError, must_be

if TYPE_CHECKING:
    from numpy.typing import NDArray

# F. J. Harris, "On the use of windows for harmonic analysis with the discrete Fourier transform", Proc. IEEE 66(1),
# 1978, table 1 and eq. 33: minimum 4-term Blackman-Harris, side lobes at -92 dB.
_TERMS: Final = (0.35875, -0.48829, 0.14128, -0.01168)
FLOOR_DBFS: Final = -200.0


@lru_cache(maxsize=8)
def _window(frames: int) -> "NDArray[np.float64]":
    phase = 2 * np.pi * np.arange(frames) / frames
    window: NDArray[np.float64] = sum(
        (term * np.cos(order * phase) for order, term in enumerate(_TERMS)), np.zeros(frames)
    )
    window /= window.sum() / 2
    window.flags.writeable = False
    return window


def spectrum_dbfs(
    samples: "NDArray[np.floating]", sample_rate_hz: float
) -> "tuple[NDArray[np.float64], NDArray[np.float64]]":
    """Return the amplitude spectrum of a stretch of sound; a full-scale sine reads 0 dBFS.

    Parameters
    ----------
    samples : ndarray of float, shape (frames,) or (frames, channels)
        One stretch, 64 frames or more; the loudest channel counts at each frequency. Non-finite samples count as 0.
    sample_rate_hz : float
        Sample rate.

    Returns
    -------
    frequency_hz, level_dbfs : ndarray of float64
        Of the bins from 0 to Nyquist, half a bin apart (padded to twice the length); not under -200 dBFS. Between two
        bins a sine reads at most 0.21 dB low.

    Raises
    ------
    InvalidValueError
        The stretch is too short.
    """
    stretch = np.asarray(samples, dtype=np.float64)
    if stretch.ndim not in (1, 2) or len(stretch) < 64:
        raise InvalidValueError(must_be("samples", "64 frames or more", stretch.shape))
    stretch = stretch.reshape(len(stretch), -1)
    if not np.isfinite(stretch).all():
        stretch = np.nan_to_num(stretch, nan=0.0, posinf=0.0, neginf=0.0)
    frames = len(stretch)
    bins = np.fft.rfft(stretch.T * _window(frames), n=2 * frames)
    power = np.square(bins.real) + np.square(bins.imag)
    level = 10 * np.log10(np.maximum(power.max(axis=0), 10 ** (FLOOR_DBFS / 10)))
    frequency = np.fft.rfftfreq(2 * frames, 1 / sample_rate_hz)
    return np.asarray(frequency, dtype=np.float64), level


def column_maxima(
    frequency_hz: "NDArray[np.float64]", level_db: "NDArray[np.float64]", edges_hz: "NDArray[np.float64]"
) -> "NDArray[np.float64]":
    """Return the level of each column of a logarithmic axis: the largest of its bins.

    Where a column holds no bin, the level is interpolated over log frequency. Columns beyond the bins are NaN.

    Parameters
    ----------
    frequency_hz, level_db : ndarray of float64, shape (n,)
        Bins, ascending.
    edges_hz : ndarray of float64, shape (columns + 1,)
        Limits of the columns, ascending, above 0.
    """
    is_positive = frequency_hz > 0
    place, level = np.log(frequency_hz[is_positive]), level_db[is_positive]
    edges = np.log(edges_hz)
    middles = (edges[:-1] + edges[1:]) / 2
    columns = np.interp(middles, place, level, left=np.nan, right=np.nan)
    edges[-1] += 1e-9  # Nyquist itself belongs to the last column, whatever way it was rounded
    first = np.searchsorted(place, edges)
    is_filled = first[1:] > first[:-1]
    if is_filled.any():
        # reduceat runs to the next start; empty columns in between hold no bins, so dropping their starts is exact.
        starts = first[:-1][is_filled]
        last = int(first[1:][is_filled][-1])
        columns[is_filled] = np.maximum.reduceat(level[:last], starts)
    return columns
