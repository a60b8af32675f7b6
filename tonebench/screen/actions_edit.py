"""Actions on the chain: moving poles, gain, steps, sections, undo.

Arrow presses are collected and applied once per tick; a run of them on one section is one undo step.
"""

import time
from typing import TYPE_CHECKING, Final

from tonebench.errors import TonebenchError
from tonebench.screen.base import BaseApp

if TYPE_CHECKING:
    from tonebench.screen.bench import Bench

TICK_S: Final = 1 / 30
PAUSE_S: Final = 1.0  # arrows after a longer pause than this begin another undo step
STARTING_LINE: Final = "peak 1000 Hz -3 dB q 1"


class EditActions(BaseApp):
    """What the keys of the groups Shape and Chain do."""

    _pitch_steps: int = 0
    _ring_steps: int = 0
    _gain_steps: int = 0
    _is_armed: bool = False
    _applied_at: float = 0.0
    _gesture: int = 1
    _gesture_sort: str = ""

    def action_pitch(self, steps: int) -> None:
        """Move the selected pole in pitch."""
        self._collect(pitch=steps)

    def action_ring(self, steps: int) -> None:
        """Move the selected pole in ring."""
        self._collect(ring=steps)

    def action_gain(self, steps: int) -> None:
        """Change the selected section's gain."""
        self._collect(gain=steps)

    def _collect(self, pitch: int = 0, ring: int = 0, gain: int = 0) -> None:
        if self.bench is None:
            self.say("still loading")
            return
        self.wants_to_quit = False
        # Gain and place are different gestures: what waits of the one is applied before the other begins.
        if (gain and (self._pitch_steps or self._ring_steps)) or ((pitch or ring) and self._gain_steps):
            self.settle()
        self._pitch_steps += pitch
        self._ring_steps += ring
        self._gain_steps += gain
        if not self._is_armed:
            self._is_armed = True
            self.set_timer(max(TICK_S - (time.monotonic() - self._applied_at), 0.001), self._tick)

    def _tick(self) -> None:
        self._is_armed = False
        if not self.is_gone:
            self._apply()

    def settle(self) -> None:
        """Apply what waits, and let the next arrow begin another undo step."""
        self._apply()
        self._gesture_sort = ""

    def _apply(self) -> None:
        pitch, ring, gain = self._pitch_steps, self._ring_steps, self._gain_steps
        self._pitch_steps = self._ring_steps = self._gain_steps = 0
        if self.bench is None or not (pitch or ring or gain):
            return
        gesture = self._next_gesture("gain" if gain else "move")
        try:
            session = self.bench.session
            sentence = session.change_gain(gain, gesture) if gain else session.move(pitch, ring, gesture)
        except TonebenchError as error:
            self.complain(error)
            return
        self.say(sentence)
        self.show_edit()
        self.show_status()
        self._applied_at = time.monotonic()

    def _next_gesture(self, sort: str) -> int:
        """Return the number of the run of presses that is going on, or of a new one."""
        if sort != self._gesture_sort or time.monotonic() - self._applied_at > PAUSE_S:
            self._gesture += 1
        self._gesture_sort = sort
        return self._gesture

    def action_step(self, offset: int) -> None:
        """Choose another step."""
        self.attempt(lambda bench: f"step: {bench.session.cycle_step(offset)}")

    def action_section(self, offset: int) -> None:
        """Select the next section, or the one before."""
        if not self.is_typing:
            self.attempt(lambda bench: self._selected(bench, bench.session.selected + offset))

    def action_number(self, number: int) -> None:
        """Select a section by its number."""
        self.attempt(lambda bench: self._selected(bench, number - 1))

    def select_section(self, index: int) -> None:
        """Select a section by its index: a click."""
        self.attempt(lambda bench: self._selected(bench, index))

    def _selected(self, bench: "Bench", index: int) -> str:
        count = len(bench.session.chain.sections)
        if count == 0:
            return "the chain is empty: press a to add a section"
        if not -1 <= index <= count:
            return f"there is no section {index + 1}: the chain has {count}"
        bench.session.select(index % count)
        self.show_selection()
        return self.describe_selected()

    def describe_selected(self) -> str:
        """Return the selected section in words."""
        from tonebench.session.describe import describe_section  # noqa: PLC0415

        session = self.bench.session if self.bench is not None else None
        if session is None or session.section is None:
            return "no section is selected"
        return describe_section(session.section, session.selected + 1, session.chain.sample_rate_hz)

    def show_selection(self) -> None:
        """Draw what depends on the selection."""

    def action_add(self) -> None:
        """Open the typed line with a section to begin from."""
        if self.ready() is not None:
            words = "add a section after the selected one: Enter takes this one, typing replaces it, Esc leaves"
            self.open_typed(STARTING_LINE, words, is_selected=True)

    def action_remove(self) -> None:
        """Remove the selected section."""
        self.attempt(lambda bench: bench.session.remove(), is_edit=True)

    def action_bypass(self) -> None:
        """Bypass the selected section, or take it back in."""
        self.attempt(lambda bench: bench.session.toggle_bypass(), is_edit=True)

    def action_reorder(self, offset: int) -> None:
        """Move the selected section in the chain."""
        self.attempt(lambda bench: bench.session.reorder(offset), is_edit=True)

    def action_undo(self) -> None:
        """Take back the last edit."""
        self.attempt(lambda bench: bench.session.undo(), is_edit=True)

    def action_redo(self) -> None:
        """Make an edit again."""
        self.attempt(lambda bench: bench.session.redo(), is_edit=True)
