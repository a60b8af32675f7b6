"""Findings about the response as a whole: too loud, changed by rounding, silent for want of a sum."""

import math
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from tonebench.core.kinds import Kind
from tonebench.core.response import SILENCE_DB, chain_response, magnitude_db
from tonebench.core.section import ByHand
from tonebench.target import thresholds as limits
from tonebench.target.findings import Finding, Severity
from tonebench.target.remedies import alternatives
from tonebench.target.stability import is_section_stable
from tonebench.target.study import Curves, Study, curves, study_chain
from tonebench.target.text import in_db, in_db_unsigned, in_hz, in_words


def check_levels(study: Study) -> Iterator[Finding]:
    """Yield what the two responses show; an unstable chain has none."""
    if not study.is_ideal_stable:
        return
    both = curves(study)
    yield from _gain_high(study, both)
    yield from _series_of_resonators(study)
    if is_comparable(study):
        yield from _response_changed(study, both)


def is_comparable(study: Study) -> bool:
    """Tell whether the rounded chain has a response: held, and stable."""
    return study.twin.is_held and all(is_section_stable(part.words) for part in study.parts)


def _gain_high(study: Study, both: Curves) -> Iterator[Finding]:
    level_db = np.nan_to_num(magnitude_db(both.ideal), nan=SILENCE_DB, posinf=math.inf)
    best = int(np.argmax(level_db))
    gain_db = float(level_db[best])
    if gain_db <= limits.GAIN_CAUTION_DB:
        return
    is_danger = gain_db > limits.GAIN_DANGER_DB
    remedy = ""
    if math.isfinite(gain_db):
        lowered_db = math.floor(10.0 * (study.chain.gain_db - gain_db + limits.GAIN_CAUTION_DB)) / 10.0
        remedy = f"a chain gain_db of {lowered_db:.1f} brings it under {in_db(limits.GAIN_CAUTION_DB)}"
    yield Finding(
        "gain-high",
        Severity.DANGER if is_danger else Severity.CAUTION,
        None,
        gain_db,
        limits.GAIN_DANGER_DB if is_danger else limits.GAIN_CAUTION_DB,
        "dB",
        f"lifts {in_hz(float(both.frequency_hz[best]))} by {in_db(gain_db)}",
        remedy,
    )


def largest_deviation(both: Curves, floor_db: float) -> tuple[float, float]:
    """Return the largest |difference| in dB, and its frequency, where the ideal lies above ``floor_db`` of its maximum.

    What the rounded chain has under -60 dB of that maximum counts as -60 dB: a null beside the wanted place is no
    infinite fault.
    """
    ideal_db, rounded_db = magnitude_db(both.ideal), magnitude_db(both.rounded)
    top_db = float(np.max(ideal_db))
    rounded_db = np.maximum(rounded_db, top_db + limits.RESPONSE_FLOOR_DB)
    weighty = ideal_db > top_db + floor_db
    if not np.any(weighty):
        return (0.0, 0.0)
    deviation = np.nan_to_num(np.where(weighty, np.abs(rounded_db - ideal_db), 0.0), posinf=0.0)
    worst = int(np.argmax(deviation))
    return (float(deviation[worst]), float(both.frequency_hz[worst]))


def _response_changed(study: Study, both: Curves) -> Iterator[Finding]:
    deviation_db, frequency_hz = largest_deviation(both, limits.RESPONSE_FLOOR_DB)
    if deviation_db <= limits.RESPONSE_NOTE_DB:
        return
    weighty_db, weighty_hz = largest_deviation(both, limits.RESPONSE_WEIGHTY_DB)
    severity, limit, floor_db = Severity.NOTE, limits.RESPONSE_NOTE_DB, limits.RESPONSE_FLOOR_DB
    if weighty_db > limits.RESPONSE_DANGER_DB:
        severity, limit = Severity.DANGER, limits.RESPONSE_DANGER_DB
    elif weighty_db > limits.RESPONSE_CAUTION_DB:
        severity, limit = Severity.CAUTION, limits.RESPONSE_CAUTION_DB
    if severity is not Severity.NOTE:
        deviation_db, frequency_hz, floor_db = weighty_db, weighty_hz, limits.RESPONSE_WEIGHTY_DB
    yield Finding(
        "response-changed",
        severity,
        None,
        deviation_db,
        limit,
        "dB",
        f"the words of {study.target} change the response by up to {in_db_unsigned(deviation_db)}, "
        f"at {in_hz(frequency_hz)}, where it lies within {-floor_db:.0f} dB of its maximum",
        _response_remedy(study, deviation_db, floor_db),
    )


def _response_remedy(study: Study, now_db: float, floor_db: float) -> str:
    """Name the target that changes the whole response least, if it halves the change."""
    for group in alternatives(study.target):
        tried = []
        for target in group:
            other = study_chain(study.chain, target)
            if is_comparable(other):
                tried.append((largest_deviation(curves(other), floor_db)[0], str(target)))
        best = min(tried, default=None)
        if best is not None and best[0] <= 0.5 * now_db:
            return f"{best[1]} changes it by at most {in_db_unsigned(best[0])}"
    return ""


def _series_of_resonators(study: Study) -> Iterator[Finding]:
    """Yield the bank whose bells silence each other: in series, each takes away what the others sing."""
    bells = [part for part in study.parts if part.section.kind is Kind.RESONATOR]
    if study.chain.combine != "series" or len(bells) < 2:
        return
    where_hz = [part.section.made.frequency_hz for part in bells if not isinstance(part.section.made, ByHand)]
    asked_db = np.array([part.section.gain_db + study.chain.gain_db for part in bells])
    loss_db = asked_db - magnitude_db(chain_response(study.chain, where_hz))
    worst = int(np.argmax(loss_db))
    if loss_db[worst] <= limits.SERIES_LOSS_DB:
        return
    summed_db = magnitude_db(chain_response(replace(study.chain, combine="sum"), where_hz))
    yield Finding(
        "series-of-resonators",
        Severity.CAUTION,
        None,
        float(loss_db[worst]),
        limits.SERIES_LOSS_DB,
        "dB",
        f"resonators {in_words([part.number for part in bells])} are in series and silence each other: "
        f"{in_hz(where_hz[worst])} comes out {in_db_unsigned(float(loss_db[worst]))} under its own gain",
        f'combine = "sum" brings {in_hz(where_hz[worst])} to {in_db(float(summed_db[worst]))}',
    )
