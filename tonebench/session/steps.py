"""The step that arrows and gain keys take; one choice sets pitch, ring and gain together."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Step:
    """One size of step: cents of pitch, per cent of ring, decibels of gain."""

    pitch_cents: float
    ring_percent: float
    gain_db: float

    def __str__(self) -> str:
        """Return what the status row shows."""
        return f"{self.pitch_cents:g} cents, {self.ring_percent:g} % of ring, {self.gain_db:g} dB"

    @property
    def pitch_ratio(self) -> float:
        """Frequency ratio of one step up."""
        return float(2.0 ** (self.pitch_cents / 1200.0))

    @property
    def ring_ratio(self) -> float:
        """Ring ratio of one step up."""
        return 1.0 + self.ring_percent / 100.0


STEPS = (Step(100.0, 10.0, 3.0), Step(10.0, 10.0, 1.0), Step(1.0, 1.0, 0.5), Step(0.1, 0.1, 0.1))
STARTING_STEP = 1
