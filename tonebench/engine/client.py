"""The screen's side of the engine: starts the child, sends commands, reads meters. Never blocks.

Loads neither scipy nor sounddevice. If the child dies or hangs it is killed by its process number, and another one
is started with the same clip, chain and settings.
"""

import contextlib
import math
import multiprocessing
import signal
import threading
import time
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from tonebench.core.coefficients import Coefficients
from tonebench.engine.messages import ChainMessage, ClipMessage, Options
from tonebench.engine.shared import (
    GUARD_REASONS,
    GUARD_STATES,
    HEARABLE,
    PHASES,
    RECENT_FRAMES,
    Command,
    Meter,
    SharedBlock,
    SharedClip,
    read_ring,
)
from tonebench.errors import EngineError, InvalidValueError, must_be

if TYPE_CHECKING:
    from multiprocessing.connection import Connection
    from multiprocessing.process import BaseProcess

SMALLEST_BLOCK_FRAMES = 16
LARGEST_BLOCK_FRAMES = 8192
LOWEST_LEVEL_DB = -120.0
LOWEST_CEILING_DB = -60.0
_START_S = 20.0  # loading scipy on a busy machine takes seconds
_HANG_S = 4.0
_CLOSE_S = 2.0


@dataclass(frozen=True, slots=True)
class EngineStatus:
    """What the engine is doing; cheap to ask for at 30 Hz.

    Attributes
    ----------
    phase : str
        ``starting``, ``stopped``, ``playing`` or ``faulted``.
    is_sounding_device : bool
        False on the silent clock.
    device_name, message : str
        ``message`` is one plain line, empty if there is nothing to say.
    position_frame, loop_start_frame, loop_end_frame : int
        In the clip.
    is_muted : bool
    hear : str
    level_db, ceiling_db : float
    guard : str
        ``idle``, ``limiting`` or ``tripped``.
    guard_reason : str
    underflows : int
    callback_load : float
        Recent median of the callback's time over the block's.
    output_peak_db : float
        Recent peak of what left the guard, −inf for silence.
    sample_rate_hz, latency_ms : float

    """

    phase: str
    is_sounding_device: bool
    device_name: str
    message: str
    position_frame: int
    loop_start_frame: int
    loop_end_frame: int
    is_muted: bool
    hear: str
    level_db: float
    ceiling_db: float
    guard: str
    guard_reason: str
    underflows: int
    callback_load: float
    output_peak_db: float
    sample_rate_hz: float
    latency_ms: float


