"""Magnitude, phase and group delay against the pole/zero form at 50 digits, from exactly the same doubles."""

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from tests.core import oracles
from tests.core.cases import STEADY, chain_of, free, free_sections, gains_db, stable_chains
from tests.core.oracles import MP
from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.response import (
    chain_response,
    feature_frequencies_hz,
    group_delay_s,
    magnitude_db,
    phase_rad,
    section_response,
)
from tonebench.core.roots import ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, Section

omegas = st.one_of(st.sampled_from((0.0, math.pi)), st.floats(1e-6, math.pi))


def exact_roots(roots: Roots) -> list[object]:
    """Return roots at exactly the doubles that the section stores."""
    if isinstance(roots, ConjugatePair):
        return oracles.pair(roots.radius, roots.angle_rad)
    return [MP.mpf(value) for value in roots.values]


def exact(one: PoleZero, omega: object) -> object:
    """Return the response of realised roots at 50 digits."""
    return oracles.root_response(exact_roots(one.zeros), exact_roots(one.poles), one.gain, one.delay_samples, omega)


def relative_errors(one: PoleZero, grid: list[float]) -> list[float]:
    """Return errors relative to max(|H|, 1e-3·max|H|) over the grid."""
    wanted = [MP.mpc(exact(one, MP.mpf(omega))) for omega in grid]
    largest = max(abs(value) for value in wanted)
    found = section_response(one, np.array(grid))
    return [
        float(abs(MP.mpc(complex(x)) - y) / max(abs(y), 1e-3 * largest)) for x, y in zip(found, wanted, strict=True)
    ]


@STEADY
@given(free_sections, st.lists(omegas, min_size=1, max_size=5))
def test_sections_against_fifty_digits(section: Section, grid: list[float]) -> None:
    """Any free section; worst of 1500 random cases, near the pole, 1.7e-13.

    The angle between pole and frequency is a difference of doubles up to pi, each exact here; its sine's rounding is
    4e-16 over a distance of 1e-5 from the pole: 4e-11 in the worst case.
    """
    made = section.made
    assert isinstance(made, ByHand)
    one = PoleZero(made.poles, made.zeros, section.polarity * 10.0 ** (made.gain_db / 20.0), section.delay_samples)
    near = [made.poles.angle_rad] if isinstance(made.poles, ConjugatePair) else []
    assert max(relative_errors(one, [*grid, *near, 0.0, math.pi])) < 1e-10


@pytest.mark.parametrize("angle_rad", [2.0 * math.pi * hz / 192000.0 for hz in (5.0, 50.0, 1000.0, 20000.0)])
@pytest.mark.parametrize("zeros", [RealRoots((1.0, -1.0)), RealRoots((-1.0, -1.0)), RealRoots()])
def test_poles_near_the_circle_from_5_hz_to_20_khz(angle_rad: float, zeros: Roots) -> None:
    """Radius 0.99999 at 192 kHz, at the pole, beside it by parts of its bandwidth, and at both ends; worst 5e-16.

    The published claim is 1.8e-12 (design.md); 1 − r itself is exact, and each factor is a handful of roundings.
    """
    one = PoleZero(ConjugatePair(0.99999, angle_rad), zeros, 1e-5)
    offsets = [sign * 1e-5 * step for sign in (-1.0, 1.0) for step in (0.0, 0.1, 0.5, 1.0, 2.0, 7.0)]
    grid = [0.0, math.pi, *(abs(angle_rad + offset) for offset in offsets)]
    assert max(relative_errors(one, grid)) < 2e-12


def test_coefficients_would_not_have_been_enough() -> None:
    """design.md: at r = 0.99999 and 0.0026 rad the coefficient form has 1.4e-9 where the roots have 1.8e-12."""
    one = PoleZero(ConjugatePair(0.99999, 0.0026), RealRoots(), 1.0)
    grid = np.linspace(0.00258, 0.00262, 41)
    assert max(relative_errors(one, grid.tolist())) < 1.8e-12
    x = np.exp(-1j * grid)
    by_coefficients = 1.0 / (1.0 - 2.0 * 0.99999 * math.cos(0.0026) * x + 0.99999**2 * x * x)
    wanted = np.array([complex(exact(one, MP.mpf(omega))) for omega in grid.tolist()])  # type: ignore[call-overload]
    assert np.max(np.abs(by_coefficients / wanted - 1.0)) > 1e-10


