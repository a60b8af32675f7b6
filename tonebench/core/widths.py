"""From the one width that was written to the prototype, and from the prototype to every width.

The published recipes (R. Bristow-Johnson, "Audio EQ Cookbook", W3C Working Group Note) derive every section from an
analogue prototype with a centre and a Q through the bilinear transform. All five widths are other words for that Q:

- ``q``: the prototype's own Q.
- ``bandwidth_hz``: the distance of the band edges in Hz, exactly as the digital section has them: between the
  half-gain points of a peak, the −3 dB points of the others. alpha = tan(pi·B/fs).
- ``bandwidth_oct``: the Cookbook's octave formula; its warped result is approximate near half the sampling rate.
- ``radius`` and ``ring_s``: of the conjugate pole pair; ring is the time to fall by 60 dB, ln(1000)/(−fs·ln r).
"""

import math
from dataclasses import dataclass

from tonebench.core.kinds import Kind, Width, WidthKey, allowed_widths
from tonebench.core.section import ByKind
from tonebench.errors import InvalidValueError, must_be

LN_1000 = math.log(1000.0)  # 60 dB as a ratio of amplitudes, in nepers


def ring_from_radius(radius: float, sample_rate_hz: float) -> float:
    """Return the time in seconds to fall (or, outside the circle, to grow) by 60 dB; inf on the circle, 0 at 0."""
    if radius == 0.0:
        return 0.0
    if radius == 1.0:
        return math.inf
    return LN_1000 / (abs(math.log(radius)) * sample_rate_hz)


def radius_from_ring(ring_s: float, sample_rate_hz: float) -> float:
    """Return the radius inside the circle that falls by 60 dB in ``ring_s`` seconds."""
    return math.exp(-LN_1000 / (ring_s * sample_rate_hz))


@dataclass(frozen=True, slots=True)
class Prototype:
    """The analogue prototype behind a second-order kind.

    Attributes
    ----------
    omega_rad : float
        Digital centre in radians per sample: of the response, never of the pole.
    q : float
        The prototype's Q as the recipes define it.
    amplitude : float
        A = 10^(gain/40).

    """

    omega_rad: float
    q: float
    amplitude: float

    @property
    def tangent(self) -> float:
        """The prewarped centre tan(w0/2)."""
        return math.tan(0.5 * self.omega_rad)


def pole_tangent_ratio(kind: Kind, amplitude: float) -> float:
    """Return how far the poles' prewarped frequency lies from the kind's: shelves shift it by the root of A."""
    if kind is Kind.LOW_SHELF:
        return 1.0 / math.sqrt(amplitude)
    if kind is Kind.HIGH_SHELF:
        return math.sqrt(amplitude)
    return 1.0


def pole_q_ratio(kind: Kind, amplitude: float) -> float:
    """Return the poles' Q over the prototype's Q: A for a peak, 1 for the others."""
    return amplitude if kind is Kind.PEAK else 1.0


def prototype(made: ByKind, sample_rate_hz: float) -> Prototype:
    """Return the prototype of a second-order kind at a sample rate.

    Raises
    ------
    InvalidValueError
        If the frequency is not under half the sampling rate, or the width has no meaning for these numbers; the
        message gives the range that has.

    """
    check_frequency(made.frequency_hz, sample_rate_hz)
    if made.width is None:
        raise InvalidValueError("a first-order section has no second-order prototype")
    omega = 2.0 * math.pi * made.frequency_hz / sample_rate_hz
    amplitude = 10.0 ** (made.gain_db / 40.0)
    if made.is_pole_frequency:
        return _prototype_at_pole(made.width, omega, amplitude, sample_rate_hz)
    return Prototype(omega, _q_from_width(made, made.width, omega, amplitude, sample_rate_hz), amplitude)


def check_frequency(frequency_hz: float, sample_rate_hz: float) -> None:
    """Refuse a frequency that this sample rate cannot hold."""
    if frequency_hz >= 0.5 * sample_rate_hz:
        rule = f"under half the sampling rate ({0.5 * sample_rate_hz:g} Hz)"
        raise InvalidValueError(must_be("frequency_hz", rule, frequency_hz))


def _q_from_width(made: ByKind, width: Width, omega: float, amplitude: float, sample_rate_hz: float) -> float:
    if width.key is WidthKey.Q:
        return width.value
    if width.key is WidthKey.BANDWIDTH_HZ:
        return math.sin(omega) / (2.0 * _alpha_from_bandwidth(width.value, sample_rate_hz))
    if width.key is WidthKey.BANDWIDTH_OCT:
        return 0.5 / _sinh_of_octaves(width.value, omega)
    pole_omega = 2.0 * math.atan(math.tan(0.5 * omega) * pole_tangent_ratio(made.kind, amplitude))
    alpha = _alpha_from_ring_or_radius(width, sample_rate_hz)
    if alpha >= math.sin(pole_omega):
        raise InvalidValueError(_conjugate_range(width, math.sin(pole_omega), sample_rate_hz))
    return math.sin(pole_omega) / (2.0 * alpha) / pole_q_ratio(made.kind, amplitude)


