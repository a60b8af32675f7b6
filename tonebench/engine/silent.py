"""The silent clock: calls the same callback at the same pace where there is no device.

Meters, loops and captures go on as with sound; only the last step, the device, is missing.
"""

import threading
import time
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Fill = Callable[[NDArray[np.float32]], None]


class SilentClock:
    """Call ``fill`` with a buffer of one block whenever a block's time has passed.

    Parameters
    ----------
    fill : callable
        Fills an array of shape (block_frames, 2).
    sample_rate_hz : float
    block_frames : int

    """

    latency = 0.0

    def __init__(self, fill: Fill, sample_rate_hz: float, block_frames: int) -> None:
        self._fill = fill
        self._block_s = block_frames / sample_rate_hz
        self._buffer = np.zeros((block_frames, 2), dtype=np.float32)
        self._halt = threading.Event()
        self._thread = threading.Thread(target=self._run, name="silent clock", daemon=True)

    def start(self) -> None:
        """Begin."""
        self._thread.start()

    @property
    def active(self) -> bool:
        """Whether it runs."""
        return self._thread.is_alive()

    def close(self) -> None:
        """End; returns when the last block is done."""
        self._halt.set()
        if self._thread.is_alive():
            self._thread.join(1.0)

    def _run(self) -> None:
        due = time.monotonic()
        while not self._halt.is_set():
            self._fill(self._buffer)
            due += self._block_s
            late = time.monotonic() - due
            if late > 1.0:
                due += late  # the machine slept: go on from here instead of racing to catch up
            if late < 0.0:
                self._halt.wait(-late)
