"""``tonebench play``: hear a preset without the screen."""

import argparse

from tonebench.cli.playing import play

DESCRIPTION = (
    "Play a clip, looped, through the chain of PRESET until --seconds have passed or Ctrl-C. Sound starts at -20 dB "
    "and fades in; raise --level only after you have heard it. --watch reloads the preset whenever another program "
    "saves it and prints a line per change."
)
EXAMPLE = "tonebench play boathouse --clip interview.wav --seconds 10 --hear change"
START_LEVEL_DB = -20.0


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("preset", metavar="PRESET", help="path or bundled name")
    parser.add_argument("--clip", metavar="FILE", help="audio file or bundled clip (default: one that suits)")
    parser.add_argument("--seconds", metavar="S", type=float, help="stop after this long")
    parser.add_argument("--level", metavar="DB", type=float, default=START_LEVEL_DB, help="at most 0; default -20")
    parser.add_argument("--hear", choices=("input", "output", "change"), default="output", help="default: output")
    parser.add_argument("--device", metavar="NAME|NUMBER|silent", help="see tonebench devices")
    parser.add_argument("--capture", metavar="OUT.wav", help="write exactly what left the guard; never overwrites")
    parser.add_argument("--watch", action="store_true", help="reload the preset when it is saved")


def run(arguments: argparse.Namespace) -> int:
    """Play."""
    return play(arguments)
