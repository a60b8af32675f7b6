"""Where rounded poles lie: published-grid rows, mpmath at 50 digits, and exact stability against matrix powers."""

import math
from fractions import Fraction

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.target.cases import RATE_HZ, pole_pair
from tonebench.core.design import PoleZero
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, polynomial, root_values
from tonebench.target.arithmetic import F32, F64, Structure, parse_format
from tonebench.target.rounded import pole_zero, roots_of
from tonebench.target.rounding import RoundedSection, round_section, round_to_step
from tonebench.target.stability import is_inside_triangle, is_section_stable
from tonebench.target.structures import Form, Transfer


def mp_roots(c1: Fraction, c2: Fraction) -> list[complex]:
    """Return the roots of z² + c1 z + c2 by mpmath at 50 digits, sorted."""
    with mpmath.workdps(50):
        half = mpmath.mpf(-c1.numerator) / c1.denominator / 2
        root = mpmath.sqrt(half * half - mpmath.mpf(c2.numerator) / c2.denominator)
        return sorted((complex(half + root), complex(half - root)), key=lambda one: (one.real, one.imag))


def test_the_oracle_by_hand() -> None:
    """(z − 3)(z − 2) has the roots 2 and 3; z² + 1 has ±j."""
    assert mp_roots(Fraction(-5), Fraction(6)) == [2.0, 3.0]
    assert sorted(one.imag for one in mp_roots(Fraction(0), Fraction(1))) == [-1.0, 1.0]


@settings(max_examples=200, deadline=None)
@given(
    st.integers(-(2**17), 2**17),
    st.integers(-(2**16), 2**16),
    st.integers(14, 31),
)
def test_roots_against_mpmath(first: int, second: int, bits: int) -> None:
    """Roots of words on a grid equal 50-digit roots to a few units of the last place."""
    scale = 2**bits
    c1 = Fraction(-2) + Fraction(first, scale)  # near the double root at 1, where cancellation is worst
    c2 = Fraction(1) + Fraction(second, scale)
    wanted = mp_roots(c1, c2)
    got = list(root_values(roots_of(c1, c2)))
    got += [0j] * (2 - len(got))
    got.sort(key=lambda one: (one.real, one.imag))
    for one, other in zip(got, wanted, strict=True):
        # Square root, sum, radius and cosine round once or twice each: 8 half-ulps of the root's own size.
        assert abs(one - other) <= 8.0 * 2.0**-53 * max(abs(other), 1.0)


def test_double_roots_are_real() -> None:
    """(z − 1/2)² has two real roots, not a pair without a frequency; z² and z² + z/4 have none or one beside 0."""
    assert roots_of(Fraction(-1), Fraction(1, 4)) == RealRoots((0.5, 0.5))
    assert roots_of(Fraction(0), Fraction(0)) == NO_ROOTS
    assert roots_of(Fraction(1, 4), Fraction(0)) == RealRoots((-0.25,))


def _direct_at_step(bits: int) -> ConjugatePair | RealRoots:
    a1, a2 = polynomial(pole_pair(0.99995, 50.0))
    return roots_of(*round_to_step((a1, a2), bits))


def _hz(pair: ConjugatePair | RealRoots) -> float:
    assert isinstance(pair, ConjugatePair)
    return pair.angle_rad * RATE_HZ / (2.0 * math.pi)


def test_one_pole_on_five_grids() -> None:
    """Radius 0.99995 at 50 Hz and 48 kHz [numeric: recomputed with exact fractions and with mpmath].

    Step 2^-14: real poles 1.0 and 0.999878, marginally unstable; 2^-22: 50.04569 Hz; 2^-30: 50.00005 Hz; binary32:
    49.97613 Hz and radius 0.99994999.
    """
    coarse = _direct_at_step(14)
    assert isinstance(coarse, RealRoots)
    assert coarse.values[0] == 1.0  # exactly on the circle
    assert coarse.values[1] == pytest.approx(0.999878, abs=5e-7)  # printed digits
    assert _hz(_direct_at_step(22)) == pytest.approx(50.04569, abs=5e-6)
    assert _hz(_direct_at_step(30)) == pytest.approx(50.00005, abs=5e-6)
    single = pole_zero(round_section(PoleZero(pole_pair(0.99995, 50.0), NO_ROOTS, 1.0), F32, Structure.TDF2))
    assert single is not None
    assert isinstance(single.poles, ConjugatePair)
    assert _hz(single.poles) == pytest.approx(49.97613, abs=5e-6)
    assert single.poles.radius == pytest.approx(0.99994999, abs=5e-9)


def test_the_same_pole_coupled() -> None:
    """Coupled at step 2^-14: 49.89368 Hz, radius 0.99996029 [numeric: recomputed]; the square grid does not care."""
    pair = pole_pair(0.99995, 50.0)
    sigma, omega = round_to_step((pair.radius * math.cos(pair.angle_rad), pair.radius * math.sin(pair.angle_rad)), 14)
    rounded = roots_of(-2 * sigma, sigma * sigma + omega * omega)
    assert _hz(rounded) == pytest.approx(49.89368, abs=5e-6)
    assert isinstance(rounded, ConjugatePair)
    assert rounded.radius == pytest.approx(0.99996029, abs=5e-9)


def test_a_pole_that_lands_on_the_circle() -> None:
    """Radius 0.9998, θ = 0.02 at step 2^-10 gives a2 = 1 exactly: a pair on the circle [numeric: recomputed]."""
    a1, a2 = round_to_step(polynomial(ConjugatePair(0.9998, 0.02)), 10)
    assert a2 == 1
    assert not is_inside_triangle(a1, a2)


