"""Which table of the file each section, export and acceptance continues, so that its comments stay with it."""

import math
from collections.abc import Callable, Sequence
from typing import Any

from tonebench.core.roots import polar_points
from tonebench.core.section import ByKind, Section
from tonebench.session.preset import Acceptance, ExportRequest


def continued(new: Sequence[Any], old: Sequence[Any]) -> list[int | None]:
    """Pair each new entry with an old one.

    First the equal ones, then those of the same kind and name and the nearest frequency, then, if none was added or
    removed, in order.
    """
    free = list(range(len(old)))
    pairs: list[int | None] = [None] * len(new)
    tests: tuple[Callable[[Any, Any], bool], ...] = (
        lambda a, b: bool(a == b),
        _is_namesake,
        _is_alike,
        lambda a, b: type(a) is type(b) and len(new) == len(old),
    )
    for is_same in tests:
        for position, entry in enumerate(new):
            alike = [index for index in free if pairs[position] is None and is_same(entry, old[index])]
            if alike:
                match = min(alike, key=lambda index, entry=entry: _distance(entry, old[index]))  # type: ignore[misc]
                pairs[position] = match
                free.remove(match)
    return pairs


def _is_namesake(one: Any, other: Any) -> bool:
    is_section = isinstance(one, Section) and isinstance(other, Section)
    return is_section and bool(one.name) and one.name == other.name


def _is_alike(one: Any, other: Any) -> bool:
    if isinstance(one, Section) and isinstance(other, Section):
        return one.kind == other.kind and not (one.name and other.name)
    if isinstance(one, ExportRequest) and isinstance(other, ExportRequest):
        return one.file == other.file
    return isinstance(one, Acceptance) and isinstance(other, Acceptance) and one.code == other.code


def _distance(one: Any, other: Any) -> float:
    """Return how far apart two sections lie on a log frequency axis; 0 for anything else."""
    if isinstance(one, Section) and isinstance(other, Section) and one.kind == other.kind:
        return abs(_place(one) - _place(other))
    return 0.0


def _place(section: Section) -> float:
    if isinstance(section.made, ByKind):
        return math.log(section.made.frequency_hz)
    angles = [point.angle_rad for point in polar_points(section.made.poles)]
    return math.log(max(angles[0], 1e-9)) if angles else 0.0
