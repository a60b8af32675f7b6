"""Which numbers each structure stores for a section, and which transfer function stored numbers really make.

Both ways stand here: from poles and zeros to the words of a structure, in double precision and without cancellation;
and from words, as exact fractions, back to b0, b1, b2, a1, a2.

- ``df1, df2, tdf2``: b0, b1, b2, a1, a2 of y = b0 x + b1 x1 + b2 x2 − a1 y1 − a2 y2.
- ``coupled`` (C. M. Rader and B. Gold, 1967): x1' = σ x1 − ω x2 + u, x2' = ω x1 + σ x2, y = d u + c1 x1 + c2 x2, with
  σ ± jω the poles. Real poles have no such form and run as two first-order recursions one after the other,
  x1' = p1 x1 + u, x2' = p2 x2 + x1, with the same taps.
- ``svf``: the trapezoidal state-variable filter with g² = |1 − p|²/|1 + p|², k = 2(1 − |p|²)/(|1 − p||1 + p|) and
  y = m0 u + m1 band + m2 low (V. Zavalishin, "The Art of VA Filter Design", 2012, the structure).
"""

import math
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction

from tonebench.core.coefficients import section_row
from tonebench.core.design import PoleZero
from tonebench.core.roots import ConjugatePair, Roots
from tonebench.target.arithmetic import Structure


class Form(StrEnum):
    """How a section's words are read; three structures share the direct form."""

    DIRECT = "direct"
    COUPLED = "coupled"
    FIRST_ORDERS = "first orders"
    SVF = "svf"


# Words of one group share one shift: they meet in one accumulator.
GROUPS: dict[Form, tuple[tuple[str, ...], ...]] = {
    Form.DIRECT: (("b0", "b1", "b2", "a1", "a2"),),
    Form.COUPLED: (("sigma", "omega"), ("d", "c1", "c2")),
    Form.FIRST_ORDERS: (("p1", "p2"), ("d", "c1", "c2")),
    Form.SVF: (("g", "k"), ("m0", "m1", "m2")),
}


# A pair nearer than this to the real axis is two equal real poles to a double: its square is under 2^-53.
_SMALLEST_OMEGA = 2.0**-27
# |1 − p|² or |1 + p|² of a pole so near to 1 or −1 that svf's taps would leave every word.
_SMALLEST_DISTANCE = 2.0**-60


@dataclass(frozen=True, slots=True)
class Transfer:
    """(b0 + b1/z + b2/z²)/(1 + a1/z + a2/z²) in exact numbers."""

    b0: Fraction
    b1: Fraction
    b2: Fraction
    a1: Fraction
    a2: Fraction


def form_of(realised: PoleZero, structure: Structure) -> Form:
    """Return how a section is held in a structure."""
    if structure is Structure.COUPLED:
        poles = realised.poles
        is_pair = isinstance(poles, ConjugatePair) and poles.radius * math.sin(poles.angle_rad) > _SMALLEST_OMEGA
        return Form.COUPLED if is_pair else Form.FIRST_ORDERS
    if structure is Structure.SVF and _has_svf(realised.poles):
        return Form.SVF
    return Form.DIRECT


def _has_svf(poles: Roots) -> bool:
    """Tell whether g and k are real and finite: all but sections with a real pole outside, or a pole at 1 or −1.

    Those are unstable, or so to a double, in any structure.
    """
    at_one, at_minus_one = _at_one(poles), _at_minus_one(poles)
    return at_one * at_minus_one > 0.0 and min(abs(at_one), abs(at_minus_one)) > _SMALLEST_DISTANCE


def wanted_words(realised: PoleZero, form: Form) -> tuple[float, ...]:
    """Return the words of a section before rounding, in the order of ``GROUPS[form]``."""
    if form is Form.DIRECT:
        b0, b1, b2, _, a1, a2 = section_row(realised)
        return (b0, b1, b2, a1, a2)
    if form is Form.COUPLED and isinstance(realised.poles, ConjugatePair):
        return _coupled(realised, realised.poles)
    if form is Form.FIRST_ORDERS:
        return _first_orders(realised)
    return _svf(realised)


