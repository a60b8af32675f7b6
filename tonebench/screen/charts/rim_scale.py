"""The vertical scale of the rim chart: which row a radius stands on, and what a row means.

From the top: the outside (growth time, mirrored), the rim, the inside (ring time), the floor. A radius r rings for
T60 = ln(1000) / (-ln r * fs), the time of a fall by 60 dB; log10 of it is, but for a constant, -log10(-ln r).
"""

import math
from dataclasses import dataclass
from enum import Enum
from typing import Final

from tonebench.errors import InvalidValueError, must_be
from tonebench.screen.charts.axis import Tick
from tonebench.screen.charts.words import ring_label

LN_1000: Final = math.log(1000.0)
RIM_LN_RADIUS: Final = 1e-7
DEFAULT_SPAN_S: Final = (1e-4, 30.0)


class Zone(Enum):
    """The four parts of the rim chart."""

    OUTSIDE = "outside"
    RIM = "rim"
    INSIDE = "inside"
    FLOOR = "floor"


def ring_s(radius: float, sample_rate_hz: float) -> float:
    """Return the time in which a pole of a radius falls (or, outside, grows) by 60 dB, in seconds.

    0 for radius 0, infinite on the unit circle itself.
    """
    if radius == 0:
        return 0.0
    ln_radius = abs(math.log(radius))
    return math.inf if ln_radius == 0 else LN_1000 / (ln_radius * sample_rate_hz)


@dataclass(frozen=True, slots=True)
class RimScale:
    """Rows of a rim chart.

    Attributes
    ----------
    rows : int
        All rows of the plot.
    sample_rate_hz : float
        Turns radius into time.
    has_outside : bool
        Whether anything lies outside the unit circle; it then gets about a quarter of the rows.
    low_s, high_s : float
        Shortest and longest time of the inside rows and of the outside rows.
    """

    rows: int
    sample_rate_hz: float
    has_outside: bool = False
    low_s: float = DEFAULT_SPAN_S[0]
    high_s: float = DEFAULT_SPAN_S[1]

    def __post_init__(self) -> None:
        if not 0 < self.low_s < self.high_s < math.inf:
            raise InvalidValueError(
                must_be("the span of ring times", "above 0 and ascending", (self.low_s, self.high_s))
            )

    @property
    def outside_rows(self) -> int:
        """Rows above the rim."""
        if self.rows < 5:
            return 0 if self.rows < 3 else 1
        if self.has_outside:
            return max(1, round(self.rows / 4))
        return 2 if self.rows >= 16 else 1

    @property
    def rim_row(self) -> int:
        """Row of the unit circle."""
        return self.outside_rows

    @property
    def floor_row(self) -> int:
        """Row of radius 0 and of all rings under the span; the rim itself if there is one row only."""
        return max(self.rim_row, self.rows - 1)

    @property
    def inside_rows(self) -> int:
        """Rows between rim and floor."""
        return max(0, self.floor_row - self.rim_row - 1)

    def zone(self, radius: float) -> Zone:
        """Return the part of the chart that a radius belongs to."""
        if radius > 0 and abs(math.log(radius)) < RIM_LN_RADIUS:
            return Zone.RIM
        if radius > 1:
            return Zone.OUTSIDE
        return Zone.FLOOR if ring_s(radius, self.sample_rate_hz) < self.low_s else Zone.INSIDE

    def row(self, radius: float) -> int:
        """Return the row of a radius; times out of the span are held at its ends."""
        zone = self.zone(radius)
        if zone is Zone.RIM:
            return self.rim_row
        if zone is Zone.FLOOR:
            return self.floor_row
        time_s = ring_s(radius, self.sample_rate_hz)
        if zone is Zone.INSIDE:
            inside = self.rim_row + 1 + self._step(time_s, self.inside_rows)
            return min(self.floor_row, inside)
        return max(0, self.rim_row - 1 - self._step(time_s, self.outside_rows))

    def pinned(self, radius: float) -> int:
        """Return 1 or -1 if a radius is held at an end because its row would be higher or lower, else 0."""
        zone = self.zone(radius)
        time_s = ring_s(radius, self.sample_rate_hz)
        if zone is Zone.INSIDE and time_s > self.high_s:
            return 1
        if zone is Zone.OUTSIDE and time_s < self.low_s:
            return 1
        return -1 if zone is Zone.OUTSIDE and time_s > self.high_s else 0

    def zone_of_row(self, row: int) -> Zone:
        """Return the part of the chart that a row belongs to."""
        if row == self.rim_row:
            return Zone.RIM
        if row < self.rim_row:
            return Zone.OUTSIDE
        return Zone.INSIDE if row < self.floor_row else Zone.FLOOR

    def time_s(self, row: int) -> float:
        """Return the ring or growth time at the middle of a row: infinite on the rim, 0 on the floor."""
        zone = self.zone_of_row(row)
        if zone is Zone.RIM:
            return math.inf
        if zone is Zone.FLOOR:
            return 0.0
        if zone is Zone.INSIDE:
            part = (row - self.rim_row - 0.5) / self.inside_rows
        else:
            part = (self.rim_row - row - 0.5) / self.outside_rows
        return self.high_s * math.pow(self.low_s / self.high_s, part)

    def radius(self, row: int) -> float:
        """Return the radius at the middle of a row: 1 on the rim, 0 on the floor."""
        zone = self.zone_of_row(row)
        if zone is Zone.RIM:
            return 1.0
        if zone is Zone.FLOOR:
            return 0.0
        ln_radius = LN_1000 / (self.time_s(row) * self.sample_rate_hz)
        return math.exp(ln_radius if zone is Zone.OUTSIDE else -ln_radius)

    def ticks(self) -> list[Tick]:
        """Return the decades of time that have a row of their own, from the top down, inside and outside."""
        decades = range(math.ceil(math.log10(self.low_s) - 1e-9), math.floor(math.log10(self.high_s) + 1e-9) + 1)
        ticks: dict[int, Tick] = {}
        for decade in sorted(decades, key=_decade_rank):
            time = float(f"1e{decade}")
            inside = self.rim_row + 1 + self._step(time, self.inside_rows)
            outside = self.rim_row - 1 - self._step(time, self.outside_rows)
            for row, room in ((inside, self.inside_rows), (outside, self.outside_rows)):
                if room >= 2 and row not in ticks and 0 <= row < self.floor_row and row != self.rim_row:
                    ticks[row] = Tick(time, row, ring_label(time))
        return [ticks[row] for row in sorted(ticks)]

    def _step(self, time_s: float, rows: int) -> int:
        """Rows from the rim to a time, of so many rows that share the span."""
        if rows == 0:
            return 0
        part = math.log(self.high_s / time_s) / math.log(self.high_s / self.low_s) if time_s < math.inf else 0.0
        return min(rows - 1, max(0, math.floor(part * rows)))


def _decade_rank(decade: int) -> tuple[int, int]:
    """Even decades first (1 s, 10 ms, 0.1 ms), so that labels thin out evenly."""
    return (decade % 2, decade)
