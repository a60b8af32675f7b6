"""Every key does what the help says, seen in the session, the engine and the message line."""

import asyncio
import math
from collections.abc import Awaitable, Callable
from dataclasses import replace

import pytest

from tests.screen.opening import Opened, make_bench, opened
from tonebench.core.chain import Chain
from tonebench.core.design import realise
from tonebench.core.kinds import Width, WidthKey
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import ByKind
from tonebench.core.widths import ring_from_radius
from tonebench.screen.keys import KEYS, help_rows
from tonebench.screen.reading import ReadingScreen


def pole(one: Opened) -> tuple[float, float]:
    """Return angle in radians and ring in seconds of the selected section's pole."""
    section = one.session.section
    assert section is not None
    poles = realise(section, 48000.0).poles
    assert isinstance(poles, ConjugatePair)
    return poles.angle_rad, ring_from_radius(poles.radius, 48000.0)


async def _pitch(one: Opened) -> None:
    angle, ring = pole(one)
    await one.press("right", "right", "left")
    # One step of 10 cents; the ring is kept. Both are solved back into f0 and radius in double precision.
    assert pole(one) == pytest.approx((angle * 2 ** (10 / 1200), ring), rel=1e-9)


async def _ring(one: Opened) -> None:
    angle, ring = pole(one)
    await one.press("up", "up", "down")
    assert pole(one) == pytest.approx((angle, ring * 1.1), rel=1e-9)  # one step of 10 %, as above


async def _gain(one: Opened) -> None:
    await one.press("2", "equals_sign", "equals_sign", "plus", "minus")
    assert one.session.chain.sections[1].gain_db == pytest.approx(-2.0, abs=1e-9)  # -4 dB and two steps of 1 dB


async def _step(one: Opened) -> None:
    before = one.session.step.pitch_cents
    await one.press("right_square_bracket")
    assert one.session.step.pitch_cents < before
    assert f"{one.session.step.pitch_cents:g} cents" in one.text().splitlines()[0]
    await one.press("left_square_bracket")
    assert one.session.step.pitch_cents == before


async def _sections(one: Opened) -> None:
    await one.press("tab")
    assert one.session.selected == 1
    await one.press("shift+tab", "shift+tab")
    assert one.session.selected == 2
    await one.press("1")
    assert one.session.selected == 0
    await one.press("9")
    assert one.session.selected == 0
    assert one.message == "there is no section 9: the chain has 3"


async def _add(one: Opened) -> None:
    await one.press("a")
    assert one.app.is_typing
    await one.press("enter")
    assert [section.kind.value for section in one.session.chain.sections[:2]] == ["notch", "peak"]
    assert len(one.session.chain.sections) == 4
    await one.press("a", *"notch", "space", *"90", "enter")
    added = one.session.section
    assert added is not None
    assert added.kind.value == "notch"
    assert not one.app.is_typing


async def _remove(one: Opened) -> None:
    await one.press("x")
    assert [section.kind.value for section in one.session.chain.sections] == ["peak", "low shelf"]


async def _bypass(one: Opened) -> None:
    await one.press("b")
    assert one.session.chain.sections[0].is_bypassed
    assert "bypassed" in one.text()
    assert len(one.engine.coefficients[-1].rows) == 2
    await one.press("b")
    assert not one.session.chain.sections[0].is_bypassed


async def _reorder(one: Opened) -> None:
    await one.press("greater_than_sign")
    assert one.session.selected == 1
    assert one.session.chain.sections[1].kind.value == "notch"
    await one.press("less_than_sign")
    assert one.session.chain.sections[0].kind.value == "notch"


async def _undo(one: Opened) -> None:
    chain = one.session.chain
    await one.press("x")
    await one.press("u")
    assert one.session.chain == chain
    await one.press("U")
    assert len(one.session.chain.sections) == 2
    await one.press("u", "u")
    assert one.message == "there is nothing to undo"


async def _play(one: Opened) -> None:
    assert ("play", "playing") not in one.engine.told
    await one.press("space")
    assert one.engine.now.phase == "playing"
    assert "playing" in one.text().splitlines()[0]
    await one.press("space")
    assert one.engine.now.phase == "stopped"


