"""The spectrum chart's widget: what goes into the chain (dashed) and what comes out of it (solid), in dBFS."""

from typing import TYPE_CHECKING

import numpy as np

from tonebench.screen.charts.analysis import column_maxima
from tonebench.screen.charts.chart import Chart, Place
from tonebench.screen.charts.curves import Spans
from tonebench.screen.charts.levels import Curve, draw_curves, draw_levels, level_at
from tonebench.screen.charts.marks import DASHED, SOLID, Dash, Ink, mark_set
from tonebench.screen.charts.words import frequency_text, level_text

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from tonebench.screen.charts.axis import FrequencyAxis
    from tonebench.screen.charts.raster import Raster

DEFAULT_LIMITS_DBFS = (-108.0, 0.0)


class SpectrumChart(Chart):
    """Level over frequency before and after the chain; `show` gives it its spectra."""

    def __init__(
        self,
        *,
        sample_rate_hz: float = 48_000.0,
        show_axis: bool = True,
        id: str | None = None,  # noqa: A002 - Textual's name for it
        classes: str | None = None,
    ) -> None:
        super().__init__(sample_rate_hz=sample_rate_hz, show_axis=show_axis, id=id, classes=classes)
        self._before: Curve | None = None
        self._after: Curve | None = None
        self._limits_dbfs = DEFAULT_LIMITS_DBFS
        self.border_title = self._title()

    @property
    def limits_db(self) -> tuple[float, float]:
        """Levels at the lower and upper limit of the plot, in dBFS."""
        return self._limits_dbfs

    def set_limits(self, low_dbfs: float, high_dbfs: float) -> None:
        """Show another range of levels."""
        self._limits_dbfs = (low_dbfs, high_dbfs)
        self.redraw()

    def show(self, before: Curve | None, after: Curve | None) -> None:
        """Show other spectra, each as the bins of `spectrum_dbfs`."""
        self._before, self._after = before, after
        self.redraw()

    def watch_marks(self, name: str) -> None:
        """Draw with another set of marks, the title too."""
        self.border_title = self._title()
        super().watch_marks(name)

    def draw(self, axis: "FrequencyAxis") -> "Raster":
        """Draw grid and spectra."""
        marks = mark_set(self.marks)
        rows, height = self.plot_rows, self.content_size.height
        raster = draw_levels(axis, (rows, height), self._limits_dbfs, "dBFS", marks)
        edges = axis.edges_hz(marks)
        curves: list[tuple[Curve | None, Ink, Dash]] = [
            (self._before, Ink.SECOND, DASHED),
            (self._after, Ink.CURVE, SOLID),
        ]
        drawn = [
            (connected(column_maxima(curve.frequency_hz, curve.level_db, edges)), ink, dash)
            for curve, ink, dash in curves
            if curve is not None
        ]
        draw_curves(raster, axis, rows, self._limits_dbfs, drawn)
        return raster

    def place(self, column: int, row: int) -> Place:
        """Return frequency and level at a cell."""
        level = level_at(row, self.plot_rows, self._limits_dbfs)
        return Place(self.axis.frequency_hz(column), level_db=level)

    def describe(self) -> str:
        """Return the highest level before and after the chain, within the range shown, in words."""
        low_hz = self.axis.low_hz
        parts = [
            f"{name} the chain, highest {level_text(float(curve.level_db[top]))}FS"
            f" at {frequency_text(float(curve.frequency_hz[top]))}"
            for name, curve in (("before", self._before), ("after", self._after))
            if curve is not None and len(curve.level_db)
            for top in (int(np.argmax(np.where(curve.frequency_hz >= low_hz, curve.level_db, -np.inf))),)
        ]
        return "Spectrum: " + ("; ".join(parts) if parts else "nothing is playing") + "."

    def _title(self) -> str:
        marks = mark_set(self.marks)
        return f"spectrum, before {marks.legend(DASHED)} after {marks.legend(SOLID)}"


def connected(levels: "NDArray[np.float64]") -> Spans:
    """Return spans that join each column's level to half way towards its neighbours'.

    The span of a column never leaves the levels of the three columns, and always holds its own.
    """
    middles = (levels[:-1] + levels[1:]) / 2
    left = np.concatenate([levels[:1], middles])
    right = np.concatenate([middles, levels[-1:]])
    low = np.fmin(np.fmin(left, right), levels)
    high = np.fmax(np.fmax(left, right), levels)
    is_known = np.isfinite(levels)
    return Spans(np.where(is_known, low, np.nan), np.where(is_known, high, np.nan))
