"""A chain: up to 128 sections at one sample rate, in series or as a sum."""

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace

from tonebench.core.design import PoleZero, realise
from tonebench.core.section import LARGEST_GAIN_DB, Section
from tonebench.errors import InvalidValueError, must_be

LARGEST_SECTION_COUNT = 128
SMALLEST_SAMPLE_RATE_HZ = 1000.0
LARGEST_SAMPLE_RATE_HZ = 1_000_000.0
COMBINES = ("series", "sum")


@dataclass(frozen=True, slots=True)
class Chain:
    """Sections and how they are combined.

    Attributes
    ----------
    name : str
    sample_rate_hz : float
        The chain runs at the clip's rate; poles by hand belong to this one.
    sections : tuple of Section
        In order. Each is checked against the rate, and gets an identity if it has none.
    gain_db : float
        Of the whole chain, applied last.
    combine : str
        ``"series"`` or ``"sum"``.
    direct_gain_db : float or None
        Sum only: adds the input itself at this level; None adds nothing.

    """

    name: str
    sample_rate_hz: float
    sections: tuple[Section, ...] = ()
    gain_db: float = 0.0
    combine: str = "series"
    direct_gain_db: float | None = None

    def __post_init__(self) -> None:
        if not SMALLEST_SAMPLE_RATE_HZ <= self.sample_rate_hz <= LARGEST_SAMPLE_RATE_HZ:
            rule = f"between {SMALLEST_SAMPLE_RATE_HZ:g} and {LARGEST_SAMPLE_RATE_HZ:g}"
            raise InvalidValueError(must_be("sample_rate_hz", rule, self.sample_rate_hz))
        if self.combine not in COMBINES:
            raise InvalidValueError(must_be("combine", '"series" or "sum"', self.combine))
        if len(self.sections) > LARGEST_SECTION_COUNT:
            raise InvalidValueError(
                must_be("the number of sections", f"at most {LARGEST_SECTION_COUNT}", len(self.sections))
            )
        self._check_gains()
        object.__setattr__(self, "sections", _identified(self.sections))
        for number, section in enumerate(self.sections, start=1):
            try:
                realise(section, self.sample_rate_hz)
            except InvalidValueError as error:
                raise InvalidValueError(f"section {number}: {error}") from error

    def _check_gains(self) -> None:
        for name, value in (("gain_db", self.gain_db), ("direct_gain_db", self.direct_gain_db)):
            if value is not None and not (math.isfinite(value) and abs(value) <= LARGEST_GAIN_DB):
                rule = f"between -{LARGEST_GAIN_DB:g} and {LARGEST_GAIN_DB:g} dB"
                raise InvalidValueError(must_be(name, rule, value))
        if self.direct_gain_db is not None and self.combine != "sum":
            raise InvalidValueError(
                must_be("direct_gain_db", 'left out for a chain in series; set combine = "sum"', self.direct_gain_db)
            )

    @property
    def active_sections(self) -> tuple[Section, ...]:
        """The sections that are not bypassed."""
        return tuple(section for section in self.sections if not section.is_bypassed)

    @property
    def direct_gain(self) -> float:
        """Linear factor of the input itself in a sum; 0.0 where nothing is added."""
        return 0.0 if self.direct_gain_db is None else 10.0 ** (self.direct_gain_db / 20.0)

    def realised(self) -> tuple[PoleZero, ...]:
        """Return poles, zeros and gain of each active section."""
        return tuple(realise(section, self.sample_rate_hz) for section in self.active_sections)

    def with_sections(self, sections: Iterable[Section]) -> "Chain":
        """Return the chain with other sections."""
        return replace(self, sections=tuple(sections))

    def with_section(self, index: int, section: Section) -> "Chain":
        """Return the chain with the section at ``index`` replaced."""
        sections = list(self.sections)
        sections[index] = section
        return self.with_sections(sections)


def _identified(sections: tuple[Section, ...]) -> tuple[Section, ...]:
    """Give each section without an identity, or with one already taken, the next free one."""
    taken: set[int] = set()
    next_free = max((section.identity for section in sections), default=0) + 1
    result = []
    for section in sections:
        kept = section
        if section.identity <= 0 or section.identity in taken:
            kept = replace(section, identity=next_free)
            next_free += 1
        taken.add(kept.identity)
        result.append(kept)
    return tuple(result)
