"""The rim chart's widget: the z-plane unrolled, frequency across and ring time upwards.

What is drawn lives in rim_drawing.py, where it stands in rim_scale.py.
"""

from typing import TYPE_CHECKING

from tonebench.screen.charts.chart import Chart, Place
from tonebench.screen.charts.marks import mark_set
from tonebench.screen.charts.rim_drawing import draw_rim, rim_scale
from tonebench.screen.charts.rim_marks import RimMark, RimPicture
from tonebench.screen.charts.rim_scale import DEFAULT_SPAN_S, RimScale
from tonebench.screen.charts.rim_words import describe_rim

if TYPE_CHECKING:
    from tonebench.screen.charts.axis import FrequencyAxis
    from tonebench.screen.charts.raster import Raster


class RimChart(Chart):
    """Poles and zeros of a chain by frequency and ring time; `show` gives it its picture."""

    BORDER_TITLE = "rim"

    def __init__(
        self,
        *,
        sample_rate_hz: float = 48_000.0,
        show_axis: bool = False,
        id: str | None = None,  # noqa: A002 - Textual's name for it
        classes: str | None = None,
    ) -> None:
        super().__init__(sample_rate_hz=sample_rate_hz, show_axis=show_axis, id=id, classes=classes)
        self._picture = RimPicture(sample_rate_hz)
        self._span_s = DEFAULT_SPAN_S

    @property
    def picture(self) -> RimPicture:
        """What is shown."""
        return self._picture

    @property
    def scale(self) -> RimScale:
        """The vertical scale at the present height."""
        return rim_scale(self._picture, self.plot_rows, self._span_s)

    def show(self, picture: RimPicture) -> None:
        """Show other poles and zeros."""
        self._picture = picture
        self.sample_rate_hz = picture.sample_rate_hz
        self.redraw()

    def set_ring_span(self, span_s: tuple[float, float] | None) -> None:
        """Show another span of ring times, in seconds; None is 0.1 ms to 30 s.

        Raises
        ------
        InvalidValueError
            The span is empty, descending, or not above 0.
        """
        span = span_s or DEFAULT_SPAN_S
        RimScale(1, self.sample_rate_hz, low_s=span[0], high_s=span[1])
        self._span_s = span
        self.redraw()

    def draw(self, axis: "FrequencyAxis") -> "Raster":
        """Draw the picture."""
        return draw_rim(self._picture, axis, self.scale, self.content_size.height, mark_set(self.marks))

    def place(self, column: int, row: int) -> Place:
        """Return frequency, ring time and radius at a cell."""
        scale = self.scale
        return Place(self.axis.frequency_hz(column), ring_s=scale.time_s(row), radius=scale.radius(row))

    def mark_cell(self, mark: RimMark) -> tuple[int, int]:
        """Return column and row of a mark in the content."""
        return self.axis.column(mark.frequency_hz), self.scale.row(mark.radius)

    def marks_near(self, column: int, row: int, reach: int = 2) -> list[RimMark]:
        """Return the marks within so many columns (and one row) of a cell, the nearest first, poles before zeros."""
        found = []
        for mark in self._picture.marks:
            mark_column, mark_row = self.mark_cell(mark)
            across, down = abs(mark_column - column), abs(mark_row - row)
            if across <= reach and down <= 1:
                found.append((across + 2 * down, mark.role != "pole", mark.section_number, mark))
        return [entry[-1] for entry in sorted(found, key=lambda entry: entry[:3])]

    def describe(self) -> str:
        """Return poles and zeros in words, section by section."""
        return describe_rim(self._picture)