def transfer(form: Form, words: tuple[Fraction, ...]) -> Transfer | None:
    """Return the transfer function that words really make; None where it has none (an infinite pole)."""
    if form is Form.DIRECT:
        return Transfer(*words)
    if form is Form.SVF:
        return _svf_transfer(words)
    one, other, d, c1, c2 = words
    if form is Form.COUPLED:
        a1, a2 = -2 * one, one * one + other * other
        return Transfer(d, d * a1 + c1, d * a2 - c1 * one + c2 * other, a1, a2)
    a1, a2 = -(one + other), one * other
    return Transfer(d, d * a1 + c1, d * a2 - c1 * other + c2, a1, a2)


def _coupled(realised: PoleZero, poles: ConjugatePair) -> tuple[float, ...]:
    sigma, omega = poles.radius * math.cos(poles.angle_rad), poles.radius * math.sin(poles.angle_rad)
    zeros, gain = realised.zeros, realised.gain
    if isinstance(zeros, ConjugatePair):
        zero_sigma, zero_omega = zeros.radius * math.cos(zeros.angle_rad), zeros.radius * math.sin(zeros.angle_rad)
        first = 2.0 * (sigma - zero_sigma)
        second = _square(sigma - zero_sigma) + (zero_omega - omega) * (zero_omega + omega)
    else:
        q1, q2 = _two(zeros.values)
        first = 2.0 * sigma - (q1 + q2)
        second = (sigma - q1) * (sigma - q2) - omega * omega
    return (sigma, omega, gain, gain * first, gain * second / omega)


def _first_orders(realised: PoleZero) -> tuple[float, ...]:
    p1, p2 = _real_values(realised.poles)
    b0, b1, b2, _, a1, a2 = section_row(realised)
    c1 = b1 - b0 * a1
    return (p1, p2, b0, c1, b2 - b0 * a2 + c1 * p2)


def _svf(realised: PoleZero) -> tuple[float, ...]:
    at_one, at_minus_one = _at_one(realised.poles), _at_minus_one(realised.poles)
    g = math.sqrt(at_one / at_minus_one)
    k = 2.0 * _one_minus_product(realised.poles) / math.copysign(math.sqrt(at_one * at_minus_one), at_minus_one)
    gain = realised.gain
    high = gain * _at_minus_one(realised.zeros) / at_minus_one
    low = gain * _at_one(realised.zeros) / at_one
    band = gain * _one_minus_product(realised.zeros) * 2.0 / (at_minus_one * g) - high * k
    return (g, k, high, band, low - high)


def _svf_transfer(words: tuple[Fraction, ...]) -> Transfer | None:
    g, k, m0, m1, m2 = words
    square, damping = g * g, k * g
    scale = 1 + damping + square
    if scale == 0:
        return None
    b0 = m0 * scale + m1 * g + m2 * square
    b1 = m0 * (2 * square - 2) + 2 * m2 * square
    b2 = m0 * (1 - damping + square) - m1 * g + m2 * square
    return Transfer(b0 / scale, b1 / scale, b2 / scale, (2 * square - 2) / scale, (1 - damping + square) / scale)


def _square(value: float) -> float:
    return value * value  # ** raises where this gives inf


def _two(values: tuple[float, ...]) -> tuple[float, float]:
    first, second, *_ = (*values, 0.0, 0.0)
    return (first, second)


def _real_values(roots: Roots) -> tuple[float, float]:
    if isinstance(roots, ConjugatePair):  # a pair at angle 0 or pi
        value = roots.radius * math.cos(roots.angle_rad)
        return (value, value)
    return _two(roots.values)


def _at_one(roots: Roots) -> float:
    """Return Π(1 − root), without cancellation near 1."""
    if isinstance(roots, ConjugatePair):
        return _square(1.0 - roots.radius) + 4.0 * roots.radius * _square(math.sin(0.5 * roots.angle_rad))
    return math.prod(1.0 - value for value in roots.values)


def _at_minus_one(roots: Roots) -> float:
    """Return Π(1 + root), without cancellation near −1."""
    if isinstance(roots, ConjugatePair):
        return _square(1.0 - roots.radius) + 4.0 * roots.radius * _square(math.cos(0.5 * roots.angle_rad))
    return math.prod(1.0 + value for value in roots.values)


def _one_minus_product(roots: Roots) -> float:
    """Return 1 − c2 of the roots' polynomial."""
    if isinstance(roots, ConjugatePair):
        return (1.0 - roots.radius) * (1.0 + roots.radius)
    first, second = _two(roots.values)
    return 1.0 - first * second