@pytest.mark.parametrize(
    ("bits", "lowest_hz"),
    [(12, 119.366), (13, 84.405), (14, 59.683), (15, 42.202), (22, 3.730), (23, 2.638), (30, 0.233)],
)
def test_lowest_pole_of_a_direct_form(bits: int, lowest_hz: float) -> None:
    """A(1) is a multiple of the step q, so the lowest pair lies at about fs·√q/2π [numeric: recomputed]."""
    # On the circle (a2 = 1) and one step away from A(1) = 0.
    step = Fraction(1, 2**bits)
    lowest = roots_of(-2 + step, Fraction(1))
    assert _hz(lowest) == pytest.approx(lowest_hz, abs=6e-4, rel=2e-4)  # printed digits; sin θ ≈ θ to 1e-5


def _matrix_of(section: RoundedSection) -> list[list[Fraction]]:
    one, other = section.words[:2]
    if section.form is Form.COUPLED:
        return [[one, -other], [other, one]]
    if section.form is Form.FIRST_ORDERS:
        return [[one, Fraction(0)], [Fraction(1), other]]
    if section.form is Form.SVF:
        # Trapezoidal integrators with states s1, s2: v1 = (s1 − g s2)/(1 + g(g + k)), v2 = s2 + g v1, s' = 2v − s.
        scale = 1 / (1 + one * (one + other))
        v1 = [scale, -one * scale]
        v2 = [one * v1[0], 1 + one * v1[1]]
        return [[2 * v1[0] - 1, 2 * v1[1]], [2 * v2[0], 2 * v2[1] - 1]]
    assert section.transfer is not None
    return [[-section.transfer.a1, -section.transfer.a2], [Fraction(1), Fraction(0)]]


def _dies_by_powers(matrix: list[list[Fraction]]) -> bool:
    """Square the exact state matrix until it has vanished or plainly will not: 2^60 steps, in 60 digits."""
    with mpmath.workdps(60):
        power = mpmath.matrix([[mpmath.mpf(one.numerator) / one.denominator for one in row] for row in matrix])
        for _ in range(60):
            power = power * power
            size = max(abs(one) for one in power)
            if size < mpmath.mpf("1e-30"):
                return True
            if size > mpmath.mpf("1e30"):
                return False
        return False


def test_the_power_oracle_by_hand() -> None:
    """A rotation never dies, a rotation by 0.999999 does, one by 1.000001 grows."""
    turned = [[Fraction(0), Fraction(-1)], [Fraction(1), Fraction(0)]]
    assert not _dies_by_powers(turned)
    assert _dies_by_powers([[one * Fraction(999999, 1000000) for one in row] for row in turned])
    assert not _dies_by_powers([[one * Fraction(1000001, 1000000) for one in row] for row in turned])


@pytest.mark.parametrize("structure", [Structure.DF1, Structure.COUPLED, Structure.SVF])
@pytest.mark.parametrize("name", ["f32", "q15", "q1.14"])
def test_stability_against_matrix_powers(structure: Structure, name: str) -> None:
    """No wrong "stable" and no wrong "unstable" on sections drawn close to the circle."""
    generator = np.random.default_rng(20)
    verdicts = []
    for _ in range(70):
        radius = 1.0 - 10.0 ** generator.uniform(-9.0, -2.0)
        angle = 10.0 ** generator.uniform(-3.5, 0.4)
        gain = (1.0 - radius) ** 2 + 4.0 * radius * math.sin(0.5 * angle) ** 2  # 0 dB at 0 Hz: taps fit every word
        realised = PoleZero(ConjugatePair(radius, angle), NO_ROOTS, gain)
        section = round_section(realised, parse_format(name), structure)
        assert section.is_held
        verdicts.append(is_section_stable(section))
        assert verdicts[-1] == _dies_by_powers(_matrix_of(section)), (radius, angle)
    assert any(verdicts)
    if name != "f32":
        assert not all(verdicts)  # the draw really reaches both sides


def test_words_exactly_on_the_circle_are_not_stable() -> None:
    """σ = 0, ω = 1 turns for ever; real poles are judged one by one; words by hand."""
    made = Transfer(*(Fraction(0),) * 5)
    rest = (Fraction(1), Fraction(0), Fraction(0))
    for form, first, second, is_stable in (
        (Form.COUPLED, Fraction(0), Fraction(1), False),
        (Form.COUPLED, Fraction(0), Fraction(2**30 - 1, 2**30), True),
        (Form.FIRST_ORDERS, Fraction(1, 2), Fraction(-1), False),
        (Form.FIRST_ORDERS, Fraction(1), Fraction(1, 2), False),
        (Form.FIRST_ORDERS, Fraction(1, 2), Fraction(-1, 2), True),
        (Form.SVF, Fraction(1, 2), Fraction(0), False),
        (Form.SVF, Fraction(0), Fraction(1), False),
        (Form.SVF, Fraction(1, 2), Fraction(1), True),
    ):
        words = RoundedSection(form, (first, second, *rest), (), made, 0, 0)
        assert is_section_stable(words) is is_stable, (form, first, second)


@settings(max_examples=100, deadline=None)
@given(st.floats(0.5, 1.5), st.floats(0.0, math.pi), st.sampled_from(list(Structure)))
def test_own_rule_equals_the_triangle(radius: float, angle: float, structure: Structure) -> None:
    """Each structure's own test and the triangle on the transfer that its words make agree, exactly."""
    section = round_section(PoleZero(ConjugatePair(radius, angle), NO_ROOTS, 1.0), F64, structure)
    assert section.transfer is not None
    assert is_section_stable(section) == is_inside_triangle(section.transfer.a1, section.transfer.a2)
