"""The grammar of the command line: commands, their options, and what an argument that is no command means.

Only the command that was named is imported, so that ``tonebench --help`` loads nothing but argparse.
"""

import argparse
import sys

from tonebench import __version__

COMMANDS = {
    "open": "open the bench on the screen (the default)",
    "play": "play a clip through a preset's chain",
    "check": "list the findings of a chain in its target's arithmetic",
    "show": "print chain, poles, zeros and response",
    "edit": "apply typed lines to a preset",
    "render": "write audio files through a preset's chain",
    "export": "write the chain as code for a build",
    "presets": "list the presets that come with the bench",
    "clips": "list the clips that come with the bench",
    "devices": "list the devices that can play",
}

_DESCRIPTION = """\
Shape a chain of second-order filter sections by pole radius and angle, hear it,
be warned about its arithmetic, and export it to a build. Without a command,
opens the bench on the boathouse clip.
"""
_EPILOG = """\
arguments that are no command are opened by what they contain:
  tonebench RECORDING.wav        the recording, with an empty chain
  tonebench NAME.toml            a preset; a new one if the file does not exist
  tonebench NAME.toml REC.wav    both

exit codes: 0 fine, 1 findings at or above the chosen severity, 2 bad input

example:
  tonebench boathouse --clip interview.wav
"""


class Parser(argparse.ArgumentParser):
    """An argument parser whose complaint is one line that says what to do."""

    commands: "tuple[Parser, ...]" = ()  # the parsers below this one: it reports what they do not know

    def options(self) -> list[str]:
        """Return every option of this parser."""
        return [option for action in self._actions for option in action.option_strings]

    def error(self, message: str):  # type: ignore[no-untyped-def]  # noqa: ANN201  (NoReturn would load typing)
        """Print one line and leave with exit code 2."""
        hint = self._did_you_mean(message)
        text = f"{self.prog}: {' '.join(message.split())}{hint}; see {self.prog} --help"
        sys.stderr.write(text + "\n")
        raise SystemExit(2)

    def _did_you_mean(self, message: str) -> str:
        """Suggest the option closest to one that argparse did not know."""
        import difflib  # noqa: PLC0415  (only for the unlucky)

        known = [option for parser in (self, *self.commands) for option in parser.options()]
        for word in message.split():
            near = difflib.get_close_matches(word.partition("=")[0], known, n=1, cutoff=0.6)
            if word.startswith("--") and near and near[0] != word:
                return f"; did you mean {near[0]}?"
        return ""


def build_parser(command: str | None) -> argparse.ArgumentParser:
    """Return the parser, with the options of one command only."""
    parser = Parser(
        prog="tonebench",
        description=_DESCRIPTION,
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"tonebench {__version__}")
    subparsers = parser.add_subparsers(metavar="COMMAND", dest="command", parser_class=Parser)
    for name, words in COMMANDS.items():
        if name != command:
            subparsers.add_parser(name, help=words, add_help=False)
            continue
        from textwrap import fill  # noqa: PLC0415  (argparse loads it too, but only when it must)

        module = _command_module(name)
        chosen = subparsers.add_parser(
            name,
            help=words,
            description=fill(module.DESCRIPTION, 78),
            epilog=f"example:\n  {module.EXAMPLE}",
            formatter_class=argparse.RawDescriptionHelpFormatter,
            allow_abbrev=False,
        )
        module.add_arguments(chosen)
        chosen.set_defaults(run=module.run)
        parser.commands = (chosen,)
    return parser


def _command_module(name: str):  # type: ignore[no-untyped-def]  # noqa: ANN202  (a module; its type would load types)
    from importlib import import_module  # noqa: PLC0415

    return import_module(f"tonebench.cli.commands.{name}")


def parse(arguments: list[str]) -> argparse.Namespace:
    """Parse arguments; those that start with no command are for ``open``.

    A word that is neither a file nor a bundled name is refused by ``open`` itself, which can look.
    """
    is_general = bool(arguments) and arguments[0] in ("-h", "--help", "--version")
    if is_general:
        return build_parser(None).parse_args(arguments)
    given = arguments if arguments and arguments[0] in COMMANDS else ["open", *arguments]
    return build_parser(given[0]).parse_args(given)


def add_format_arguments(parser: argparse.ArgumentParser) -> None:
    """Add ``--format text|json`` and its short form ``--json``."""
    parser.add_argument("--format", choices=("text", "json"), default="text", help="text (default) or json")
    parser.add_argument("--json", dest="format", action="store_const", const="json", help="short for --format json")
