"""``tonebench render``: audio files through a chain."""

import argparse
from pathlib import Path

from tonebench.cli.progress import Progress
from tonebench.cli.text import narrate
from tonebench.core.rates import at_rate
from tonebench.engine.render import render_file
from tonebench.errors import InvalidValueError, StorageError
from tonebench.files.bundled import find_clip, find_preset
from tonebench.files.clips import read_blocks
from tonebench.files.presets import load_preset

DESCRIPTION = (
    "Write each INPUT through the chain of PRESET as a 32-bit float WAV of the same length and rate. With two inputs "
    "or more OUT is a folder. Nothing is overwritten without --force."
)
EXAMPLE = "tonebench render boathouse-clean interview.wav -o interview-clean.wav"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("preset", metavar="PRESET", help="path or bundled name")
    parser.add_argument("inputs", metavar="INPUT", nargs="+", help="audio file or bundled clip")
    parser.add_argument("-o", "--output", metavar="OUT", required=True, help="WAV file, or folder for several inputs")
    parser.add_argument("--force", action="store_true", help="overwrite what is there")


def run(arguments: argparse.Namespace) -> int:
    """Render every input; the first failure stops, and what was already written stays."""
    loaded = load_preset(find_preset(arguments.preset))
    for note in loaded.notes:
        narrate(f"note: {note}")
    chain = loaded.preset.chain
    sources = [find_clip(one) for one in arguments.inputs]
    for source, destination in pair_outputs(sources, Path(arguments.output)):
        with read_blocks(source, 1) as blocks:
            rate_hz, frames = blocks.sample_rate_hz, blocks.frames
        if rate_hz != chain.sample_rate_hz:
            narrate(f"{source.name} has {rate_hz:g} Hz: the chain runs at that rate, Hz and seconds kept")
            for number, loss in at_rate(chain, rate_hz).lost:
                narrate(f"section {number}: {loss}")
        with Progress(source.name, frames) as progress:
            render_file(chain, source, destination, is_forced=arguments.force, tell_frames=progress.advance)
        narrate(f"wrote {destination}")
    return 0


def pair_outputs(sources: list[Path], output: Path) -> list[tuple[Path, Path]]:
    """Return each source with its destination, and make the folder that several inputs need.

    Raises
    ------
    InvalidValueError
        If two inputs would write the same file, or an input would write over itself.
    StorageError
        If the folder cannot be made.

    """
    if len(sources) == 1 and not output.is_dir():
        pairs = [(sources[0], output)]
    else:
        try:
            output.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise StorageError(
                f"{output} must be a folder for several inputs: {error.strerror}; choose another OUT"
            ) from error
        pairs = [(source, output / f"{source.stem}.wav") for source in sources]
    seen: dict[Path, Path] = {}
    for source, destination in pairs:
        if destination in seen:
            raise InvalidValueError(f"{seen[destination]} and {source} would both write {destination}; rename one")
        if destination.exists() and destination.resolve() == source.resolve():
            raise InvalidValueError(f"{source} would be written over itself; choose another OUT")
        seen[destination] = source
    return pairs
