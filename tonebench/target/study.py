"""What all checks look at: a chain, its rounded twin, and both responses on one grid; each computed once."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.response import combined_response, section_response, to_omega_rad
from tonebench.core.roots import ConjugatePair, RealRoots, Roots, largest_radius
from tonebench.core.section import Section
from tonebench.core.widths import ring_from_radius
from tonebench.target.arithmetic import Target
from tonebench.target.rounded import RoundedChain, round_chain
from tonebench.target.rounding import LARGEST_MAGNITUDE, RoundedSection

_GRID_POINTS = 240
_SPREAD = np.array([0.0, 0.1, 0.3, 0.6, 1.0, 2.0, 4.0, 8.0, 16.0, 32.0])
_OFFSETS = np.unique(np.concatenate([-_SPREAD, _SPREAD]))


@dataclass(frozen=True, slots=True)
class Part:
    """One active section, before and after rounding.

    Attributes
    ----------
    number : int
        From 1, bypassed sections counted.
    section : Section
    ideal : PoleZero
    words : RoundedSection
    rounded : PoleZero or None
        None where the format cannot hold it.

    """

    number: int
    section: Section
    ideal: PoleZero
    words: RoundedSection
    rounded: PoleZero | None

    @property
    def ideal_radius(self) -> float:
        """Radius of the outermost ideal pole."""
        return largest_radius([self.ideal.poles])


@dataclass(frozen=True, slots=True, eq=False)
class Curves:
    """Both responses of the whole chain where something can happen: an even grid, and points around every root."""

    frequency_hz: NDArray[np.float64]
    ideal: NDArray[np.complex128]
    rounded: NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class Study:
    """A chain for one target at one sample rate.

    Attributes
    ----------
    chain : Chain
    target : Target
    parts : tuple of Part
    twin : RoundedChain

    """

    chain: Chain
    target: Target
    parts: tuple[Part, ...]
    twin: RoundedChain

    @property
    def is_computable(self) -> bool:
        """Whether doubles can follow the chain: no root beyond ``LARGEST_MAGNITUDE``."""
        roots = [one for part in self.parts for one in (part.ideal.poles, part.ideal.zeros)]
        return largest_radius(roots) <= LARGEST_MAGNITUDE

    @property
    def is_ideal_stable(self) -> bool:
        """Whether every ideal pole lies inside the circle."""
        return all(part.ideal_radius < 1.0 for part in self.parts)

    def to_hz(self, angle_rad: float) -> float:
        """Return the frequency of an angle."""
        return angle_rad * self.chain.sample_rate_hz / (2.0 * math.pi)

    def ring_s(self, roots: Roots) -> float:
        """Return the T60 of the outermost of these roots."""
        return ring_from_radius(largest_radius([roots]), self.chain.sample_rate_hz)


def study_chain(chain: Chain, target: Target) -> Study:
    """Round a chain and line its sections up with their rounded twins."""
    twin = round_chain(chain, target)
    active = [(number, one) for number, one in enumerate(chain.sections, start=1) if not one.is_bypassed]
    lined_up = zip(active, chain.realised(), twin.sections, twin.realised, strict=True)
    parts = tuple(Part(number, section, ideal, words, rounded) for (number, section), ideal, words, rounded in lined_up)
    return Study(chain, target, parts, twin)


def curves(study: Study) -> Curves:
    """Compute both responses of a study."""
    frequency_hz = _grid_hz(study)
    omega = to_omega_rad(frequency_hz, study.chain.sample_rate_hz)
    parts = [section_response(part.ideal, omega) for part in study.parts]
    gain = 10.0 ** (study.chain.gain_db / 20.0)
    with np.errstate(over="ignore", invalid="ignore"):
        ideal = combined_response(parts, study.chain.combine, gain, study.chain.direct_gain, omega.size)
        return Curves(frequency_hz, ideal, study.twin.response(frequency_hz))


def _grid_hz(study: Study) -> NDArray[np.float64]:
    """Return 0 to half the rate: log-even points, and up to 32 bandwidths around every root on either side."""
    half_hz = 0.5 * study.chain.sample_rate_hz
    found = [np.array([0.0, half_hz]), np.geomspace(min(5.0, 0.1 * half_hz), half_hz, _GRID_POINTS)]
    for part in study.parts:
        for one in (part.ideal, part.rounded):
            if one is not None:
                found += [_around(study, one.poles, one.poles), _around(study, one.zeros, one.poles)]
    grid = np.unique(np.concatenate(found))
    return grid[(grid >= 0.0) & (grid <= half_hz)]


def _around(study: Study, roots: Roots, poles: Roots) -> NDArray[np.float64]:
    """Return frequencies around a pair's angle; a zero on the circle borrows the width of its section's poles."""
    if isinstance(roots, RealRoots) or roots.radius == 0.0:
        return np.empty(0)
    width = abs(math.log(roots.radius))
    if roots is not poles and isinstance(poles, ConjugatePair) and poles.radius > 0.0:
        width = max(width, abs(math.log(poles.radius)))
    return np.asarray(roots.angle_rad + _OFFSETS * width) * (study.chain.sample_rate_hz / (2.0 * math.pi))
