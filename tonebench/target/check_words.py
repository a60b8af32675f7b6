"""Findings about the words themselves: range of coefficients, range of signals, forms that do not exist."""

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from tonebench.core.coefficients import Coefficients, from_chain
from tonebench.core.impulse import run
from tonebench.core.roots import NO_ROOTS
from tonebench.target import thresholds as limits
from tonebench.target.arithmetic import NumberFormat
from tonebench.target.findings import Finding, Severity
from tonebench.target.structures import Form
from tonebench.target.study import Part, Study
from tonebench.target.text import in_db, in_words

_DB_PER_BIT = 20.0 * math.log10(2.0)
_TAIL_FRAMES = 2048


def check_words(study: Study) -> Iterator[Finding]:
    """Yield what the target's words cannot hold, or hold only by a shift."""
    yield from check_held(study)
    yield from _shifted(study)
    for part in study.parts:
        if part.words.form is Form.FIRST_ORDERS and part.ideal.poles != NO_ROOTS:
            yield _fallback(study, part)
    if not study.target.number_format.is_float and study.is_ideal_stable:
        yield from _overflow(study)


def check_held(study: Study) -> Iterator[Finding]:
    """Yield the sections that no word of the target can hold."""
    for part in study.parts:
        if not part.words.is_held:
            yield _not_held(study, part)


def _not_held(study: Study, part: Part) -> Finding:
    return Finding(
        "coefficient-range",
        Severity.DANGER,
        part.number,
        None,
        None,
        "",
        f"no word of {study.target.number_format} holds this section's coefficients",
        "take the section's gain into smaller steps, or give it another place for its poles and zeros",
    )


def _shifted(study: Study) -> Iterator[Finding]:
    number_format = study.target.number_format
    shifted = [part for part in study.parts if _needed_bits(part) > number_format.integer_bits]
    if number_format.is_float or not shifted:
        return
    worst = max(shifted, key=_needed_bits)
    needed = _needed_bits(worst)
    words = replace(number_format, integer_bits=needed, fraction_bits=number_format.word_bits - 1 - needed)
    many = len(shifted) > 1
    yield Finding(
        "coefficient-range",
        Severity.NOTE,
        None if many else worst.number,
        float(needed),
        float(number_format.integer_bits),
        "bits",
        f"coefficients of section{'s' if many else ''} {in_words([part.number for part in shifted])} are over the "
        f"range of {number_format}; section {worst.number} needs words of {words}",
        f"store them as {words} and shift the sums left by {needed - number_format.integer_bits}",
    )


def _needed_bits(part: Part) -> int:
    return max(part.words.integer_bits, default=0)


def _fallback(study: Study, part: Part) -> Finding:
    return Finding(
        "first-order-fallback",
        Severity.NOTE,
        part.number,
        None,
        None,
        "",
        f"its poles are real, which {study.target.structure} cannot hold: it runs as first-order recursions",
        "",
    )


@dataclass(frozen=True, slots=True)
class Norm:
    """Sum of |h| up to a node: no input of peak 1 comes out over it (L. B. Jackson, 1970)."""

    number: int | None
    value: float
    is_whole: bool


def output_norms(study: Study) -> list[Norm]:
    """Return the ℓ1 norm to every section's output, and to the chain's (number None), of the ideal chain.

    At most ``LARGEST_NORM_FRAMES`` frames are summed; a longer ring adds the geometric tail of its last frames, and
    the norm is then an estimate (``is_whole`` False).
    """
    coefficients = from_chain(study.chain)
    slowest = max((part.ideal_radius for part in study.parts), default=0.0)
    needed = 64 if slowest == 0.0 else int(min(14.0 / -math.log(slowest), 1e9)) + 64
    frames = min(needed, limits.LARGEST_NORM_FRAMES)
    norms, total = [], np.zeros(frames)
    unit = np.zeros(frames)
    unit[0] = 1.0
    heard = unit
    for index, part in enumerate(study.parts):
        heard = run(_one(coefficients, index), unit if coefficients.combine == "sum" else heard)
        total = total + heard
        norms.append(Norm(part.number, _sum_with_tail(heard, slowest, needed), needed <= frames))
    if coefficients.combine == "sum":
        heard = total + coefficients.direct_gain * unit
    norms.append(Norm(None, coefficients.gain * _sum_with_tail(heard, slowest, needed), needed <= frames))
    return norms


def _one(coefficients: Coefficients, index: int) -> Coefficients:
    """Return one section alone; its delay moves |h| in time and is left out."""
    rows = coefficients.rows[index : index + 1]
    identity = coefficients.identities[index : index + 1]
    return Coefficients(coefficients.sample_rate_hz, "series", rows, (0,), identity, 1.0, 0.0)


def _sum_with_tail(response: NDArray[np.float64], slowest: float, needed: int) -> float:
    size = np.abs(response)
    total = float(np.sum(size))
    if needed <= size.size:
        return total
    fallen = slowest**_TAIL_FRAMES
    return total + float(np.sum(size[-_TAIL_FRAMES:])) * fallen / (1.0 - fallen)


def _overflow(study: Study) -> Iterator[Finding]:
    number_format = study.target.number_format
    headroom_db = _DB_PER_BIT * number_format.integer_bits
    worst = max(output_norms(study), key=lambda norm: norm.value)
    level_db = 20.0 * math.log10(worst.value) if worst.value > 0.0 else -math.inf
    if not (headroom_db < level_db < math.inf):
        return
    node = "the chain's output" if worst.number is None else f"the output of section {worst.number}"
    word = "bound" if worst.is_whole else "estimated bound"
    over_db = level_db - headroom_db
    yield Finding(
        "overflow-possible",
        Severity.CAUTION,
        worst.number,
        level_db,
        headroom_db,
        "dB",
        f"a full-scale input can reach {in_db(level_db)} at {node} ({word}: the sum of |h|; few signals come near it), "
        f"and {number_format} holds {in_db(headroom_db)}",
        f"lower the input by {math.ceil(10.0 * over_db) / 10.0:.1f} dB{_wider(number_format, over_db)}",
    )


def _wider(number_format: NumberFormat, over_db: float) -> str:
    bits = math.ceil(over_db / _DB_PER_BIT)
    if bits >= number_format.fraction_bits:
        return ""
    wider = replace(
        number_format,
        integer_bits=number_format.integer_bits + bits,
        fraction_bits=number_format.fraction_bits - bits,
    )
    return f", or compute in {wider}"
