"""Outside models of the exported arithmetic: plain numpy loops, one rounding per operation, and error bounds."""

from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import signal

from tonebench.core.coefficients import Coefficients

Real = type[np.float32] | type[np.float64]


def float_model(
    coefficients: Coefficients, structure: str, samples: NDArray[np.float64], real: Real
) -> NDArray[np.float64]:
    """Run a chain in one float type operation by operation, as the export's comment describes it; a naive loop."""
    x: NDArray[Any] = samples.astype(real)
    gain = real(coefficients.gain)
    rows = [[real(row[i]) for i in (0, 1, 2, 4, 5)] for row in coefficients.rows]
    if coefficients.combine == "sum":
        direct = real(coefficients.direct_gain)
        total: NDArray[Any] = x * direct if coefficients.direct_gain else np.zeros(x.size, real)
        for row, delay in zip(rows, coefficients.delays, strict=True):
            total = total + _late(_section(row, structure, x), delay)
    else:
        total = x
        for row, delay in zip(rows, coefficients.delays, strict=True):
            total = _late(_section(row, structure, total), delay)
    return (total if gain == 1.0 else total * gain).astype(np.float64)


def _late(samples: NDArray[Any], delay: int) -> NDArray[Any]:
    return np.concatenate([np.zeros(delay, samples.dtype), samples])[: samples.size]


def _section(row: list[Any], structure: str, samples: NDArray[Any]) -> NDArray[Any]:
    b0, b1, b2, a1, a2 = row
    zero = samples.dtype.type(0.0)
    made = np.empty_like(samples)
    p = q = r = s = zero
    for index, x in enumerate(samples):
        if structure == "tdf2":
            y = b0 * x + p
            p = b1 * x - a1 * y + q
            q = b2 * x - a2 * y
        elif structure == "df2":
            w = x - a1 * p - a2 * q
            y = b0 * w + b1 * p + b2 * q
            p, q = w, p
        else:
            y = b0 * x + b1 * p + b2 * q - a1 * r - a2 * s
            p, q, r, s = x, p, y, r
        made[index] = y
    return made


def reference(
    coefficients: Coefficients, rows: NDArray[np.float64], samples: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Run rows of coefficients in double precision with scipy.signal.sosfilt."""
    if coefficients.combine == "sum":
        total = coefficients.direct_gain * samples
        for row, delay in zip(rows, coefficients.delays, strict=True):
            total = total + np.concatenate([np.zeros(delay), signal.sosfilt(row[None, :], samples)])[: samples.size]
        return np.asarray(coefficients.gain * total)
    total = samples
    for row, delay in zip(rows, coefficients.delays, strict=True):
        total = np.concatenate([np.zeros(delay), signal.sosfilt(row[None, :], total)])[: samples.size]
    return np.asarray(coefficients.gain * total)
