"""The edit state machine: undo and redo give back exactly what was, whatever was done."""

import math
from collections.abc import Callable

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.session.cases import bench, bench_preset, made_by_hand, made_by_kind
from tests.strategies import STEADY, presets
from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import by_kind
from tonebench.errors import InvalidValueError, TypedLineError
from tonebench.session.preset import Preset
from tonebench.session.session import LONGEST_HISTORY, Session
from tonebench.session.steps import STEPS

_LINES = (
    "peak 320 Hz -4 dB q 1.2", "free poles 0.9 at 30 deg", "remove", "free", "bypass", "all ring x0.8", "1 +5 Hz",
    "name a", "up", "down", "2 remove", "move 1 to 2", "chain sum", "chain series", "chain gain -3 dB",
    "chain rate 44100", "target q31/df1", "undo", "redo", "no such line",
)  # fmt: skip
_EDITS = _LINES[:-3]
Act = Callable[[Session], object]
_acts: st.SearchStrategy[Act] = st.one_of(
    st.sampled_from(_LINES).map(lambda line: lambda session: session.type_line(line)),
    st.tuples(st.integers(-3, 3), st.integers(-3, 3), st.integers(0, 2)).map(
        lambda steps: lambda session: session.move(*steps)
    ),
    st.tuples(st.integers(-3, 3), st.integers(0, 2)).map(lambda steps: lambda session: session.change_gain(*steps)),
    st.integers(-1, 5).map(lambda index: lambda session: session.select(index)),
    st.sampled_from((-1, 1)).map(lambda offset: lambda session: session.select_next(offset)),
    st.sampled_from((-1, 1)).map(lambda offset: lambda session: session.reorder(offset)),
    st.sampled_from((-1, 1)).map(lambda offset: lambda session: session.cycle_step(offset)),
    st.sampled_from(
        (
            lambda session: session.toggle_bypass(),
            lambda session: session.remove(),
            lambda session: session.undo(),
            lambda session: session.redo(),
            lambda session: session.replace_preset(bench_preset()),
            lambda session: session.replace_preset(Preset(Chain("empty", 48000.0))),
        )
    ),
)


def state(session: Session) -> tuple[Preset, int]:
    """Return what undo and redo must give back."""
    return session.preset, session.selected


def undo_all(session: Session) -> int:
    """Undo to the start; return how many steps."""
    steps = 0
    while session.can_undo:
        session.undo()
        steps += 1
    return steps


def redo_all(session: Session) -> int:
    """Redo to the end; return how many steps."""
    steps = 0
    while session.can_redo:
        session.redo()
        steps += 1
    return steps


def steps_back_and_forth(session: Session) -> tuple[bool, bool]:
    """Return whether there is something to undo, and to redo."""
    return session.can_undo, session.can_redo


def run(session: Session, acts: list[Act]) -> None:
    """Do all of them; a refusal must leave everything as it was."""
    for act in acts:
        before = state(session)
        try:
            act(session)
        except InvalidValueError:
            assert state(session) == before
        count = len(session.chain.sections)
        assert (0 <= session.selected < count) if count else session.selected == -1


@settings(STEADY, max_examples=150)
@given(presets(max_sections=3), st.lists(_acts, max_size=20))
def test_undoing_all_returns_to_the_start_and_redoing_to_the_end(preset: Preset, acts: list[Act]) -> None:
    """Preset and selection, bit for bit, after any acts."""
    session = Session(preset)
    run(session, acts)
    redo_all(session)
    end = state(session)
    steps = undo_all(session)
    assert session.preset == preset
    assert redo_all(session) == steps
    if steps:
        assert state(session) == end


@settings(STEADY, max_examples=100)
@given(presets(max_sections=3), st.lists(_acts, max_size=8), st.sampled_from(_EDITS))
def test_undo_gives_back_preset_and_selection(preset: Preset, acts: list[Act], line: str) -> None:
    """Whatever came before, one line and one undo are nothing; a line that changes nothing is no step."""
    session = Session(preset)
    run(session, acts)
    before = state(session)
    try:
        session.type_line(line)
    except TypedLineError:
        assert state(session) == before
        return
    after = state(session)
    if after == before:
        return
    assert session.undo() == "undone"
    assert state(session) == before
    assert session.redo() == "redone"
    assert state(session) == after


