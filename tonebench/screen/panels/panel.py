"""What all panels share: they draw text into the size they have, again when the size changes, and take no keys."""

from textual.content import Content
from textual.widgets import Static

ELLIPSIS = "…"
_PLAIN = str.maketrans({"…": "~", "·": "|", "−": "-", "×": "x", "–": "-", "←": "<-", "→": "->", "↑": "^", "↓": "v"})


class Panel(Static, can_focus=False):
    """Base of the panels. A subclass keeps its data, calls `paint` when they change, and makes text in `draw`."""

    ALLOW_SELECT = False
    DEFAULT_CSS = """
    Panel { border: solid $foreground 35%; border-title-color: $foreground; padding: 0 1; height: 1fr; }
    Panel.-bare { border: none; padding: 0; height: 1; }
    """

    is_plain = False
    """Whether only ASCII may be written."""

    def draw(self, width: int, height: int) -> Content:
        """Return the text for a content of this size."""
        raise NotImplementedError

    def paint(self) -> None:
        """Draw again; the size is given by the layout, so nothing is laid out anew."""
        width, height = self.content_size
        if self.is_mounted and width > 0 and height > 0:
            self.update(self.draw(width, height), layout=False)

    def set_plain(self, is_plain: bool) -> None:
        """Write ASCII only, or not."""
        self.is_plain = is_plain
        self.paint()

    def set_title(self, title: str) -> None:
        """Set the title of the frame, if it changed: that draws the frame anew."""
        title = self.spell(title)
        if self.border_title != title:
            self.border_title = title

    def spell(self, text: str) -> str:
        """Text in the characters that may be written."""
        return text.translate(_PLAIN).encode("ascii", "replace").decode() if self.is_plain else text

    def on_resize(self) -> None:
        """Draw at the new size."""
        self.paint()


def cut(text: str, width: int) -> str:
    """Return text that fits, its end marked where it was cut."""
    if len(text) <= width:
        return text
    return text[: max(width - 1, 0)].rstrip() + ELLIPSIS if width > 0 else ""


def wrap(text: str, width: int, indent: str = "") -> list[str]:
    """Return lines of at most this width, broken at spaces where there are any; later lines are indented."""
    lines: list[str] = []
    line = ""
    for word in text.split():
        lead = indent if lines else ""
        candidate = f"{line} {word}" if line else lead + word
        if len(candidate) <= width or not line:
            line = candidate
        else:
            lines.append(line)
            line = indent + word
    return [cut(one, width) for one in [*lines, line] if one]
