"""The pole's read-out: radius, ring, angle, widths, f0 and zeros of the selected section, as the session says it."""

from collections.abc import Sequence

from textual.content import Content

from tonebench.screen.panels.panel import Panel, cut


class PolePanel(Panel):
    """The read-out of the selected section."""

    BORDER_TITLE = "pole"

    def __init__(self, *, id: str | None = None) -> None:  # noqa: A002 - Textual's name for it
        super().__init__(id=id)
        self._lines: tuple[str, ...] = ()

    def show(self, title: str, lines: Sequence[str]) -> None:
        """Show another section."""
        self._lines = tuple(lines)
        self.set_title(title)
        self.paint()

    def draw(self, width: int, height: int) -> Content:
        """Draw the lines; where there are too many, the last row says how many more."""
        lines = list(self._lines)
        if any(len(line) > width for line in lines):
            lines = refilled(lines, width)
        if len(lines) > height:
            lines = [*lines[: height - 1], f"… and {len(lines) - height + 1} more lines"]
        return Content("\n".join(self.spell(cut(line, width)) for line in lines))


def refilled(lines: Sequence[str], width: int) -> list[str]:
    """Return the same facts in lines of at most this width; each pole, each zero and f0 begin a line.

    Facts stand two spaces apart. Two bandwidths are one fact in two units.
    """
    facts: list[str] = []
    for line in lines:
        for fact in line.strip().split("  "):
            if fact.startswith("bandwidth ") and facts and facts[-1].startswith("bandwidth "):
                facts[-1] += ", " + fact.removeprefix("bandwidth ")
            else:
                facts.append(fact)
    filled: list[str] = []
    for fact in facts:
        begins = fact.split(" ")[0] in ("pole", "zero", "f0", "gain") and not (filled and filled[-1].startswith("f0"))
        if filled and not begins and len(filled[-1]) + 2 + len(fact) <= width:
            filled[-1] += f"  {fact}"
        else:
            filled.append(fact)
    return filled
