"""From a section to its poles, zeros and gain.

Every second-order kind is an analogue prototype under the bilinear transform (R. Bristow-Johnson, "Audio EQ
Cookbook", W3C Working Group Note). Written as (s² + s·k/Q + k²) over the like, its roots come out in polar form
directly, with full precision near 0 Hz and near the unit circle:

    −ln r = atanh(alpha),  alpha = k/(1 + k²)/Q;   angle = atan2(W, 1 − s) + atan2(W, 1 + s),  s = k/2Q.
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from tonebench.core.kinds import Kind, WidthKey
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, Roots, factors, largest_radius
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.core.widths import (
    Prototype,
    check_frequency,
    pole_q_ratio,
    pole_tangent_ratio,
    prototype,
)
from tonebench.errors import InvalidValueError, must_be


@dataclass(frozen=True, slots=True)
class PoleZero:
    """A section as poles, zeros and gain: H(z) = gain · z^−delay · Π(1 − q/z) / Π(1 − p/z).

    Attributes
    ----------
    poles, zeros : Roots
    gain : float
        Signed: polarity is inside.
    delay_samples : int
    identity : int
        The section's.

    """

    poles: Roots
    zeros: Roots
    gain: float
    delay_samples: int = 0
    identity: int = 0


def realise(section: Section, sample_rate_hz: float) -> PoleZero:
    """Return the poles, zeros and gain of a section at a sample rate.

    Raises
    ------
    InvalidValueError
        If the section has no meaning at this rate: frequency at or over half of it, a width out of its range.

    """
    made = section.made
    if isinstance(made, ByHand):
        result = _by_hand(made, sample_rate_hz)
    elif made.order == 1:
        result = _first_order(made, sample_rate_hz)
    else:
        result = _second_order(made, prototype(made, sample_rate_hz))
    return replace(
        result,
        gain=section.polarity * result.gain,
        delay_samples=section.delay_samples + result.delay_samples,
        identity=section.identity,
    )


def bilinear_roots(tangent: float, q: float) -> Roots:
    """Return the z-plane roots of s² + s·k/Q + k² under s = (1 − 1/z)/(1 + 1/z), k = ``tangent``."""
    sigma = 0.5 * tangent / q
    if q > 0.5:
        width = tangent * math.sqrt((1.0 - 0.5 / q) * (1.0 + 0.5 / q))
        alpha = tangent / (1.0 + tangent * tangent) / q
        angle = math.atan2(width, 1.0 - sigma) + math.atan2(width, 1.0 + sigma)
        return ConjugatePair(math.exp(-math.atanh(alpha)), min(angle, math.pi))
    # The far root without cancellation, the near one from their product.
    far = sigma + tangent * math.sqrt((0.5 / q - 1.0) * (0.5 / q + 1.0))
    near = tangent * tangent / far
    return RealRoots(((1.0 - near) / (1.0 + near), (1.0 - far) / (1.0 + far)))


def _second_order(made: ByKind, proto: Prototype) -> PoleZero:
    kind, amplitude, k = made.kind, proto.amplitude, proto.tangent
    pole_k = k * pole_tangent_ratio(kind, amplitude)
    poles = bilinear_roots(pole_k, proto.q * pole_q_ratio(kind, amplitude))
    if isinstance(poles, ConjugatePair) and made.width is not None and made.width.key is WidthKey.RADIUS:
        poles = replace(poles, radius=made.width.value)  # what was written, to the last bit
    if largest_radius([poles]) >= 1.0:
        raise InvalidValueError(f"this {kind} is so narrow that its poles land on the unit circle; make it wider")
    alpha = k / (1.0 + k * k) / proto.q
    if kind is Kind.ALL_PASS:
        return _mirrored(poles)
    zeros, gain = _zeros_and_gain(kind, proto, alpha)
    return PoleZero(poles, zeros, gain)


def _zeros_and_gain(kind: Kind, proto: Prototype, alpha: float) -> tuple[Roots, float]:
    k, q, a = proto.tangent, proto.q, proto.amplitude
    if kind is Kind.PEAK:
        return bilinear_roots(k, q / a), (1.0 + alpha * a) / (1.0 + alpha / a)
    if kind is Kind.LOW_SHELF:
        return bilinear_roots(k * math.sqrt(a), q), _biquadratic(k * math.sqrt(a), q) / _biquadratic(
            k / math.sqrt(a), q
        )
    if kind is Kind.HIGH_SHELF:
        gain = a * a * _biquadratic(k / math.sqrt(a), q) / _biquadratic(k * math.sqrt(a), q)
        return bilinear_roots(k / math.sqrt(a), q), gain
    if kind is Kind.NOTCH:
        return ConjugatePair(1.0, proto.omega_rad), 1.0 / (1.0 + alpha)
    if kind is Kind.LOW_PASS:
        return RealRoots((-1.0, -1.0)), k * k / (1.0 + k * k) / (1.0 + alpha)
    if kind is Kind.HIGH_PASS:
        return RealRoots((1.0, 1.0)), 1.0 / (1.0 + k * k) / (1.0 + alpha)
    # Band-pass and resonator share (1 − z⁻²): their peak is exactly the gain, at exactly the centre.
    return RealRoots((1.0, -1.0)), a * a * alpha / (1.0 + alpha)


def _biquadratic(k: float, q: float) -> float:
    """Return 1 + k/Q + k², the leading coefficient that a bilinear pair is normalised by."""
    return 1.0 + k / q + k * k


def _first_order(made: ByKind, sample_rate_hz: float) -> PoleZero:
    """One pole: the recipes' analogue prototypes of first order; shelves have half their gain (in dB) at f0."""
    check_frequency(made.frequency_hz, sample_rate_hz)
    k = math.tan(math.pi * made.frequency_hz / sample_rate_hz)
    a = 10.0 ** (made.gain_db / 40.0)
    if made.kind is Kind.LOW_PASS:
        return PoleZero(_real(k), RealRoots((-1.0,)), k / (1.0 + k))
    if made.kind is Kind.HIGH_PASS:
        return PoleZero(_real(k), RealRoots((1.0,)), 1.0 / (1.0 + k))
    if made.kind is Kind.LOW_SHELF:
        return PoleZero(_real(k / a), _real(k * a), (1.0 + k * a) / (1.0 + k / a))
    if made.kind is Kind.HIGH_SHELF:
        return PoleZero(_real(k * a), _real(k / a), a * a * (1.0 + k / a) / (1.0 + k * a))
    return _mirrored(_real(k))


