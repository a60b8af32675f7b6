"""``tonebench presets``: the presets that come with the bench."""

import argparse

from tonebench.cli.listing import write_items
from tonebench.cli.parser import add_format_arguments
from tonebench.files.bundled import bundled_presets

DESCRIPTION = "List the presets that come with the bench. Any command that takes a PRESET takes these names."
EXAMPLE = "tonebench presets --json"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    add_format_arguments(parser)


def run(arguments: argparse.Namespace) -> int:
    """List the bundled presets."""
    return write_items(bundled_presets(), arguments.format)
