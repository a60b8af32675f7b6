"""The same chain at another sample rate: Hz and seconds are kept.

A kind keeps its frequency, its gain and the width that was written (a ``radius`` keeps the ring time that it means).
Poles and zeros by hand keep Hz and seconds through their logarithm: radius^(old/new), angle·old/new. What cannot be
kept (anything at or over half the new rate, the level of a free section without ``gain_at_hz``) is reported.
"""

import math
from dataclasses import dataclass, replace

from tonebench.core.chain import Chain
from tonebench.core.kinds import Width, WidthKey
from tonebench.core.roots import ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.errors import InvalidValueError


@dataclass(frozen=True, slots=True)
class RateChange:
    """A chain at another rate.

    Attributes
    ----------
    chain : Chain
        Without the sections that the rate cannot hold.
    lost : tuple of (int, str)
        Section number, from 1, and what could not be kept.

    """

    chain: Chain
    lost: tuple[tuple[int, str], ...]


def at_rate(chain: Chain, sample_rate_hz: float) -> RateChange:
    """Return the chain for another sample rate, with what was lost on the way."""
    if sample_rate_hz == chain.sample_rate_hz:
        return RateChange(chain, ())
    replace(chain, sections=(), sample_rate_hz=sample_rate_hz)  # refuses an impossible rate
    ratio = chain.sample_rate_hz / sample_rate_hz
    sections: list[Section] = []
    lost: list[tuple[int, str]] = []
    for number, section in enumerate(chain.sections, start=1):
        try:
            moved, losses = _section_at(section, sample_rate_hz, ratio)
            Chain(chain.name, sample_rate_hz, (moved,))
        except InvalidValueError as error:
            reason = str(error).removeprefix("section 1: ")
            lost.append((number, f"left out at {sample_rate_hz:g} Hz: {reason}"))
            continue
        sections.append(moved)
        lost += [(number, loss) for loss in losses]
    return RateChange(replace(chain, sample_rate_hz=sample_rate_hz, sections=tuple(sections)), tuple(lost))


def _section_at(section: Section, sample_rate_hz: float, ratio: float) -> tuple[Section, list[str]]:
    losses = []
    delay = section.delay_samples / ratio
    if delay != round(delay):
        losses.append(f"delay of {section.delay_samples} samples becomes {round(delay)}, not {delay:.3f}")
    moved = replace(section, delay_samples=round(delay))
    if isinstance(section.made, ByKind):
        return replace(moved, made=_kind_at(section.made, ratio)), losses
    made, by_hand_losses = _hand_at(section.made, sample_rate_hz, ratio)
    return replace(moved, made=made), losses + by_hand_losses


def _kind_at(made: ByKind, ratio: float) -> ByKind:
    if made.width is None or made.width.key is not WidthKey.RADIUS:
        return made
    return replace(made, width=Width(WidthKey.RADIUS, made.width.value**ratio))


def _hand_at(made: ByHand, sample_rate_hz: float, ratio: float) -> tuple[ByHand, list[str]]:
    losses = []
    poles, zeros = _roots_at(made.poles, ratio), _roots_at(made.zeros, ratio)
    if made.gain_at_hz is None and (poles, zeros) != (made.poles, made.zeros):
        losses.append("the level of a free section changes with the rate; give gain_at_hz to keep it")
    for name, before, after in (("poles", made.poles, poles), ("zeros", made.zeros, zeros)):
        if isinstance(before, ConjugatePair) and before.angle_rad * ratio > math.pi:
            losses.append(f"its {name} lie over half of {sample_rate_hz:g} Hz and are held there")
        if isinstance(after, RealRoots) and any(-1.0 != v < 0.0 for v in after.values):
            losses.append(f"its negative real {name} stay at half the sampling rate, which is another frequency now")
    return replace(made, poles=poles, zeros=zeros), losses


def _roots_at(roots: Roots, ratio: float) -> Roots:
    if isinstance(roots, ConjugatePair):
        return ConjugatePair(_power(roots.radius, ratio), min(roots.angle_rad * ratio, math.pi))
    return RealRoots(tuple(math.copysign(_power(abs(value), ratio), value) for value in roots.values))


def _power(radius: float, ratio: float) -> float:
    """Return radius^ratio; a root too far out for a double is held at the largest one."""
    if radius == 0.0:
        return 0.0
    return math.exp(min(ratio * math.log(radius), 700.0))