def test_an_edit_forgets_what_was_undone() -> None:
    """After undo, another edit leaves nothing to redo."""
    session = bench()
    session.type_line("1 q 3")
    session.undo()
    assert steps_back_and_forth(session) == (False, True)
    session.type_line("1 q 4")
    assert steps_back_and_forth(session) == (True, False)
    with pytest.raises(TypedLineError, match=r"^there is nothing to redo$"):
        session.redo()


def test_nothing_to_undo_is_said() -> None:
    """At the start, by call and by line."""
    with pytest.raises(TypedLineError, match=r"^there is nothing to undo$"):
        bench().undo()
    with pytest.raises(TypedLineError, match=r"^there is nothing to undo$"):
        bench().type_line(" Undo ")


def test_an_edit_that_changes_nothing_is_no_step() -> None:
    """It leaves undo and redo as they were, so that undo always shows something."""
    session = bench()
    session.type_line("1 q 3")
    session.undo()
    session.type_line("hum ring 0.4 s")
    assert not session.can_undo
    assert session.can_redo


def test_one_gesture_is_one_step() -> None:
    """Moves of one number are undone together, of another apart, and those without a number one by one."""
    session = bench(selected=1)
    start = session.preset
    for _ in range(5):
        session.move(1, 0, gesture=7)
    after_first = session.preset
    session.move(0, 1, gesture=8)
    session.undo()
    assert session.preset == after_first
    session.undo()
    assert session.preset == start
    assert not session.can_undo


def test_gestures_end_with_another_selection_or_an_undo() -> None:
    """The same number goes on after neither."""
    session = bench()
    session.move(1, 0, gesture=3)
    first = session.preset
    session.select(1)
    session.move(1, 0, gesture=3)
    session.undo()
    assert session.preset == first
    session.move(1, 0, gesture=3)
    session.undo()
    assert session.preset == first


def test_edits_without_a_gesture_are_steps_of_their_own() -> None:
    """Two moves, two undos."""
    session = bench()
    session.move(1, 0)
    once = session.preset
    session.move(1, 0)
    session.undo()
    assert session.preset == once


def test_history_is_bounded() -> None:
    """A thousand steps are kept; the oldest are let go."""
    session = Session(Preset(Chain("", 48000.0, (by_kind(Kind.PEAK, 1000, ("q", 1.0)),))))
    for number in range(LONGEST_HISTORY + 5):
        session.put_section(by_kind(Kind.PEAK, 1000 + number, ("q", 2.0)))
    assert undo_all(session) == LONGEST_HISTORY
    assert made_by_kind(session, 0).frequency_hz == 1004.0


def test_selection_goes_around_and_ignores_what_is_not_there() -> None:
    """Next of the last is the first, before the first the last; a wrong index changes nothing."""
    session = bench()
    session.select_next(-1)
    assert session.selected == 2
    session.select_next(1)
    assert session.selected == 0
    session.select(3)
    session.select(-1)
    assert session.selected == 0


def test_selection_follows_a_section_that_is_put_elsewhere() -> None:
    """Up, down and move keep hold of the section; the ends refuse."""
    session = bench(selected=1)
    assert session.reorder(-1) == "section 2 is now section 1"
    assert (session.selected, session.chain.sections[0].name) == (0, "hum")
    with pytest.raises(TypedLineError, match=r"^section 1 cannot be moved up: it is at the end of the chain$"):
        session.reorder(-1)
    assert session.type_line("move 1 to 3") == "section 1 is now section 3"
    assert (session.selected, session.chain.sections[2].name) == (2, "hum")
    with pytest.raises(TypedLineError, match=r"^section 3 cannot be moved down: it is at the end of the chain$"):
        session.reorder(1)


def test_selection_after_removing() -> None:
    """The next section takes its place, at the end the one before, and at last none."""
    session = bench(selected=1)
    assert session.remove() == "removed section 2"
    assert session.selected == 1
    session.remove()
    assert session.selected == 0
    session.remove()
    assert session.selected == -1
    assert session.section is None
    for act in (session.remove, session.toggle_bypass, lambda: session.move(1, 0), lambda: session.change_gain(1)):
        with pytest.raises(InvalidValueError, match=r"^the chain is empty; add a section first, such as notch 50 Hz$"):
            act()
    session.undo()
    assert session.selected == 0