def _sinh_of_octaves(octaves: float, omega: float) -> float:
    argument = 0.5 * math.log(2.0) * octaves * omega / math.sin(omega)
    if argument > 700.0:
        raise InvalidValueError(must_be("bandwidth_oct", "small enough to be computed", octaves, "narrow it"))
    return math.sinh(argument)


def _alpha_from_bandwidth(bandwidth_hz: float, sample_rate_hz: float) -> float:
    if bandwidth_hz >= 0.5 * sample_rate_hz:
        rule = f"under half the sampling rate ({0.5 * sample_rate_hz:g} Hz)"
        raise InvalidValueError(must_be("bandwidth_hz", rule, bandwidth_hz))
    return math.tan(math.pi * bandwidth_hz / sample_rate_hz)


def _alpha_from_ring_or_radius(width: Width, sample_rate_hz: float) -> float:
    """Return alpha = (1 − r²)/(1 + r²) = tanh(−ln r)."""
    if width.key is WidthKey.RADIUS:
        return math.tanh(-math.log(width.value))
    return math.tanh(LN_1000 / (width.value * sample_rate_hz))


def _conjugate_range(width: Width, largest_alpha: float, sample_rate_hz: float) -> str:
    smallest_radius = math.exp(-math.atanh(min(largest_alpha, 1.0 - 1e-16)))
    if width.key is WidthKey.RADIUS:
        rule = f"over {smallest_radius:.6g} and under 1 here (below it the poles are real and have no common radius)"
    else:
        shortest = ring_from_radius(smallest_radius, sample_rate_hz)
        rule = f"over {shortest:.4g} s here (below it the poles are real and have no common ring)"
    return must_be(width.key.value, rule, width.value, "or give q instead")


def _prototype_at_pole(width: Width, theta: float, amplitude: float, sample_rate_hz: float) -> Prototype:
    """Solve for the response's centre when the pole's angle is given: cos w0 = sqrt(1 − alpha²)·cos(theta)."""
    alpha = _alpha_at_pole(width, theta, sample_rate_hz)
    if not alpha < 1.0:
        raise InvalidValueError(
            must_be(width.key.value, "narrow enough for conjugate poles at this angle", width.value, "narrow it")
        )
    sine = math.sqrt(math.sin(theta) ** 2 + (alpha * math.cos(theta)) ** 2)
    omega = math.atan2(sine, math.sqrt(1.0 - alpha * alpha) * math.cos(theta))
    return Prototype(omega, sine / (2.0 * alpha), amplitude)


def _alpha_at_pole(width: Width, theta: float, sample_rate_hz: float) -> float:
    if width.key is WidthKey.BANDWIDTH_HZ:
        return _alpha_from_bandwidth(width.value, sample_rate_hz)
    if width.key in (WidthKey.RING_S, WidthKey.RADIUS):
        return _alpha_from_ring_or_radius(width, sample_rate_hz)
    if width.key is WidthKey.Q:
        # alpha = sin(w0)/(2q) and sin²(w0) = sin²(theta) + alpha²·cos²(theta), solved for alpha.
        return _alpha_of_q_at_pole(width.value, theta)
    # Octaves depend on the centre, which depends on alpha: the bracket halves until it is the same double.
    low, high = 0.0, 1.0
    for _ in range(200):
        middle = 0.5 * (low + high)
        sine = math.sqrt(math.sin(theta) ** 2 + (middle * math.cos(theta)) ** 2)
        omega = math.atan2(sine, math.sqrt(1.0 - middle * middle) * math.cos(theta))
        too_small = middle < sine * _sinh_of_octaves(width.value, omega)
        low, high = (middle, high) if too_small else (low, middle)
        if high - low <= 1e-16 * high:
            break
    return high


def _alpha_of_q_at_pole(q: float, theta: float) -> float:
    denominator = 4.0 * q * q - math.cos(theta) ** 2
    return math.inf if denominator <= 0.0 else math.sin(theta) / math.sqrt(denominator)


def all_widths(made: ByKind, sample_rate_hz: float) -> dict[WidthKey, float]:
    """Return every width that has a meaning for this section, the written one exactly as written.

    ``ring_s`` and ``radius`` are left out while the poles are real.
    """
    if made.width is None:
        return {}
    proto = prototype(made, sample_rate_hz)
    result = {WidthKey.Q: proto.q}
    if WidthKey.BANDWIDTH_HZ in allowed_widths(made.kind):
        alpha = math.sin(proto.omega_rad) / (2.0 * proto.q)
        result[WidthKey.BANDWIDTH_HZ] = math.atan(alpha) * sample_rate_hz / math.pi
        octaves = math.asinh(0.5 / proto.q) * math.sin(proto.omega_rad) / proto.omega_rad
        result[WidthKey.BANDWIDTH_OCT] = 2.0 / math.log(2.0) * octaves
    pole_q = proto.q * pole_q_ratio(made.kind, proto.amplitude)
    if pole_q > 0.5:
        tangent = proto.tangent * pole_tangent_ratio(made.kind, proto.amplitude)
        alpha = tangent / (1.0 + tangent * tangent) / pole_q
        result[WidthKey.RING_S] = LN_1000 / (math.atanh(alpha) * sample_rate_hz)
        result[WidthKey.RADIUS] = math.exp(-math.atanh(alpha))
    result[made.width.key] = made.width.value
    return result
