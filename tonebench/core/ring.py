"""How long a chain rings, after a click and after a tone, mode by mode.

A pole's decay time alone cries wolf, so every ring is given twice: *after a click*, the mode's envelope against the
largest sample of the whole impulse response; *after a tone* at its own frequency, the tail against the input tone.

A mode is one pole of the upper half plane or the real axis, or several that lie closer than their bandwidth: their
partial fractions cancel almost wholly, so a mode's part of the response is taken from the contour integral of
H(z)·z^(n−1) around them (Cauchy's residue theorem), which does not.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.design import PoleZero
from tonebench.core.impulse import impulse_response
from tonebench.core.roots import PolarPoint, polar_points, root_values
from tonebench.core.widths import ring_from_radius

AUDIBLE_LEVEL_DB = -60.0  # a ring that starts lower than this under its reference is not judged
_CONTOUR_POINTS = 64
_LARGEST_CLICK_FRAMES = 1 << 20
_CLUSTER_POINTS = 400
_CLICK_FRAMES = 4096


@dataclass(frozen=True, slots=True)
class Ring:
    """One mode of a chain.

    Attributes
    ----------
    frequency_hz : float
        Of the mode's outermost pole.
    t60_s : float
        Its own decay by 60 dB; inf on the circle; outside, the time to grow by 60 dB.
    is_growing : bool
        The pole lies outside the circle.
    click_level_db, tone_level_db : float
        Start of the tail against the largest |h|, and against a steady input tone at the mode's frequency.
    click_ring_s, tone_ring_s : float
        Time until the tail is 60 dB under its reference; 0 where it starts lower.
    identities : tuple of int
        The sections whose poles make the mode.

    """

    frequency_hz: float
    t60_s: float
    is_growing: bool
    click_level_db: float
    tone_level_db: float
    click_ring_s: float
    tone_ring_s: float
    identities: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class _Pole:
    value: complex
    point: PolarPoint
    identity: int


def rings(chain: Chain) -> tuple[Ring, ...]:
    """Return every mode of the chain, the longest ring first."""
    realised = chain.realised()
    poles = [pole for one in realised for pole in _poles(one)]
    if not poles:
        return ()
    with np.errstate(all="ignore"):
        click = impulse_response(from_chain(chain), _click_frames(chain, realised, poles))
    reference = float(np.max(np.abs(click[np.isfinite(click)]), initial=0.0))
    modes = [_mode(chain, realised, cluster, poles, reference) for cluster in _clusters(poles)]
    return tuple(sorted(modes, key=lambda one: one.t60_s, reverse=True))


def _poles(realised: PoleZero) -> list[_Pole]:
    """Return the poles of the upper half plane and the real axis.

    A pair that has died before it has turned (angle under half of |ln r|: a Q near one half) is given whole: its
    members' partial fractions cancel as those of near-double poles do.
    """
    found = []
    for point in polar_points(realised.poles):
        if point.radius == 0.0:
            continue
        value = cmath.rect(point.radius, point.angle_rad)
        if not point.is_pair or point.angle_rad in (0.0, math.pi):
            value = complex(math.copysign(point.radius, value.real))  # exactly real: a rounded sine of pi is not 0
        pole = _Pole(value, point, realised.identity)
        found.append(pole)
        is_slow_to_turn = min(point.angle_rad, math.pi - point.angle_rad) < 0.5 * abs(math.log(point.radius))
        if point.is_pair and is_slow_to_turn:
            found.append(replace(pole, value=value.conjugate()))
    return found


def _click_frames(chain: Chain, realised: Sequence[PoleZero], poles: Sequence[_Pole]) -> int:
    """Return how much of the impulse response surely holds its largest sample.

    k equal poles in series rise for up to k time constants before they fall.
    """
    radii = [one.point.radius for one in poles if one.point.radius < 1.0]
    slowest = min((-math.log(radius) for radius in radii), default=1.0)
    count = sum(1 for radius in radii if -math.log(radius) < 2.0 * slowest) if chain.combine == "series" else 1
    delays = [one.delay_samples for one in realised]
    late = max(delays, default=0) if chain.combine == "sum" else sum(delays)
    return min(_CLICK_FRAMES + late + int((count - 1) / slowest), _LARGEST_CLICK_FRAMES)


def longest_ring_s(chain: Chain) -> float:
    """Return the longest T60 of any pole in seconds: inf for an unstable chain, 0.0 without poles."""
    longest = 0.0
    for one in chain.realised():
        for point in polar_points(one.poles):
            if point.radius >= 1.0:
                return math.inf
            longest = max(longest, ring_from_radius(point.radius, chain.sample_rate_hz))
    return longest


def _clusters(poles: Sequence[_Pole]) -> list[list[_Pole]]:
    """Group poles that lie within a bandwidth (2·|ln r|) of each other."""
    groups: list[list[_Pole]] = []
    for pole in sorted(poles, key=lambda one: (one.point.angle_rad, one.point.radius)):
        near = [group for group in groups if any(_is_near(pole, other) for other in group)]
        merged = [pole]
        for group in near:
            merged = group + merged
            groups.remove(group)
        groups.append(merged)
    return groups


def _is_near(one: _Pole, other: _Pole) -> bool:
    width = 2.0 * min(abs(math.log(one.point.radius)), abs(math.log(other.point.radius)))
    return abs(one.value - other.value) <= width


def _mode(
    chain: Chain, realised: Sequence[PoleZero], cluster: list[_Pole], poles: Sequence[_Pole], reference: float
) -> Ring:
    outermost = max(cluster, key=lambda one: one.point.radius)
    radius, angle = outermost.point.radius, outermost.point.angle_rad
    t60_s = ring_from_radius(radius, chain.sample_rate_hz)
    if radius >= 1.0:
        click, tone = _Tail.endless(), _Tail.endless()
    else:
        click, tone = _tails(chain, realised, cluster, poles, reference)
    return Ring(
        frequency_hz=angle * chain.sample_rate_hz / (2.0 * math.pi),
        t60_s=t60_s,
        is_growing=radius > 1.0,
        click_level_db=click.level_db,
        tone_level_db=tone.level_db,
        click_ring_s=click.ring_s,
        tone_ring_s=tone.ring_s,
        identities=tuple(sorted({one.identity for one in cluster})),
    )


@dataclass(frozen=True, slots=True)
class _Tail:
    """How high a tail starts against its reference, and for how long it stays above −60 dB."""

    level_db: float
    ring_s: float

    @classmethod
    def endless(cls) -> "_Tail":
        return cls(math.inf, math.inf)

    @classmethod
    def of(cls, envelope: NDArray[np.float64], frames: NDArray[np.float64], t60_s: float, rate_hz: float) -> "_Tail":
        """Read a tail off its envelope; one pole alone falls in a straight line, which needs only its start."""
        level_db = _decibel(float(np.max(envelope)))
        if frames.size == 1:
            return cls(level_db, t60_s * max(level_db - AUDIBLE_LEVEL_DB, 0.0) / 60.0)
        above = np.flatnonzero(envelope > 10.0 ** (AUDIBLE_LEVEL_DB / 20.0))
        return cls(level_db, float(frames[above[-1]]) / rate_hz if above.size else 0.0)


def _tails(
    chain: Chain, realised: Sequence[PoleZero], cluster: list[_Pole], poles: Sequence[_Pole], reference: float
) -> tuple[_Tail, _Tail]:
    """Return the tail after a click and the tail after a tone.

    With h[n] = Re(e[n]) and e[n] the mode's complex part (twice the residue sum for a conjugate mode), the click's
    envelope is |e[n]|. After a real tone of the mode's angle the envelope of the tail starts at
    |R·(r/(1 − r) + p·e^{jw}/(1 − p·e^{jw}))|: the tone's two halves e^{±jw} each leave R·p/(e^{±jw} − p).
    """
    outermost = max(cluster, key=lambda one: one.point.radius)
    is_conjugate = outermost.value.imag > 0.0 and not any(one.value.imag < 0.0 for one in cluster)
    z, weight = _contours(chain, realised, cluster, poles)
    frames = _frames(cluster)
    powers = z[None, :] ** frames[:, None]
    click = np.abs(powers @ (weight / z)) * (2.0 if is_conjugate else 1.0)
    tone = cmath.rect(1.0, outermost.point.angle_rad)
    if not is_conjugate:
        tone = complex(math.copysign(1.0, tone.real))  # a mode on the real axis is left behind by 0 Hz or fs/2
    halves = (tone, tone.conjugate()) if is_conjugate else (tone,)
    after_tone = np.abs(powers @ sum((weight / (half - z) for half in halves), np.zeros_like(z)))
    t60_s = ring_from_radius(outermost.point.radius, chain.sample_rate_hz)
    rate_hz = chain.sample_rate_hz
    scale = 1.0 / reference if reference > 0.0 else 0.0
    return _Tail.of(click * scale, frames, t60_s, rate_hz), _Tail.of(after_tone, frames, t60_s, rate_hz)


def _frames(cluster: list[_Pole]) -> NDArray[np.float64]:
    """Return the sample numbers at which a tail is looked at: its start, or for a cluster its whole fall."""
    if len(cluster) == 1:
        return np.zeros(1)
    slowest = min(abs(math.log(one.point.radius)) for one in cluster)
    # n equal poles are 60 dB down after some 5 + 1.9·n time constants (measured); a louder start adds to that.
    return np.linspace(0.0, (16.0 + 2.0 * len(cluster)) / slowest, _CLUSTER_POINTS)


def _contours(
    chain: Chain, realised: Sequence[PoleZero], cluster: list[_Pole], poles: Sequence[_Pole]
) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
    """Return points z and weights w with h_mode[n] = Σ w·z^(n−1), on small circles around the cluster's poles.

    Poles within a quarter of the bandwidth share a circle; the circles stay within half a bandwidth, so that z^n
    does not outgrow the tail that it stands for, and clear of the unit circle.
    """
    slowest = min(abs(math.log(one.point.radius)) for one in cluster)
    turned = np.exp(2j * math.pi * (np.arange(_CONTOUR_POINTS) + 0.5) / _CONTOUR_POINTS)
    everywhere = [0j, *(one.value for one in poles)]  # in powers of 1/z there are poles at 0 as well
    everywhere += [one.value.conjugate() for one in poles if one.value.imag != 0.0]
    points, weights = [], []
    for group in _grouped(cluster, 0.25 * slowest):
        centre = sum(group, 0j) / len(group)
        reach = max(abs(value - centre) for value in group)
        outside = min((abs(v - centre) for v in everywhere if abs(v - centre) > reach * (1.0 + 1e-9)), default=2.0)
        spread = min(math.sqrt(max(reach, 0.2 * outside) * outside), max(0.5 * slowest, 1.5 * reach))
        z = centre + spread * turned
        points.append(z)
        weights.append(spread * turned / _CONTOUR_POINTS * _transfer(chain, realised, cluster, z))
    return np.concatenate(points), np.concatenate(weights)


def _grouped(cluster: list[_Pole], distance: float) -> list[list[complex]]:
    """Split a cluster into groups whose poles are linked by steps of at most ``distance``."""
    groups: list[list[complex]] = []
    for value in (one.value for one in cluster):
        near = [group for group in groups if any(abs(value - other) <= distance for other in group)]
        merged = [value]
        for group in near:
            merged += group
            groups.remove(group)
        groups.append(merged)
    return groups


def _transfer(
    chain: Chain, realised: Sequence[PoleZero], cluster: list[_Pole], z: NDArray[np.complex128]
) -> NDArray[np.complex128]:
    """Return H(z) on the contour; of a sum, only the sections that own a pole of the cluster ring there."""
    gain = 10.0 ** (chain.gain_db / 20.0)
    identities = {one.identity for one in cluster}
    if chain.combine == "sum":
        own = [one for one in realised if one.identity in identities]
        latest = max(one.delay_samples for one in own)  # the tail is looked at from when all of its parts sound
        parts = [_section(one, z) * z ** (latest - one.delay_samples) for one in own]
        total = np.zeros(z.shape, dtype=np.complex128)
        for part in parts:
            total += part
        return np.asarray(total * gain, dtype=np.complex128)
    result = np.full(z.shape, complex(gain), dtype=np.complex128)
    for one in realised:
        result *= _section(one, z)
    return result


def _section(one: PoleZero, z: NDArray[np.complex128]) -> NDArray[np.complex128]:
    result = np.full(z.shape, complex(one.gain), dtype=np.complex128)
    for zero in root_values(one.zeros):
        result *= 1.0 - zero / z
    for pole in root_values(one.poles):
        result /= 1.0 - pole / z
    return np.asarray(result)  # the delay of a series only shifts the envelope in time


def _decibel(ratio: float) -> float:
    if ratio <= 0.0:
        return -math.inf
    return math.inf if math.isinf(ratio) else 20.0 * math.log10(ratio)
