"""``tonebench clips``: the clips that come with the bench."""

import argparse

from tonebench.cli.listing import write_items
from tonebench.cli.parser import add_format_arguments
from tonebench.files.bundled import bundled_clips

DESCRIPTION = "List the clips that come with the bench. --clip takes these names, or the path of any audio file."
EXAMPLE = "tonebench clips --json"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    add_format_arguments(parser)


def run(arguments: argparse.Namespace) -> int:
    """List the bundled clips."""
    return write_items(bundled_clips(), arguments.format)
