"""``python -m tests.benchmarks [PART...]``: speed and memory as ratios inside one run, never as a timed test."""

import sys
from importlib import import_module

PARTS = ("start_up", "rendering", "playing")


def main(names: list[str]) -> None:
    """Print the table of the parts named, or of all."""
    print("| what | measured | yardstick | ratio | goal | |")
    print("|---|---|---|---|---|---|")
    for name in names or PARTS:
        for row in import_module(f"tests.benchmarks.{name}").rows():
            print(row, flush=True)


if __name__ == "__main__":
    main(sys.argv[1:])