async def _mute(one: Opened) -> None:
    await one.press("m")
    assert one.engine.now.is_muted
    await one.press("m")
    assert not one.engine.now.is_muted


async def _hear(one: Opened) -> None:
    for key, what in (("i", "input"), ("d", "change"), ("o", "output")):
        await one.press(key)
        assert one.engine.now.hear == what


async def _level(one: Opened) -> None:
    await one.press("left_curly_bracket", "left_curly_bracket", "right_curly_bracket")
    assert one.engine.now.level_db == -21.0


async def _peak(one: Opened) -> None:
    await one.press("p")
    # The clip's hum is at 50.2 Hz; the search is good to a small part of the 1 Hz that 1 s of clip resolves. Of a
    # notch it is the zero that must lie there; its pole lies lower.
    assert one.bench.working_frequency_hz() == pytest.approx(50.2, abs=0.05)
    assert pole(one)[0] * 48000.0 / (2.0 * math.pi) < one.bench.working_frequency_hz()
    assert "Hz" in one.message
    assert "dBFS" in one.message
    assert "dB over its surroundings" in one.message


async def _findings(one: Opened) -> None:
    one.app.findings_panel.show([], "f32/tdf2")
    await one.press("f")
    assert one.message == "no findings so far"
    await one.press("2", "right")
    await one.pilot.pause(0.3)
    await one.settled()
    await one.press("f")
    assert isinstance(one.app.screen, ReadingScreen) == bool(one.app.findings_panel.findings)


async def _help(one: Opened) -> None:
    await one.press("question_mark")
    assert isinstance(one.app.screen, ReadingScreen)
    assert "play or stop" in one.text()
    await one.press("m")
    assert one.engine.now.is_muted
    await one.press("escape")
    assert not isinstance(one.app.screen, ReadingScreen)


async def _cancel(one: Opened) -> None:
    await one.press("enter", "x", "escape")
    assert not one.app.is_typing
    assert len(one.session.chain.sections) == 3


async def _type(one: Opened) -> None:
    await one.press("enter", *"2", "space", *"q", "space", *"3", "enter")
    made = one.session.chain.sections[1].made
    assert isinstance(made, ByKind)
    assert made.width == Width(WidthKey.Q, 3.0)
    assert not one.app.is_typing


async def _export(one: Opened) -> None:
    await one.press("e")
    assert one.app.typed_input.value == "export c preset.h"
    await one.press("escape")


async def _save(one: Opened) -> None:
    await one.press("S")
    assert one.app.typed_input.value == "save preset.toml"
    await one.press("escape")


async def _quit(one: Opened) -> None:
    await one.press("x")
    await one.press("q")
    assert one.app.is_running
    assert "unsaved" in one.message
    await one.press("q")
    assert ("stop", "stopped") in one.engine.told
    assert one.app._exit


CASES: dict[str, Callable[[Opened], Awaitable[None]]] = {
    "pitch": _pitch, "ring": _ring, "gain": _gain, "step": _step, "section": _sections, "number": _sections,
    "add": _add, "remove": _remove, "bypass": _bypass, "reorder": _reorder, "undo": _undo, "redo": _undo,
    "play": _play, "mute": _mute, "hear": _hear, "level": _level, "peak": _peak, "findings": _findings,
    "help": _help, "cancel": _cancel, "type": _type, "export": _export, "save": _save, "quit": _quit,
}  # fmt: skip


@pytest.mark.parametrize("name", [name for name in CASES if name not in ("number", "redo")])
def test_key_does_what_the_help_says(name: str) -> None:
    """Each action of the table, by its keys."""

    async def run() -> None:
        async with opened() as one:
            await CASES[name](one)

    asyncio.run(run())


def test_every_key_of_the_table_has_a_case() -> None:
    """A new key cannot come without a test; g is tested with the layouts."""
    actions = {key.action.split("(")[0] for key in KEYS}
    assert actions - {"chart"} == set(CASES)


def test_help_names_every_key() -> None:
    """No key is missing in the help."""
    shown = {row[0] for _, rows in help_rows() for row in rows}
    assert {key.shown for key in KEYS if not key.shown.isdigit()} | {"1 to 9"} == shown


