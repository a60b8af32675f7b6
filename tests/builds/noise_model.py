"""How much noise float32 itself makes: the white round-off model, worked on the test's own signal.

Every product and sum adds an independent error of variance ulp²/12, ulp being that of the number that was rounded
(the textbook model; Oppenheim & Schafer, from memory). Sizes come from the exact signal in doubles, frame by frame.
"""

import numpy as np
from numpy.typing import NDArray
from scipy import signal

_FRAMES = 200_000


def predicted_noise_rms(rows: NDArray[np.float64], structure: str, gain: float, samples: NDArray[np.float64]) -> float:
    """Return the rms of the round-off noise at the output of a series in float32."""
    power, heard = 0.0, samples
    for index, row in enumerate(rows):
        behind = rows[index + 1 :]
        rounded_inside, rounded_outside = _rounded(row, structure, heard)
        through = np.array([1.0, 0.0, 0.0, *row[3:]]) if structure != "df2" else row
        power += _variance(rounded_inside) * _energy(np.vstack([through, behind]))
        power += _variance(rounded_outside) * _energy(behind)
        heard = signal.sosfilt(row[None, :], heard)
    return float(np.sqrt(gain * gain * power + _variance([gain * heard])))


def _rounded(
    row: NDArray[np.float64], structure: str, x: NDArray[np.float64]
) -> tuple[list[NDArray[np.float64]], list[NDArray[np.float64]]]:
    """Return every number that is rounded: those whose error enters the recursion, and those that only add up."""
    b0, b1, b2, _, a1, a2 = row
    y = signal.sosfilt(row[None, :], x)
    x1, x2, y1, y2 = _late(x, 1), _late(x, 2), _late(y, 1), _late(y, 2)
    if structure == "tdf2":
        second = b2 * x - a2 * y
        first = b1 * x - a1 * y + _late(second, 1)
        return [b0 * x, y, b1 * x, a1 * y, b1 * x - a1 * y, first, b2 * x, a2 * y, second], []
    if structure == "df1":
        sums = [b0 * x + b1 * x1, b0 * x + b1 * x1 + b2 * x2, y + a2 * y2, y]
        return [b0 * x, b1 * x1, b2 * x2, a1 * y1, a2 * y2, *sums], []
    w = signal.lfilter([1.0], row[3:], x)
    w1, w2 = _late(w, 1), _late(w, 2)
    inside = [a1 * w1, a2 * w2, x - a1 * w1, w]
    return inside, [b0 * w, b1 * w1, b2 * w2, b0 * w + b1 * w1, y]


def _late(samples: NDArray[np.float64], frames: int) -> NDArray[np.float64]:
    return np.concatenate([np.zeros(frames), samples[:-frames]])


def _variance(rounded: list[NDArray[np.float64]]) -> float:
    """Return the summed mean variance of the roundings of these signals in binary32."""
    total = 0.0
    for values in rounded:
        ulp = np.spacing(np.abs(values).astype(np.float32)).astype(np.float64)
        total += float(np.mean(np.where(values == 0.0, 0.0, ulp) ** 2)) / 12.0
    return total


def _energy(rows: NDArray[np.float64]) -> float:
    """Return Σ h² of a series of sections, 1 for none."""
    unit = np.zeros(_FRAMES)
    unit[0] = 1.0
    return float(np.sum((signal.sosfilt(rows, unit) if len(rows) else unit) ** 2))
