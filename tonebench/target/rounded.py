"""Where the poles and zeros of rounded words really lie, and the response that they make.

The discriminant is taken in exact fractions, so that near-double roots come out right and a pair that became real is
seen as such; the result is the core's own ``PoleZero``, so that one formula computes both responses.
"""

import math
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.response import combined_response, section_response, to_omega_rad
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, Roots
from tonebench.target.arithmetic import Target
from tonebench.target.rounding import RoundedSection, round_section, round_words

# A root under 2^-100 is 0, and one over 2^100 is a sample of delay: neither bends a response by a double's last bit,
# and their squares would leave the range of doubles.
_NEGLIGIBLE = Fraction(1, 2**200)


@dataclass(frozen=True, slots=True)
class RoundedChain:
    """A chain as a target stores it.

    Attributes
    ----------
    sample_rate_hz : float
    combine : str
    sections : tuple of RoundedSection
        One per active section of the chain.
    realised : tuple of PoleZero or None
        What each section really makes; None where the format cannot hold it.
    gain, direct_gain : float
        Linear, rounded to a word of their own.

    """

    sample_rate_hz: float
    combine: str
    sections: tuple[RoundedSection, ...]
    realised: tuple[PoleZero | None, ...]
    gain: float
    direct_gain: float

    @property
    def is_held(self) -> bool:
        """Whether the format can hold every section and gain."""
        return all(one.is_held for one in self.sections) and math.isfinite(self.gain + self.direct_gain)

    def response(self, frequency_hz: NDArray[np.float64]) -> NDArray[np.complex128]:
        """Return the complex response; sections that are not held are left out."""
        omega = to_omega_rad(frequency_hz, self.sample_rate_hz)
        parts = [section_response(one, omega) for one in self.realised if one is not None]
        return combined_response(parts, self.combine, self.gain, self.direct_gain, omega.size)


def round_chain(chain: Chain, target: Target) -> RoundedChain:
    """Return the chain as the target stores it."""
    sections = tuple(round_section(one, target.number_format, target.structure) for one in chain.realised())
    return RoundedChain(
        sample_rate_hz=chain.sample_rate_hz,
        combine=chain.combine,
        sections=sections,
        realised=tuple(pole_zero(one) for one in sections),
        gain=_gain_word(10.0 ** (chain.gain_db / 20.0), target),
        direct_gain=_gain_word(chain.direct_gain, target),
    )


def pole_zero(section: RoundedSection) -> PoleZero | None:
    """Return the poles, zeros and gain that a rounded section really has; None where it is not held.

    A leading coefficient that was rounded to nothing (or as good as) becomes a sample of delay.
    """
    made = section.transfer
    if made is None:
        return None
    numerator = [made.b0, made.b1, made.b2]
    poles = roots_of(made.a1, made.a2)
    delay = section.delay_samples
    largest = max(abs(one) for one in numerator)
    while numerator and abs(numerator[0]) <= _NEGLIGIBLE * largest:
        numerator.pop(0)
        delay += 1
    if not numerator:
        return PoleZero(poles, NO_ROOTS, 0.0, section.delay_samples, section.identity)
    gain, c1, c2 = (*numerator, Fraction(0), Fraction(0))[:3]
    return PoleZero(poles, roots_of(c1 / gain, c2 / gain), float(gain), delay, section.identity)


def roots_of(c1: Fraction, c2: Fraction) -> Roots:
    """Return the roots of 1 + c1/z + c2/z² from exact numbers, each to double precision."""
    if abs(c2) <= _NEGLIGIBLE:
        return NO_ROOTS if c1 == 0 else RealRoots((float(-c1),))
    half = -c1 / 2
    discriminant = half * half - c2
    if discriminant < 0:
        angle = math.atan2(math.sqrt(-discriminant), half)
        return ConjugatePair(math.sqrt(c2), min(angle, math.pi))
    # The far root adds, so nothing cancels; the near one follows from the product.
    far = float(half) + math.copysign(math.sqrt(discriminant), half)
    return RealRoots((far, float(c2) / far))


def _gain_word(value: float, target: Target) -> float:
    rounded = round_words((value,), target.number_format)
    return math.inf if rounded is None else float(rounded.words[0])
