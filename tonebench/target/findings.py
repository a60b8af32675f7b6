"""What a finding is: trouble with the numbers, as data.

Everything that checks a chain returns values of this one class; nothing here decides when a finding is made.
"""

from dataclasses import dataclass
from enum import StrEnum


class Severity(StrEnum):
    """How much a finding matters, in words; ``rank`` orders them."""

    NOTE = "note"
    CAUTION = "caution"
    DANGER = "danger"

    @property
    def rank(self) -> int:
        """0 for a note, 1 for a caution, 2 for a danger."""
        return _ORDER.index(self)


_ORDER = (Severity.NOTE, Severity.CAUTION, Severity.DANGER)


def rank(severity: Severity) -> int:
    """Return 0 for a note, 1 for a caution, 2 for a danger."""
    return severity.rank


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing that will happen to a chain.

    Attributes
    ----------
    code : str
        Plain words with hyphens, such as ``pole-moved``; never changes once released.
    severity : Severity
    section : int or None
        Number from 1, bypassed sections counted; None for the whole chain.
    measured, limit : float or None
        In ``unit``. A greater value is the worse one, in every code, so that an acceptance can say "up to".
    unit : str
        ``""`` for a bare ratio.
    message : str
        One sentence with the numbers in it.
    remedy : str
        What to do, computed for this chain; empty where nothing could be computed.
    accepted : bool
        Wanted by the preset, within the limit given there.
    because : str
        The preset's reason.

    """

    code: str
    severity: Severity
    section: int | None
    measured: float | None
    limit: float | None
    unit: str
    message: str
    remedy: str
    accepted: bool = False
    because: str = ""
