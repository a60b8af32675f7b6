"""One line of the benchmark's table: a ratio from one run, beside a named yardstick."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Row:
    """What was measured, what beside, their ratio, and the largest ratio that is wished for."""

    name: str
    measured: str
    yardstick: str
    ratio: float
    goal: float

    def __str__(self) -> str:
        """Return a line of a markdown table."""
        verdict = "met" if self.ratio <= self.goal else "MISSED"
        return f"| {self.name} | {self.measured} | {self.yardstick} | {self.ratio:.2f} | {self.goal:g} | {verdict} |"
