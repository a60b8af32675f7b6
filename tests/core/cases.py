"""Strategies and short constructors for the tests of the core room."""

import math

import numpy as np
from hypothesis import settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.kinds import Kind, has_gain
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, ByKind, Section, by_kind

# The same cases on every run and machine, and no time limit per case: mpmath is slow on a busy core.
STEADY = settings(derandomize=True, deadline=None)

RATES_HZ = (44100.0, 48000.0, 88200.0, 96000.0, 192000.0)

# The kinds that the Cookbook has, under the Cookbook's names. A resonator is its BPF times a gain.
PUBLISHED = {
    Kind.LOW_PASS: "LPF",
    Kind.HIGH_PASS: "HPF",
    Kind.BAND_PASS: "BPF",
    Kind.NOTCH: "notch",
    Kind.ALL_PASS: "APF",
    Kind.PEAK: "peakingEQ",
    Kind.LOW_SHELF: "lowShelf",
    Kind.HIGH_SHELF: "highShelf",
    Kind.RESONATOR: "BPF",
}

rates_hz = st.sampled_from(RATES_HZ)
qs = st.floats(-1.0, 2.5).map(lambda exponent: 10.0**exponent)
gains_db = st.floats(-24.0, 24.0)


def frequencies_hz(rate_hz: float, highest: float = 0.47) -> st.SearchStrategy[float]:
    """Draw evenly in log frequency, from 5 Hz up."""
    low, high = math.log(5.0), math.log(highest * rate_hz)
    return st.floats(low, high).map(math.exp)


@st.composite
def kinds_at_rate(draw: st.DrawFn, *, smallest_q: float = 0.1) -> tuple[Section, float]:
    """Draw a second-order section by kind with its Q written, and a sample rate."""
    rate_hz = draw(rates_hz)
    kind = draw(st.sampled_from(tuple(PUBLISHED)))
    q = smallest_q * 10.0 ** draw(st.floats(0.0, 3.0))
    gain_db = draw(gains_db) if has_gain(kind) else 0.0
    return by_kind(kind, draw(frequencies_hz(rate_hz)), ("q", q), gain_db), rate_hz


_radii = st.one_of(st.floats(0.05, 0.99), st.floats(2.0, 5.0).map(lambda exponent: 1.0 - 10.0**-exponent))
_angles = st.floats(0.001, math.pi - 0.001)
_pairs = st.builds(ConjugatePair, _radii, _angles)
_reals = st.lists(st.floats(-0.999, 0.999), max_size=2).map(lambda values: RealRoots(tuple(values)))
stable_roots: st.SearchStrategy[Roots] = st.one_of(_pairs, _reals)
free_sections = st.builds(
    lambda poles, zeros, gain_db, polarity, delay: Section(
        ByHand(poles, zeros, gain_db), polarity=polarity, delay_samples=delay
    ),
    stable_roots,
    stable_roots,
    gains_db,
    st.sampled_from((1, -1)),
    st.integers(0, 40),
)


@st.composite
def stable_chains(draw: st.DrawFn) -> Chain:
    """Draw a stable chain of up to five free sections, in series or as a sum."""
    combine = draw(st.sampled_from(("series", "sum")))
    direct = draw(st.one_of(st.none(), gains_db)) if combine == "sum" else None
    sections = tuple(draw(st.lists(free_sections, max_size=5)))
    return Chain("", 48000.0, sections, draw(gains_db), combine, direct)


def chain_of(*sections: Section, combine: str = "series", rate_hz: float = 48000.0) -> Chain:
    """Return a chain without a name."""
    return Chain("", rate_hz, sections, combine=combine)


def free(poles: Roots = NO_ROOTS, zeros: Roots = NO_ROOTS, gain_db: float = 0.0) -> Section:
    """Return a free section."""
    return Section(ByHand(poles, zeros, gain_db))


def kind_of(section: Section) -> ByKind:
    """Return what a section is made by, which must be a kind."""
    assert isinstance(section.made, ByKind)
    return section.made


def own_row(one: PoleZero) -> NDArray[np.float64]:
    """Multiply a section's roots out with numpy, for the tests that need coefficients and not core's own."""
    sides = []
    for roots in (one.zeros, one.poles):
        if isinstance(roots, ConjugatePair):
            upper = roots.radius * np.exp(1j * roots.angle_rad)
            values = np.array([upper, np.conj(upper)])
        else:
            values = np.array(roots.values, dtype=complex)
        poly = np.real(np.poly(values)) if values.size else np.array([1.0])
        sides.append(np.concatenate([poly, np.zeros(3 - poly.size)]))
    return np.concatenate([one.gain * sides[0], sides[1]])
