"""``tonebench devices``: what can play sound here."""

import argparse
from dataclasses import asdict

from tonebench.cli.parser import add_format_arguments
from tonebench.cli.text import clipped, write_json, write_line, write_wrapped
from tonebench.engine.devices import list_devices

DESCRIPTION = "List the devices that can play. --device takes a number or a name from this list, or silent."
EXAMPLE = "tonebench devices --json"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    add_format_arguments(parser)


def run(arguments: argparse.Namespace) -> int:
    """List the output devices, or say in one line why there are none."""
    listing = list_devices()
    if arguments.format == "json":
        write_json({"devices": [asdict(one) for one in listing.devices], "message": listing.message})
        return 0
    for one in listing.devices:
        mark = "default" if one.is_default else ""
        name = clipped(one.name, 44)
        write_line(f"{one.number:>3}  {name:<44} {one.default_sample_rate_hz:>6.0f} Hz  {mark}".rstrip())
    if listing.message:
        write_wrapped(listing.message)
    return 0
