"""A preset's text as segments, one per table header, and the lines of its keys.

A segment is a header with its keys and the comments right above it, so that a comment stays with its table when
tables are added, removed or put in another order. Text that is not touched stays byte for byte.
"""

import re
from dataclasses import dataclass

# The first part of a header's name, and whether more parts follow. A line outside strings and brackets that begins
# with a bracket is a header, whatever is in its name.
_HEADER = re.compile(r"""^\s*(\[\[?)\s*("(?:\\.|[^"\\])*"|'[^']*'|[A-Za-z0-9_\-]+)\s*(\.)?""")
_KEY = re.compile(r"^\s*([A-Za-z0-9_\-]+|\"[^\"]*\"|'[^']*')\s*(\.[^=]*)?=")
_TOKEN = re.compile(r'"""|\'\'\'|"(?:\\.|[^"\\])*"|\'[^\']*\'|[#\[\]{}]')
# Up to two quotes may stand right before the three that close.
_CLOSING = {
    '"""': re.compile(r'(?:\\.|[^\\])*?"{3,5}', re.DOTALL),
    "'''": re.compile(r"[^\0]*?'{3,5}"),
}


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
    """Split a valid TOML text at its table headers; joining the segments' texts gives the text back."""
    segments = [Segment("", is_repeated=False, lines=[], first_line=1, header_line=1)]
    quote, depth, idle = "", 0, 0
    # Only a line feed ends a line in TOML; splitlines would end one at U+2028 inside a comment, too.
    for number, line in enumerate(re.findall(r"[^\n]*\n|[^\n]+", text), start=1):
        is_outside = not quote and depth == 0
        quote, depth = _scanned(line, quote, depth)
        match = _HEADER.match(line) if is_outside else None
        last = segments[-1]
        if match is None or (match[3] and _plain(match[2]) == last.table):  # [section.more] is part of its section
            last.lines.append(line)
            is_idle = is_outside and (not line.strip() or line.lstrip().startswith("#"))
            idle = idle + 1 if is_idle else 0
            continue
        above = _comments_above(last, idle)
        idle = 0
        first = number - len(above)
        segments.append(Segment(_plain(match[2]), match[1] == "[[", [*above, line], first, number))
    return segments


def _scanned(line: str, quote: str, depth: int) -> tuple[str, int]:
    """Return which long string and how many brackets are still open at the end of a line."""
    position = 0
    while position < len(line):
        if quote:
            closing = _CLOSING[quote].match(line, position)
            if closing is None:
                return quote, depth
            position, quote = closing.end(), ""
            continue
        token = _TOKEN.search(line, position)
        if token is None or token[0] == "#":
            break
        position = token.end()
        if token[0] in _CLOSING:
            quote = token[0]
        elif token[0] in ("[", "{"):
            depth += 1
        elif token[0] in ("]", "}"):
            depth -= 1
    return quote, depth


def _plain(name: str) -> str:
    return name.strip("\"'")


def _comments_above(segment: Segment, idle: int) -> list[str]:
    """Take the comment lines directly above a header, and the blank lines above those, off a segment.

    ``idle`` is how many of its last lines are blank or comments.
    """
    start = len(segment.lines)
    lowest = start - idle
    while start > lowest and segment.lines[start - 1].lstrip().startswith("#"):
        start -= 1
    if segment.table == "" and start == 0:
        return []  # a comment at the very top is the file's, not the first table's
    while start > lowest and not segment.lines[start - 1].strip():
        start -= 1
    taken = segment.lines[start:]
    del segment.lines[start:]
    return taken
