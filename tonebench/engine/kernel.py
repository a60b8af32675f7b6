"""The one kernel: whatever runs a chain in double precision, for playing or for a file, runs it here.

A chain without delays in series is one call of `scipy.signal.sosfilt`; a delay ends a call. In a sum every section is
one call of `scipy.signal.lfilter`, which costs a quarter of `sosfilt` for a single section (8 against 32 µs per block
of 256 stereo frames), and the outputs are added in the order of the rows. Both work sample by sample from a state that
is kept here, so the result does not depend on how the signal was cut into blocks, bit for bit.

This is the only module of the engine that imports scipy.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import signal

from tonebench.core.coefficients import Coefficients
from tonebench.engine.delay import DelayLine
from tonebench.errors import InvalidValueError, must_be

# After silence at the input the state decays into subnormal numbers, where the arithmetic was measured 12 times slower.
# So, at every multiple of this many frames from frame 0 that ends a quantum of zeros, what is left under the floor is
# dropped: 1e-200 is 3000 dB under the smallest float32. Bound to the frame number and the input alone, not to blocks.
QUANTUM_FRAMES = 256
_STATE_FLOOR = 1e-200


@dataclass(slots=True)
class KernelState:
    """What a chain remembers from one block to the next.

    Attributes
    ----------
    sections : ndarray, shape (n, channels, 2)
        Transposed direct form II, per row.
    lines : dict of int to DelayLine
        Per row that has a delay.
    phase_frames : int
        Frames since the last multiple of `QUANTUM_FRAMES`.
    is_quantum_silent : bool
        Whether the input since then was nothing but zeros.

    """

    sections: NDArray[np.float64]
    lines: dict[int, DelayLine]
    phase_frames: int = 0
    is_quantum_silent: bool = True

    def is_at_rest(self) -> bool:
        """Tell whether zeros at the input would give zeros at the output from now on."""
        return not self.sections.any() and all(line.is_empty() for line in self.lines.values())


class Kernel:
    """A chain at work: coefficients and the state of every section.

    Parameters
    ----------
    coefficients : Coefficients
    channels : int
        Number of channels; each runs through the same chain.

    Raises
    ------
    InvalidValueError
        If `channels` is under 1 or the way to combine is unknown.

    """

    def __init__(self, coefficients: Coefficients, channels: int) -> None:
        if channels < 1:
            raise InvalidValueError(must_be("channels", "at least 1", channels))
        if coefficients.combine not in ("series", "sum"):
            raise InvalidValueError(must_be("combine", "series or sum", coefficients.combine))
        self.coefficients = coefficients
        self.channels = channels
        self._rows = np.ascontiguousarray(coefficients.rows, dtype=np.float64).reshape(-1, 6)
        self._numerators = [row[:3].copy() for row in self._rows]
        self._denominators = [row[3:].copy() for row in self._rows]
        self._runs = _runs_between_delays(coefficients.delays)
        self.state = KernelState(
            sections=np.zeros((len(self._rows), channels, 2)),
            lines={index: DelayLine(channels, delay) for index, delay in enumerate(coefficients.delays) if delay},
        )

    def process_block(self, block: NDArray[np.float64]) -> NDArray[np.float64]:
        """Run the next block; the state goes on where the last block ended.

        Parameters
        ----------
        block : ndarray, shape (frames, channels)
            Left as it is.

        Returns
        -------
        ndarray, shape (frames, channels)
            A new array. An unstable chain gives infinities and NaN, without a warning.

        """
        frames = block.shape[0]
        out = np.empty((frames, self.channels))
        start = 0
        last_rest = -1
        with np.errstate(all="ignore"):
            for stop in self._silent_edges(block):
                if stop == last_rest + QUANTUM_FRAMES:
                    last_rest = stop  # zeros into a chain at rest: nothing to drop, no need to cut here
                    continue
                out[start:stop] = self._run(block[start:stop].T).T
                start = stop
                if self._drop_remains():
                    last_rest = stop
            if start < frames:
                out[start:] = self._run(block[start:].T).T
        return out

    def copy_state_from(self, other: "Kernel") -> None:
        """Take over the state of every section that `other` has, too, found by identity.

        A section that only this kernel has keeps its own state. Where a section's delay has changed, the most recent
        samples of its line are kept.

        Parameters
        ----------
        other : Kernel
            With the same number of channels.

        """
        there = {identity: index for index, identity in enumerate(other.coefficients.identities)}
        pairs = [
            (index, there[identity]) for index, identity in enumerate(self.coefficients.identities) if identity in there
        ]
        if pairs:
            mine, theirs = (list(column) for column in zip(*pairs, strict=True))
            self.state.sections[mine] = other.state.sections[theirs]
        for index, their_index in pairs:
            if index in self.state.lines and their_index in other.state.lines:
                self.state.lines[index].take_over(other.state.lines[their_index])
        self.state.phase_frames = other.state.phase_frames
        self.state.is_quantum_silent = other.state.is_quantum_silent

    def _run(self, signals: NDArray[np.float64]) -> NDArray[np.float64]:
        if self.coefficients.combine == "sum":
            return self._run_sum(signals)
        sections = self.state.sections
        for first, last in self._runs:
            signals, sections[first:last] = signal.sosfilt(self._rows[first:last], signals, zi=sections[first:last])
            signals = self._delayed(last - 1, signals)
        return self.coefficients.gain * signals

    def _run_sum(self, signals: NDArray[np.float64]) -> NDArray[np.float64]:
        sections = self.state.sections
        total = self.coefficients.direct_gain * signals if self.coefficients.direct_gain else np.zeros(signals.shape)
        for index, (numerator, denominator) in enumerate(zip(self._numerators, self._denominators, strict=True)):
            output, sections[index] = signal.lfilter(numerator, denominator, signals, zi=sections[index])
            total += self._delayed(index, output)
        return self.coefficients.gain * total

    def _delayed(self, index: int, signals: NDArray[np.float64]) -> NDArray[np.float64]:
        line = self.state.lines.get(index)
        return signals if line is None else line.process(signals)

    def _silent_edges(self, block: NDArray[np.float64]) -> Sequence[int]:
        """Return the frames of the block at which a quantum ends whose input was nothing but zeros."""
        state = self.state
        frames = block.shape[0]
        first = QUANTUM_FRAMES - state.phase_frames
        state.phase_frames = (state.phase_frames + frames) % QUANTUM_FRAMES
        if frames < first:
            state.is_quantum_silent = state.is_quantum_silent and not block.any()
            return ()
        edges = np.arange(first, frames + 1, QUANTUM_FRAMES)
        is_silent = np.empty(len(edges), dtype=np.bool_)
        is_silent[0] = state.is_quantum_silent and not block[:first].any()
        whole = block[first : edges[-1]].reshape(len(edges) - 1, QUANTUM_FRAMES * self.channels)
        is_silent[1:] = ~whole.any(axis=1)
        state.is_quantum_silent = not block[edges[-1] :].any()
        return [int(edge) for edge in edges[is_silent]]

    def _drop_remains(self) -> bool:
        """Set what is under the floor to zero, keeping its sign, and tell whether the whole chain is at rest."""
        self.state.sections *= np.abs(self.state.sections) >= _STATE_FLOOR
        return self.state.is_at_rest()


def _runs_between_delays(delays: Sequence[int]) -> list[tuple[int, int]]:
    """Return ranges of rows that one call can run: a row with a delay ends its range."""
    ends = [index + 1 for index, delay in enumerate(delays) if delay]
    if not ends or ends[-1] < len(delays):
        ends.append(len(delays))
    return list(zip([0, *ends[:-1]], ends, strict=True)) if delays else []
