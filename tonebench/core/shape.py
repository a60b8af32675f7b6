"""Moving a pole: the arrows' act, solved back into frequency and width.

A kind's truth is f0 and a width, but the hand moves the *pole*. The pole's new place gives the prototype's centre
and Q in closed form; f0 and the value of the kept width follow, and the rest of the section follows its kind.
"""

import math
from dataclasses import dataclass, replace

from tonebench.core.design import realise
from tonebench.core.kinds import Width, WidthKey
from tonebench.core.roots import ConjugatePair, RealRoots, Roots, is_on_rim
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.core.widths import all_widths, pole_q_ratio, pole_tangent_ratio, prototype
from tonebench.errors import InvalidValueError

# A held key stops this far from the rim, a ring of 12 minutes at 48 kHz, and outside RIM_LOG_RADIUS, so that a pole
# that was stopped here can come back.
_SMALLEST_LOG_RADIUS = 2e-7
_LARGEST_OMEGA = 0.9999 * math.pi
_SMALLEST_OMEGA = 1e-7


@dataclass(frozen=True, slots=True)
class Move:
    """How far a pole is moved: pitch as a ratio of its angle, ring as a ratio of its ring time."""

    pitch_ratio: float = 1.0
    ring_ratio: float = 1.0


def move_pole(section: Section, sample_rate_hz: float, move: Move) -> Section:
    """Return the section with its poles moved.

    While the poles are real, or of first order, there is no ring: pitch moves f0 and ring moves the prototype's Q.
    A pole is stopped short of the unit circle, of 0 Hz and of half the sampling rate, so a held key cannot leave the
    range of the kind.

    Raises
    ------
    InvalidValueError
        If the section has no poles.

    """
    made = section.made
    if isinstance(made, ByHand):
        return replace(section, made=replace(made, poles=_moved_roots(made.poles, move)))
    poles = realise(section, sample_rate_hz).poles
    if made.width is None or isinstance(poles, RealRoots):
        return _moved_by_numbers(section, made, sample_rate_hz, move)
    moved = _moved_pair(poles, move, is_rim_fixed=False)
    return set_pole(section, sample_rate_hz, moved.radius, moved.angle_rad)


def set_pole(section: Section, sample_rate_hz: float, radius: float, angle_rad: float) -> Section:
    """Return the section of the same kind whose pole pair lies at this radius and angle.

    Raises
    ------
    InvalidValueError
        If the kind cannot have a conjugate pair there: on or outside the circle, or of first order.

    """
    made = section.made
    if isinstance(made, ByHand):
        return replace(section, made=replace(made, poles=ConjugatePair(radius, angle_rad)))
    if made.width is None:
        raise InvalidValueError("a first-order section has no pole pair; set its frequency instead")
    if not 0.0 < radius < 1.0:
        raise InvalidValueError(
            f"radius must be over 0 and under 1 for a {made.kind}, got {radius!r}; make the section free to go further"
        )
    if not 0.0 < angle_rad < math.pi:
        raise InvalidValueError(f"the angle of a pole pair must lie between 0 and 180 degrees, got {angle_rad!r} rad")
    return replace(section, made=_solve(made, sample_rate_hz, radius, angle_rad))


def _solve(made: ByKind, sample_rate_hz: float, radius: float, angle_rad: float) -> ByKind:
    """Invert the bilinear transform at the pole: k² = |z − 1|²/|z + 1|², alpha = (1 − r²)/(1 + r²)."""
    amplitude = 10.0 ** (made.gain_db / 40.0)
    half_sine_squared = math.sin(0.5 * angle_rad) ** 2
    near = (1.0 - radius) ** 2 + 4.0 * radius * half_sine_squared
    far = (1.0 - radius) ** 2 + 4.0 * radius * math.cos(0.5 * angle_rad) ** 2
    pole_tangent = math.sqrt(near / far)
    alpha = math.tanh(-math.log(radius))
    pole_q = pole_tangent / (1.0 + pole_tangent * pole_tangent) / alpha
    tangent = pole_tangent / pole_tangent_ratio(made.kind, amplitude)
    frequency_hz = math.atan(tangent) * sample_rate_hz / math.pi
    if made.is_pole_frequency:
        frequency_hz = angle_rad * sample_rate_hz / (2.0 * math.pi)
    key = WidthKey.Q if made.width is None else made.width.key
    if key is WidthKey.RADIUS:
        return replace(made, frequency_hz=frequency_hz, width=Width(key, radius))
    by_q = replace(
        made, frequency_hz=frequency_hz, width=Width(WidthKey.Q, pole_q / pole_q_ratio(made.kind, amplitude))
    )
    kept = replace(by_q, width=Width(key, all_widths(by_q, sample_rate_hz)[key]))
    return kept if _has_pole(kept, sample_rate_hz, radius) else by_q


def _has_pole(made: ByKind, sample_rate_hz: float, radius: float) -> bool:
    """Tell whether the kept width leads back to the pole: far from the rim two poles may have the same octaves."""
    try:
        poles = realise(Section(made), sample_rate_hz).poles
    except InvalidValueError:
        return False
    return isinstance(poles, ConjugatePair) and abs(poles.radius - radius) < 1e-9


def _moved_by_numbers(section: Section, made: ByKind, sample_rate_hz: float, move: Move) -> Section:
    largest_hz = 0.49995 * sample_rate_hz
    frequency_hz = min(max(made.frequency_hz * move.pitch_ratio, 1e-3), largest_hz)
    moved = replace(made, frequency_hz=frequency_hz)
    if made.width is None:
        return replace(section, made=moved)
    key = made.width.key
    q = prototype(made, sample_rate_hz).q * move.ring_ratio
    by_q = replace(moved, width=Width(WidthKey.Q, min(max(q, 1e-3), 1e6)))
    widths = all_widths(by_q, sample_rate_hz)
    return replace(section, made=replace(by_q, width=Width(key, widths[key])) if key in widths else by_q)


def _moved_roots(roots: Roots, move: Move) -> Roots:
    if isinstance(roots, ConjugatePair):
        return _moved_pair(roots, move)
    if not roots.values:
        raise InvalidValueError("this section has no pole to move; type one, for example: poles 0.99 at 30 deg")
    # On the real axis the angle is fixed; only the ring can be moved.
    return RealRoots(tuple(math.copysign(_moved_radius(abs(v), move.ring_ratio), v) for v in roots.values))


def _moved_pair(pair: ConjugatePair, move: Move, *, is_rim_fixed: bool = True) -> ConjugatePair:
    angle = min(max(pair.angle_rad * move.pitch_ratio, _SMALLEST_OMEGA), _LARGEST_OMEGA)
    if pair.angle_rad in (0.0, math.pi):
        angle = pair.angle_rad
    return ConjugatePair(_moved_radius(pair.radius, move.ring_ratio, is_rim_fixed=is_rim_fixed), angle)


def _moved_radius(radius: float, ring_ratio: float, *, is_rim_fixed: bool = True) -> float:
    """Scale ln r, so that ring time scales; a root never crosses the unit circle by a step.

    A root by hand that lies on the circle stays there; the pole of a kind that is typed that close can still be moved.
    """
    if radius == 0.0 or ring_ratio == 1.0 or (is_rim_fixed and is_on_rim(radius)):
        return radius
    before = math.log(radius)
    smallest = min(_SMALLEST_LOG_RADIUS, abs(before)) if ring_ratio > 1.0 else 0.0
    return math.exp(math.copysign(max(abs(before) / ring_ratio, smallest), before))
