"""Writing to the terminal: plain text of at most 80 columns, JSON, and narration on stderr."""

import json
import math
import shutil
import sys
import textwrap
from typing import Any

COLUMNS = 80


def write_line(text: str = "") -> None:
    """Write one line of data to stdout."""
    sys.stdout.write(text + "\n")


def write_wrapped(text: str, indent: str = "") -> None:
    """Write a paragraph of data, wrapped to the columns of the terminal, never more than 80."""
    width = min(COLUMNS, shutil.get_terminal_size((COLUMNS, 24)).columns)
    first = text[: len(text) - len(text.lstrip())]
    lines = textwrap.wrap(text.strip(), max(width, 40), initial_indent=first, subsequent_indent=first + indent)
    for line in lines:
        write_line(line)


def narrate(text: str) -> None:
    """Write one line about what is going on to stderr."""
    sys.stderr.write(text + "\n")
    sys.stderr.flush()


def write_json(value: Any) -> None:
    """Write one JSON document; numbers that JSON does not have become null."""
    sys.stdout.write(json.dumps(_plain(value), indent=2, ensure_ascii=False, allow_nan=False) + "\n")


def _plain(value: Any) -> Any:
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {str(key): _plain(one) for key, one in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(one) for one in value]
    if hasattr(value, "tolist"):
        return _plain(value.tolist())
    return value


def clipped(text: str, width: int) -> str:
    """Shorten a text to a column's width, with a mark where it was cut."""
    return text if len(text) <= width else text[: max(width - 1, 0)] + "…"
