"""A preset's text as segments, one per table header, and the lines of its keys.

A segment is a header with its keys and the comments right above it, so that a comment stays with its table when
tables are added, removed or put in another order. Text that is not touched stays byte for byte.
"""

import re
from dataclasses import dataclass

_HEADER = re.compile(r"^\s*(\[\[?)\s*([A-Za-z0-9_.\-\"' ]+?)\s*\]\]?\s*(#.*)?$")
_KEY = re.compile(r"^\s*([A-Za-z0-9_\-]+|\"[^\"]*\"|'[^']*')\s*(\.[^=]*)?=")
_TRIPLE = re.compile(r'"""|' + r"'''")


@dataclass(slots=True)
class Segment:
    """One table with the comments above it.

    Attributes
    ----------
    table : str
        First part of the header's name: ``section`` also for ``[section.more]``; empty for what comes before any.
    is_repeated : bool
        ``[[table]]``.
    lines : list of str
        With their line ends.
    first_line : int
        Number of the first line in the file, from 1.
    header_line : int
        Number of the header's line.

    """

    table: str
    is_repeated: bool
    lines: list[str]
    first_line: int
    header_line: int

    @property
    def text(self) -> str:
        """The segment as it stands in the file."""
        return "".join(self.lines)

    def line_of(self, key: str) -> int:
        """Return the line number of a key, or of the header if the key is not there."""
        for offset, line in enumerate(self.lines):
            match = _KEY.match(line)
            if match and match[1].strip("\"'") == key:
                return self.first_line + offset
        return self.header_line


def split_segments(text: str) -> list[Segment]:
    """Split a text at its table headers; joining the segments' texts gives the text back."""
    segments = [Segment("", is_repeated=False, lines=[], first_line=1, header_line=1)]
    is_inside_string = False
    for number, line in enumerate(text.splitlines(keepends=True), start=1):
        match = None if is_inside_string else _HEADER.match(line.rstrip("\r\n"))
        if len(_TRIPLE.findall(line)) % 2:
            is_inside_string = not is_inside_string
        last = segments[-1]
        if match is None or _belongs_to(match, last):
            last.lines.append(line)
            continue
        above = _comments_above(last)
        segments.append(
            Segment(
                table=_first_part(match[2]),
                is_repeated=match[1] == "[[",
                lines=[*above, line],
                first_line=number - len(above),
                header_line=number,
            )
        )
    return segments


def _belongs_to(match: re.Match[str], last: Segment) -> bool:
    """Tell whether a header such as ``[section.more]`` is part of the table above it."""
    return "." in match[2] and _first_part(match[2]) == last.table


def _first_part(name: str) -> str:
    return name.split(".", maxsplit=1)[0].strip().strip("\"'")


def _comments_above(segment: Segment) -> list[str]:
    """Take the comment lines that stand directly above a header, and the blank lines above those, off a segment."""
    start = len(segment.lines)
    while start > 0 and segment.lines[start - 1].lstrip().startswith("#"):
        start -= 1
    if segment.table == "" and start == 0:
        return []  # a comment at the very top is the file's, not the first table's
    while start > 0 and not segment.lines[start - 1].strip():
        start -= 1
    taken = segment.lines[start:]
    del segment.lines[start:]
    return taken
