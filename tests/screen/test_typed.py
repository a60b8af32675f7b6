"""The typed line: the screen's own words, and that all others are the session's."""

import asyncio
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from textual import events

from tests.screen.opening import make_bench, opened
from tonebench.errors import TypedLineError
from tonebench.screen.loading import clean_name
from tonebench.screen.typed import EXAMPLES, Command, quoted, read_command


def test_every_example_of_the_help_is_read() -> None:
    """What the help shows is understood."""
    for line, _ in EXAMPLES:
        command = read_command(line)
        assert command is not None
        assert command.word == line.split()[0]


def test_numbers_are_read_as_people_write_them() -> None:
    """Comma or point, with or without a unit, with the minus of typography."""
    assert read_command("level −26,5 dB") == Command("level", numbers=(-26.5,))
    assert read_command("ceiling -9dBFS") == Command("ceiling", numbers=(-9.0,))
    assert read_command("loop 2.5 s 6s") == Command("loop", numbers=(2.5, 6.0))
    assert read_command("loop off") == Command("loop")
    assert read_command("save! x.toml") == Command("save", ("x.toml",), is_forced=True)
    assert read_command("peak 320 Hz") is None


@pytest.mark.parametrize(
    ("line", "reason"),
    [
        ("level", "level is written level -26"),
        ("level -2 -3", "level is written level -26"),
        ("level loud", "got loud"),
        ("loop 3", "loop is written loop 2.5 6"),
        ("hear nothing", "hear must be followed by input, output, change, got nothing"),
        ("save a b", "save is written save FILE.toml"),
        ('save "a', "a quote is not closed"),
        ("export c", "export is written export c FILE.h"),
        ("open", "open is written open PRESET"),
    ],
)
def test_what_does_not_go_on_as_it_must_is_refused(line: str, reason: str) -> None:
    """In one sentence with the right form."""
    with pytest.raises(TypedLineError, match=reason):
        read_command(line)


@given(st.text(st.characters(exclude_characters='"', exclude_categories=["C"]), min_size=1).filter(lambda t: t.strip()))
def test_a_quoted_name_is_read_back(name: str) -> None:
    """Whatever a file is called, the line that the screen offers means that file."""
    kept = name.strip()
    command = read_command(f"save {quoted(kept)}")
    assert command is not None
    assert command.texts == (kept,)


@given(st.text())
def test_a_clean_name_is_one_line_without_what_names_may_not_hold(name: str) -> None:
    """It is never empty."""
    clean = clean_name(name)
    assert clean
    assert clean.isprintable()
    assert '"' not in clean
    assert "*/" not in clean


def test_words_of_sound_reach_the_engine() -> None:
    """Level, ceiling, loop and hear; a refused one changes nothing and stays to be mended."""

    async def run() -> None:
        async with opened() as one:
            await one.type_line("level -26")
            await one.type_line("ceiling -9")
            await one.type_line("loop 0.25 0.5")
            await one.type_line("hear change")
            assert one.engine.told[-4:] == [
                ("level", -26.0), ("ceiling", -9.0), ("loop", 12000, 24000), ("hear", "change"),
            ]  # fmt: skip
            told = len(one.engine.told)
            for line, reason in (("level 3", "between -120 and 0"), ("loop 0.5 9", "two times in order")):
                await one.type_line(line)
                assert reason in one.message
                assert one.app.typed_input.value == line
            assert len(one.engine.told) == told
            await one.press("escape")
            assert not one.app.is_typing

    asyncio.run(run())


def test_a_refused_line_stays_and_changes_nothing() -> None:
    """The session's refusals too."""

    async def run() -> None:
        async with opened() as one:
            chain = one.session.chain
            await one.type_line("notch 30000 Hz")
            assert "under half the sampling rate" in one.message
            assert one.app.is_typing
            assert one.session.chain == chain
            one.app.typed_input.value = "notch 300 Hz"
            await one.press("enter")
            assert len(one.session.chain.sections) == 4
            await one.type_line("undo")
            assert one.session.chain == chain

    asyncio.run(run())


def test_save_export_and_open(tmp_path: Path) -> None:
    """A new preset asks for a name; then S saves there; nothing is replaced without the mark."""

    async def run() -> None:
        async with opened() as one:
            preset, header = tmp_path / "my own.toml", tmp_path / "hum.h"
            await one.press("right")
            await one.type_line(f"save {quoted(str(preset))}")
            assert preset.exists()
            assert not one.session.is_dirty
            assert "*" not in one.text().splitlines()[0]
            await one.press("right")
            assert "small*" in one.text().splitlines()[0]
            before = preset.read_text(encoding="utf-8")
            await one.press("S")
            assert preset.read_text(encoding="utf-8") != before
            await one.type_line(f"export c {header}")
            assert "wrote" in one.message
            first = header.read_text(encoding="utf-8")
            await one.press("2", "right")
            await one.type_line(f"export c {header}")
            assert "already there" in one.message
            assert header.read_text(encoding="utf-8") == first
            await one.press("escape")
            await one.type_line(f"open {quoted(str(preset))}")
            assert "unsaved" in one.message
            await one.press("escape")
            await one.type_line(f"open! {quoted(str(preset))}")
            assert "opened small" in one.message
            assert not one.session.is_dirty

    asyncio.run(run())


def test_save_never_replaces_a_strange_file(tmp_path: Path) -> None:
    """Not without the exclamation mark, and only under a preset's suffix."""
    strange = tmp_path / "strange.toml"
    strange.write_text("mine", encoding="utf-8")

    async def run() -> None:
        async with opened() as one:
            await one.type_line(f"save {strange}")
            assert "save! to replace it" in one.message
            assert strange.read_text(encoding="utf-8") == "mine"
            await one.press("escape")
            await one.type_line(f"save {tmp_path / 'song.wav'}")
            assert "must end in .toml" in one.message

    asyncio.run(run())


def test_a_folder_that_cannot_be_written_is_one_sentence(tmp_path: Path) -> None:
    """The work stays, unsaved."""

    async def run() -> None:
        async with opened(make_bench(path=tmp_path / "missing" / "a.toml")) as one:
            await one.press("x", "S")
            assert "could not be written" in one.message or "does not exist" in one.message
            assert one.session.is_dirty

    asyncio.run(run())


def test_keys_typed_at_once_behind_enter_are_text() -> None:
    """A fast hand, or a paste: nothing behind Enter acts as a command, however little time the screen has had."""

    async def run() -> None:
        async with opened() as one:
            line = "peak 320 Hz -4 dB q 1.2"
            named = {" ": "space", "-": "minus", ".": "full_stop"}
            one.app.post_message(events.Key("enter", None))
            for character in line:
                one.app.post_message(events.Key(named.get(character, character), character))
            await one.settled()
            assert one.app.typed_input.value == line

    asyncio.run(run())
