"""The response chart's widget: magnitude of the whole chain and of the selected section."""

from typing import TYPE_CHECKING

import numpy as np

from tonebench.screen.charts.chart import Chart, Place
from tonebench.screen.charts.curves import column_spans
from tonebench.screen.charts.levels import Curve, draw_curves, draw_levels, level_at, level_limits_db
from tonebench.screen.charts.marks import DOTTED, SOLID, Dash, Ink, mark_set
from tonebench.screen.charts.words import describe_curve

if TYPE_CHECKING:
    from tonebench.screen.charts.axis import FrequencyAxis
    from tonebench.screen.charts.raster import Raster


class ResponseChart(Chart):
    """Magnitude in dB: the chain solid, the selected section dotted; `show` gives it its curves."""

    BORDER_TITLE = "response"

    def __init__(
        self,
        *,
        sample_rate_hz: float = 48_000.0,
        show_axis: bool = False,
        id: str | None = None,  # noqa: A002 - Textual's name for it
        classes: str | None = None,
    ) -> None:
        super().__init__(sample_rate_hz=sample_rate_hz, show_axis=show_axis, id=id, classes=classes)
        self._chain: Curve | None = None
        self._section: Curve | None = None
        self._section_number: int | None = None
        self._f0_hz: float | None = None
        self._limits_db: tuple[float, float] | None = None

    @property
    def limits_db(self) -> tuple[float, float]:
        """Levels at the lower and upper limit of the plot."""
        return self._limits_db or (-24.0, 6.0)

    def show(
        self,
        chain: Curve,
        section: Curve | None = None,
        *,
        section_number: int | None = None,
        f0_hz: float | None = None,
    ) -> None:
        """Show other curves.

        Parameters
        ----------
        chain : Curve
            The whole chain.
        section : Curve or None
            The selected section alone.
        section_number : int or None
            Its number, for the title.
        f0_hz : float or None
            Its f0, marked at the foot of the plot.
        """
        self._chain, self._section, self._f0_hz = chain, section, f0_hz
        self._section_number = None if section is None else section_number
        self._set_title()
        self.redraw()

    def watch_marks(self, name: str) -> None:
        """Draw with another set of marks, the title too."""
        self._set_title()
        super().watch_marks(name)

    def rescale(self) -> None:
        """Choose the limits afresh: another preset was loaded."""
        self._limits_db = None
        self.redraw()

    def draw(self, axis: "FrequencyAxis") -> "Raster":
        """Draw grid and curves."""
        marks = mark_set(self.marks)
        edges = np.log(axis.edges_hz(marks))
        curves: list[tuple[Curve | None, Ink, Dash]] = [
            (self._section, Ink.THIRD, DOTTED),
            (self._chain, Ink.CURVE, SOLID),
        ]
        drawn = [
            (column_spans(np.log(np.maximum(curve.frequency_hz, 1e-9)), curve.level_db, edges), ink, dash)
            for curve, ink, dash in curves
            if curve is not None
        ]
        if drawn:
            high = np.concatenate([spans.high for spans, _, _ in drawn])
            low = np.concatenate([spans.low for spans, _, _ in drawn])
            self._limits_db = level_limits_db(high, low, self._limits_db)
        raster = draw_levels(axis, (self.plot_rows, self.content_size.height), self.limits_db, "dB", marks)
        if self._f0_hz is not None:
            raster.put(axis.column(self._f0_hz), self.plot_rows - 1, "▴", Ink.SELECTED)
        draw_curves(raster, axis, self.plot_rows, self.limits_db, drawn)
        return raster

    def place(self, column: int, row: int) -> Place:
        """Return frequency and level at a cell."""
        level = level_at(row, self.plot_rows, self.limits_db)
        return Place(self.axis.frequency_hz(column), level_db=level)

    def describe(self) -> str:
        """Return the chain's response in words."""
        if self._chain is None or len(self._chain.level_db) == 0:
            return "Response: nothing to show."
        return "Response of the chain: " + describe_curve(self._chain) + "."

    def _set_title(self) -> None:
        """Explain the curves in the title; set only if it changed, since that draws the border anew."""
        marks, number = mark_set(self.marks), self._section_number
        title = "response"
        if number is not None:
            title = f"response, chain {marks.legend(SOLID)} section {number} {marks.legend(DOTTED)}"
        if self.border_title != title:
            self.border_title = title
