"""The widget that all charts are: line API, styles, resizing, and rows refreshed only when they changed.

A chart takes no focus and no keys; a click is handed on as a place in the chart's own units.
"""

from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

import numpy as np
from textual.geometry import Region
from textual.message import Message
from textual.reactive import reactive
from textual.strip import Strip
from textual.widget import Widget

from tonebench.screen.charts.axis import FrequencyAxis, default_axis
from tonebench.screen.charts.marks import Ink, mark_set
from tonebench.screen.charts.raster import Raster

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray
    from rich.style import Style
    from textual import events

# One component class per ink, in the order of `Ink`.
INK_CLASSES = tuple(f"chart--{ink.name.lower()}" for ink in Ink)


@dataclass(frozen=True, slots=True)
class Place:
    """What a cell of a chart stands for.

    Attributes
    ----------
    frequency_hz : float
        0 in the left gutter, Nyquist in the right one.
    level_db : float or None
        On response and spectrum.
    ring_s : float or None
        On the rim chart: ring time, growth time if outside, infinite on the rim, 0 on the floor.
    radius : float or None
        On the rim chart.
    """

    frequency_hz: float
    level_db: float | None = None
    ring_s: float | None = None
    radius: float | None = None


class Chart(Widget, can_focus=False):
    """Base of the charts. A subclass draws a `Raster` in `draw` and calls `redraw` when its data change.

    Parameters
    ----------
    sample_rate_hz : float
        Sets Nyquist.
    show_axis : bool
        Whether the last row carries the frequencies.
    id, classes
        As for any widget.
    """

    ALLOW_SELECT = False

    COMPONENT_CLASSES: ClassVar[set[str]] = set(INK_CLASSES)
    """
    | Class | Description |
    | :- | :- |
    | `chart--base` | Blank cells. |
    | `chart--grid` | Grid dots and the lines of the gutters. |
    | `chart--label` | Numbers and words of the axes. |
    | `chart--curve` | The main curve (solid). |
    | `chart--second` | The curve to compare with (dashed). |
    | `chart--third` | The selected section's curve (dotted). |
    | `chart--mark` | Poles and zeros. |
    | `chart--selected` | The selected pole or zero. |
    | `chart--bypassed` | Poles and zeros of bypassed sections. |
    | `chart--rim` | The unit circle. |
    | `chart--leader` | Leaders from pole to f0, and the limit of convergence. |
    """

    DEFAULT_CSS = """
    Chart {
        height: 1fr;
        border: solid $foreground 35%;
        border-bottom: none;
        border-title-color: $foreground;
        & .chart--grid { color: $foreground 28%; }
        & .chart--label { color: $foreground 70%; }
        & .chart--curve { color: $foreground; text-style: bold; }
        & .chart--second { color: $text-primary; }
        & .chart--third { color: $text-accent; }
        & .chart--mark { color: $foreground; text-style: bold; }
        & .chart--selected { color: $text-accent; text-style: bold; }
        & .chart--bypassed { color: $foreground 50%; }
        & .chart--rim { color: $foreground 60%; }
        & .chart--leader { color: $foreground 40%; }
    }
    """

    marks: reactive[str] = reactive("braille", init=False)
    """Set of marks: "braille", "half-block" or "ascii"."""
    show_axis: reactive[bool] = reactive(False, init=False)
    """Whether the last row carries the frequencies."""

    class Clicked(Message):
        """A cell of the plot was clicked.

        Attributes
        ----------
        chart : Chart
            The sender.
        column, row : int
            The cell, in the chart's content.
        place : Place
            What it stands for.
        """

        def __init__(self, chart: "Chart", column: int, row: int, place: Place) -> None:
            super().__init__()
            self.chart = chart
            self.column = column
            self.row = row
            self.place = place

        @property
        def control(self) -> "Chart":
            """The sender, for `@on` with a selector."""
            return self.chart

    def __init__(
        self,
        *,
        sample_rate_hz: float = 48_000.0,
        show_axis: bool = False,
        id: str | None = None,  # noqa: A002 - Textual's name for it
        classes: str | None = None,
    ) -> None:
        super().__init__(id=id, classes=classes)
        self.sample_rate_hz = sample_rate_hz
        self._frequency_range_hz: tuple[float, float] | None = None
        self._raster = Raster(0, 0, mark_set("braille"))
        self._strips: dict[int, Strip] = {}
        self._ink_styles: list[Style] = []
        self.set_reactive(Chart.show_axis, show_axis)

    @property
    def axis(self) -> FrequencyAxis:
        """The frequency axis at the present width and range."""
        width = self.content_size.width
        if self._frequency_range_hz is None:
            return default_axis(width, self.sample_rate_hz)
        return FrequencyAxis(width, self.sample_rate_hz, *self._frequency_range_hz)

    @property
    def plot_rows(self) -> int:
        """Rows of the plot, without the row of frequencies."""
        height = self.content_size.height
        return height - 1 if self.show_axis and height > 1 else height

    def set_frequency_range(self, range_hz: tuple[float, float] | None) -> None:
        """Show another range of frequencies, in Hz; None is 20 Hz to Nyquist.

        Raises
        ------
        InvalidValueError
            The range is empty, descending, or leaves 0 Hz to Nyquist.
        """
        if range_hz is not None:
            FrequencyAxis(1, self.sample_rate_hz, *range_hz)
        self._frequency_range_hz = range_hz
        self.redraw()

    def frequencies_hz(self, extra_hz: "Iterable[float]" = ()) -> "NDArray[np.float64]":
        """Return the frequencies at which a curve should be given: limits and middles of all dot columns, ascending.

        Parameters
        ----------
        extra_hz : iterable of float
            Frequencies that must not be missed (poles, zeros and their flanks); those out of range are left out.
        """
        edges = self.axis.edges_hz(mark_set(self.marks))
        extra = np.fromiter(extra_hz, dtype=np.float64)
        extra = extra[(extra >= edges[0]) & (extra <= edges[-1])]
        return np.unique(np.concatenate([edges, np.sqrt(edges[:-1] * edges[1:]), extra]))

    def draw(self, axis: FrequencyAxis) -> Raster:
        """Draw the plot into a raster of the content's size; the row of frequencies is added by `redraw`."""
        raise NotImplementedError

    def place(self, column: int, row: int) -> Place:
        """Return what a cell of the content stands for."""
        raise NotImplementedError

    def describe(self) -> str:
        """Return the content in words."""
        raise NotImplementedError

    def redraw(self) -> None:
        """Draw anew, and refresh the rows that changed."""
        if not self.is_mounted or not self.content_size:
            return
        axis = self.axis
        raster = self.draw(axis)
        if self.show_axis and raster.height > 1:
            axis.draw_labels(raster, raster.height - 1)
        old, self._raster = self._raster, raster
        if old.codes.shape != raster.codes.shape:
            self._strips.clear()
            self.refresh()
            return
        is_changed = ((old.codes != raster.codes) | (old.inks != raster.inks)).any(axis=1)
        changed = np.flatnonzero(is_changed).tolist()
        for row in changed:
            self._strips.pop(row, None)
        if changed:
            self.refresh(*(Region(0, row, raster.width, 1) for row in changed))

    def text_rows(self) -> list[str]:
        """Return the characters that are on the screen, row by row."""
        return self._raster.text_rows()

    def render_line(self, y: int) -> Strip:
        """Return one row of the content."""
        if y >= self._raster.height:
            return Strip.blank(self.content_size.width, self.rich_style)
        if y not in self._strips:
            if not self._ink_styles:
                self._ink_styles = [self.get_component_rich_style(name) for name in INK_CLASSES]
            self._strips[y] = self._raster.strip(y, self._ink_styles)
        return self._strips[y]

    def notify_style_update(self) -> None:
        """Forget the cached styles: theme or classes changed."""
        self._ink_styles = []
        self._strips.clear()
        super().notify_style_update()

    def watch_marks(self, name: str) -> None:
        """Draw with another set of marks."""
        mark_set(name)
        self.redraw()

    def watch_show_axis(self) -> None:
        """Draw with or without the row of frequencies."""
        self.redraw()

    def on_resize(self) -> None:
        """Draw at the new size."""
        self.redraw()

    def on_click(self, event: "events.Click") -> None:
        """Hand a click on as a place."""
        offset = event.get_content_offset(self)
        if offset is not None and offset.y < self.plot_rows:
            self.post_message(self.Clicked(self, offset.x, offset.y, self.place(offset.x, offset.y)))