def test_a_run_of_arrows_is_one_undo_step() -> None:
    """Twenty presses, one undo; another section or another sort of key begins a new step."""

    async def run() -> None:
        async with opened() as one:
            chain = one.session.chain
            await one.press(*["right"] * 12, *["up"] * 8)
            assert one.session.chain != chain
            await one.press("u")
            assert one.session.chain == chain
            assert not one.session.can_undo
            await one.press("2", "right", "equals_sign")
            await one.press("u")
            assert one.session.chain != chain
            await one.press("u")
            assert one.session.chain == chain

    asyncio.run(run())


def test_no_arrow_of_a_flood_is_lost() -> None:
    """Arrow presses faster than the tick are added up, and an action after them sees them all."""

    async def run() -> None:
        async with opened() as one:
            angle, _ = pole(one)
            for _ in range(100):
                one.app.action_pitch(1)
            one.app.action_bypass()
            assert pole(one)[0] == pytest.approx(angle * 2 ** (100 * 10 / 1200), rel=1e-9)
            pushes = len(one.engine.coefficients)
            assert pushes <= 2  # the run as one edit, and the bypass

    asyncio.run(run())


def test_letters_go_to_the_open_line_only() -> None:
    """While typing, keys write; nothing else happens."""

    async def run() -> None:
        async with opened() as one:
            chain = one.session.chain
            await one.press("enter", *"xbqmu", "tab", "space")
            assert one.session.chain == chain
            assert one.session.selected == 0
            assert one.app.typed_input.value == "xbqmu "
            assert one.engine.now.phase == "stopped"

    asyncio.run(run())


def test_guard_is_rearmed_by_space() -> None:
    """A tripped guard is told in words, and Space takes it back in."""

    async def run() -> None:
        async with opened() as one:
            await one.press("space")
            one.engine.now = replace(one.engine.now, guard="tripped", guard_reason="over +30 dBFS for 10 ms")
            one.app.look()
            await one.settled()
            assert "GUARD TRIPPED" in one.text().splitlines()[0]
            assert "over +30 dBFS for 10 ms" in one.message
            await one.press("space")
            assert ("rearm", "idle") in one.engine.told
            assert ("stop", "stopped") not in one.engine.told

    asyncio.run(run())


def test_empty_chain_refuses_in_words() -> None:
    """Keys on an empty chain say what to do, and change nothing."""

    async def run() -> None:
        async with opened(make_bench(Chain("empty", 48000.0))) as one:
            for key in ("right", "x", "b", "p", "minus", "tab", "less_than_sign"):
                await one.press(key)
                assert "empty" in one.message
            assert one.session.chain.sections == ()

    asyncio.run(run())


def test_an_unforeseen_error_in_a_thread_takes_no_work_with_it(monkeypatch: pytest.MonkeyPatch) -> None:
    """It is told in words; the screen goes on, the edit stays, and findings are looked for again."""

    def fall_over(*_: object) -> None:
        raise ZeroDivisionError("by hand")

    async def run() -> None:
        async with opened() as one:
            with monkeypatch.context() as patched:
                patched.setattr("tonebench.target.check.check_chain", fall_over)
                await one.press("x")
                await one.pilot.pause(0.3)
                await one.settled()
                assert "internal error (ZeroDivisionError: by hand)" in one.message
            assert one.session.is_dirty
            await one.press("b")
            await one.pilot.pause(0.3)
            await one.settled()
            assert "…" not in str(one.app.findings_panel.border_title)

    asyncio.run(run())


def test_findings_are_those_of_the_newest_chain() -> None:
    """Edits while a thread is at work are not lost, and older findings are never shown as new."""

    async def run() -> None:
        async with opened() as one:
            for _ in range(5):
                await one.press("right")
            await one.type_line("free poles 1.001 at 7.5 deg")
            assert str(one.app.findings_panel.border_title).endswith("…")
            for _ in range(100):
                await one.pilot.pause(0.02)
                if not one.app.findings_panel._is_pending:
                    break
            worst = one.app.findings_panel.findings[0]
            assert worst.severity == "danger"
            assert worst.section == 2

    asyncio.run(run())