class EngineClient:
    """One engine.

    Parameters
    ----------
    device : str, int or None
        None is the default device; a name, a number, or ``"silent"``.
    block_frames : int
        Frames per callback.
    capture_frames : int
        Length of the ring for ``drain_capture``; 0 for none.

    """

    def __init__(self, *, device: str | int | None = None, block_frames: int = 256, capture_frames: int = 0) -> None:
        if not SMALLEST_BLOCK_FRAMES <= block_frames <= LARGEST_BLOCK_FRAMES:
            rule = f"between {SMALLEST_BLOCK_FRAMES} and {LARGEST_BLOCK_FRAMES}"
            raise InvalidValueError(must_be("block_frames", rule, block_frames))
        with _shielded():  # the first shared memory starts Python's resource tracker, a process that must outlive us
            self._shared = SharedBlock(capture_frames)
        self._options = Options(self._shared.name, capture_frames, device, block_frames)
        self._clip: SharedClip | None = None
        self._clip_number = 0
        self._rate_hz = 0.0
        self._coefficients: Coefficients | None = None
        self._chain_number = 0
        self._is_chain_waiting = False
        self._last: EngineStatus | None = None
        self._device_name, self._message = "", ""
        self._captured = 0
        self._lost = 0
        self._is_closed = False
        self._start()

    def _start(self) -> None:
        from tonebench.engine.process import run_child  # noqa: PLC0415  (loads nothing heavy itself)

        context = multiprocessing.get_context("spawn")
        self._connection: Connection
        self._connection, theirs = context.Pipe()
        self._process: BaseProcess = context.Process(
            target=run_child, args=(theirs, self._options), name="tonebench engine", daemon=True
        )
        self._shared.meters[Meter.ALIVE_S] = math.nan
        self._shared.meters[Meter.PHASE] = PHASES.index("starting")
        self._shared.meters[Meter.CHAIN_NUMBER] = self._chain_number
        with _shielded():
            self._process.start()
        theirs.close()
        self._started_s = time.monotonic()
        self._send_clip()

    def load_clip(self, frames: NDArray[np.float32], sample_rate_hz: float) -> None:
        """Give the engine a clip, shape (n, 1) or (n, 2); it starts at the beginning.

        Raises
        ------
        InvalidValueError
            If it is empty or has another shape.

        """
        if frames.ndim != 2 or frames.shape[0] < 1 or frames.shape[1] not in (1, 2):
            raise InvalidValueError(must_be("a clip", "of shape (n, 1) or (n, 2), n at least 1", frames.shape))
        old = self._clip
        self._clip = SharedClip((frames.shape[0], frames.shape[1]))
        self._clip.frames[:] = frames
        self._clip_number += 1
        self._rate_hz = float(sample_rate_hz)
        self.set_loop(0, frames.shape[0])
        self._send_clip()
        if old is not None:
            old.close()  # the child still has it open; it goes when both have let go

    def _send_clip(self) -> None:
        if self._clip is None:
            return
        chain = self._coefficients or _straight_through(self._rate_hz)
        self._send(ClipMessage(self._clip.name, self._clip.shape, self._rate_hz, self._clip_number, chain))

    def _send(self, message: object) -> None:
        with contextlib.suppress(OSError):  # a child that just died is started again by status()
            self._connection.send(message)

    def set_coefficients(self, coefficients: Coefficients) -> None:
        """Change the chain; heard in the next block, faded, states carried by identity."""
        self._coefficients = coefficients
        self._is_chain_waiting = self._clip is not None
        self._send_chain()

    def _send_chain(self) -> None:
        """Send the latest chain if the child has taken the one before: a child that hangs cannot make this side wait.

        What has to wait goes with the next call of ``status``, ``recent`` or ``drain_capture``.
        """
        is_taken = int(self._shared.meters[Meter.CHAIN_NUMBER]) == self._chain_number
        if self._is_chain_waiting and is_taken and self._coefficients is not None:
            self._is_chain_waiting = False
            self._chain_number += 1
            self._send(ChainMessage(self._chain_number, self._coefficients))

    def play(self) -> None:
        """Start, fading in.

        Raises
        ------
        EngineError
            If no clip is loaded.

        """
        if self._clip is None:
            raise EngineError("there is nothing to play; load a clip first")
        self._command(Command.IS_PLAYING, 1.0)

    def stop(self) -> None:
        """Stop, fading out; the position is kept."""
        self._command(Command.IS_PLAYING, 0.0)

    def rearm(self) -> None:
        """Arm the guard again after it tripped; sound fades in."""
        self._command(Command.REARM_COUNT, self._shared.commands[Command.REARM_COUNT] + 1.0)

    def set_muted(self, is_muted: bool) -> None:
        """Mute within 5 ms, or fade in again."""
        self._command(Command.IS_MUTED, float(is_muted))

    def set_level_db(self, level_db: float) -> None:
        """Set the level, at most 0 dB."""
        if not LOWEST_LEVEL_DB <= level_db <= 0.0:
            raise InvalidValueError(must_be("level", f"between {LOWEST_LEVEL_DB:g} and 0 dB", level_db))
        self._command(Command.LEVEL_DB, level_db)

    def set_ceiling_db(self, ceiling_db: float) -> None:
        """Set the guard's ceiling."""
        if not LOWEST_CEILING_DB <= ceiling_db <= 0.0:
            raise InvalidValueError(must_be("ceiling", f"between {LOWEST_CEILING_DB:g} and 0 dB", ceiling_db))
        self._command(Command.CEILING_DB, ceiling_db)

    def set_hear(self, what: str) -> None:
        """Choose what is heard: ``input``, ``output`` or ``change``."""
        if what not in HEARABLE:
            raise InvalidValueError(must_be("hear", f"one of {', '.join(HEARABLE)}", what))
        self._command(Command.HEAR, float(HEARABLE.index(what)))

    def set_loop(self, start_frame: int, end_frame: int) -> None:
        """Set the loop's ends, the end exclusive."""
        length = 0 if self._clip is None else self._clip.shape[0]
        if not 0 <= start_frame < end_frame <= length:
            raise InvalidValueError(
                must_be("loop", f"two frames in order from 0 to {length}", (start_frame, end_frame))
            )
        self._command(Command.LOOP_START, float(start_frame))
        self._command(Command.LOOP_END, float(end_frame))

    def set_is_looping(self, is_looping: bool) -> None:
        """Play round and round, or once."""
        self._command(Command.IS_LOOPING, float(is_looping))

    def _command(self, command: Command, value: float) -> None:
        if self._is_closed:
            raise EngineError("the engine is closed")
        self._shared.commands[command] = value

    def status(self) -> EngineStatus:
        """Return what the engine is doing, and start a new child if the old one is dead or hangs.

        After ``close`` it is what it was last.
        """
        if not self._is_closed or self._last is None:
            self._last = self._read_status()
        return self._last

    def _read_status(self) -> EngineStatus:
        self._listen()
        self._revive()
        self._send_chain()
        meters, commands = self._shared.meters.copy(), self._shared.commands.copy()
        loads = self._shared.loads
        guard = GUARD_STATES[int(meters[Meter.GUARD])]
        is_ready = int(meters[Meter.CLIP_NUMBER]) == self._clip_number and self._clip_number > 0
        return EngineStatus(
            phase=PHASES[int(meters[Meter.PHASE])] if is_ready else "starting",
            is_sounding_device=bool(meters[Meter.IS_DEVICE]),
            device_name=self._device_name,
            message=self._message,
            position_frame=int(meters[Meter.POSITION]),
            loop_start_frame=int(commands[Command.LOOP_START]),
            loop_end_frame=int(commands[Command.LOOP_END]),
            is_muted=bool(commands[Command.IS_MUTED]),
            hear=HEARABLE[int(commands[Command.HEAR])],
            level_db=float(commands[Command.LEVEL_DB]),
            ceiling_db=float(commands[Command.CEILING_DB]),
            guard=guard,
            guard_reason=GUARD_REASONS[int(meters[Meter.GUARD_REASON])],
            underflows=int(meters[Meter.UNDERFLOWS]),
            callback_load=float(np.nanmedian(loads)) if np.isfinite(loads).any() else 0.0,
            output_peak_db=float(meters[Meter.PEAK_DB]),
            sample_rate_hz=self._rate_hz,
            latency_ms=float(meters[Meter.LATENCY_MS]),
        )

    def loads(self) -> NDArray[np.float64]:
        """Return the last callback times over the block's time, for benchmarks."""
        loads = self._shared.loads.copy()
        return loads[np.isfinite(loads)]

    def _listen(self) -> None:
        with contextlib.suppress(EOFError, OSError):
            while self._connection.poll(0):
                self._device_name, self._message = self._connection.recv()

    def _revive(self) -> None:
        now = time.monotonic()
        if self._is_closed:
            return
        alive_s = float(self._shared.meters[Meter.ALIVE_S])
        is_starting = math.isnan(alive_s)
        is_late = now - self._started_s > _START_S if is_starting else now - alive_s > _HANG_S
        if self._process.is_alive() and not is_late:
            return
        if now - self._started_s < 1.0:
            return  # not more than one try a second
        self._kill()
        self._message = "the engine had to be started again; the work goes on"
        self._start()

    def _kill(self) -> None:
        self._connection.close()
        if self._process.is_alive():
            self._process.kill()
        self._process.join(_CLOSE_S)

    def recent(self, frames: int) -> tuple[NDArray[np.float32], NDArray[np.float32]]:
        """Return the last frames before and after the chain, each of shape (k, 2), k at most ``frames``."""
        if self._is_closed:
            return np.zeros((0, 2), dtype=np.float32), np.zeros((0, 2), dtype=np.float32)
        self._send_chain()
        count = int(self._shared.meters[Meter.RECENT_COUNT])
        # A quarter of the ring is left aside: the child goes on writing while this side copies.
        wanted = min(frames, count, RECENT_FRAMES * 3 // 4)
        both = read_ring(self._shared.recent, count - wanted, count)
        return both[:, :2], both[:, 2:]

    def drain_capture(self) -> NDArray[np.float32]:
        """Return what left the guard since the last call, shape (k, 2), from the first block that played on."""
        size = self._options.capture_frames
        if self._is_closed:
            return np.zeros((0, 2), dtype=np.float32)
        self._send_chain()
        count = int(self._shared.meters[Meter.CAPTURE_COUNT])
        if size == 0 or count == self._captured:
            return np.zeros((0, 2), dtype=np.float32)
        first = max(self._captured, count - size)
        if first > self._captured:
            self._lost += first - self._captured
            self._message = f"{self._lost} captured frames were lost: this machine is too busy"
        self._captured = count
        return read_ring(self._shared.capture, first, count)

    def close(self) -> None:
        """Stop, end the child, and remove the shared memory. May be called twice."""
        if self._is_closed:
            return
        self._last = self._read_status()
        self._shared.commands[Command.IS_PLAYING] = 0.0
        self._is_closed = True
        self._send("close")
        self._process.join(_CLOSE_S)
        self._kill()
        self._process.close()
        if self._clip is not None:
            self._clip.close()
        self._shared.close()


@contextlib.contextmanager
def _shielded() -> Iterator[None]:
    """Let processes be started that ignore Ctrl-C and a closed terminal from their first instruction.

    Both signals go to the whole group; this process answers them and ends the others. Only the main thread may do it.
    """
    if threading.current_thread() is not threading.main_thread():
        yield
        return
    numbers = [getattr(signal, name) for name in ("SIGINT", "SIGHUP") if hasattr(signal, name)]
    before = [(number, signal.signal(number, signal.SIG_IGN)) for number in numbers]
    try:
        yield
    finally:
        for number, handler in before:
            signal.signal(number, handler)


def _straight_through(sample_rate_hz: float) -> Coefficients:
    """Return an empty chain."""
    return Coefficients(sample_rate_hz, "series", np.zeros((0, 6)), (), (), 1.0, 0.0)
