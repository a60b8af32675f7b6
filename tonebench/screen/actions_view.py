"""What is drawn when: the layout, the charts and the panels. The response is drawn on change only."""

from typing import TYPE_CHECKING, cast

from textual import events
from textual.geometry import Size
from textual.widget import Widget

from tonebench.screen.actions_files import FileActions
from tonebench.screen.panels.chain import ChainPanel
from tonebench.screen.panels.panel import Panel
from tonebench.screen.panels.pole import PolePanel
from tonebench.screen.panels.rows import KeysRow
from tonebench.screen.shell import CHARTS, Layout, layout_for

if TYPE_CHECKING:
    from tonebench.screen.charts.chart import Chart
    from tonebench.screen.charts.levels import Curve
    from tonebench.screen.charts.response import ResponseChart
    from tonebench.screen.charts.rim import RimChart
    from tonebench.screen.charts.spectrum import SpectrumChart


class ViewActions(FileActions):
    """Layout and drawing, and what g does."""

    chart_shown: int = 0
    _layout: Layout | None = None
    _has_charts: bool = False
    _before: "Curve | None" = None

    # Layout

    def arrange(self, size: Size) -> None:
        """Divide the terminal."""
        layout = layout_for(size.width, size.height)
        screen = self.screen_stack[0]
        for name, is_set in layout.classes.items():
            screen.set_class(is_set, name)
        self._layout = layout
        self.part(KeysRow).set_one_chart(layout.is_one_chart)
        self._show_charts()
        self.fit_message()

    def _show_charts(self) -> None:
        """Show all charts, or the one that is chosen; the lowest one carries frequencies and the frame's foot."""
        is_one = self._layout is not None and self._layout.is_one_chart
        shown = [CHARTS[self.chart_shown]] if is_one else list(CHARTS)
        for name in CHARTS:
            widget = self._chart_widget(name)
            widget.display = name in shown
            is_last = name == shown[-1]
            widget.set_class(is_last, "-last")
            if self._has_charts:
                cast("Chart", widget).show_axis = is_last
        if self._has_charts:
            self.call_after_refresh(self.draw_response)

    def _chart_widget(self, name: str) -> Widget:
        return self.screen_stack[0].query_one(f"#{name}")

    def on_resize(self, event: events.Resize) -> None:
        """Divide the terminal anew."""
        self.arrange(event.size)

    def action_chart(self) -> None:
        """Show the next chart."""
        if self._layout is not None and not self._layout.is_one_chart:
            self.say("all three charts are in sight")
            return
        self.chart_shown = (self.chart_shown + 1) % len(CHARTS)
        self._show_charts()
        self.say(f"chart: {CHARTS[self.chart_shown]}")

    # Drawing

    @property
    def rim(self) -> "RimChart":
        """The rim chart."""
        return cast("RimChart", self._chart_widget("rim"))

    @property
    def response(self) -> "ResponseChart":
        """The response."""
        return cast("ResponseChart", self._chart_widget("response"))

    @property
    def spectrum(self) -> "SpectrumChart":
        """The spectrum."""
        return cast("SpectrumChart", self._chart_widget("spectrum"))

    async def put_charts(self) -> None:
        """Put the charts in the place of what stood for them."""
        from tonebench.screen.charts.response import ResponseChart  # noqa: PLC0415
        from tonebench.screen.charts.rim import RimChart  # noqa: PLC0415
        from tonebench.screen.charts.spectrum import SpectrumChart  # noqa: PLC0415

        bench = self.bench
        if bench is None:
            return
        rate_hz = bench.clip.sample_rate_hz
        holder = self.screen_stack[0].query_one("#charts")
        with self.batch_update():
            await holder.remove_children()
            charts: list[Chart] = [
                RimChart(sample_rate_hz=rate_hz, id="rim"),
                ResponseChart(sample_rate_hz=rate_hz, id="response"),
                SpectrumChart(sample_rate_hz=rate_hz, id="spectrum"),
            ]
            await holder.mount(*charts)
            for chart in charts:
                chart.marks = self.marks
            self._has_charts = True
            self._show_charts()

    def show_edit(self) -> None:
        """Give the engine the chain as it is now, draw it, and ask for findings."""
        if self.bench is not None:
            self.bench.push()
            self.show_selection()
            self.ask_findings()

    def ask_findings(self) -> None:
        """Ask for the findings of the preset as it is."""

    def show_loaded(self) -> None:
        """Draw another preset."""
        if self._has_charts:
            self.response.rescale()
        self.show_edit()

    def show_selection(self) -> None:
        """Draw chain, pole, rim and response."""
        bench = self.bench
        if bench is None or not self._has_charts:
            return
        from tonebench.screen import pictures  # noqa: PLC0415

        self.part(ChainPanel).show(pictures.chain_rows(bench), bench.session.selected)
        self.part(PolePanel).show(*pictures.pole_words(bench))
        self.rim.show(pictures.rim_picture(bench))
        self.draw_response()
        if not self._is_live:
            self.show_still_spectrum()

    @property
    def _is_live(self) -> bool:
        return self._phase == "playing"

    def draw_response(self) -> None:
        """Draw the response in as many points as the chart is wide."""
        bench = self.bench
        if bench is None or not self._has_charts or not self.response.display or not self.response.content_size:
            return
        from tonebench.screen import pictures  # noqa: PLC0415

        frequency_hz = self.response.frequencies_hz(pictures.features_hz(bench))
        number = bench.session.selected + 1 or None
        self.response.show(
            pictures.chain_curve(bench, frequency_hz),
            pictures.section_curve(bench, frequency_hz),
            section_number=number,
            f0_hz=pictures.f0_hz(bench),
        )

    def show_still_spectrum(self) -> None:
        """Draw the clip's long-term spectrum, as it is and as the chain leaves it."""
        if self.bench is None or not self._has_charts or self._before is None or not self.spectrum.display:
            return
        from tonebench.screen import pictures  # noqa: PLC0415

        self.spectrum.show(self._before, pictures.after_curve(self.bench, self._before))

    def show_live_spectrum(self) -> None:
        """Draw the spectrum of what has just been played."""
        bench = self.bench
        if bench is None or not self._has_charts or not self.spectrum.display:
            return
        from tonebench.screen import spectra  # noqa: PLC0415

        before, after = bench.engine.recent(spectra.STRETCH_FRAMES)
        self.spectrum.show(*spectra.playing_curves(before, after, bench.clip.sample_rate_hz))

    def find_long_term(self) -> None:
        """Find the clip's long-term spectrum in a thread, once per clip."""
        bench = self.bench
        if bench is None:
            return

        def find() -> "Curve | None":
            from tonebench.screen import spectra  # noqa: PLC0415

            return spectra.long_term_curve(bench.clip.frames, bench.clip.sample_rate_hz)

        self.in_thread(find, self._have_long_term)

    def _have_long_term(self, curve: "Curve | None") -> None:
        self._before = curve
        if not self._is_live:
            self.show_still_spectrum()

    def set_marks(self, marks: str) -> None:
        """Use another set of marks everywhere."""
        self.marks = marks
        is_plain = marks == "ascii"
        self.screen_stack[0].set_class(is_plain, "-ascii")
        for panel in self.screen_stack[0].query(Panel):
            panel.set_plain(is_plain)
