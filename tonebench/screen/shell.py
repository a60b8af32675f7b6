"""The shell: which panels there are and where they stand at each size of the terminal. Painted before numpy is loaded.

Two questions decide the layout: is the terminal narrow (then the panels stand under the charts, else beside them),
and is it low (then one chart is shown at a time).
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

from textual.containers import Vertical
from textual.content import Content
from textual.widget import Widget
from textual.widgets import Input, Static

from tonebench.screen.panels.chain import ChainPanel
from tonebench.screen.panels.findings import FindingsPanel
from tonebench.screen.panels.panel import Panel
from tonebench.screen.panels.pole import PolePanel
from tonebench.screen.panels.rows import KeysRow, MessageRow, StatusRow

CHARTS: Final = ("rim", "response", "spectrum")
_NARROW_WIDTH = 100
_LOW_HEIGHT = 30
_LOW_HEIGHT_NARROW = 44  # three charts of eight rows, and the panels under them

CSS: Final = """
Screen { layout: vertical; overflow: hidden; }
#main { layout: horizontal; height: 1fr; }
#charts { width: 1fr; height: 100%; }
#side { width: 50; height: 100%; }
#rim { height: 2fr; }
#response, #spectrum { height: 1fr; }
.-last { border-bottom: solid $foreground 35%; }
#chain { height: 1fr; }
#pole { height: 9; }
#findings { height: 1fr; }
#typing { height: 1; }
#prompt { width: 3; height: 1; }
#line { height: 1; width: 1fr; border: none; padding: 0; background: transparent; }
#line:focus { border: none; background-tint: transparent 0%; }
#typing { layout: horizontal; }
#message.-two { height: 2; }

.-huge #side { width: 62; }
.-low #pole { height: 9; }
.-low #chain { height: 1fr; }
.-low #findings { height: 5; }

.-narrow #main { layout: vertical; }
.-narrow #charts { height: 1fr; width: 100%; }
.-narrow #side { width: 100%; height: 11; layout: grid; grid-size: 2 2; grid-columns: 11fr 10fr; grid-rows: 9 2; }
.-narrow #chain, .-narrow #pole { height: 9; padding: 0; }
.-narrow #findings { column-span: 2; height: 2; border: none; padding: 0 1; }
.-tiny #side { height: 5; grid-size: 2 1; grid-rows: 5; }
.-tiny #chain, .-tiny #pole { height: 5; }
.-tiny #findings { display: none; }
.-slim #side { grid-size: 1 2; grid-columns: 1fr; grid-rows: 9 2; }
.-slim #pole { display: none; }
.-slim #findings { column-span: 1; }
.-tiny.-slim #side { grid-size: 1 1; grid-rows: 5; }

.-ascii Panel, .-ascii Chart { border: ascii $foreground 35%; }
.-ascii Chart { border-bottom: none; }
.-ascii Chart.-last { border-bottom: ascii $foreground 35%; }
.-ascii Panel.-bare { border: none; }
.-ascii.-narrow #findings { border: none; }
"""


@dataclass(frozen=True, slots=True)
class Layout:
    """How a terminal of some size is divided."""

    is_narrow: bool
    is_one_chart: bool
    is_tiny: bool
    is_slim: bool
    is_huge: bool

    @property
    def classes(self) -> dict[str, bool]:
        """The style classes of the screen."""
        return {
            "-narrow": self.is_narrow,
            "-low": self.is_one_chart,
            "-tiny": self.is_tiny,
            "-slim": self.is_slim,
            "-huge": self.is_huge,
        }


def layout_for(width: int, height: int) -> Layout:
    """Return the layout for a terminal of this size, in cells."""
    is_narrow = width < _NARROW_WIDTH
    return Layout(
        is_narrow=is_narrow,
        is_one_chart=height < (_LOW_HEIGHT_NARROW if is_narrow else _LOW_HEIGHT),
        is_tiny=is_narrow and height < 22,
        is_slim=width < 64,
        is_huge=width >= 160,
    )


class Waiting(Panel):
    """Stands in a chart's place until it is loaded."""

    def draw(self, width: int, height: int) -> Content:
        """Say so."""
        del width, height
        return Content(self.spell("loading …"))


class TypedInput(Input):
    """The typed line; it takes the focus only while it is open, so that no key is lost to it."""

    def __init__(self) -> None:
        super().__init__(id="line", compact=True, select_on_focus=False)
        self.can_focus = False

    def open(self, text: str, *, is_selected: bool = False) -> None:
        """Take the keys; a selected text is replaced by the first one typed."""
        self.can_focus = True
        self.value = text
        self.cursor_position = len(text)
        # Now, not in a later turn as focus() does: keys typed fast behind Enter must not act as commands.
        self.screen.set_focus(self)
        if is_selected:
            self.select_all()

    def close(self) -> None:
        """Give the keys back."""
        self.value = ""
        self.blur()
        self.can_focus = False


def compose_shell() -> Iterator[Widget]:
    """Yield everything that the screen holds, the charts' places still waiting."""
    yield StatusRow(id="status")
    with Vertical(id="main"):
        with Vertical(id="charts"):
            for name in CHARTS:
                waiting = Waiting(id=name)
                waiting.border_title = name
                yield waiting
        with Vertical(id="side"):
            yield ChainPanel(id="chain")
            yield PolePanel(id="pole")
            yield FindingsPanel(id="findings")
    yield MessageRow(id="message")
    with Vertical(id="typing"):
        yield Static(" >", id="prompt")
        yield TypedInput()
    yield KeysRow(id="keys")
