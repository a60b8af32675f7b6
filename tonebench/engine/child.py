"""The engine's process: owns the device, runs the callback, and outlives nothing.

It is spawned, never forked. File descriptor 2 goes nowhere, since ALSA and PortAudio print to it and would tear the
screen. It ends when its parent does. What it has to say goes through the pipe, one plain line at a time.
"""

import contextlib
import gc
import os
import sys
import time
from multiprocessing.connection import Connection
from typing import TYPE_CHECKING

import numpy as np

from tonebench.engine.callback import Callback
from tonebench.engine.kernel import Kernel
from tonebench.engine.messages import ChainMessage, ClipMessage, Options
from tonebench.engine.output import Output, Wanted, open_output, silence_descriptor_two
from tonebench.engine.player import Player
from tonebench.engine.shared import PHASES, Command, Meter, SharedBlock, SharedClip

if TYPE_CHECKING:
    from tonebench.core.coefficients import Coefficients

_TICK_S = 0.02
_STALE_S = 0.5  # a device whose callback has not come for this long is gone, whatever it says of itself
_RETRY_S = 1.0
_FADE_OUT_S = 0.2
_LINGER_S = 2.0  # a stopped device is kept this long, so that play after stop starts at once


def run(connection: Connection, options: Options) -> None:
    """Run until told to stop or the parent is gone."""
    silence_descriptor_two()
    _raise_priority()
    engine = _Engine(connection, options)
    try:
        engine.serve()
    except (EOFError, BrokenPipeError, ConnectionResetError, KeyboardInterrupt):
        pass  # the parent is gone, or Ctrl-C reached the whole group: nothing to tell, only to close
    finally:
        engine.close()


def _raise_priority() -> None:
    """Ask for real-time scheduling; most systems refuse, and the engine works without."""
    sys.setswitchinterval(0.001)
    with contextlib.suppress(AttributeError, OSError, PermissionError):
        os.sched_setscheduler(0, os.SCHED_FIFO, os.sched_param(20))


class _Engine:
    """The thread beside the callback: takes messages, prepares kernels, watches the device."""

    def __init__(self, connection: Connection, options: Options) -> None:
        self._connection = connection
        self._options = options
        self._shared = SharedBlock(options.capture_frames, options.shared_name)
        self._clip: SharedClip | None = None
        self._callback: Callback | None = None
        self._output: Output | None = None
        self._rate_hz = 0.0
        self._retry_at = 0.0
        self._idle_since = time.monotonic()
        self._is_done = False
        self._said = ("", "")

    def serve(self) -> None:
        """Work until told to stop."""
        gc.collect()
        gc.freeze()
        gc.disable()  # a collection would pause the callback; nothing here makes cycles
        while not self._is_done:
            self._shared.meters[Meter.ALIVE_S] = time.monotonic()
            if self._connection.poll(_TICK_S):
                self._take_messages()
            self._watch_output()

    def close(self) -> None:
        """Fade out, and close device, clip and shared memory."""
        self._fade_out()
        if self._output is not None:
            self._output.close()
        self._callback = None
        if self._clip is not None:
            self._clip.close()
        self._shared.close()

    def _take_messages(self) -> None:
        """Take everything that waits; of several clips and of several chains only the last counts."""
        clip: ClipMessage | None = None
        chain: Coefficients | None = None
        while self._connection.poll(0):
            message = self._connection.recv()
            if isinstance(message, ChainMessage):
                chain = message.coefficients
                self._shared.meters[Meter.CHAIN_NUMBER] = message.number
            elif isinstance(message, ClipMessage):
                clip, chain = message, None
            else:
                self._is_done = True
        if self._is_done:
            return
        if clip is not None:
            self._load(clip)
        if chain is not None and self._callback is not None:
            player = self._callback.player
            player.pending_kernel = Kernel(chain, player.channels)

    def _load(self, message: ClipMessage) -> None:
        self._fade_out()
        self._close_output()
        old = self._clip
        self._clip = SharedClip(message.shape, message.name)
        kernel = Kernel(message.coefficients, message.shape[1])
        player = Player(self._clip.frames, message.sample_rate_hz, kernel)
        _warm_up(kernel)
        self._callback = Callback(player, self._shared, message.sample_rate_hz)
        self._rate_hz = message.sample_rate_hz
        if old is not None:
            old.close()
        self._shared.meters[Meter.PHASE] = PHASES.index("stopped")
        self._shared.meters[Meter.CLIP_NUMBER] = message.number

    def _watch_output(self) -> None:
        """Open the device when sound is wanted, close it when it has long been idle, and notice when it is gone."""
        now = time.monotonic()
        wants_sound = self._callback is not None and bool(self._shared.commands[Command.IS_PLAYING])
        if self._output is None:
            if wants_sound and now >= self._retry_at:
                self._open()
            return
        if self._is_gone(now):
            self._lose(now)
            return
        if wants_sound or (self._callback is not None and not self._callback.player.is_idle):
            self._idle_since = now
        elif now - self._idle_since > _LINGER_S:
            self._close_output()

    def _is_gone(self, now: float) -> bool:
        output = self._output
        if output is None:
            return False
        if not output.is_active or not output.is_device:
            return not output.is_active
        last = max(float(self._shared.meters[Meter.CALLBACK_S]), output.opened_s)
        return now - last > _STALE_S

    def _lose(self, now: float) -> None:
        self._close_output()
        self._retry_at = now + _RETRY_S
        self._shared.meters[Meter.PHASE] = PHASES.index("faulted")
        self._say("", "the sound device is gone; trying again every second, the work goes on")

    def _open(self) -> None:
        if self._callback is None:
            return
        self._callback.player.guard.shut()
        options = self._options
        opened = open_output(Wanted(options.device, self._rate_hz, options.block_frames, self._callback, self._shared))
        if isinstance(opened, str):
            self._retry_at = time.monotonic() + _RETRY_S
            self._shared.meters[Meter.PHASE] = PHASES.index("faulted")
            self._say("", opened)
            return
        self._output = opened
        self._idle_since = time.monotonic()
        self._shared.meters[Meter.IS_DEVICE] = float(opened.is_device)
        look_ahead = self._callback.player.guard.look_ahead_frames / self._rate_hz
        self._shared.meters[Meter.LATENCY_MS] = 1000.0 * (look_ahead + opened.latency_s)
        self._say(opened.name, opened.message)

    def _fade_out(self) -> None:
        """Wait until nothing sounds, the device's own buffer included; a device that hangs is not waited for."""
        if self._output is None or self._callback is None:
            return
        player = self._callback.player
        self._callback.is_held = True
        deadline = time.monotonic() + _FADE_OUT_S
        while time.monotonic() < deadline:
            if player.is_idle:
                break
            time.sleep(0.002)
        time.sleep(min(self._output.latency_s, _FADE_OUT_S))

    def _close_output(self) -> None:
        if self._output is not None:
            self._output.close()
            self._output = None
            if self._callback is not None:
                self._shared.meters[Meter.PHASE] = PHASES.index("stopped")

    def _say(self, device_name: str, message: str) -> None:
        said = (device_name, message)
        if said != self._said:
            self._said = said
            self._connection.send(said)


def _warm_up(kernel: Kernel) -> None:
    """Run scipy once before the callback must be quick; the first call costs many times a later one."""
    Kernel(kernel.coefficients, kernel.channels).process_block(np.zeros((64, kernel.channels)))