@pytest.mark.parametrize("value", [-1.0, -0.999999, -0.9, 0.999999, 1.0])
def test_real_roots_on_both_sides(value: float) -> None:
    """A zero on the real axis, near and on the circle, at its own end of the spectrum, relative to |H| itself.

    With the sine of half an angle (or its cosine) nothing cancels. pi as a double is 1.2e-16 off, which counts
    against 1e-6: 1e-10 there, and it is the same double for both sides here.
    """
    one = PoleZero(RealRoots(), RealRoots((value,)), 1.0)
    end = 0.0 if value > 0.0 else math.pi
    for offset in (1e-7, 1e-5, 1e-3):
        omega = abs(end - offset)
        wanted = MP.mpc(exact(one, MP.mpf(omega)))
        found = complex(section_response(one, np.array([omega]))[0])
        assert float(abs(MP.mpc(found) - wanted) / abs(wanted)) < 1e-8  # cos(w/2) near pi/2: 6e-17 over 5e-8


@STEADY
@given(stable_chains(), st.floats(0.0, 24000.0))
def test_series_is_the_product_and_sum_the_sum(chain: Chain, frequency_hz: float) -> None:
    """By the sections' own responses at 50 digits, with direct gain and gain; 1e-9 of the largest partial value.

    f·2pi/fs is rounded (4e-16), over 1e-5 from a pole, times five sections: 2e-10.
    """
    omega = 2 * MP.pi * MP.mpf(frequency_hz) / 48000
    parts = [MP.mpc(exact(one, omega)) for one in chain.realised()]
    if chain.combine == "sum":
        direct = 0 if chain.direct_gain_db is None else MP.mpf(10) ** (MP.mpf(chain.direct_gain_db) / 20)
        wanted, scale = sum(parts, direct), max([abs(direct), *(abs(part) for part in parts)])
    else:
        wanted = MP.mpf(1)
        for part in parts:
            wanted *= part
        scale = abs(wanted)
    gain = MP.mpf(10) ** (MP.mpf(chain.gain_db) / 20)
    found = complex(chain_response(chain, [frequency_hz])[0])
    # A zero right at the frequency makes a partial product tiny: there the absolute floor speaks.
    assert float(abs(MP.mpc(found) - gain * wanted)) <= 1e-9 * float(gain * max(scale, 1e-4))


@STEADY
@given(stable_chains(), st.floats(1.0, 23990.0))
def test_group_delay_is_the_slope_of_the_phase(chain: Chain, frequency_hz: float) -> None:
    """Against mpmath's numeric derivative of the whole chain's response, series and sum.

    Relative to the sum of the sections' own delays (which may cancel), and where a sum does not itself cancel.
    """
    realised = chain.realised()
    direct = 0 if chain.direct_gain_db is None else MP.mpf(10) ** (MP.mpf(chain.direct_gain_db) / 20)

    def response(omega: object) -> Any:
        parts: list[Any] = [exact(one, omega) for one in realised]
        return sum(parts, direct) if chain.combine == "sum" else MP.fprod(parts)

    omega = 2 * MP.pi * MP.mpf(frequency_hz) / 48000
    parts = [abs(MP.mpc(exact(one, omega))) for one in realised]
    value = abs(MP.mpc(response(omega)))
    if value == 0 or min(parts, default=MP.mpf(1)) < 1e-6 * max(parts, default=MP.mpf(1)):
        return
    cancellation = float(sum(parts, direct) / value) if chain.combine == "sum" else 1.0
    wanted = float(oracles.group_delay_samples(response, omega))
    own = sum(abs(float(oracles.group_delay_samples(lambda w, one=one: exact(one, w), omega))) for one in realised)
    found = float(group_delay_s(chain, [frequency_hz])[0]) * 48000.0
    # The frequency's rounding over 1e-5 (squared in the slope, 1e5 samples late at most): 1e-9 of the delays.
    assert found == pytest.approx(wanted, abs=1e-9 * (1.0 + own) * cancellation**2)


