"""Findings about ringing: both rings of every mode, judged by their decay against the published thresholds."""

import math
from collections.abc import Iterator

from tonebench.core.ring import AUDIBLE_LEVEL_DB, Ring, rings
from tonebench.target import thresholds as limits
from tonebench.target.check_poles import is_ring_wanted
from tonebench.target.findings import Finding, Severity
from tonebench.target.remedies import ring_remedy
from tonebench.target.study import Part, Study
from tonebench.target.text import in_db, in_hz, in_seconds


def check_rings(study: Study) -> Iterator[Finding]:
    """Yield the modes that are heard to ring although nobody asked; a chain that is not stable has worse to say.

    A mode at 0 Hz is a drift, not a ring, and a ring that was asked for is no fault: only its change by rounding is.
    """
    if not study.is_ideal_stable:
        return
    if not any(_is_suspect(study, part) for part in study.parts):
        return  # the modes cost milliseconds, and no pole here decays slowly enough
    for mode in rings(study.chain):
        part = _owner(study, mode)
        if part is None or mode.frequency_hz == 0.0 or is_ring_wanted(part.section):
            continue
        limit_s = limits.ring_limit_s(mode.frequency_hz)
        if mode.t60_s > limit_s:
            yield from _heard(study, part, mode, limit_s)


def _is_suspect(study: Study, part: Part) -> bool:
    return study.ring_s(part.ideal.poles) > limits.RING_HIGH_S and not is_ring_wanted(part.section)


def _owner(study: Study, mode: Ring) -> Part | None:
    """Return the section whose pole is the mode's outermost."""
    owners = [part for part in study.parts if part.ideal.identity in mode.identities]
    return max(owners, key=lambda part: part.ideal_radius, default=None)


def _heard(study: Study, part: Part, mode: Ring, limit_s: float) -> Iterator[Finding]:
    is_caution = mode.t60_s > limits.RING_CAUTION_FACTOR * limit_s
    after = {
        "ring-after-click": (
            "a click",
            "the largest sample of the click's answer",
            mode.click_level_db,
            mode.click_ring_s,
        ),
        "ring-after-tone": ("a tone", "the tone", mode.tone_level_db, mode.tone_ring_s),
    }
    for code, (what, reference, level_db, audible_s) in after.items():
        if not level_db > AUDIBLE_LEVEL_DB or math.isnan(level_db):
            continue
        yield Finding(
            code,
            Severity.CAUTION if is_caution else Severity.NOTE,
            part.number,
            mode.t60_s,
            limits.RING_CAUTION_FACTOR * limit_s if is_caution else limit_s,
            "s",
            f"rings {in_seconds(mode.t60_s)} (T60) at {in_hz(mode.frequency_hz)} after {what}, from {in_db(level_db)} "
            f"against {reference}, {in_seconds(audible_s)} until it is 60 dB under it; over about "
            f"{in_seconds(limit_s)} is heard there",
            ring_remedy(part.section, study.chain.sample_rate_hz),
        )
