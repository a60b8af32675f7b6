"""Actions on files and the typed line: save, open, export, type, quit.

Whatever may take long (hearing numbers on save, a long clip on open) runs in a thread; the screen stays alive.
"""

from pathlib import Path
from typing import TYPE_CHECKING

from tonebench.errors import TonebenchError
from tonebench.screen.actions_edit import EditActions
from tonebench.screen.actions_sound import SoundActions
from tonebench.screen.typed import Command, quoted, read_command

if TYPE_CHECKING:
    from textual.widgets import Input

    from tonebench.files.presets import LoadedPreset
    from tonebench.screen.bench import Bench


class FileActions(EditActions, SoundActions):
    """What the keys of the group Keep do."""

    def action_type(self) -> None:
        """Open the typed line."""
        if self.ready() is not None:
            self.open_typed("", "for example: notch 50 Hz radius 0.9995 (? lists more). Enter does it, Esc leaves")

    def action_save(self) -> None:
        """Save, or ask for a name."""
        bench = self.ready()
        if bench is None:
            return
        if bench.path is not None:
            self._save(bench, None, is_forced=False)
        else:
            words = "this preset has no file of its own yet: Enter saves it under this name"
            self.open_typed(f"save {quoted(bench.suggested)}", words)

    def action_export(self) -> None:
        """Open the typed line with an export to begin from."""
        bench = self.ready()
        if bench is None:
            return
        exports = bench.session.preset.exports
        language, file = (exports[0].to, exports[0].file) if exports else ("c", f"{Path(bench.suggested).stem}.h")
        self.open_typed(f"export {language} {quoted(file)}", "Enter exports this chain for the build; Esc leaves")

    def on_input_submitted(self, event: "Input.Submitted") -> None:
        """Do what was typed; a refused line stays to be mended."""
        event.stop()
        text = event.value.strip()
        if not text or self._typed(text):
            self.close_typed()

    def _typed(self, text: str) -> bool:
        bench = self.ready()
        if bench is None:
            return False
        try:
            command = read_command(text)
            if command is not None:
                return self._do(bench, command)
        except TonebenchError as error:
            self.complain(error)
            return False
        return self.attempt(lambda bench: bench.session.type_line(text), is_edit=True)

    def _do(self, bench: "Bench", command: Command) -> bool:
        if command.word == "save":
            return self._save(bench, Path(command.texts[0]) if command.texts else None, is_forced=command.is_forced)
        if command.word == "open":
            return self._open(bench, command.texts[0], is_forced=command.is_forced)
        if command.word == "export":
            language, path = command.texts[0], Path(command.texts[1])
            return self.attempt(lambda bench: bench.export(language, path, is_forced=command.is_forced))
        if command.word == "quit":
            self.close_typed()
            self._quit(is_forced=command.is_forced)
            return True
        return self.attempt(lambda bench: self._sound(bench, command))

    def _sound(self, bench: "Bench", command: Command) -> str:
        if command.word == "level":
            return f"level {bench.set_level(command.numbers[0]):g} dB"
        if command.word == "ceiling":
            bench.engine.set_ceiling_db(command.numbers[0])
            return f"ceiling {command.numbers[0]:g} dBFS: nothing louder leaves"
        if command.word == "loop":
            return bench.set_loop(command.numbers)
        return self.hear(bench, command.texts[0])

    def _save(self, bench: "Bench", path: Path | None, *, is_forced: bool) -> bool:
        """Save in a thread: the hearing numbers of a long ring take a while."""
        if path is not None and not is_forced and path != bench.path and path.exists():
            self.complain(f"{path} is already there; type save! to replace it, or another name")
            return False
        if path is not None and path.suffix != ".toml":
            self.complain(f"a preset's name must end in .toml, got {path.name}; type save {path.name}.toml")
            return False
        self.say("saving …")
        self.in_thread(lambda: bench.save(path, is_forced=is_forced), self._saved)
        return True

    def _saved(self, sentence: str) -> None:
        self.say(sentence)
        self.show_status()

    def _open(self, bench: "Bench", name: str, *, is_forced: bool) -> bool:
        if bench.session.is_dirty and not is_forced:
            self.complain("there is unsaved work: S saves it, or type open! to leave it behind")
            return False
        self.say(f"opening {name} …")
        self.in_thread(lambda: _load(name), lambda loaded: self._opened(bench, name, loaded))
        return True

    def _opened(self, bench: "Bench", name: str, loaded: "LoadedPreset") -> None:
        from tonebench.screen.loading import place  # noqa: PLC0415

        self.settle()
        bench.session.replace_preset(loaded.preset, is_saved=True)
        bench.notes = loaded.notes
        place(bench, loaded, name)
        self.show_loaded()
        words = (f"opened {bench.session.chain.name}", *bench.notes, bench.rate_words(), bench.hearing_words())
        self.say(". ".join(one.rstrip(".") for one in words if one))
        self.show_status()

    def show_loaded(self) -> None:
        """Draw another preset."""

    async def action_quit(self) -> None:
        """Leave; with unsaved work, say so once."""
        self._quit(is_forced=False)

    def _quit(self, *, is_forced: bool) -> None:
        bench = self.bench
        self.settle()
        if bench is not None and bench.session.is_dirty and not (is_forced or self.wants_to_quit):
            self.wants_to_quit = True
            self.say("there is unsaved work: S saves it; q once more leaves without it")
            return
        if bench is not None:
            bench.engine.stop()  # silence first: the engine itself is closed when the screen is gone
        self.exit()


def _load(name: str) -> "LoadedPreset":
    from tonebench.files.bundled import find_preset  # noqa: PLC0415
    from tonebench.files.presets import load_preset  # noqa: PLC0415

    return load_preset(find_preset(name))
