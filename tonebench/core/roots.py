"""Poles and zeros in polar form: the stored truth of every section.

A section has at most two poles and two zeros. Each set is a conjugate pair, or up to two real roots, so that every
coefficient is real. Coefficients are derived here and never edited back: the way through a1 and a2 loses the angle
near 0 Hz.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.errors import InvalidValueError, must_be

# A root this close to the unit circle (|ln r|) is drawn and treated as lying on it: 1e-7 is a ring of 24 minutes at
# 48 kHz, longer than any clip of the bench.
RIM_LOG_RADIUS = 1e-7


@dataclass(frozen=True, slots=True)
class ConjugatePair:
    """Two roots at ``radius * exp(±j * angle_rad)``.

    Attributes
    ----------
    radius : float
        Distance from the origin, 0 or more; 1 is the unit circle.
    angle_rad : float
        Angle of the upper root, 0 to pi; 0 and pi are double real roots.

    """

    radius: float
    angle_rad: float

    def __post_init__(self) -> None:
        if not (math.isfinite(self.radius) and self.radius >= 0.0):
            raise InvalidValueError(must_be("radius", "a finite number of 0 or more", self.radius))
        if not (math.isfinite(self.angle_rad) and 0.0 <= self.angle_rad <= math.pi):
            raise InvalidValueError(must_be("angle", "between 0 and pi radians (0 and 180 degrees)", self.angle_rad))


@dataclass(frozen=True, slots=True)
class RealRoots:
    """No, one or two roots on the real axis, at ``values``."""

    values: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        if len(self.values) > 2:
            raise InvalidValueError(must_be("real", "at most two roots", list(self.values)))
        for value in self.values:
            if not math.isfinite(value):
                raise InvalidValueError(must_be("real", "finite numbers", value))


Roots = ConjugatePair | RealRoots
NO_ROOTS = RealRoots()


@dataclass(frozen=True, slots=True)
class PolarPoint:
    """One root of the upper half plane or the real axis: ``radius`` and ``angle_rad``; a real negative one has pi."""

    radius: float
    angle_rad: float
    is_pair: bool


def polar_points(roots: Roots) -> tuple[PolarPoint, ...]:
    """Return one point per conjugate pair or real root, as charts and listings show them."""
    if isinstance(roots, ConjugatePair):
        return (PolarPoint(roots.radius, roots.angle_rad, is_pair=True),)
    return tuple(PolarPoint(abs(v), math.pi if v < 0.0 else 0.0, is_pair=False) for v in roots.values)


def root_values(roots: Roots) -> tuple[complex, ...]:
    """Return every root as a complex number, both members of a pair."""
    if isinstance(roots, ConjugatePair):
        upper = roots.radius * complex(math.cos(roots.angle_rad), math.sin(roots.angle_rad))
        return (upper, upper.conjugate())
    return tuple(complex(v) for v in roots.values)


def polynomial(roots: Roots) -> tuple[float, float]:
    """Return ``c1, c2`` of ``1 + c1/z + c2/z**2``, the product of ``1 - root/z``."""
    if isinstance(roots, ConjugatePair):
        return (-2.0 * roots.radius * math.cos(roots.angle_rad), roots.radius * roots.radius)
    values = (*roots.values, 0.0, 0.0)
    return (-(values[0] + values[1]), values[0] * values[1])


def factors(roots: Roots, omega_rad: NDArray[np.float64]) -> list[NDArray[np.complex128]]:
    """Return ``1 - root * exp(-j*omega)`` for each root, without cancellation near the circle.

    Written with 1 − r and sin² of half the angle between root and frequency, so that a pole at radius 0.99999 and
    0.0026 rad keeps a relative error of some 1e-12, where the coefficient form has 1e-9.

    Parameters
    ----------
    roots : ConjugatePair or RealRoots
    omega_rad : ndarray, shape (k,)
        Frequency in radians per sample.

    """
    if isinstance(roots, ConjugatePair):
        return [
            _factor(roots.radius, roots.angle_rad - omega_rad),
            _factor(roots.radius, -roots.angle_rad - omega_rad),
        ]
    return [_real_factor(value, omega_rad) for value in roots.values]


def _factor(radius: float, delta_rad: NDArray[np.float64]) -> NDArray[np.complex128]:
    half_sine = np.sin(0.5 * delta_rad)
    real = (1.0 - radius) + 2.0 * radius * half_sine * half_sine
    return np.asarray(real - 1j * (radius * np.sin(delta_rad)), dtype=np.complex128)


def _real_factor(value: float, omega_rad: NDArray[np.float64]) -> NDArray[np.complex128]:
    if value >= 0.0:
        return _factor(value, -omega_rad)
    half_cosine = np.cos(0.5 * omega_rad)
    # 1 − v cos w with v < 0 cancels near half the sampling rate; 1 + v − 2 v cos²(w/2) does not.
    real = (1.0 + value) - 2.0 * value * half_cosine * half_cosine
    return np.asarray(real + 1j * (value * np.sin(omega_rad)), dtype=np.complex128)


def is_on_rim(radius: float) -> bool:
    """Tell whether a root of this radius lies on the unit circle for all practical purposes."""
    return radius > 0.0 and abs(math.log(radius)) < RIM_LOG_RADIUS


def largest_radius(roots: Sequence[Roots]) -> float:
    """Return the largest radius in several sets of roots, 0.0 where there is none."""
    return max((point.radius for one in roots for point in polar_points(one)), default=0.0)
