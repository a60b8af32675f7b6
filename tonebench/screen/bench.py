"""What the screen works on: a session, a clip, an engine, and where the preset is kept. No drawing here.

Imports numpy and the rooms below; so it is loaded in a thread, after the first picture.
"""

import contextlib
import math
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING, Protocol

from tonebench.core.coefficients import Coefficients, from_chain
from tonebench.core.hearing import largest_gain
from tonebench.core.rates import RateChange, at_rate
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import ByKind
from tonebench.core.shape import set_pole
from tonebench.core.stability import is_stable
from tonebench.errors import InvalidValueError
from tonebench.session.session import Session

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from tonebench.core.chain import Chain
    from tonebench.core.section import Section
    from tonebench.engine.client import EngineStatus
    from tonebench.files.clips import Clip

LOUD_DB = 6.0  # twice the amplitude: clearly more than shaping; common practice, no source
STARTING_LEVEL_DB = -20.0
QUIETEST_LEVEL_DB = -120.0


class Engine(Protocol):
    """What the screen needs of the engine's client; tests put a plain object in its place."""

    def load_clip(self, frames: "NDArray[np.float32]", sample_rate_hz: float) -> None:
        """Play these frames."""

    def set_coefficients(self, coefficients: Coefficients) -> None:
        """Run this chain."""

    def play(self) -> None:
        """Play."""

    def stop(self) -> None:
        """Stop."""

    def rearm(self) -> None:
        """Take the guard back in."""

    def set_muted(self, is_muted: bool) -> None:
        """Mute, or unmute."""

    def set_level_db(self, level_db: float) -> None:
        """Set the level."""

    def set_hear(self, what: str) -> None:
        """Hear input, output or change."""

    def set_loop(self, start_frame: int, end_frame: int) -> None:
        """Loop between two frames."""

    def set_ceiling_db(self, ceiling_db: float) -> None:
        """Set the guard's ceiling."""

    def status(self) -> "EngineStatus":
        """Return what it does now."""

    def recent(self, frames: int) -> "tuple[NDArray[np.float32], NDArray[np.float32]]":
        """Return the last frames before and after the chain."""

    def close(self) -> None:
        """End its process."""


