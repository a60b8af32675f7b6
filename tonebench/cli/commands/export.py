"""``tonebench export``: coefficients and code for a build."""

import argparse
from pathlib import Path

from tonebench.builds import export_text
from tonebench.cli.text import narrate, write_line
from tonebench.errors import StorageError
from tonebench.files.atomic import write_text_atomically
from tonebench.files.bundled import find_preset
from tonebench.files.presets import load_preset
from tonebench.target.arithmetic import parse_target

DESCRIPTION = (
    "Write the chain of PRESET in the target's structure and arithmetic. An unstable chain is refused unless --force, "
    "and then says so in the file."
)
EXAMPLE = "tonebench export boathouse-clean --to c -o hum.h"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("preset", metavar="PRESET", help="path or bundled name")
    parser.add_argument("--to", metavar="LANGUAGE", default="c", help="language: c (default)")
    parser.add_argument("-o", "--output", metavar="FILE", required=True, help="file to write; - for stdout")
    parser.add_argument("--target", metavar="NAME", help="arithmetic instead of the preset's, such as f64/tdf2")
    parser.add_argument("--prefix", metavar="NAME", default="", help="of every exported name")
    parser.add_argument("--force", action="store_true", help="overwrite what is there; export an unstable chain")


def run(arguments: argparse.Namespace) -> int:
    """Write one export."""
    preset = load_preset(find_preset(arguments.preset)).preset
    target = parse_target(arguments.target) if arguments.target else preset.target
    text = export_text(preset.chain, target, arguments.to, arguments.prefix, is_forced=arguments.force)
    if arguments.output == "-":
        write_line(text.rstrip("\n"))
        return 0
    path = Path(arguments.output)
    if path.exists() and not arguments.force:
        raise StorageError(f"{path} is already there; give --force to overwrite it, or another -o")
    write_text_atomically(path, text)
    narrate(f"wrote {path}: {len(preset.chain.active_sections)} sections, {target}")
    return 0
