"""The callback: from shared commands to one block of sound, and its meters.

It allocates what numpy must and nothing else, takes no lock, writes no log. Whatever an edit needs is prepared by the
child's other thread and handed over as one attribute.
"""

import time

import numpy as np
from numpy.typing import NDArray

from tonebench.engine.player import Loop, Player, peak_db
from tonebench.engine.shared import (
    GUARD_REASONS,
    HEARABLE,
    LOADS,
    PHASES,
    Command,
    Meter,
    SharedBlock,
    write_ring,
)

_PEAK_FALL_DB_PER_S = 20.0


class Callback:
    """One block at a time, for a device or the silent clock.

    Parameters
    ----------
    player : Player
    shared : SharedBlock
    sample_rate_hz : float

    """

    def __init__(self, player: Player, shared: SharedBlock, sample_rate_hz: float) -> None:
        self.player = player
        self._shared = shared
        self._rate_hz = sample_rate_hz
        self.is_held = False  # the other thread wants silence, before it takes clip or device away
        self._rearmed = shared.commands[Command.REARM_COUNT]
        self._ceiling_db = float(shared.commands[Command.CEILING_DB])
        player.guard.set_ceiling_db(self._ceiling_db)

    def fill(self, out: NDArray[np.float32]) -> None:
        """Fill one block, shape (frames, 2)."""
        started = time.perf_counter()
        shared = self._shared
        self._obey()
        out[:] = self.player.fill_block(out.shape[0])
        self._report(out)
        load = (time.perf_counter() - started) * self._rate_hz / out.shape[0]
        blocks = int(shared.meters[Meter.BLOCKS])
        shared.loads[blocks % LOADS] = load
        shared.meters[Meter.BLOCKS] = blocks + 1
        shared.meters[Meter.CALLBACK_S] = time.monotonic()

    def _obey(self) -> None:
        commands, player = self._shared.commands, self.player
        player.is_wanted = bool(commands[Command.IS_PLAYING]) and not self.is_held
        player.is_muted = bool(commands[Command.IS_MUTED])
        player.set_level_db(float(commands[Command.LEVEL_DB]))
        player.hear(HEARABLE[int(commands[Command.HEAR])])
        start, end = int(commands[Command.LOOP_START]), int(commands[Command.LOOP_END])
        is_looping = bool(commands[Command.IS_LOOPING])
        loop = player.loop
        if 0 <= start < end <= player.clip_frames and (start, end, is_looping) != (
            loop.start,
            loop.end,
            loop.is_looping,
        ):
            player.loop = Loop(start, end, is_looping)
        ceiling_db = float(commands[Command.CEILING_DB])
        if ceiling_db != self._ceiling_db:
            self._ceiling_db = ceiling_db
            player.guard.set_ceiling_db(ceiling_db)
        if commands[Command.REARM_COUNT] != self._rearmed:
            self._rearmed = commands[Command.REARM_COUNT]
            player.rearm()

    def _report(self, out: NDArray[np.float32]) -> None:
        shared, player, meters = self._shared, self.player, self._shared.meters
        guard = player.guard
        meters[Meter.GUARD] = 2 if guard.is_tripped else 1 if guard.is_limiting else 0
        meters[Meter.GUARD_REASON] = GUARD_REASONS.index(guard.reason)
        meters[Meter.POSITION] = player.position
        meters[Meter.LOOP_START], meters[Meter.LOOP_END] = player.loop.start, player.loop.end
        is_idle = player.is_idle
        meters[Meter.PHASE] = PHASES.index("stopped" if is_idle else "playing")
        fallen = meters[Meter.PEAK_DB] - _PEAK_FALL_DB_PER_S * out.shape[0] / self._rate_hz
        meters[Meter.PEAK_DB] = max(peak_db(out), fallen)
        if player.before.shape[0]:
            both = np.concatenate([player.before, player.after], axis=1)
            with np.errstate(over="ignore"):
                meters[Meter.RECENT_COUNT] = write_ring(
                    shared.recent, int(meters[Meter.RECENT_COUNT]), both.astype(np.float32)
                )
        if shared.capture_frames and not is_idle:
            meters[Meter.CAPTURE_COUNT] = write_ring(shared.capture, int(meters[Meter.CAPTURE_COUNT]), out)