def _real(k: float) -> RealRoots:
    return RealRoots(((1.0 - k) / (1.0 + k),))


def _mirrored(poles: Roots) -> PoleZero:
    """Return the all-pass of these poles: each 1/(1 − p/z) gets the numerator (1/z − p) (real) or its pair form.

    A pole at exactly 0 mirrors to infinity, which is a whole sample of delay.
    """
    if isinstance(poles, ConjugatePair):
        if poles.radius == 0.0:
            return PoleZero(NO_ROOTS, NO_ROOTS, 1.0, 2)
        zeros = ConjugatePair(1.0 / poles.radius, poles.angle_rad)
        return PoleZero(poles, zeros, poles.radius * poles.radius)
    kept = [p for p in poles.values if p != 0.0]
    gain = math.prod(-p for p in kept)
    mirrored = RealRoots(tuple(1.0 / p for p in kept))
    return PoleZero(poles, mirrored, gain, len(poles.values) - len(kept))


def _by_hand(made: ByHand, sample_rate_hz: float) -> PoleZero:
    gain = 10.0 ** (made.gain_db / 20.0)
    if made.gain_at_hz is None:
        return PoleZero(made.poles, made.zeros, gain)
    if made.gain_at_hz > 0.5 * sample_rate_hz:
        rule = f"at most half the sampling rate ({0.5 * sample_rate_hz:g} Hz)"
        raise InvalidValueError(must_be("gain_at_hz", rule, made.gain_at_hz))
    omega = np.array([2.0 * math.pi * made.gain_at_hz / sample_rate_hz])
    from_zeros = [abs(one[0]) for one in factors(made.zeros, omega)]
    from_poles = [abs(one[0]) for one in factors(made.poles, omega)]
    numerator, denominator = math.prod(from_zeros), math.prod(from_poles)
    # A root at the very frequency comes out as the rounding of its sine, some 1e-16.
    if min((*from_zeros, *from_poles), default=1.0) < 1e-15 or not math.isfinite(gain * denominator / numerator):
        raise InvalidValueError(
            must_be("gain_at_hz", "a frequency without a zero or a pole on the unit circle", made.gain_at_hz)
        )
    return PoleZero(made.poles, made.zeros, gain * float(denominator / numerator))
