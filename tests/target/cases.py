"""Chains and strategies shared by the tests of the target room."""

import math
from collections.abc import Sequence

from hypothesis import strategies as st

from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, Section, by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import check_chain
from tonebench.target.findings import Finding

RATE_HZ = 48000.0


def chain_of(*sections: Section, combine: str = "series", rate_hz: float = RATE_HZ) -> Chain:
    """Return a chain without a name."""
    return Chain("", rate_hz, sections, combine=combine)


def free(poles: Roots = NO_ROOTS, zeros: Roots = NO_ROOTS, gain_db: float = 0.0, name: str = "") -> Section:
    """Return a free section."""
    return Section(ByHand(poles, zeros, gain_db), name=name)


def pole_pair(radius: float, frequency_hz: float, rate_hz: float = RATE_HZ) -> ConjugatePair:
    """Return a pair by its frequency."""
    return ConjugatePair(radius, 2.0 * math.pi * frequency_hz / rate_hz)


def low_bell() -> Section:
    """Return the pole of the published-grid example: radius 0.99995 at 50 Hz, zeros at 0 Hz and half the rate."""
    return free(pole_pair(0.99995, 50.0), RealRoots((1.0, -1.0)), -80.0)


def sixteen() -> Chain:
    """Return the chain that ``check_chain`` is timed on: peaks and notches of q 30 on 50 Hz and its harmonics."""
    return chain_of(
        *(
            by_kind(Kind.NOTCH if k % 2 else Kind.PEAK, 50.0 * (k + 1), ("q", 30.0), 0.0 if k % 2 else 3.0)
            for k in range(16)
        )
    )


_radii = st.one_of(st.floats(0.0, 0.99999), st.floats(1e-6, 0.2).map(lambda d: 1.0 - d), st.just(1.0))
_angles = st.one_of(st.floats(0.0, math.pi), st.floats(1e-5, 0.05))
pairs = st.builds(ConjugatePair, _radii, _angles)
reals = st.builds(RealRoots, st.lists(st.floats(-0.99999, 0.99999), max_size=2).map(tuple))
any_roots: st.SearchStrategy[Roots] = st.one_of(pairs, reals)
_sizes = st.one_of(st.floats(0.0, 2.0), st.floats(0.0, 1e9), st.floats(0.0, 1e30), st.floats(0.0, 1e300))
hostile_roots: st.SearchStrategy[Roots] = st.one_of(
    any_roots,
    st.builds(ConjugatePair, _sizes, st.floats(0.0, math.pi)),
    st.builds(
        RealRoots, st.lists(st.builds(math.copysign, _sizes, st.sampled_from([1.0, -1.0])), max_size=2).map(tuple)
    ),
)


def found(chain: Chain, target: str, code: str, rates_hz: Sequence[float] = ()) -> list[Finding]:
    """Return the findings of one code."""
    return [one for one in check_chain(chain, parse_target(target), rates_hz) if one.code == code]


def only(chain: Chain, target: str, code: str, rates_hz: Sequence[float] = ()) -> Finding:
    """Return the one finding of a code."""
    (finding,) = found(chain, target, code, rates_hz)
    return finding
