"""Playing without the screen: one loop that feeds the engine, watches the preset and keeps the capture."""

import argparse
import contextlib
import math
import signal
import time
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from tonebench.cli.text import narrate
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.rates import at_rate
from tonebench.engine.client import EngineClient, EngineStatus
from tonebench.errors import InvalidValueError, TonebenchError, must_be
from tonebench.files.bundled import clip_for_preset, find_clip, find_preset
from tonebench.files.clips import Clip, ClipWriter, load_clip
from tonebench.files.presets import LoadedPreset, load_preset
from tonebench.session.changes import describe_changes

_TICK_S = 0.05
_CAPTURE_RING_S = 10.0
_LARGEST_SECONDS = 7 * 24 * 3600.0


@dataclass(frozen=True, slots=True)
class _Wish:
    """What was asked for, checked."""

    seconds: float
    level_db: float
    hear: str
    device: str | int | None
    is_watching: bool


def play(arguments: argparse.Namespace) -> int:
    """Play until the time is over, Ctrl-C, or a fault without return."""
    wish = _checked(arguments)
    path = find_preset(arguments.preset)
    loaded = load_preset(path)
    clip = load_clip(find_clip(arguments.clip) if arguments.clip else clip_for_preset(path))
    for note in (*loaded.notes, *clip.notes):
        narrate(f"note: {note}")
    chain = _chain_at_clip(loaded.preset.chain, clip)
    with _capture(arguments.capture, clip) as writer:
        ring_frames = int(_CAPTURE_RING_S * clip.sample_rate_hz) if writer else 0
        _leave_when_told()
        engine = EngineClient(device=wish.device, capture_frames=ring_frames)
        try:
            engine.load_clip(clip.frames, clip.sample_rate_hz)
            engine.set_coefficients(from_chain(chain))
            engine.set_level_db(wish.level_db)
            engine.set_hear(wish.hear)
            engine.play()
            _tell_start(loaded, clip, wish)
            _Listening(engine, clip, wish, _Watch(path, loaded), writer).run()
        finally:
            engine.close()
    return 0


def _leave_when_told() -> None:
    """Treat the end of the terminal, and a polite kill, as Ctrl-C: sound fades out and nothing is left behind."""

    def interrupt(_number: int, _frame: object) -> None:
        raise KeyboardInterrupt

    for name in ("SIGTERM", "SIGHUP"):  # Windows has no SIGHUP
        if hasattr(signal, name):
            signal.signal(getattr(signal, name), interrupt)


def _checked(arguments: argparse.Namespace) -> _Wish:
    seconds = math.inf if arguments.seconds is None else arguments.seconds
    if not seconds > 0.0 or (arguments.seconds is not None and seconds > _LARGEST_SECONDS):
        raise InvalidValueError(must_be("--seconds", "over 0 and at most a week", arguments.seconds))
    if not (math.isfinite(arguments.level) and -120.0 <= arguments.level <= 0.0):
        raise InvalidValueError(must_be("--level", "between -120 and 0 dB", arguments.level))
    device = arguments.device
    if device is not None and device.isdecimal():
        device = int(device)
    return _Wish(seconds, arguments.level, arguments.hear, device, arguments.watch)


def _chain_at_clip(chain: Chain, clip: Clip) -> Chain:
    change = at_rate(chain, clip.sample_rate_hz)
    if clip.sample_rate_hz != chain.sample_rate_hz:
        narrate(
            f"{clip.name} has {clip.sample_rate_hz:g} Hz, the preset {chain.sample_rate_hz:g} Hz: played at the clip's "
            "own rate, Hz and seconds kept"
        )
    for number, loss in change.lost:
        narrate(f"section {number}: {loss}")
    return change.chain


@contextlib.contextmanager
def _capture(output: str | None, clip: Clip) -> Iterator[ClipWriter | None]:
    if output is None:
        yield None
        return
    with ClipWriter(Path(output), clip.sample_rate_hz, 2, is_forced=False) as writer:
        yield writer


def _tell_start(loaded: LoadedPreset, clip: Clip, wish: _Wish) -> None:
    chain = loaded.preset.chain
    narrate(
        f"{chain.name}: {len(chain.active_sections)} sections on {clip.name}, {clip.sample_rate_hz:g} Hz, hearing "
        f"{wish.hear} at {wish.level_db:g} dB"
    )


class _Watch:
    """Notice that another program saved the preset."""

    def __init__(self, path: Path, loaded: LoadedPreset) -> None:
        self._path = path
        self._preset = loaded.preset
        self._stamp = self._read_stamp()

    def _read_stamp(self) -> tuple[int, int] | None:
        try:
            found = self._path.stat()
        except OSError:
            return None
        return (found.st_mtime_ns, found.st_size)

    def reloaded(self) -> Chain | None:
        """Return the chain if the file has changed and reads well; say what changed, or what is wrong with it."""
        stamp = self._read_stamp()
        if stamp is None or stamp == self._stamp:
            return None
        self._stamp = stamp
        try:
            loaded = load_preset(self._path)
        except TonebenchError as error:
            narrate(f"kept the chain as it was: {error}")
            return None
        for line in describe_changes(self._preset, loaded.preset):
            narrate(line)
        self._preset = loaded.preset
        return loaded.preset.chain


@dataclass(slots=True)
class _Listening:
    """One stretch of playing: polled until the time is over, counted from the first sample that is played."""

    engine: EngineClient
    clip: Clip
    wish: _Wish
    watch: _Watch
    writer: ClipWriter | None
    told: str = ""
    guard: str = "idle"

    def run(self) -> None:
        heard_since: float | None = None
        with contextlib.suppress(KeyboardInterrupt):
            while heard_since is None or time.monotonic() - heard_since < self.wish.seconds:
                time.sleep(_TICK_S)
                status = self.engine.status()
                self._tell(status)
                if status.phase == "playing" and heard_since is None:
                    heard_since = time.monotonic()
                self._keep_capture()
                if self.wish.is_watching and (changed := self.watch.reloaded()) is not None:
                    self.engine.set_coefficients(from_chain(_chain_at_clip(changed, self.clip)))
        self.engine.stop()
        time.sleep(2 * _TICK_S)  # the fade-out and the blocks under way
        self._keep_capture()
        underflows = self.engine.status().underflows
        if underflows:
            narrate(f"{underflows} underflows: the device ran dry, and what was heard has gaps")

    def _keep_capture(self) -> None:
        if self.writer is not None:
            self.writer.write(self.engine.drain_capture())

    def _tell(self, status: EngineStatus) -> None:
        """Say what is new: the engine's message, and what the guard does."""
        if status.message and status.message != self.told:
            self.told = status.message
            narrate(status.message)
        if status.guard == self.guard:
            return
        if status.guard == "tripped":
            narrate(f"guard: silent, {status.guard_reason}")
        elif status.guard == "limiting" and self.guard == "idle":
            narrate(f"guard: holding the output under {status.ceiling_db:g} dBFS")
        if status.guard != "idle":  # a limiter that comes and goes is told once
            self.guard = status.guard
