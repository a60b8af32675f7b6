"""The section to the nearest spectral peak of the clip: searched in a thread, told in numbers."""

from typing import TYPE_CHECKING

from tonebench.screen.actions_look import LookActions

if TYPE_CHECKING:
    from tonebench.hum.peaks import Peak
    from tonebench.screen.bench import Bench


class PeakActions(LookActions):
    """What p does."""

    def action_peak(self) -> None:
        """Look for the peak nearest where the selected section works."""
        self.attempt(self._search)

    def _search(self, bench: "Bench") -> str:
        frequency_hz = bench.working_frequency_hz()
        section = bench.session.section
        identity = section.identity if section is not None else 0

        def search() -> "Peak | None":
            from tonebench.hum.peaks import nearest_peak  # noqa: PLC0415

            return nearest_peak(bench.clip.frames, bench.clip.sample_rate_hz, frequency_hz)

        self.in_thread(search, lambda peak: self._found(bench, identity, peak))
        return "looking for the nearest peak …"

    def _found(self, bench: "Bench", identity: int, peak: "Peak | None") -> None:
        section = bench.session.section
        if section is None or section.identity != identity:
            self.say("the peak was found, but another section is selected now: nothing was moved")
            return
        if peak is None:
            self.say("no spectral peak stands out near this section")
            return
        self.attempt(lambda bench: self._put(bench, peak), is_edit=True)

    @staticmethod
    def _put(bench: "Bench", peak: "Peak") -> str:
        bench.put_frequency(round(peak.frequency_hz, 4))  # finer than any clip tells
        return (
            f"section {bench.session.selected + 1} on the peak: {peak.frequency_hz:.3f} Hz, "
            f"{peak.level_dbfs:.1f} dBFS, {peak.height_db:.1f} dB over its surroundings"
        )
