"""Findings about poles: unstable, moved, merged, ringing otherwise than asked."""

import math
from collections.abc import Iterator

from tonebench.core.kinds import Kind, WidthKey
from tonebench.core.roots import ConjugatePair, largest_radius
from tonebench.core.section import ByHand, Section
from tonebench.target import thresholds as limits
from tonebench.target.findings import Finding, Severity
from tonebench.target.remedies import pole_remedy
from tonebench.target.stability import is_section_stable
from tonebench.target.study import Part, Study
from tonebench.target.text import in_hz, in_seconds

_CENTS_PER_OCTAVE = 1200.0


def is_ring_wanted(section: Section) -> bool:
    """Tell whether the section's ring was asked for: a resonator, or a width written as ``ring_s``."""
    if isinstance(section.made, ByHand):
        return False
    width = section.made.width
    return section.kind is Kind.RESONATOR or (width is not None and width.key is WidthKey.RING_S)


def check_poles(study: Study) -> Iterator[Finding]:
    """Yield what happens to each section's poles."""
    for part in study.parts:
        if part.ideal_radius >= 1.0:
            yield _unstable(part)
        elif part.rounded is None:
            continue  # coefficient-range says it
        elif not is_section_stable(part.words):
            yield _unstable_rounded(study, part)
        elif isinstance(part.ideal.poles, ConjugatePair) and not isinstance(part.rounded.poles, ConjugatePair):
            yield from _merged(study, part, part.ideal.poles)
        else:
            yield from _moved(study, part)
            yield from _ring_changed(study, part)


def _unstable(part: Part) -> Finding:
    radius = part.ideal_radius
    where = "on" if radius == 1.0 else "outside"
    return Finding(
        "unstable",
        Severity.DANGER,
        part.number,
        radius,
        limits.LARGEST_RADIUS,
        "",
        f"a pole lies {where} the unit circle, at radius {radius:.9g}: it never falls silent",
        "move the pole to a radius under 1",
    )


def _unstable_rounded(study: Study, part: Part) -> Finding:
    radius = 1.0 if part.rounded is None else largest_radius([part.rounded.poles])
    return Finding(
        "unstable-rounded",
        Severity.DANGER,
        part.number,
        radius,
        limits.LARGEST_RADIUS,
        "",
        f"stable as shaped (radius {part.ideal_radius:.9g}), but the words of {study.target} put a pole "
        f"at radius {radius:.9g}",
        pole_remedy(study, part),
    )


def _merged(study: Study, part: Part, poles: ConjugatePair) -> Iterator[Finding]:
    if part.rounded is None or poles.radius == 0.0 or poles.angle_rad in (0.0, math.pi):
        return
    frequency_hz = study.to_hz(poles.angle_rad)
    yield Finding(
        "poles-merged",
        Severity.CAUTION,
        part.number,
        frequency_hz,
        None,
        "Hz",
        f"the words of {study.target} turn the pole pair at {in_hz(frequency_hz)} into real poles, "
        f"which have no frequency",
        pole_remedy(study, part),
    )


def _moved(study: Study, part: Part) -> Iterator[Finding]:
    ideal, rounded = part.ideal.poles, None if part.rounded is None else part.rounded.poles
    if not (isinstance(ideal, ConjugatePair) and isinstance(rounded, ConjugatePair)) or ideal.angle_rad == 0.0:
        return
    cents = abs(_CENTS_PER_OCTAVE * math.log2(rounded.angle_rad / ideal.angle_rad))
    if cents <= limits.POLE_MOVED_NOTE_CENTS:
        return
    is_caution = cents > limits.POLE_MOVED_CAUTION_CENTS
    before_hz, after_hz = study.to_hz(ideal.angle_rad), study.to_hz(rounded.angle_rad)
    yield Finding(
        "pole-moved",
        Severity.CAUTION if is_caution else Severity.NOTE,
        part.number,
        cents,
        limits.POLE_MOVED_CAUTION_CENTS if is_caution else limits.POLE_MOVED_NOTE_CENTS,
        "cents",
        f"{study.target} moves the pole from {in_hz(before_hz)} to {in_hz(after_hz)}: "
        f"{abs(after_hz - before_hz):.3g} Hz, {cents:.3g} cents",
        pole_remedy(study, part),
    )


def _ring_changed(study: Study, part: Part) -> Iterator[Finding]:
    if part.rounded is None or part.ideal_radius == 0.0:
        return
    before_s, after_s = study.ring_s(part.ideal.poles), study.ring_s(part.rounded.poles)
    frequency_hz = study.to_hz(part.ideal.poles.angle_rad) if isinstance(part.ideal.poles, ConjugatePair) else 0.0
    is_wanted = is_ring_wanted(part.section)
    percent = 100.0 * abs(after_s / before_s - 1.0)
    is_heard = is_wanted or max(before_s, after_s) > limits.ring_limit_s(frequency_hz)
    if percent <= limits.RING_CHANGED_PERCENT or not is_heard:
        return
    is_caution = is_wanted or percent > limits.RING_CHANGED_CAUTION_PERCENT
    yield Finding(
        "ring-changed",
        Severity.CAUTION if is_caution else Severity.NOTE,
        part.number,
        percent,
        limits.RING_CHANGED_PERCENT if is_wanted or not is_caution else limits.RING_CHANGED_CAUTION_PERCENT,
        "%",
        f"{study.target} changes the ring from {in_seconds(before_s)} to {in_seconds(after_s)}, by {percent:.3g} %",
        pole_remedy(study, part),
    )
