"""Actions on the sound, and the poll that shows what the engine does.

The poll runs at the spectrum's rate while something plays, and twice a second otherwise, so that idling costs nothing.
"""

from typing import TYPE_CHECKING, Final

from tonebench.screen.base import BaseApp
from tonebench.screen.wording import status_facts

if TYPE_CHECKING:
    from tonebench.engine.client import EngineStatus
    from tonebench.screen.bench import Bench

PLAYING_POLL_S: Final = 1 / 12
IDLE_POLL_S: Final = 0.5
_AFTER_A_KEY_S: Final = 0.06
_ENDED = ("stopped", "faulted")


class SoundActions(BaseApp):
    """What the keys of the group Hear do."""

    is_playing_wanted: bool = False
    _engine_message: str = ""
    _guard: str = "idle"
    _phase: str = ""

    def action_play(self) -> None:
        """Play, stop, or take the guard back in."""
        self.attempt(self._play)

    def _play(self, bench: "Bench") -> str:
        engine = bench.engine
        if engine.status().guard == "tripped":
            engine.rearm()
            if not self.is_playing_wanted:
                engine.play()
            self.is_playing_wanted = True
            sentence = "re-armed: the sound fades in again"
        elif self.is_playing_wanted:
            engine.stop()
            self.is_playing_wanted = False
            sentence = "stopped"
        else:
            engine.play()
            self.is_playing_wanted = True
            sentence = f"playing {bench.clip.name} at {bench.level_db:g} dB"
        self.set_timer(_AFTER_A_KEY_S, self.look)
        return sentence

    def action_mute(self) -> None:
        """Mute, or unmute; works at once, whatever waits."""
        bench = self.bench
        if bench is None:
            self.say("still loading")
            return
        is_muted = not bench.engine.status().is_muted
        bench.engine.set_muted(is_muted)
        self.say("muted: m unmutes" if is_muted else "unmuted")
        self.set_timer(_AFTER_A_KEY_S, self.look)

    def action_hear(self, what: str) -> None:
        """Hear input, output or change."""
        self.attempt(lambda bench: self.hear(bench, what))

    def hear(self, bench: "Bench", what: str) -> str:
        """Hear something else; return a sentence."""
        bench.engine.set_hear(what)
        self.set_timer(_AFTER_A_KEY_S, self.look)
        return {
            "input": "hearing the input: the clip as it is",
            "output": "hearing the output: the clip through the chain",
            "change": "hearing the change: what the chain takes away or adds",
        }[what]

    def action_level(self, steps: int) -> None:
        """Raise or lower the level by 1 dB."""
        self.attempt(lambda bench: f"level {bench.change_level(steps):g} dB")
        self.set_timer(_AFTER_A_KEY_S, self.look)

    def start_polling(self) -> None:
        """Begin to look at the engine, now and then."""
        self._poll()

    def _poll(self) -> None:
        status = self.look()
        is_live = status is not None and status.phase == "playing"
        self.set_timer(PLAYING_POLL_S if is_live else IDLE_POLL_S, self._poll)

    def look(self) -> "EngineStatus | None":
        """Look at the engine once: status, message, guard, spectrum."""
        bench = self.bench
        if bench is None or self.is_gone:
            return None
        status = bench.engine.status()
        if status.phase == "faulted":
            self.is_playing_wanted = False
        self._tell(status)
        self.show_facts(status)
        if status.phase == "playing":
            self.show_live_spectrum()
        elif self._phase == "playing":
            self.show_still_spectrum()
        self._phase = status.phase
        return status

    def _tell(self, status: "EngineStatus") -> None:
        """Say what is new; the same thing is said once."""
        if status.message and status.message != self._engine_message:
            self._engine_message = status.message
            self.say(status.message)
        if status.guard == "tripped" and self._guard != "tripped":
            reason = f": {status.guard_reason}" if status.guard_reason else ""
            self.say(f"the guard silenced the sound{reason}. Mend the chain, then press Space to re-arm")
        self._guard = status.guard

    def show_status(self) -> None:
        """Draw the status row from the engine as it is now."""
        if self.bench is not None:
            self.show_facts(self.bench.engine.status())

    def show_facts(self, status: "EngineStatus") -> None:
        """Draw the status row."""
        if self.bench is not None:
            self.status_row.show(*status_facts(self.bench, status))

    def show_live_spectrum(self) -> None:
        """Draw the spectrum of what plays."""

    def show_still_spectrum(self) -> None:
        """Draw the clip's long-term spectrum."""
