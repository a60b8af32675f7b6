"""The section kinds and what each of them has: a gain, a first-order form, which widths.

The truth of a kind is its frequency, one width and a gain; the formulas that turn them into poles and zeros stand
in ``design.py``.
"""

import math
from dataclasses import dataclass
from enum import StrEnum

from tonebench.errors import InvalidValueError, must_be


class Kind(StrEnum):
    """What a section is made by. ``free`` means poles and zeros by hand."""

    PEAK = "peak"
    LOW_SHELF = "low shelf"
    HIGH_SHELF = "high shelf"
    NOTCH = "notch"
    LOW_PASS = "low-pass"
    HIGH_PASS = "high-pass"
    BAND_PASS = "band-pass"
    ALL_PASS = "all-pass"
    RESONATOR = "resonator"
    FREE = "free"


class WidthKey(StrEnum):
    """The five ways to say how wide a section is."""

    Q = "q"
    BANDWIDTH_HZ = "bandwidth_hz"
    BANDWIDTH_OCT = "bandwidth_oct"
    RING_S = "ring_s"
    RADIUS = "radius"


_BANDED = frozenset({Kind.PEAK, Kind.NOTCH, Kind.BAND_PASS, Kind.RESONATOR})
_WITH_GAIN = frozenset({Kind.PEAK, Kind.LOW_SHELF, Kind.HIGH_SHELF, Kind.RESONATOR})
_FIRST_ORDER = frozenset({Kind.LOW_SHELF, Kind.HIGH_SHELF, Kind.LOW_PASS, Kind.HIGH_PASS, Kind.ALL_PASS})


def has_gain(kind: Kind) -> bool:
    """Tell whether the kind has a gain of its own at its frequency."""
    return kind in _WITH_GAIN


def has_first_order(kind: Kind) -> bool:
    """Tell whether the kind exists with one pole."""
    return kind in _FIRST_ORDER


def allowed_widths(kind: Kind) -> tuple[WidthKey, ...]:
    """Return the widths that mean something for this kind.

    A bandwidth needs two band edges, so shelves, low-, high- and all-pass have none. Ring time and radius describe
    a conjugate pole pair; whether a given section has one is checked with its numbers.
    """
    if kind in _BANDED:
        return tuple(WidthKey)
    return (WidthKey.Q, WidthKey.RING_S, WidthKey.RADIUS)


def parse_kind(text: str) -> Kind:
    """Read a kind's name; spaces, hyphens and underscores are the same.

    Raises
    ------
    InvalidValueError
        If there is no such kind.

    """
    plain = _plain(text)
    for kind in Kind:
        if _plain(kind.value) == plain:
            return kind
    names = ", ".join(kind.value for kind in Kind)
    raise InvalidValueError(must_be("kind", f"one of {names}", text))


def _plain(text: str) -> str:
    return text.strip().lower().replace(" ", "").replace("-", "").replace("_", "")


@dataclass(frozen=True, slots=True)
class Width:
    """The one width that was written or last typed: its key and its value."""

    key: WidthKey
    value: float

    def __post_init__(self) -> None:
        if not (math.isfinite(self.value) and self.value > 0.0):
            raise InvalidValueError(must_be(self.key.value, "a finite number over 0", self.value))
        if self.key is WidthKey.RADIUS and self.value >= 1.0:
            raise InvalidValueError(
                must_be("radius", "under 1 for a kind", self.value, "make the section free to reach the unit circle")
            )
