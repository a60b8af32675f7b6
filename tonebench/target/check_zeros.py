"""Findings about notches: what the rounded words leave at the frequency that was meant to vanish."""

import math
from collections.abc import Iterator

import numpy as np

from tonebench.core.design import PoleZero
from tonebench.core.response import SILENCE_DB, section_response
from tonebench.core.roots import ConjugatePair, is_on_rim
from tonebench.target import thresholds as limits
from tonebench.target.findings import Finding, Severity
from tonebench.target.remedies import best_trial
from tonebench.target.stability import is_section_stable
from tonebench.target.study import Part, Study
from tonebench.target.text import in_db, in_hz


def check_zeros(study: Study) -> Iterator[Finding]:
    """Yield the notches that rounding fills; in a sum a section's zeros are not the chain's."""
    if study.chain.combine == "sum":
        return
    for part in study.parts:
        angle_rad = notch_angle_rad(part.ideal)
        if angle_rad is not None and part.rounded is not None and is_section_stable(part.words):
            yield from _filled(study, part, part.rounded, angle_rad)


def notch_angle_rad(ideal: PoleZero) -> float | None:
    """Return the angle of a zero pair on the unit circle, None where there is none."""
    zeros = ideal.zeros
    if isinstance(zeros, ConjugatePair) and is_on_rim(zeros.radius) and 0.0 < zeros.angle_rad < math.pi:
        return zeros.angle_rad
    return None


def level_left_db(ideal: PoleZero, rounded: PoleZero, angle_rad: float) -> float:
    """Return the rounded section's level at the intended notch, against the ideal's level at 0 Hz or half the rate."""
    ends = np.abs(section_response(ideal, np.array([0.0, math.pi])))
    left = float(np.abs(section_response(rounded, np.array([angle_rad])))[0])
    reference = float(np.max(ends))
    if left == 0.0 or reference == 0.0 or not math.isfinite(reference):
        return SILENCE_DB
    return max(20.0 * math.log10(left / reference), SILENCE_DB)


def _filled(study: Study, part: Part, rounded: PoleZero, angle_rad: float) -> Iterator[Finding]:
    left_db = level_left_db(part.ideal, rounded, angle_rad)
    if left_db <= limits.NOTCH_NOTE_DB:
        return
    if left_db > limits.NOTCH_MISSED_DB:
        code, severity, limit = "notch-missed", Severity.DANGER, limits.NOTCH_MISSED_DB
    elif left_db > limits.NOTCH_CAUTION_DB:
        code, severity, limit = "notch-shallower", Severity.CAUTION, limits.NOTCH_CAUTION_DB
    else:
        code, severity, limit = "notch-shallower", Severity.NOTE, limits.NOTCH_NOTE_DB
    zeros = rounded.zeros
    where = "its zeros became real"
    if isinstance(zeros, ConjugatePair):
        where = f"its zero moved to {in_hz(study.to_hz(zeros.angle_rad))}"
    yield Finding(
        code,
        severity,
        part.number,
        left_db,
        limit,
        "dB",
        f"{study.target} leaves {in_db(left_db)} at {in_hz(study.to_hz(angle_rad))}, which the notch "
        f"should remove: {where}",
        _remedy(study, part, angle_rad, left_db),
    )


def _remedy(study: Study, part: Part, angle_rad: float, now_db: float) -> str:
    def amplitude(rounded: PoleZero) -> float:
        return math.pow(10.0, level_left_db(part.ideal, rounded, angle_rad) / 20.0)

    trial = best_trial(part, study.target, amplitude, 10.0 ** (now_db / 20.0))
    if trial is None:
        return ""
    left_db = level_left_db(part.ideal, trial.rounded, angle_rad)
    return f"{trial.target} leaves {in_db(left_db)} there"