@dataclass(slots=True)
class Bench:
    """Everything that is open.

    Attributes
    ----------
    session : Session
    clip : Clip
    engine : Engine
    path : Path or None
        Where the preset is saved; None for a bundled or unnamed one.
    suggested : str
        File name that saving offers where there is no path.
    like : str or None
        Text of the bundled preset it came from: its comments go into the copy.
    level_db : float
    notes : tuple of str
        What was noticed while loading, one line each.

    """

    session: Session
    clip: "Clip"
    engine: Engine
    path: Path | None = None
    suggested: str = "preset.toml"
    like: str | None = None
    level_db: float = STARTING_LEVEL_DB
    notes: tuple[str, ...] = ()
    _running: tuple["Chain", RateChange] | None = field(default=None, init=False)

    @property
    def running(self) -> "Chain":
        """The chain as it runs: at the clip's rate, Hz and seconds kept."""
        return self.rate_change.chain

    @property
    def rate_change(self) -> RateChange:
        """The chain at the clip's rate, and what could not be kept there."""
        chain = self.session.chain
        if self._running is None or self._running[0] is not chain:
            self._running = (chain, at_rate(chain, self.clip.sample_rate_hz))
        return self._running[1]

    @property
    def is_other_rate(self) -> bool:
        """Whether preset and clip have different sample rates."""
        return self.session.chain.sample_rate_hz != self.clip.sample_rate_hz

    def number_of(self, identity: int) -> int:
        """Return the number, from 1, of the session's section with this identity; 0 if there is none."""
        for number, section in enumerate(self.session.chain.sections, start=1):
            if section.identity == identity:
                return number
        return 0

    def push(self) -> None:
        """Give the engine the chain as it is now."""
        self.engine.set_coefficients(from_chain(self.running))

    def change_level(self, steps: int) -> float:
        """Raise or lower the level by whole decibels, at most 0 dB."""
        return self.set_level(math.floor(self.level_db + 0.5) + steps)

    def set_level(self, level_db: float) -> float:
        """Set the level and return it.

        Raises
        ------
        InvalidValueError
            Above 0 dB, or under -120 dB.

        """
        if not QUIETEST_LEVEL_DB <= level_db <= 0.0:
            raise InvalidValueError(f"level must be between {QUIETEST_LEVEL_DB:g} and 0 dB, got {level_db:g}")
        self.engine.set_level_db(level_db)
        self.level_db = float(level_db)
        return self.level_db

    def set_loop(self, seconds: tuple[float, ...]) -> str:
        """Set the loop's ends in seconds, or take the whole clip; return a sentence."""
        frames = len(self.clip.frames)
        if not seconds:
            self.engine.set_loop(0, frames)
            return "loop: the whole clip"
        start, end = (round(one * self.clip.sample_rate_hz) for one in seconds)
        if not 0 <= start < end <= frames:
            raise InvalidValueError(
                f"loop must be two times in order, from 0 to {self.clip.seconds:.6g} s, got {seconds[0]:g} and "
                f"{seconds[1]:g}"
            )
        self.engine.set_loop(start, end)
        return f"loop: {seconds[0]:g} s to {seconds[1]:g} s"

    def working_frequency_hz(self) -> float:
        """Return where the selected section works: f0 of a kind, the pole's own angle of a free section.

        Raises
        ------
        InvalidValueError
            If there is no section, or a free one has no pole pair.

        """
        made = self._section().made
        if isinstance(made, ByKind):
            return made.frequency_hz
        if not isinstance(made.poles, ConjugatePair):
            raise InvalidValueError(f"section {self.session.selected + 1} has no pole pair to move; type its poles")
        return made.poles.angle_rad * self.session.chain.sample_rate_hz / (2.0 * math.pi)

    def put_frequency(self, frequency_hz: float) -> None:
        """Move the selected section so that it works at a frequency; its width, or its pole's radius, is kept.

        Of a notch it is the zeros that take the hum away, and its poles lie lower: f0 is what must be on the peak.

        Raises
        ------
        InvalidValueError
            If it cannot lie there.

        """
        chain, section = self.session.chain, self._section()
        made = section.made
        if isinstance(made, ByKind):
            self.session.put_section(section.with_frequency_hz(frequency_hz))
        elif isinstance(made.poles, ConjugatePair):
            angle_rad = 2.0 * math.pi * frequency_hz / chain.sample_rate_hz
            self.session.put_section(set_pole(section, chain.sample_rate_hz, made.poles.radius, angle_rad))

    def _section(self) -> "Section":
        section = self.session.section
        if section is None:
            raise InvalidValueError("the chain is empty; press a to add a section")
        return section

    def rate_words(self) -> str:
        """Say what another sample rate of the clip means; empty where the rates are the same."""
        if not self.is_other_rate:
            return ""
        words = (
            f"{self.clip.name} has {self.clip.sample_rate_hz:g} Hz, the preset "
            f"{self.session.chain.sample_rate_hz:g} Hz: it runs at the clip's rate, Hz and seconds kept"
        )
        lost = "; ".join(f"section {number}: {loss}" for number, loss in self.rate_change.lost)
        return f"{words}; {lost}" if lost else words

    def hearing_words(self) -> str:
        """Return the hearing caution: what the bench cannot know, and how loud this chain can be."""
        if not is_stable(self.running):
            return "Caution: this chain is unstable and can grow without bound. The guard will silence it."
        gain_db, gain_hz = largest_gain(self.running)
        unknown = "The bench cannot know how loud it is at your ears: start low. Space plays."
        if gain_db > LOUD_DB:
            return f"Caution: this chain makes a tone at {gain_hz:.4g} Hz {gain_db:.1f} dB louder. {unknown}"
        return unknown

    def save(self, path: Path | None, *, is_forced: bool) -> str:
        """Write the preset and return a sentence; the caller may be a thread.

        Raises
        ------
        TonebenchError
            If it cannot be written; nothing has changed then.

        """
        from tonebench.files.presets import save_preset  # noqa: PLC0415  (tomlkit follows it)

        destination = self.path if path is None else path
        if destination is None:
            raise InvalidValueError("this preset has no file yet; type save and a name, such as save mine.toml")
        is_own = self.path is not None and _is_same(destination, self.path)
        preset = self.session.preset
        written = save_preset(preset, destination, like=None if is_own else self.like, is_forced=is_own or is_forced)
        # Edits made while the file was written stay unsaved.
        self.session.mark_saved(replace(preset, written_hearing=written.written_hearing))
        self.path, self.like = destination, None
        return f"saved {destination}"

    def export(self, language: str, path: Path, *, is_forced: bool) -> str:
        """Write an export and return a sentence.

        Raises
        ------
        TonebenchError
            If it is not offered or cannot be written.

        """
        from tonebench.builds import export_text  # noqa: PLC0415
        from tonebench.files.atomic import write_text_atomically  # noqa: PLC0415

        preset = self.session.preset
        text = export_text(preset.chain, preset.target, language, is_forced=is_forced)
        write_text_atomically(path, text, is_forced=is_forced)
        return f"wrote {path}: {len(preset.chain.active_sections)} sections, {preset.target}"


def _is_same(one: Path, other: Path) -> bool:
    with contextlib.suppress(OSError):
        return one.resolve() == other.resolve()
    return one == other