def test_a_new_section_comes_after_the_selected_one() -> None:
    """It is selected, and has an identity of its own."""
    session = bench(selected=0)
    session.type_line("peak 1 kHz")
    assert session.selected == 1
    assert made_by_kind(session, 1).frequency_hz == 1000.0
    assert len({section.identity for section in session.chain.sections}) == 4


def test_identities_survive_every_edit_of_a_section() -> None:
    """By them the engine keeps what a section holds while it is moved, renamed, reordered or made free."""
    session = bench(selected=1)
    before = session.chain.sections[1].identity
    for line in ("+5 cents", "name mains", "q 9", "free", "up", "bypass"):
        session.type_line(line)
    assert session.chain.sections[0].identity == before


def test_dirty_is_relative_to_what_was_saved() -> None:
    """Undo back to the saved preset is clean; hearing numbers that were read do not count."""
    session = bench()

    def is_dirty_after(*acts: Callable[[], object]) -> bool:
        for act in acts:
            act()
        return session.is_dirty

    assert not is_dirty_after()
    assert is_dirty_after(lambda: session.type_line("1 q 2"))
    assert not is_dirty_after(session.undo)
    assert not is_dirty_after(session.redo, session.mark_saved)
    assert is_dirty_after(session.undo)
    other = Preset(Chain("other", 48000.0))
    assert not is_dirty_after(lambda: session.replace_preset(other, is_saved=True))
    assert session.selected == -1


def test_saving_what_is_no_longer_there_leaves_it_dirty() -> None:
    """A file is written while the edits go on: only what was written counts as saved."""
    session = bench()
    session.type_line("1 q 2")
    written = session.preset
    session.type_line("1 q 3")
    session.mark_saved(written)
    assert session.is_dirty
    session.undo()
    assert not session.is_dirty


def test_steps_go_from_coarse_to_fine_and_stop_there() -> None:
    """Pitch, ring and gain get finer together."""
    session = bench()
    for _ in range(9):
        session.cycle_step(-1)
    assert session.step == STEPS[0]
    sizes = [session.step] + [session.cycle_step(1) for _ in range(9)]
    assert sizes[: len(STEPS)] == list(STEPS)
    assert set(sizes[len(STEPS) :]) == {STEPS[-1]}
    assert str(STEPS[0]) == "100 cents, 10 % of ring, 3 dB"


def test_moves_are_steps_of_pitch_and_ring() -> None:
    """Twelve steps of 100 cents are an octave of the pole; a step of ring is 10 %.

    Both relative 1e-9: the pole is solved back into f0 and width through a dozen operations at a radius 5e-4 from 1.
    """
    session = bench(selected=1)
    session.cycle_step(-1)
    session.type_line("2 pole 0.9996 at 0.375 deg")
    ring_s = made_by_kind(session, 1).width
    session.move(12, 0)
    session.move(0, 1)
    moved = made_by_kind(session, 1)
    assert ring_s is not None
    assert moved.width is not None
    assert moved.width.value == pytest.approx(1.1 * ring_s.value, rel=1e-9)
    session.type_line("2 free")
    poles = made_by_hand(session, 1).poles
    assert isinstance(poles, ConjugatePair)
    assert poles.angle_rad == pytest.approx(2.0 * math.radians(0.375), rel=1e-9)


def test_gain_steps_do_not_drift() -> None:
    """Ten steps of 0.1 dB up from -6 are exactly -5."""
    session = bench()
    for _ in range(4):
        session.cycle_step(1)
    for _ in range(10):
        session.change_gain(1)
    assert made_by_kind(session, 0).gain_db == -5.0


def test_a_kind_without_a_gain_refuses_one() -> None:
    """The complaint names the kind; nothing has changed."""
    session = bench(selected=1)
    with pytest.raises(InvalidValueError, match=r"^gain_db must be left out for a notch, which has no gain of its own"):
        session.change_gain(1)
    assert not session.can_undo


def test_bypass_says_which_way() -> None:
    """There and back."""
    session = bench(selected=1)
    assert session.toggle_bypass() == "section 2 bypassed"
    assert session.toggle_bypass() == "section 2 taken back in"
