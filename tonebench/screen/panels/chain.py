"""The chain's list: one row per section, the selected one marked by > and kept in sight, bypassed ones in words."""

from collections.abc import Sequence
from dataclasses import dataclass

from textual import events
from textual.content import Content
from textual.message import Message

from tonebench.screen.panels.panel import Panel, cut

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
        """Draw the rows in sight, in columns."""
        if self._rows is None:
            return Content(self.spell("loading …"))
        if not self._rows:
            self.set_title("chain")
            return Content(_EMPTY)
        self._scroll(height)
        visible = self._rows[self._first : self._first + height]
        count = len(self._rows)
        is_cut = count > height
        self.set_title(f"chain, {self._first + 1}–{self._first + len(visible)} of {count}" if is_cut else "chain")
        lines = columns(visible, self._selected, width)
        parts: list[Content] = []
        for row, line in zip(visible, lines, strict=True):
            is_selected = row.number - 1 == self._selected
            style = "bold" if is_selected else "dim" if row.is_bypassed else ""
            parts.append(Content.styled(self.spell(line), style))
        return Content("\n").join(parts)

    def _scroll(self, height: int) -> None:
        count = len(self._rows or ())
        self._first = min(max(self._first, self._selected - height + 1), max(self._selected, 0))
        self._first = max(0, min(self._first, count - height))

    def on_click(self, event: events.Click) -> None:
        """Tell which row was clicked."""
        offset = event.get_content_offset(self)
        if offset is not None and self._rows and self._first + offset.y < len(self._rows):
            self.post_message(self.Chosen(self._first + offset.y))


def columns(rows: Sequence[ChainRow], selected: int, width: int) -> list[str]:
    """Return one line per row, columns aligned.

    What does not fit is left out in this order: gaps of two become one, then names, then the kind is cut.
    """
    digits = max(len(str(row.number)) for row in rows)
    for gap, has_names in (("  ", True), (" ", True), (" ", False)):
        lines = _aligned(rows, selected, digits, gap, has_names)
        if max(len(line) for line in lines) <= width:
            return lines
    excess = max(len(line) for line in lines) - width
    kind_width = max(max(len(row.kind) for row in rows) - excess, 4)
    lines = _aligned(rows, selected, digits, " ", False, kind_width)
    return [cut(line, width) for line in lines]


def _aligned(
    rows: Sequence[ChainRow], selected: int, digits: int, gap: str, has_names: bool, kind_width: int = 99
) -> list[str]:
    name = max(len(row.name) for row in rows) if has_names else 0
    kind = min(max(len(row.kind) for row in rows), kind_width)
    frequency = max(len(row.frequency) for row in rows)
    gain = max(len(row.gain) for row in rows)
    lines = []
    for row in rows:
        mark = ">" if row.number - 1 == selected else " "
        cells = [f"{mark}{row.number:>{digits}}"]
        cells += [f"{cut(row.name, name):<{name}}"] if name else []
        cells += [f"{cut(row.kind, kind):<{kind}}", f"{row.frequency:>{frequency}}"]
        cells += [f"{row.gain:>{gain}}"] if gain else []
        lines.append(gap.join([*cells, row.last]).rstrip())
    return lines
