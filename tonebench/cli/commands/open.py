"""``tonebench open``: the bench on the screen, and what arguments without a command mean."""

import argparse
import difflib
import os
import sys
from pathlib import Path

from tonebench.errors import InvalidValueError, StorageError, TonebenchError

DESCRIPTION = (
    "Open the bench on the screen. Without PRESET or clip it opens on the boathouse clip and a chain to start from; a "
    "clip alone opens with an empty chain."
)
EXAMPLE = "tonebench open boathouse --clip interview.wav"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("names", metavar="PRESET", nargs="*", help="path or bundled name; an audio file is the clip")
    parser.add_argument("--clip", metavar="FILE", help="audio file or bundled clip")
    parser.add_argument("--device", metavar="NAME|NUMBER|silent", help="see tonebench devices")


def run(arguments: argparse.Namespace) -> int:
    """Open the screen."""
    preset, clip = sort_arguments(arguments.names, arguments.clip)
    _check_terminal()
    from tonebench.screen.start import start  # noqa: PLC0415  (the drawing library, only now)

    device = arguments.device
    if device is not None and device.isdecimal():
        device = int(device)
    return start(preset, clip, device)


def sort_arguments(names: list[str], clip: str | None) -> tuple[str | None, str | None]:
    """Tell presets from clips by what the files contain.

    Returns
    -------
    preset, clip : str or None
        As they were given.

    Raises
    ------
    InvalidValueError
        If there are two of one sort, or a name is neither a file, a bundled name nor a new ``.toml`` path.

    """
    presets: list[str] = []
    clips: list[str] = [] if clip is None else [clip]
    for name in names:
        (clips if _is_clip(name) else presets).append(name)
    for sort, found in (("preset", presets), ("clip", clips)):
        if len(found) > 1:
            raise InvalidValueError(f"one {sort} at a time, got {' and '.join(found)}; leave one out")
    return (presets[0] if presets else None, clips[0] if clips else None)


def _is_clip(name: str) -> bool:
    from tonebench.cli.parser import COMMANDS  # noqa: PLC0415
    from tonebench.files.bundled import bundled_presets, sniff  # noqa: PLC0415

    path = Path(name)
    content = sniff(path)
    if content == "audio":
        return True
    if content == "preset" or path.suffix == ".toml":
        return False
    if content == "other":
        raise StorageError(f"{name} must be an audio file or a preset (TOML), and is neither; open another file")
    known = [one.name for one in bundled_presets()]
    if name in known:
        return False
    near = difflib.get_close_matches(name, [*COMMANDS, *known], n=1, cutoff=0.6)
    hint = f"did you mean {near[0]}?" if near else "see tonebench --help"
    raise InvalidValueError(f"{name} is no command, no file and no bundled preset; {hint}")


def _check_terminal() -> None:
    if os.environ.get("TERM", "") in ("dumb", ""):
        raise TonebenchError(
            "the screen needs a terminal that can place text, and TERM says it cannot (dumb or empty); use tonebench "
            "show, edit, check and play instead"
        )
    if not (sys.stdin.isatty() and sys.stdout.isatty()):
        raise TonebenchError(
            "the screen needs a terminal for input and output; use tonebench show, edit, check and play instead"
        )
