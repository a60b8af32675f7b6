"""The pole's read-out: radius, ring, angle, every width, f0 and zeros of the selected section, as the session says it."""

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
        if len(lines) > height:
            lines = [*lines[: height - 1], f"… and {len(lines) - height + 1} more lines"]
        return Content("\n".join(self.spell(cut(line, width)) for line in lines))
