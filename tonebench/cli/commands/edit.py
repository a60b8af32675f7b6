"""``tonebench edit``: the screen's typed line without a screen."""

import argparse
from pathlib import Path

from tonebench.cli.text import narrate, write_line
from tonebench.core.chain import Chain
from tonebench.errors import StorageError
from tonebench.files.bundled import find_preset, is_bundled
from tonebench.files.presets import LoadedPreset, load_preset, save_preset
from tonebench.session.preset import Preset
from tonebench.session.session import Session

DESCRIPTION = (
    "Apply each typed line to PRESET in order and save it. If one is refused nothing is saved. A PRESET path that does "
    "not exist becomes a new preset; a bundled preset is copied to the file given with -o."
)
EXAMPLE = 'tonebench edit hum.toml "notch 50.02 Hz radius 0.9995" "1 name hum"'


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("preset", metavar="PRESET", help="path or bundled name")
    parser.add_argument("lines", metavar="LINE", nargs="+", help='a typed line, such as "2 +1.5 dB"')
    parser.add_argument("-o", "--output", metavar="FILE", help="save there instead of over PRESET")
    parser.add_argument("--force", action="store_true", help="overwrite the file given with -o")


def run(arguments: argparse.Namespace) -> int:
    """Apply the lines, say what each did, and save once."""
    loaded = load_or_new(arguments.preset)
    destination = Path(arguments.output) if arguments.output else loaded.path
    if destination is None or (not arguments.output and is_bundled(destination)):
        raise StorageError(f"{arguments.preset} comes with the bench and stays as it is; give -o FILE for your copy")
    if arguments.output and destination.exists() and not arguments.force:
        raise StorageError(f"{destination} is already there; give --force to overwrite it, or another -o")
    session = Session(loaded.preset)
    answers = [session.type_line(line) for line in arguments.lines]
    like = loaded.path.read_text(encoding="utf-8") if loaded.path and loaded.path.exists() else None
    save_preset(session.preset, destination, like=like)
    for answer in answers:
        write_line(answer)
    narrate(f"saved {destination}")
    return 0


def load_or_new(name: str) -> LoadedPreset:
    """Load a preset, or start a new one where a ``.toml`` path does not exist."""
    path = Path(name)
    if path.suffix == ".toml" and not path.exists():
        return LoadedPreset(Preset(Chain(path.stem, 48000.0)), path, ())
    return load_preset(find_preset(name))
