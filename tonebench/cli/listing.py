"""How bundled presets and clips are listed."""

import textwrap
from collections.abc import Sequence

from tonebench.cli.text import write_json, write_line
from tonebench.files.bundled import BundledItem

_NAME_COLUMNS = 16


def write_items(items: Sequence[BundledItem], output_format: str) -> int:
    """Write one line per item, its description wrapped beside the name; or JSON with name, path, description."""
    if output_format == "json":
        write_json([{"name": one.name, "path": str(one.path), "description": one.description} for one in items])
        return 0
    for item in items:
        lines = textwrap.wrap(item.description, 80 - _NAME_COLUMNS) or [""]
        write_line(f"{item.name:<{_NAME_COLUMNS}}{lines[0]}".rstrip())
        for line in lines[1:]:
            write_line(" " * _NAME_COLUMNS + line)
    return 0
