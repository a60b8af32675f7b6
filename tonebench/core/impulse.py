"""Impulse and step response of a chain in the time domain, in plain numpy.

The recursion runs in blocks: inside a block it is a small triangular matrix, between blocks only the two states are
handed on. It serves charts and norms; what is *heard* runs in the engine's kernel.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.core.coefficients import Coefficients

_BLOCK_FRAMES = 64


def impulse_response(coefficients: Coefficients, frames: int) -> NDArray[np.float64]:
    """Return the first ``frames`` samples of the impulse response.

    An unstable chain grows; where doubles overflow the rest is infinite or NaN.
    """
    unit = np.zeros(frames)
    if frames:
        unit[0] = 1.0
    return run(coefficients, unit)


def step_response(coefficients: Coefficients, frames: int) -> NDArray[np.float64]:
    """Return the first ``frames`` samples of the answer to a unit step."""
    return run(coefficients, np.ones(frames))


def run(coefficients: Coefficients, samples: NDArray[np.float64]) -> NDArray[np.float64]:
    """Run samples of shape (n,) through a chain from a state of rest."""
    with np.errstate(over="ignore", invalid="ignore"):
        if coefficients.combine == "sum":
            total = coefficients.direct_gain * samples
            for row, delay in zip(coefficients.rows, coefficients.delays, strict=True):
                total = total + _section(row, delay, samples)
        else:
            total = samples
            for row, delay in zip(coefficients.rows, coefficients.delays, strict=True):
                total = _section(row, delay, total)
        return np.asarray(coefficients.gain * total, dtype=np.float64)


def _section(row: NDArray[np.float64], delay: int, samples: NDArray[np.float64]) -> NDArray[np.float64]:
    frames = samples.size
    result = _recursion(_Blocks.of(row), samples)
    if delay == 0:
        return result
    return np.concatenate([np.zeros(min(delay, frames)), result[: max(frames - delay, 0)]])


@dataclass(frozen=True, slots=True)
class _Blocks:
    """Transposed direct form II over one block: output = x·inner + state·outer, and the like for the state."""

    inner: NDArray[np.float64]  # (block, block)
    outer: NDArray[np.float64]  # (2, block)
    feed: NDArray[np.float64]  # (block, 2)
    carry: NDArray[np.float64]  # (2, 2)

    @classmethod
    def of(cls, row: NDArray[np.float64]) -> "_Blocks":
        size = _BLOCK_FRAMES
        trials = np.zeros((size + 2, size))
        trials[:size] = np.eye(size)
        states = np.zeros((size + 2, 2))
        states[size:] = np.eye(2)
        outputs = np.empty_like(trials)
        b0, b1, b2, _, a1, a2 = row
        first, second = states[:, 0].copy(), states[:, 1].copy()
        for frame in range(size):
            x = trials[:, frame]
            y = b0 * x + first
            first = b1 * x - a1 * y + second
            second = b2 * x - a2 * y
            outputs[:, frame] = y
        ends = np.column_stack([first, second])
        return cls(outputs[:size], outputs[size:], ends[:size], ends[size:])


def _recursion(blocks: _Blocks, samples: NDArray[np.float64]) -> NDArray[np.float64]:
    size = _BLOCK_FRAMES
    count = -(-samples.size // size)
    padded = np.zeros(count * size)
    padded[: samples.size] = samples
    grid = padded.reshape(count, size)
    fed = grid @ blocks.feed
    (c00, c01), (c10, c11) = blocks.carry.tolist()
    states = np.zeros((count, 2))
    first = second = 0.0
    for index, (feed_first, feed_second) in enumerate(fed.tolist()):
        states[index, 0] = first
        states[index, 1] = second
        first, second = (
            first * c00 + second * c10 + feed_first,
            first * c01 + second * c11 + feed_second,
        )
    result = grid @ blocks.inner + states @ blocks.outer
    return result.reshape(-1)[: samples.size]
