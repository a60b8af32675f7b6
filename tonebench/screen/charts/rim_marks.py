"""What the rim chart is given, and how marks that fall into one cell are brought together and named."""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tonebench.errors import InvalidValueError, must_be
from tonebench.screen.charts.marks import Ink

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from tonebench.screen.charts.axis import FrequencyAxis
    from tonebench.screen.charts.rim_scale import RimScale


@dataclass(frozen=True, slots=True)
class RimMark:
    """One pole or zero. A conjugate pair is one mark; each root of a real pair is a mark of its own.

    Attributes
    ----------
    section_number : int
        As the screen counts them, from 1.
    role : str
        "pole" or "zero".
    frequency_hz : float
        The angle in Hz: 0 for a positive real root, half the sample rate for a negative one.
    radius : float
        Distance from the origin, finite, 0 or more.
    is_selected : bool
        Put in brackets. For a whole section selected, set it on the poles only.
    is_bypassed : bool
        The section is out of the chain: drawn in parentheses, and no part of the region of convergence.
    """

    section_number: int
    role: str
    frequency_hz: float
    radius: float
    is_selected: bool = False
    is_bypassed: bool = False

    def __post_init__(self) -> None:
        if self.role not in ("pole", "zero"):
            raise InvalidValueError(must_be("role", '"pole" or "zero"', self.role))
        if not (math.isfinite(self.radius) and self.radius >= 0):
            raise InvalidValueError(must_be("radius", "a finite number, 0 or more", self.radius))
        if not (math.isfinite(self.frequency_hz) and self.frequency_hz >= 0):
            raise InvalidValueError(must_be("frequency_hz", "a finite number, 0 or more", self.frequency_hz))


@dataclass(frozen=True, slots=True)
class RimLeader:
    """The f0 of a section, marked at the foot of the chart and joined to the section's first pole."""

    section_number: int
    f0_hz: float


@dataclass(frozen=True, slots=True)
class RimPicture:
    """Everything that a rim chart shows.

    Attributes
    ----------
    sample_rate_hz : float
        Of the chain.
    marks : tuple of RimMark
        Poles and zeros of all sections.
    leaders : tuple of RimLeader
        One per section that has an f0.
    """

    sample_rate_hz: float
    marks: tuple[RimMark, ...] = ()
    leaders: tuple[RimLeader, ...] = ()

    @property
    def has_outside(self) -> bool:
        """Whether any pole or zero lies outside the unit circle."""
        return any(mark.radius > 1 and math.log(mark.radius) >= 1e-7 for mark in self.marks)

    @property
    def outermost_pole(self) -> RimMark | None:
        """The pole that bounds the region of convergence of the causal chain, bypassed sections left out."""
        poles = [mark for mark in self.marks if mark.role == "pole" and not mark.is_bypassed]
        return max(poles, key=lambda mark: mark.radius, default=None)


@dataclass(frozen=True, slots=True)
class Cluster:
    """All marks that share one cell.

    Attributes
    ----------
    column, row : int
        The cell.
    glyph : str
        × for poles, ○ for zeros, ⊗ for both.
    texts : tuple of str
        Names to try, from the fullest to the shortest; empty if it needs none.
    ink : Ink
        Of glyph and name.
    is_selected, is_bypassed : bool
        Whether any of the marks is selected; whether all are bypassed.
    arrow : str
        "‹", "›", "↑" or "↓" if held at an edge of the chart, else empty.
    """

    column: int
    row: int
    glyph: str
    texts: tuple[str, ...]
    ink: Ink
    is_selected: bool
    is_bypassed: bool
    arrow: str


def clusters(marks: "Iterable[RimMark]", axis: "FrequencyAxis", scale: "RimScale") -> list[Cluster]:
    """Bring together the marks of each cell; the selected ones first, then from left to right."""
    cells: dict[tuple[int, int], list[RimMark]] = {}
    for mark in marks:
        cell = (axis.column(mark.frequency_hz), scale.row(mark.radius))
        cells.setdefault(cell, []).append(mark)
    found = [_cluster(column, row, group, axis, scale) for (column, row), group in cells.items()]
    return sorted(found, key=lambda cluster: (not cluster.is_selected, cluster.row, cluster.column))


def _cluster(column: int, row: int, group: "Sequence[RimMark]", axis: "FrequencyAxis", scale: "RimScale") -> Cluster:
    poles = [mark for mark in group if mark.role == "pole"]
    named = sorted({mark.section_number for mark in poles or group if poles or mark.is_selected})
    chosen = sorted({mark.section_number for mark in group if mark.is_selected})
    is_bypassed = all(mark.is_bypassed for mark in group)
    ink = Ink.SELECTED if chosen else Ink.BYPASSED if is_bypassed else Ink.MARK
    glyph = "⊗" if 0 < len(poles) < len(group) else "×" if poles else "○"
    return Cluster(
        column, row, glyph, number_texts(named, chosen), ink, bool(chosen), is_bypassed, _arrow(group[0], axis, scale)
    )


def _arrow(mark: RimMark, axis: "FrequencyAxis", scale: "RimScale") -> str:
    across, up = axis.pinned(mark.frequency_hz), scale.pinned(mark.radius)
    if across:
        return "‹" if across < 0 else "›"
    return {0: "", 1: "↑", -1: "↓"}[up]


def number_texts(numbers: "Sequence[int]", chosen: "Sequence[int]" = ()) -> tuple[str, ...]:
    """Ways to write section numbers, from the fullest to the shortest: "2,4,5" or "2-4", "2+" (2 and more).

    If some are chosen (selected), only they are written, since they stand in brackets; "+" tells of the others.
    """
    if not numbers:
        return ()
    if chosen and len(chosen) < len(numbers):
        return tuple(dict.fromkeys((_joined(chosen) + "+", f"{chosen[0]}+")))
    full = _joined(numbers)
    return (full,) if len(numbers) == 1 else (full, f"{numbers[0]}+")


def _joined(numbers: "Sequence[int]") -> str:
    """Numbers as a list, or as a range if three or more follow each other."""
    if len(numbers) > 2 and numbers[-1] - numbers[0] == len(numbers) - 1:
        return f"{numbers[0]}-{numbers[-1]}"
    return ",".join(str(number) for number in numbers)
