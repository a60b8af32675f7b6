"""The single rows: status on top; message, typed line's hint and keys at the foot."""

from collections.abc import Sequence
from dataclasses import dataclass

from textual.content import Content

from tonebench.screen.keys import PLAIN_ARROWS, hints
from tonebench.screen.panels.panel import Panel, cut

_SEPARATOR = " · "


@dataclass(frozen=True, slots=True)
class Fact:
    """One thing that the status row says.

    Attributes
    ----------
    text : str
        In full.
    rank : int
        0 is never left out; the highest rank goes first where there is no room.
    short : str
        For a narrow row; empty where there is no shorter way.
    is_loud : bool
        Written in reverse: it needs the eye now.

    """

    text: str
    rank: int
    short: str = ""
    is_loud: bool = False


class StatusRow(Panel):
    """What plays and is heard, how loud, the guard, the step, and what is unsaved; on one row."""

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - Textual's name for it
        super().__init__(id=id, classes="-bare")
        self._left: tuple[Fact, ...] = (Fact("tonebench", 0), Fact("loading …", 0))
        self._right: tuple[Fact, ...] = ()

    def show(self, left: Sequence[Fact], right: Sequence[Fact]) -> None:
        """Show other facts, unless they are the same."""
        if (tuple(left), tuple(right)) != (self._left, self._right):
            self._left, self._right = tuple(left), tuple(right)
            self.paint()

    def draw(self, width: int, height: int) -> Content:
        """Draw what fits: the facts of the left, and those of the right at the right edge."""
        del height
        left, right = fitted(self._left, self._right, width - 2)
        first, second = self._joined(left), self._joined(right)
        gap = max(width - 2 - first.cell_length - second.cell_length, 1)
        return Content.assemble(" ", first, " " * gap, second, " ").truncate(width, ellipsis=True)

    def _joined(self, facts: Sequence[Fact]) -> Content:
        parts = [Content.styled(self.spell(one.text), "reverse bold" if one.is_loud else "") for one in facts]
        return Content(self.spell(_SEPARATOR)).join(parts)


def fitted(left: Sequence[Fact], right: Sequence[Fact], width: int) -> tuple[list[Fact], list[Fact]]:
    """Return the facts that fit: the least important go, then some are shortened, then more of them go.

    So an alarm, of rank 0, keeps its full words as long as anything else can give way.
    """
    kept = [[*left], [*right]]
    _leave_out(kept, 10, width)
    for rank in range(6, 0, -1):
        _shorten(kept, rank, width)
    for rank in range(9, 4, -1):
        _leave_out(kept, rank, width)
    _shorten(kept, 0, width)
    for rank in range(4, 0, -1):
        _leave_out(kept, rank, width)
    return kept[0], kept[1]


def _length(rows: Sequence[Sequence[Fact]]) -> int:
    lengths = [sum(len(one.text) for one in row) + len(_SEPARATOR) * max(len(row) - 1, 0) for row in rows]
    return sum(lengths) + (2 if all(lengths) else 0)


def _leave_out(rows: Sequence[list[Fact]], rank: int, width: int) -> None:
    for row in rows:
        if _length(rows) > width:
            row[:] = [one for one in row if one.rank != rank]


def _shorten(rows: Sequence[list[Fact]], rank: int, width: int) -> None:
    for row in rows:
        for place, one in enumerate(row):
            if one.rank == rank and one.short and _length(rows) > width:
                row[place] = Fact(one.short, one.rank, is_loud=one.is_loud)


class MessageRow(Panel):
    """The sentence of the last action."""

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - Textual's name for it
        super().__init__(id=id, classes="-bare")
        self.text = ""
        self._is_complaint = False

    def show(self, text: str, *, is_complaint: bool = False) -> None:
        """Show another sentence; a complaint starts with the words not done."""
        self.text, self._is_complaint = " ".join(text.split()), is_complaint
        self.paint()

    @property
    def _words(self) -> str:
        return f"not done: {self.text}" if self._is_complaint else self.text

    @property
    def needed(self) -> int:
        """Columns that the whole sentence takes."""
        return len(self._words)

    def draw(self, width: int, height: int) -> Content:
        """Draw the sentence, wrapped into the rows there are."""
        lines = [self.spell(one) for one in _wrapped(self._words, width - 2, height)]
        return Content("\n").join(Content.styled(f" {one}", "bold" if self._is_complaint else "") for one in lines)


def _wrapped(text: str, width: int, height: int) -> list[str]:
    """Break at spaces into so many rows; only the last one is cut."""
    rows: list[str] = []
    rest = text
    while rest and len(rows) < height - 1 and len(rest) > width:
        at = rest.rfind(" ", 0, width + 1)
        at = at if at > 0 else width
        rows.append(rest[:at])
        rest = rest[at:].lstrip()
    return [*rows, cut(rest, width)]


class KeysRow(Panel):
    """The keys that fit, most needed first."""

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - Textual's name for it
        super().__init__(id=id, classes="-bare")
        self._is_one_chart = True

    def set_one_chart(self, is_one_chart: bool) -> None:
        """Name the key for the next chart only where one is shown at a time."""
        self._is_one_chart = is_one_chart
        self.paint()

    def draw(self, width: int, height: int) -> Content:
        """Draw keys in bold, what they do beside them."""
        del height
        parts: list[Content] = []
        for key, word in hints(width - 2, is_one_chart=self._is_one_chart):
            shown = key.translate(PLAIN_ARROWS) if self.is_plain else key
            parts.append(Content.assemble((shown, "bold"), f" {word}"))
        return Content.assemble(" ", Content("  ").join(parts)).truncate(width)
