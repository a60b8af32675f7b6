"""Shared memory between the screen's side and the engine's child.

Every field has one writer and is one aligned 8-byte word, so it is never seen half written; rings are written before
their counter is moved on. There is no lock anywhere.
"""

import contextlib
import math
from enum import IntEnum
from multiprocessing import shared_memory

import numpy as np
from numpy.typing import NDArray

from tonebench.errors import EngineError

RECENT_FRAMES = 1 << 16  # 1.4 s at 48 kHz of what goes in and comes out, for spectra
LOADS = 1024


class Command(IntEnum):
    """What the screen's side writes."""

    IS_PLAYING = 0
    IS_MUTED = 1
    LEVEL_DB = 2
    HEAR = 3
    LOOP_START = 4
    LOOP_END = 5
    IS_LOOPING = 6
    CEILING_DB = 7
    REARM_COUNT = 8


class Meter(IntEnum):
    """What the child writes."""

    ALIVE_S = 0
    CALLBACK_S = 1
    BLOCKS = 2
    PHASE = 3
    IS_DEVICE = 4
    POSITION = 5
    LOOP_START = 6
    LOOP_END = 7
    GUARD = 8
    UNDERFLOWS = 9
    PEAK_DB = 10
    LATENCY_MS = 11
    RECENT_COUNT = 12
    CAPTURE_COUNT = 13
    CLIP_NUMBER = 14
    CHAIN_NUMBER = 15
    GUARD_REASON = 16


PHASES = ("starting", "stopped", "playing", "faulted")
GUARD_STATES = ("idle", "limiting", "tripped")
GUARD_REASONS = ("", "the signal ran away, over +30 dBFS", "the signal is no longer a number")
HEARABLE = ("input", "output", "change")


class SharedBlock:
    """All shared memory of one engine.

    Parameters
    ----------
    capture_frames : int
        Length of the capture ring; 0 for none.
    name : str or None
        Attach to this block; None makes a new one.

    """

    def __init__(self, capture_frames: int, name: str | None = None) -> None:
        self.capture_frames = capture_frames
        words = len(Command) + len(Meter) + LOADS
        size = 8 * words + 4 * RECENT_FRAMES * 4 + 4 * capture_frames * 2
        self._memory = shared_memory.SharedMemory(name=name, create=name is None, size=size if name is None else 0)
        self._is_owner = name is None
        self.name = self._memory.name
        buffer = _view(self._memory)
        self.commands: NDArray[np.float64] = np.frombuffer(buffer, np.float64, len(Command))
        self.meters: NDArray[np.float64] = np.frombuffer(buffer, np.float64, len(Meter), 8 * len(Command))
        self.loads: NDArray[np.float64] = np.frombuffer(buffer, np.float64, LOADS, 8 * (len(Command) + len(Meter)))
        self.recent: NDArray[np.float32] = np.frombuffer(buffer, np.float32, RECENT_FRAMES * 4, 8 * words).reshape(
            -1, 4
        )
        start = 8 * words + 16 * RECENT_FRAMES
        self.capture: NDArray[np.float32] = np.frombuffer(buffer, np.float32, capture_frames * 2, start).reshape(-1, 2)
        if self._is_owner:
            self.commands[Command.LEVEL_DB] = -20.0
            self.commands[Command.HEAR] = HEARABLE.index("output")
            self.commands[Command.IS_LOOPING] = 1.0
            self.commands[Command.CEILING_DB] = -6.0
            self.meters[Meter.PEAK_DB] = -math.inf
            self.loads[:] = math.nan

    def close(self) -> None:
        """Let go of the memory, and remove it if this side made it. The arrays must not be used after this."""
        empty = np.zeros(0)
        self.commands = self.meters = self.loads = empty
        self.recent = self.capture = empty.astype(np.float32).reshape(0, 4)
        _let_go(self._memory, is_owner=self._is_owner)


def _view(memory: shared_memory.SharedMemory) -> memoryview:
    view = memory.buf
    if view is None:  # only after close()
        raise EngineError("shared memory was closed too early")
    return view


def _let_go(memory: shared_memory.SharedMemory, *, is_owner: bool) -> None:
    """Close this side's view, and remove the name if this side made it.

    A callback under way may still hold an array on it; the view then goes when the array does.
    """
    with contextlib.suppress(BufferError):
        memory.close()
    if is_owner:
        with contextlib.suppress(FileNotFoundError):
            memory.unlink()


def write_ring(ring: NDArray[np.float32], count: int, frames: NDArray[np.float32]) -> int:
    """Write frames at the counter's place, going round; return the counter moved on."""
    size = ring.shape[0]
    kept = frames[-size:]
    start = (count + frames.shape[0] - kept.shape[0]) % size
    head = min(kept.shape[0], size - start)
    ring[start : start + head] = kept[:head]
    ring[: kept.shape[0] - head] = kept[head:]
    return count + int(frames.shape[0])


def read_ring(ring: NDArray[np.float32], first: int, last: int) -> NDArray[np.float32]:
    """Return a copy of the frames with counters ``first`` to ``last``."""
    size = ring.shape[0]
    start, count = first % size, last - first
    head = min(count, size - start)
    return np.concatenate([ring[start : start + head], ring[: count - head]])


class SharedClip:
    """A clip in shared memory: written once by the screen's side, read by the child."""

    def __init__(self, shape: tuple[int, int], name: str | None = None) -> None:
        self.shape = shape
        size = max(4 * shape[0] * shape[1], 1)
        self._memory = shared_memory.SharedMemory(name=name, create=name is None, size=size if name is None else 0)
        self._is_owner = name is None
        self.name = self._memory.name
        flat = np.frombuffer(_view(self._memory), np.float32, shape[0] * shape[1])
        self.frames: NDArray[np.float32] = flat.reshape(shape)

    def close(self) -> None:
        """Let go of the memory, and remove it if this side made it."""
        self.frames = np.zeros((0, 1), dtype=np.float32)
        _let_go(self._memory, is_owner=self._is_owner)
