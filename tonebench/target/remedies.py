"""What would help, computed: other structures for the same words, longer words, the width that rings less.

A remedy is only named when it was tried and found better; its numbers are those of the trial.
"""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from tonebench.core.design import PoleZero, realise
from tonebench.core.kinds import WidthKey
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import ByHand, Section
from tonebench.core.widths import all_widths, radius_from_ring, ring_from_radius
from tonebench.errors import InvalidValueError
from tonebench.target.arithmetic import F32, F64, LARGEST_WORD_BITS, NumberFormat, Structure, Target
from tonebench.target.rounded import pole_zero
from tonebench.target.rounding import round_section
from tonebench.target.stability import is_section_stable
from tonebench.target.study import Part, Study
from tonebench.target.text import in_hz, in_seconds
from tonebench.target.thresholds import ring_limit_s

# One per form: df1, df2 and tdf2 store the same words.
_DISTINCT = (Structure.TDF2, Structure.COUPLED, Structure.SVF)
_DIRECT = (Structure.DF1, Structure.DF2, Structure.TDF2)
_BETTER = 0.5  # what is named must leave at most half of the fault


@dataclass(frozen=True, slots=True)
class Trial:
    """A section in another target: stable, and what its poles and zeros become."""

    target: Target
    rounded: PoleZero


def alternatives(target: Target) -> Iterator[tuple[Target, ...]]:
    """Yield the targets worth trying, in the order in which they are preferred: same words first, then longer ones."""
    others = [one for one in _DISTINCT if one is not target.structure]
    if target.structure in _DIRECT:
        others = [one for one in others if one not in _DIRECT]
    yield tuple(replace(target, structure=one) for one in others)
    for longer in longer_formats(target.number_format):
        yield tuple(_with_format(target, longer, one) for one in (target.structure, *others))


def longer_formats(number_format: NumberFormat) -> tuple[NumberFormat, ...]:
    """Return the next longer words of the same kind: f32 to f64, fixed point to twice its length with the same m."""
    if number_format.is_float:
        return (F64,) if number_format == F32 else ()
    word_bits = 2 * number_format.word_bits
    if word_bits > LARGEST_WORD_BITS:
        return ()
    return (replace(number_format, fraction_bits=word_bits - 1 - number_format.integer_bits),)


def _with_format(target: Target, number_format: NumberFormat, structure: Structure) -> Target:
    bits = target.accumulator_bits
    kept = None if bits is None else max(bits, number_format.word_bits)
    return replace(target, number_format=number_format, structure=structure, accumulator_bits=kept)


def best_trial(part: Part, target: Target, fault: Callable[[PoleZero], float], now: float) -> Trial | None:
    """Return the trial with the least fault, from the first group of targets that halves it; None where none does."""
    for group in alternatives(target):
        trials = [trial for one in group if (trial := _trial(part, one)) is not None]
        best = min(trials, key=lambda trial: fault(trial.rounded), default=None)
        if best is not None and fault(best.rounded) <= _BETTER * now:
            return best
    return None


def _trial(part: Part, target: Target) -> Trial | None:
    words = round_section(part.ideal, target.number_format, target.structure)
    rounded = pole_zero(words)
    if rounded is None or not is_section_stable(words):
        return None
    return Trial(target, rounded)


def pole_fault(ideal: PoleZero, rounded: PoleZero) -> float:
    """Return how far the pole went, in units of its distance from the circle; inf where a pair became real."""
    if not isinstance(ideal.poles, ConjugatePair):
        return 0.0
    if not isinstance(rounded.poles, ConjugatePair):
        return math.inf
    angle = abs(rounded.poles.angle_rad - ideal.poles.angle_rad)
    return math.hypot(rounded.poles.radius - ideal.poles.radius, angle) / max(1.0 - ideal.poles.radius, 1e-12)


def pole_remedy(study: Study, part: Part) -> str:
    """Name the target that keeps this section's pole best, with where it keeps it."""
    now = (
        math.inf if part.rounded is None or not is_section_stable(part.words) else pole_fault(part.ideal, part.rounded)
    )
    trial = best_trial(part, study.target, lambda rounded: pole_fault(part.ideal, rounded), now)
    if trial is None:
        return ""
    poles = trial.rounded.poles
    if isinstance(poles, ConjugatePair):
        kept = f"{in_hz(study.to_hz(poles.angle_rad))} and a ring of {in_seconds(study.ring_s(poles))}"
        return f"{trial.target} keeps {kept}"
    return f"{trial.target} keeps it stable with a ring of {in_seconds(study.ring_s(poles))}"


def ring_remedy(section: Section, sample_rate_hz: float) -> str:
    """Name the narrowest width at which the section's ring is no longer over the limit, in the key that it has."""
    if isinstance(section.made, ByHand):
        poles = section.made.poles
        if not isinstance(poles, ConjugatePair):
            return ""
        frequency_hz = poles.angle_rad * sample_rate_hz / (2.0 * math.pi)
        radius = radius_from_ring(ring_limit_s(frequency_hz), sample_rate_hz)
        shorter = _radius_down(radius)
        return f"a radius of {shorter:.6g} rings {in_seconds(ring_from_radius(shorter, sample_rate_hz))}"
    q = longest_q(section, sample_rate_hz)
    if q is None:
        return ""
    ring_s = _ring_of_q(section, q, sample_rate_hz)
    return "" if ring_s is None else f"a q of {_plain(q)} rings {in_seconds(ring_s[0])}"


def longest_q(section: Section, sample_rate_hz: float) -> float | None:
    """Return the largest q of three digits whose ring is at most the limit at its own pole; None if there is none."""
    made = section.made
    if isinstance(made, ByHand) or made.width is None:
        return None
    now = all_widths(made, sample_rate_hz)
    ring_s = now.get(WidthKey.RING_S)
    if ring_s is None:
        return None
    q = _three_digits_down(now[WidthKey.Q] * ring_limit_s(_pole_hz(section, sample_rate_hz)) / ring_s)
    rung = _ring_of_q(section, q, sample_rate_hz)
    return q if rung is not None and rung[0] <= ring_limit_s(rung[1]) else None


def _ring_of_q(section: Section, q: float, sample_rate_hz: float) -> tuple[float, float] | None:
    """Return the ring and the pole's frequency with another q; None where the poles are then real."""
    try:
        changed = section.with_width(WidthKey.Q, q)
        poles = realise(changed, sample_rate_hz).poles
    except InvalidValueError:
        return None
    if not isinstance(poles, ConjugatePair):
        return None
    frequency_hz = poles.angle_rad * sample_rate_hz / (2.0 * math.pi)
    return (ring_from_radius(poles.radius, sample_rate_hz), frequency_hz)


def _pole_hz(section: Section, sample_rate_hz: float) -> float:
    poles = realise(section, sample_rate_hz).poles
    return poles.angle_rad * sample_rate_hz / (2.0 * math.pi) if isinstance(poles, ConjugatePair) else 0.0


def _three_digits_down(value: float) -> float:
    scale = 10.0 ** (2 - math.floor(math.log10(value)))
    return math.floor(value * scale * (1.0 + 1e-12)) / scale


def _plain(q: float) -> str:
    return f"{q:.3g}" if q < 1000.0 else f"{q:.0f}"


def _radius_down(radius: float) -> float:
    """Return a radius of six digits that is not over this one."""
    return math.floor(radius * 1e6) / 1e6
