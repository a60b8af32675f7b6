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
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.design import PoleZero
from tonebench.core.impulse import impulse_response
from tonebench.core.roots import PolarPoint, polar_points, root_values
from tonebench.core.widths import ring_from_radius

AUDIBLE_LEVEL_DB = -60.0  # a ring that starts lower than this under its reference is not judged
_CONTOUR_POINTS = 96
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
    poles = [
        _Pole(cmath.rect(point.radius, point.angle_rad), point, one.identity)
        for one in realised
        for point in polar_points(one.poles)
        if point.radius > 0.0
    ]
    if not poles:
        return ()
    click = impulse_response(from_chain(chain), _CLICK_FRAMES)
    reference = float(np.max(np.abs(click[np.isfinite(click)]), initial=0.0))
    modes = [_mode(chain, realised, cluster, poles, reference) for cluster in _clusters(poles)]
    return tuple(sorted(modes, key=lambda one: one.t60_s, reverse=True))


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
    click, tone = _levels(chain, realised, cluster, poles)
    click_db = _decibel(click / reference if reference > 0.0 else 0.0)
    tone_db = _decibel(tone)
    return Ring(
        frequency_hz=angle * chain.sample_rate_hz / (2.0 * math.pi),
        t60_s=t60_s,
        is_growing=radius > 1.0,
        click_level_db=click_db,
        tone_level_db=tone_db,
        click_ring_s=_time_above(click_db, t60_s),
        tone_ring_s=_time_above(tone_db, t60_s),
        identities=tuple(sorted({one.identity for one in cluster})),
    )


def _time_above(level_db: float, t60_s: float) -> float:
    """Return how long a tail that starts at ``level_db`` stays above −60 dB."""
    above_db = level_db - AUDIBLE_LEVEL_DB
    if above_db <= 0.0:
        return 0.0
    return t60_s * above_db / 60.0


def _levels(
    chain: Chain, realised: Sequence[PoleZero], cluster: list[_Pole], poles: Sequence[_Pole]
) -> tuple[float, float]:
    """Return the click envelope and the tone tail at their start, as linear amplitudes.

    With h[n] = Re(e[n]) and e[n] the mode's complex part (twice the residue sum for a conjugate mode), the click
    level is the largest |e|. After a real tone of the mode's angle the envelope of the tail starts at
    |R·(r/(1 − r) + p·e^{jw}/(1 − p·e^{jw}))|: the tone's two halves e^{±jw} each leave R·p/(e^{±jw} − p).
    """
    outermost = max(cluster, key=lambda one: one.point.radius)
    if outermost.point.radius >= 1.0:
        return (math.inf, math.inf)
    tone = cmath.rect(1.0, outermost.point.angle_rad)
    centre, spread = _contour(cluster, poles, tone)
    turned = np.exp(2j * math.pi * (np.arange(_CONTOUR_POINTS) + 0.5) / _CONTOUR_POINTS)
    z = centre + spread * turned
    weight = spread * turned / _CONTOUR_POINTS * _transfer(chain, realised, cluster, z)
    is_conjugate = outermost.point.is_pair and 0.0 < outermost.point.angle_rad < math.pi
    envelope = np.abs((z[None, :] ** (_envelope_frames(cluster)[:, None] - 1)) @ weight)
    tail = 0j
    for half in (tone, tone.conjugate()) if is_conjugate else (tone,):
        tail += complex(np.sum(weight / (half - z)))
        if abs(half - centre) < spread:  # the tone's own residue, −H, is inside the contour too
            tail += complex(_transfer(chain, realised, cluster, np.array([half]))[0])
    return ((2.0 if is_conjugate else 1.0) * float(np.max(envelope)), abs(tail))


def _envelope_frames(cluster: list[_Pole]) -> NDArray[np.int64]:
    """Return sample numbers over which a cluster's envelope can have its largest value: a few time constants."""
    if len(cluster) == 1:
        return np.arange(1, 2)
    slowest = min(abs(math.log(one.point.radius)) for one in cluster)
    return np.unique(np.geomspace(1.0, 4.0 / slowest + 2.0, 96).astype(np.int64))


def _contour(cluster: list[_Pole], poles: Sequence[_Pole], tone: complex) -> tuple[complex, float]:
    """Return centre and radius of a circle around a cluster that leaves every other pole outside.

    It also keeps away from the tone's own point on the unit circle, where the integrand has a pole.
    """
    centre = sum((one.value for one in cluster), 0j) / len(cluster)
    reach = max(abs(one.value - centre) for one in cluster)
    inside = {id(one) for one in cluster}
    others = [abs(one.value - centre) for one in poles if id(one) not in inside]
    others += [abs(one.value.conjugate() - centre) for one in poles if abs(one.value.imag) > 0.0]
    outside = min(others, default=math.inf)
    slowest = min(abs(math.log(one.point.radius)) for one in cluster)
    wanted = max(2.0 * reach, 0.5 * slowest, 1e-12)
    if outside <= reach:
        return (centre, max(reach, 1e-12))
    spread = min(wanted, math.sqrt(max(reach, 0.05 * outside) * outside))
    distance = abs(tone - centre)
    if 0.7 * distance < spread < 1.5 * distance:
        inner, outer = 0.7 * distance, 1.5 * distance
        spread = inner if inner > 1.3 * reach else min(outer, math.sqrt(distance * outside))
    return (centre, spread)


def _transfer(
    chain: Chain, realised: Sequence[PoleZero], cluster: list[_Pole], z: NDArray[np.complex128]
) -> NDArray[np.complex128]:
    """Return H(z) on the contour; of a sum, only the sections that own a pole of the cluster ring there."""
    gain = 10.0 ** (chain.gain_db / 20.0)
    identities = {one.identity for one in cluster}
    if chain.combine == "sum":
        parts = [_section(one, z) for one in realised if one.identity in identities]
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
    return np.asarray(result)  # delay only shifts the envelope in time


def _decibel(ratio: float) -> float:
    if ratio <= 0.0:
        return -math.inf
    return math.inf if math.isinf(ratio) else 20.0 * math.log10(ratio)
