"""The edit state machine: preset, selection, step, undo and redo.

Every edit makes a new value and pushes the old one; undo gives back exactly what was. A run of arrow presses is one
undo step when the caller gives all of them the same gesture number (there is no clock here).
"""

from dataclasses import dataclass, replace

from tonebench.core.chain import Chain
from tonebench.core.section import Section
from tonebench.core.shape import Move, move_pole
from tonebench.errors import InvalidValueError, TypedLineError
from tonebench.session.describe import describe_section
from tonebench.session.preset import Preset
from tonebench.session.steps import STARTING_STEP, STEPS, Step
from tonebench.session.typed_line import apply_line

LONGEST_HISTORY = 1000


@dataclass(frozen=True, slots=True)
class _State:
    preset: Preset
    selected: int


class Session:
    """One preset being worked on.

    Parameters
    ----------
    preset : Preset

    """

    def __init__(self, preset: Preset) -> None:
        self._state = _State(preset, 0 if preset.chain.sections else -1)
        self._saved = preset
        self._past: list[_State] = []
        self._future: list[_State] = []
        self._gesture = 0
        self._step_index = STARTING_STEP

    @property
    def preset(self) -> Preset:
        """The preset as it is now."""
        return self._state.preset

    @property
    def chain(self) -> Chain:
        """Its chain."""
        return self._state.preset.chain

    @property
    def selected(self) -> int:
        """Index of the selected section, −1 if the chain is empty."""
        return self._state.selected

    @property
    def section(self) -> Section | None:
        """The selected section."""
        return self.chain.sections[self.selected] if self.selected >= 0 else None

    @property
    def step(self) -> Step:
        """The step of arrows and gain keys."""
        return STEPS[self._step_index]

    @property
    def is_dirty(self) -> bool:
        """Whether the preset differs from the one that was loaded or last saved."""
        now, then = self.preset, self._saved
        return replace(now, written_hearing=None) != replace(then, written_hearing=None)

    @property
    def can_undo(self) -> bool:
        """Whether there is an edit to take back."""
        return bool(self._past)

    @property
    def can_redo(self) -> bool:
        """Whether there is an edit to make again."""
        return bool(self._future)

    def select(self, index: int) -> None:
        """Select a section by index; an index outside the chain changes nothing."""
        if 0 <= index < len(self.chain.sections):
            self._state = replace(self._state, selected=index)
            self._gesture = 0

    def select_next(self, offset: int) -> None:
        """Select the next section (or, with −1, the one before), around the ends."""
        if self.chain.sections:
            self.select((self.selected + offset) % len(self.chain.sections))

    def cycle_step(self, offset: int) -> Step:
        """Choose a finer step (+1) or a coarser one (−1), and return it."""
        self._step_index = min(max(self._step_index + offset, 0), len(STEPS) - 1)
        self._gesture = 0
        return self.step

    def move(self, pitch_steps: int, ring_steps: int, gesture: int = 0) -> str:
        """Move the selected pole by steps of pitch and ring; return a sentence.

        Raises
        ------
        InvalidValueError
            If there is no pole to move.

        """
        section = self._selected_section()
        move = Move(self.step.pitch_ratio**pitch_steps, self.step.ring_ratio**ring_steps)
        return self._put(move_pole(section, self.chain.sample_rate_hz, move), gesture)

    def change_gain(self, steps: int, gesture: int = 0) -> str:
        """Raise the selected section's gain by steps; return a sentence.

        Raises
        ------
        InvalidValueError
            If its kind has no gain.

        """
        section = self._selected_section()
        gain_db = round(section.gain_db + steps * self.step.gain_db, 6)
        return self._put(section.with_gain_db(gain_db), gesture)

    def put_section(self, section: Section, gesture: int = 0) -> str:
        """Replace the selected section; return a sentence."""
        self._selected_section()
        return self._put(section, gesture)

    def toggle_bypass(self) -> str:
        """Bypass the selected section, or take it back in."""
        section = self._selected_section()
        self._put(replace(section, is_bypassed=not section.is_bypassed), 0)
        return f"section {self.selected + 1} {'taken back in' if section.is_bypassed else 'bypassed'}"

    def remove(self) -> str:
        """Take the selected section out."""
        self._selected_section()
        return self.type_line(f"{self.selected + 1} remove")

    def reorder(self, offset: int) -> str:
        """Move the selected section one place towards the start (−1) or the end (+1)."""
        self._selected_section()
        return self.type_line(f"{self.selected + 1} {'up' if offset < 0 else 'down'}")

    def type_line(self, text: str) -> str:
        """Apply a typed line and return one sentence about what it did.

        Raises
        ------
        TypedLineError
            If it is refused; nothing has changed then.

        """
        word = text.strip().lower()
        if word in ("undo", "redo"):
            return self.undo() if word == "undo" else self.redo()
        outcome = apply_line(self.preset, self.selected, text)
        self._push(_State(outcome.preset, outcome.selected), 0)
        return outcome.sentence

    def replace_preset(self, preset: Preset, *, is_saved: bool = False) -> None:
        """Put another preset in place, undoably; ``is_saved`` if it is what stands in the file."""
        selected = min(max(self.selected, 0), len(preset.chain.sections) - 1)
        self._push(_State(preset, selected), 0)
        if is_saved:
            self._saved = preset

    def mark_saved(self, preset: Preset | None = None) -> None:
        """Remember the preset as it is now, or as it was when it was written, as saved."""
        self._saved = self.preset if preset is None else preset

    def undo(self) -> str:
        """Take back the last edit.

        Raises
        ------
        TypedLineError
            If there is none.

        """
        if not self._past:
            raise TypedLineError("there is nothing to undo")
        self._future.append(self._state)
        self._state = self._past.pop()
        self._gesture = 0
        return "undone"

    def redo(self) -> str:
        """Make an edit again that was taken back.

        Raises
        ------
        TypedLineError
            If there is none.

        """
        if not self._future:
            raise TypedLineError("there is nothing to redo")
        self._past.append(self._state)
        self._state = self._future.pop()
        self._gesture = 0
        return "redone"

    def _selected_section(self) -> Section:
        section = self.section
        if section is None:
            raise InvalidValueError("the chain is empty; add a section first, such as notch 50 Hz")
        return section

    def _put(self, section: Section, gesture: int) -> str:
        chain = self.chain.with_section(self.selected, section)
        self._push(_State(replace(self.preset, chain=chain), self.selected), gesture)
        return describe_section(chain.sections[self.selected], self.selected + 1, chain.sample_rate_hz)

    def _push(self, state: _State, gesture: int) -> None:
        """Make a state the present one; edits of one gesture share one undo step, and no change is no step."""
        if state.preset == self.preset:
            self._state = replace(self._state, selected=state.selected)
            return
        is_same_gesture = gesture != 0 and gesture == self._gesture and bool(self._past)
        if not is_same_gesture:
            self._past.append(self._state)
            del self._past[: max(len(self._past) - LONGEST_HISTORY, 0)]
        self._future.clear()
        self._state = state
        self._gesture = gesture
