"""Text over the whole screen, to be read and scrolled: the help, and all findings."""

from collections.abc import Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Static

from tonebench.screen.keys import PLAIN_ARROWS, help_rows
from tonebench.screen.panels.findings import FindingWords
from tonebench.screen.typed import EXAMPLES

_HEAR = (
    "The bench cannot know the sound pressure at your ears: that depends on amplifier and headphones. Start low. Only "
    "a measurement by a qualified person tells how loud it is; your employer's noise programme and local rules say how "
    "long is too long; for ringing or muffled hearing, see an audiologist."
)


class ReadingScreen(ModalScreen[None]):
    """A text to read. Escape, q or the key that opened it closes it; the arrows scroll."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape,q,question_mark,f,enter", "dismiss", "close", show=False),
        Binding("up", "scroll(-1)", show=False),
        Binding("down", "scroll(1)", show=False),
        Binding("pageup", "scroll(-10)", show=False),
        Binding("pagedown,space", "scroll(10)", show=False),
        Binding("m", "app.mute", show=False),  # silence must be one key away, whatever lies over the screen
        Binding("tab,shift+tab", "nothing", show=False, priority=True),
    ]
    DEFAULT_CSS = """
    ReadingScreen { align: center middle; }
    ReadingScreen VerticalScroll {
        width: 90%; max-width: 96; height: 90%; border: solid $foreground 50%; padding: 0 1; background: $surface;
    }
    ReadingScreen Static { width: 100%; height: auto; }
    """

    def __init__(self, title: str, text: Content, *, is_plain: bool = False) -> None:
        super().__init__()
        self._title_text, self._text, self._is_plain = title, text, is_plain

    def compose(self) -> ComposeResult:
        """Lay out the text."""
        with VerticalScroll(can_focus=False) as scroll:
            scroll.border_title = f"{self._title_text}: arrows scroll, Esc closes"
            if self._is_plain:
                scroll.styles.border = ("ascii", "white")
            yield Static(self._text)

    def action_scroll(self, lines: int) -> None:
        """Scroll by lines."""
        self.query_one(VerticalScroll).scroll_relative(y=lines, animate=False)

    def action_nothing(self) -> None:
        """Keep the focus where it is."""


def help_text(line_examples: Sequence[tuple[str, str]], *, is_plain: bool = False) -> Content:
    """Return the help: all keys, and what may be typed."""
    parts: list[Content] = []
    for title, rows in help_rows():
        parts += [Content.styled(title, "bold"), *_rows(rows, 10, is_plain=is_plain), Content("")]
    parts.append(Content.styled("Typed line (Enter), for the chain", "bold"))
    parts += [*_rows(line_examples, 34), Content("")]
    parts.append(Content.styled("Typed line, for files and sound", "bold"))
    parts += [*_rows(EXAMPLES, 34), Content("")]
    parts += [Content.styled("Your hearing", "bold"), Content(_HEAR)]
    return Content("\n").join(parts)


def _rows(rows: Sequence[tuple[str, str]], width: int, *, is_plain: bool = False) -> list[Content]:
    lines = []
    for key, words in rows:
        shown = key.translate(PLAIN_ARROWS) if is_plain else key
        pad = " " * max(width - len(shown), 0)
        if len(shown) > width:  # a long example has a row of its own, and its words under it
            lines.append(Content.assemble("  ", (shown, "bold")))
            lines.append(Content(" " * (width + 4) + words))
        else:
            lines.append(Content.assemble("  ", (shown, "bold"), pad, "  ", words))
    return lines


def findings_text(findings: Sequence[FindingWords], closing: str) -> Content:
    """Return all findings with what to do about them."""
    parts: list[Content] = []
    for one in findings:
        first, *others = one.lines
        parts.append(Content.styled(first, "bold"))
        parts += [Content(f"  {line}") for line in others]
        parts.append(Content(""))
    return Content("\n").join([*parts, *([Content(closing)] if closing else [])])
