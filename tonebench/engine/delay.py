"""A delay of whole samples that goes on from block to block: the z**-delay of a section at work."""

import numpy as np
from numpy.typing import NDArray


class DelayLine:
    """The last samples of a signal, as a ring, so that a block costs the same however long the delay is.

    Parameters
    ----------
    channels, delay : int
        Both at least 1.

    """

    def __init__(self, channels: int, delay: int) -> None:
        self._ring = np.zeros((channels, delay))
        self._oldest = 0

    def process(self, signals: NDArray[np.float64]) -> NDArray[np.float64]:
        """Return the signals, shape (channels, frames), as they were `delay` samples ago."""
        frames, delay = signals.shape[1], self._ring.shape[1]
        if frames >= delay:
            joined = np.concatenate((self.history(), signals), axis=1)
            self._ring, self._oldest = joined[:, frames:].copy(), 0
            return joined[:, :frames]
        out = np.empty(signals.shape)
        head = min(frames, delay - self._oldest)
        for first, last, at in ((0, head, self._oldest), (head, frames, 0)):
            part = self._ring[:, at : at + last - first]
            out[:, first:last] = part
            part[:] = signals[:, first:last]
        self._oldest = (self._oldest + frames) % delay
        return out

    def history(self) -> NDArray[np.float64]:
        """Return what the line holds, oldest first, shape (channels, delay)."""
        return np.roll(self._ring, -self._oldest, axis=1)

    def take_over(self, other: "DelayLine") -> None:
        """Take the most recent samples of another line; where this one is longer, it starts with zeros."""
        past = other.history()
        kept = min(past.shape[1], self._ring.shape[1])
        self._ring[:] = 0.0
        self._ring[:, self._ring.shape[1] - kept :] = past[:, past.shape[1] - kept :]
        self._oldest = 0

    def is_empty(self) -> bool:
        """Tell whether nothing but zeros is on its way."""
        return not self._ring.any()