def test_group_delay_at_the_ends_and_on_a_zero() -> None:
    """All-real cases by hand: p/(1 − p) at 0 Hz, −p/(1 + p) at fs/2; NaN on a zero of the circle itself."""
    chain = chain_of(free(RealRoots((0.75,))))
    assert group_delay_s(chain, [0.0, 24000.0]) * 48000.0 == pytest.approx([3.0, -0.75 / 1.75], rel=1e-12)  # rounding
    assert np.isnan(group_delay_s(chain_of(free(zeros=RealRoots((1.0,)))), [0.0])[0])
    late = Section(ByHand(), delay_samples=7)
    assert group_delay_s(chain_of(late), [0.0, 100.0, 24000.0]) == pytest.approx([7.0 / 48000.0] * 3, rel=1e-15)


@STEADY
@given(gains_db, st.integers(0, 30), st.floats(0.0, 24000.0))
def test_polarity_and_delay(gain_db: float, delay: int, frequency_hz: float) -> None:
    """An upside-down, late wire is −g·e^{−jwd}; 30 samples at pi multiply w's rounding to 1e-13."""
    chain = chain_of(Section(ByHand(gain_db=gain_db), polarity=-1, delay_samples=delay))
    angle = -2.0 * math.pi * frequency_hz * delay / 48000.0
    wanted = -(10.0 ** (gain_db / 20.0)) * complex(math.cos(angle), math.sin(angle))
    assert chain_response(chain, [frequency_hz])[0] == pytest.approx(wanted, rel=1e-12)


def test_bypassed_sections_are_left_out() -> None:
    """A series passes, a sum loses the part: an empty sum is silence, and its level the lowest number there is."""
    off = Section(ByHand(gain_db=20.0), is_bypassed=True)
    assert chain_response(chain_of(off), [100.0])[0] == 1.0
    silent = chain_response(chain_of(off, combine="sum"), [100.0])
    assert silent[0] == 0.0
    assert magnitude_db(silent)[0] == -400.0


def test_phase_is_unwrapped() -> None:
    """Ten samples late, from 0 to half the rate in fine steps: a straight line to −10·pi."""
    grid = np.linspace(0.0, 24000.0, 500)
    phase = phase_rad(chain_response(chain_of(Section(ByHand(), delay_samples=10)), grid))
    assert phase == pytest.approx(-10.0 * math.pi * grid / 24000.0, abs=1e-12)  # rounding of 10·pi


def test_a_pole_on_the_circle_is_infinite_there_without_a_warning() -> None:
    """1/(1 − 1/z) at 0 Hz."""
    assert magnitude_db(chain_response(chain_of(free(RealRoots((1.0,)))), [0.0]))[0] == math.inf


@STEADY
@given(st.floats(2.0, 7.0), st.floats(0.001, 3.1))
@example(5.0, 0.0026)
def test_feature_frequencies_catch_every_peak(exponent: float, angle_rad: float) -> None:
    """The grid around a pole comes within 0.01 dB of its height: a point within 0.02 bandwidths each side."""
    chain = chain_of(free(ConjugatePair(1.0 - 10.0**-exponent, angle_rad)))
    grid = feature_frequencies_hz(chain, 0.0, 24000.0)
    exact_hz = angle_rad * 48000.0 / (2.0 * math.pi)
    assert np.min(np.abs(grid - exact_hz)) <= 1e-9 * exact_hz
    best = magnitude_db(chain_response(chain, grid)).max()
    at_pole = magnitude_db(chain_response(chain, [exact_hz]))[0]
    assert best >= at_pole - 1e-9
    assert grid.min() >= 0.0
    assert grid.max() <= 24000.0
