"""Findings, help, and clicks. Findings are looked for off the key's path, and the newest question wins."""

import math
from typing import TYPE_CHECKING, Final

from tonebench.screen.actions_view import ViewActions
from tonebench.screen.panels.chain import ChainPanel
from tonebench.screen.panels.findings import FindingsPanel, FindingWords
from tonebench.screen.reading import ReadingScreen, findings_text, help_text

if TYPE_CHECKING:
    from textual.content import Content

    from tonebench.screen.charts.chart import Chart
    from tonebench.session.preset import Preset

FINDINGS_DELAY_S: Final = 0.15  # after the last edit: a held key starts no work that it would throw away


class LookActions(ViewActions):
    """What the keys of the group Look and the mouse do."""

    _asked: "Preset | None" = None
    _closing_words: str = ""
    _is_waiting_for_findings: bool = False
    _is_checking: bool = False

    def ask_findings(self) -> None:
        """Ask for the findings of the preset as it is; the newest question wins."""
        if self.bench is None:
            return
        self.part(FindingsPanel).set_pending()
        self._asked = self.bench.session.preset
        if not self._is_waiting_for_findings:
            self._is_waiting_for_findings = True
            self.set_timer(FINDINGS_DELAY_S, self._check)

    def _check(self) -> None:
        self._is_waiting_for_findings = False
        preset = self._asked
        if self.is_gone or self._is_checking or preset is None:
            return  # whoever is checking looks for a newer question at the end
        self._asked, self._is_checking = None, True
        self.in_thread(lambda: _find(preset), lambda found: self._have_findings(preset, *found), self._checked)

    def _have_findings(self, preset: "Preset", found: list[FindingWords], closing: str) -> None:
        self._closing_words = closing
        if self.bench is not None and self.bench.session.preset is preset:
            self.part(FindingsPanel).show(found, str(preset.target))
        self._checked()

    def _checked(self) -> None:
        self._is_checking = False
        if not self._is_waiting_for_findings:
            self._check()

    def action_findings(self) -> None:
        """Show all findings."""
        if self.ready() is None:
            return
        found = self.findings_panel.findings
        if not found:
            self.say("no findings so far")
            return
        self._read("findings", findings_text(found, self._closing_words))

    def action_help(self) -> None:
        """Show the help."""
        if self.ready() is not None:
            from tonebench.session.line_help import HELP  # noqa: PLC0415

            self._read("help", help_text(HELP, is_plain=self.marks == "ascii"))

    def _read(self, title: str, text: "Content") -> None:
        self.push_screen(ReadingScreen(title, text, is_plain=self.marks == "ascii"))

    def action_cancel(self) -> None:
        """Leave the typed line."""
        if self.is_typing:
            self.say("")
            self.close_typed()
        self.wants_to_quit = False

    def on_chain_panel_chosen(self, event: ChainPanel.Chosen) -> None:
        """Select the section that was clicked in the list."""
        self.select_section(event.index)

    def on_chart_clicked(self, event: "Chart.Clicked") -> None:
        """Select the section whose pole lies nearest to the click: at the cell on the rim chart, in pitch elsewhere."""
        if self.bench is None:
            return
        if event.chart is self.rim:
            near = self.rim.marks_near(event.column, event.row, reach=6)
        else:
            pitch = math.log(max(event.place.frequency_hz, 1.0))
            poles = [mark for mark in self.rim.picture.marks if mark.role == "pole"]
            near = sorted(poles, key=lambda mark: abs(math.log(max(mark.frequency_hz, 1.0)) - pitch))
        if near:
            self.select_section(near[0].section_number - 1)


def _find(preset: "Preset") -> tuple[list[FindingWords], str]:
    """Return the findings in words, and what was not judged; the caller is a thread."""
    from tonebench.screen.wording import finding_words  # noqa: PLC0415
    from tonebench.target.check import NOT_YET_JUDGED, check_chain  # noqa: PLC0415

    found = check_chain(preset.chain, preset.target, preset.build_rates_hz, preset.acceptances)
    return finding_words(found), NOT_YET_JUDGED
