"""The chain's list: one row per section, the selected one marked by > and kept in sight, bypassed ones in words."""

from collections.abc import Sequence
from dataclasses import dataclass

from textual import events
from textual.content import Content
from textual.message import Message

from tonebench.screen.panels.panel import Panel, cut, wrap

_LONGEST_NAME = 12
_EMPTY = "no sections yet: press a to add one, or Enter and type, for example notch 50 Hz"


@dataclass(frozen=True, slots=True)
class ChainRow:
    """What the list shows of one section."""

    number: int
    name: str
    kind: str
    frequency: str
    gain: str
    ring: str
    is_bypassed: bool = False
    note: str = ""

    @property
    def last(self) -> str:
        """The last column: bypassed stands in place of the ring, since nothing rings then."""
        words = "bypassed" if self.is_bypassed else self.ring
        return f"{words} {self.note}".strip()


class ChainPanel(Panel):
    """The list of sections."""

    BORDER_TITLE = "chain"

    class Chosen(Message):
        """A row was clicked."""

        def __init__(self, index: int) -> None:
            super().__init__()
            self.index = index

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - Textual's name for it
        super().__init__(id=id)
        self._rows: tuple[ChainRow, ...] | None = None
        self._selected = -1
        self._first = 0

    def show(self, rows: Sequence[ChainRow], selected: int) -> None:
        """Show other rows."""
        self._rows, self._selected = tuple(rows), selected
        self.paint()

    def draw(self, width: int, height: int) -> Content:
        """Draw a row of headings and the sections in sight, in columns."""
        if self._rows is None:
            return Content(self.spell("loading …"))
        if not self._rows:
            self.set_title("chain")
            return Content("\n".join(wrap(_EMPTY, width)))
        room = max(height - 1, 1)
        self._scroll(room)
        visible = self._rows[self._first : self._first + room]
        count = len(self._rows)
        is_cut = count > room
        self.set_title(f"chain, {self._first + 1}–{self._first + len(visible)} of {count}" if is_cut else "chain")
        heading, *lines = columns(visible, self._selected, width)
        parts = [Content.styled(self.spell(heading), "dim")] if height > 1 else []
        for row, line in zip(visible, lines, strict=True):
            is_selected = row.number - 1 == self._selected
            style = "bold" if is_selected else "dim" if row.is_bypassed else ""
            parts.append(Content.styled(self.spell(line), style))
        return Content("\n").join(parts)

    def _scroll(self, room: int) -> None:
        count = len(self._rows or ())
        self._first = min(max(self._first, self._selected - room + 1), max(self._selected, 0))
        self._first = max(0, min(self._first, count - room))

    def on_click(self, event: events.Click) -> None:
        """Tell which row was clicked."""
        offset = event.get_content_offset(self)
        if offset is None or not self._rows:
            return
        index = self._first + offset.y - 1
        if self._first <= index < len(self._rows):
            self.post_message(self.Chosen(index))


def columns(rows: Sequence[ChainRow], selected: int, width: int) -> list[str]:
    """Return the headings and one line per row, columns aligned.

    Where it is too wide, gaps of two become one, then the names go, then the kinds are cut.
    """
    table = _cells(rows, selected)
    for gap, has_names in (("  ", True), (" ", True), (" ", False)):
        lines = _aligned(table, gap, 1 if has_names else 0)
        if max(len(line) for line in lines) <= width:
            return lines
    excess = max(len(line) for line in lines) - width
    kind_width = max(max(len(cells[2]) for cells in table) - excess, 5)
    return [cut(line, width) for line in _aligned([[*c[:2], cut(c[2], kind_width), *c[3:]] for c in table], " ", 0)]


def _cells(rows: Sequence[ChainRow], selected: int) -> list[list[str]]:
    """Return headings and rows as cells: mark and number, name, kind, frequency, gain, ring."""
    digits = max(len(str(row.number)) for row in rows)
    has_names, has_gains = any(row.name for row in rows), any(row.gain for row in rows)
    table = [[" " + " " * digits, "name" if has_names else "", "kind", "f0", "gain" if has_gains else "", "ring"]]
    for row in rows:
        mark = ">" if row.number - 1 == selected else " "
        name = cut(row.name, _LONGEST_NAME)
        table.append([f"{mark}{row.number:>{digits}}", name, row.kind, row.frequency, row.gain, row.last])
    return table


def _aligned(table: Sequence[Sequence[str]], gap: str, name_count: int) -> list[str]:
    widths = [max(len(cells[place]) for cells in table) for place in range(6)]
    kept = [place for place in range(6) if widths[place] and (place != 1 or name_count)]
    return [
        gap.join(
            cells[place].rjust(widths[place]) if place in (3, 4) else cells[place].ljust(widths[place])
            for place in kept
        ).rstrip()
        for cells in table
    ]
