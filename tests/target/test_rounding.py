"""Words of every structure against hand-worked values, and what they make against exact algebra."""

import math
from fractions import Fraction

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.target.cases import any_roots, pole_pair
from tonebench.core.chain import Chain
from tonebench.core.design import PoleZero
from tonebench.core.response import section_response
from tonebench.core.roots import ConjugatePair, RealRoots, polynomial
from tonebench.target.arithmetic import F32, F64, Structure, parse_format, parse_target
from tonebench.target.rounded import pole_zero, round_chain
from tonebench.target.rounding import round_section, round_to_step, round_words
from tonebench.target.structures import Form

Q15 = parse_format("q15")
STRUCTURES = list(Structure)


def test_ties_go_to_even() -> None:
    """Halves of a step round to the even neighbour, as IEEE 754 does; worked by hand."""
    words = round_to_step((0.125, 0.375, -0.125, -0.375), 2)
    assert [float(word) for word in words] == [0.0, 0.5, 0.0, -0.5]


def test_smallest_shift_that_fits() -> None:
    """Q0.15 holds −1 but not 1, Q1.14 holds −2 but not 2; a value that rounds up to the edge needs one more bit."""
    cases = {0.5: 0, -1.0: 0, 1.0: 1, 1.99: 1, -2.0: 1, 2.0: 2, 1.99999: 2, -1.99999: 1}
    for value, integer_bits in cases.items():
        words = round_words((value,), Q15)
        assert words is not None
        assert words.integer_bits == integer_bits, value


def test_fixed_words_lie_on_their_grid_and_near() -> None:
    """Every word is a multiple of its step, within half of it."""
    generator = np.random.default_rng(1)
    for value in generator.uniform(-4.0, 4.0, 200):
        words = round_words((float(value), 0.25), Q15)
        assert words is not None
        assert words.integer_bits is not None
        step = Fraction(1, 2 ** (15 - words.integer_bits))
        assert all((word / step).denominator == 1 for word in words.words)
        assert abs(words.words[0] - Fraction(float(value))) <= step / 2


def test_float_words_are_the_machines() -> None:
    """A float32 word is numpy's float32, exactly; a float64 word is the double itself."""
    words = round_words((0.1, -1.7), F32)
    assert words is not None
    assert [float(word) for word in words.words] == [float(np.float32(0.1)), float(np.float32(-1.7))]
    assert round_words((0.1,), F64) == round_words((0.1,), F64)
    assert (round_words((0.1,), F64) or words).words == (Fraction(0.1),)


@pytest.mark.parametrize("value", [math.inf, math.nan, 1e40])
def test_what_no_format_holds(value: float) -> None:
    """Non-finite and enormous numbers are not held, without an exception."""
    assert round_words((value,), F32) is None
    assert round_words((value,), Q15) is None


def test_fixed_point_refuses_what_its_word_cannot_hold() -> None:
    """A 16-bit word ends at Q15.0: 32767 fits, 40000 does not."""
    assert (round_words((32767.0,), Q15) or pytest.fail("must fit")).integer_bits == 15
    assert round_words((40000.0,), Q15) is None


@settings(max_examples=150, deadline=None)
@given(any_roots, any_roots, st.floats(0.01, 10.0), st.sampled_from(STRUCTURES))
def test_every_structure_makes_the_section(
    poles: ConjugatePair | RealRoots, zeros: ConjugatePair | RealRoots, gain: float, structure: Structure
) -> None:
    """In doubles, the words of each structure make the section's own numerator and denominator."""
    realised = PoleZero(poles, zeros, gain)
    words = round_section(realised, F64, structure)
    assert words.transfer is not None
    c1, c2 = polynomial(zeros)
    a1, a2 = polynomial(poles)
    made = words.transfer
    # Each word is off by at most a few times 2^-53 of itself; the largest product that a coefficient is made of is
    # word times word, so the sum of magnitudes of such products bounds the error. 64 leaves room for the formulas.
    size = 1.0 + sum(abs(float(word)) for word in words.words)
    tolerance = 64.0 * 2.0**-53 * size * size
    assert float(made.a1) == pytest.approx(a1, abs=tolerance)
    assert float(made.a2) == pytest.approx(a2, abs=tolerance)
    for got, wanted in ((made.b0, gain), (made.b1, gain * c1), (made.b2, gain * c2)):
        assert float(got) == pytest.approx(wanted, abs=tolerance)


def test_coupled_taps_by_hand() -> None:
    """1/A at 50 Hz has an output tap of 153 (worked: (2σ² − r²)/ω with r near 1 is 1/0.006545)."""
    words = round_section(PoleZero(pole_pair(0.99995, 50.0), RealRoots(()), 1.0), F64, Structure.COUPLED)
    assert words.form is Form.COUPLED
    named = dict(zip(words.names, words.words, strict=True))
    assert float(named["c2"]) == pytest.approx(152.8, abs=0.1)  # 1/0.0065450 = 152.79
    assert float(named["sigma"]) == pytest.approx(0.99995 * math.cos(2.0 * math.pi * 50.0 / 48000.0), rel=1e-15)


def test_svf_words_by_hand() -> None:
    """A low-pass at a quarter of the rate with Q = 1 has g = tan(π/4) = 1 and k = 1/Q = 1 (Zavalishin 2012)."""
    # The bilinear transform of 1/(s² + s + 1): poles of 3 + z⁻², numerator (1 + z⁻¹)²/3.
    poles = ConjugatePair(math.sqrt(1.0 / 3.0), math.pi / 2.0)
    words = round_section(PoleZero(poles, RealRoots((-1.0, -1.0)), 1.0 / 3.0), F64, Structure.SVF)
    assert [float(word) for word in words.words] == pytest.approx([1.0, 1.0, 0.0, 0.0, 1.0], abs=1e-15)


def test_real_poles_in_coupled_are_first_orders() -> None:
    """Real poles have no coupled form; the fallback stores the poles themselves."""
    words = round_section(PoleZero(RealRoots((0.5, -0.25)), RealRoots((0.125,)), 1.0), F64, Structure.COUPLED)
    assert words.form is Form.FIRST_ORDERS
    assert words.words[:2] == (Fraction(1, 2), Fraction(-1, 4))
    assert words.transfer is not None
    made = words.transfer
    assert [float(one) for one in (made.b0, made.b1, made.b2, made.a1, made.a2)] == [1.0, -0.125, 0.0, -0.25, -0.125]


def _mp_response(words: tuple[Fraction, ...], form: Form, omega: float) -> complex:
    """Run the structure's own state equations in the frequency domain, at 50 digits: shares no code with the room."""
    with mpmath.workdps(50):
        w = [mpmath.mpf(word.numerator) / word.denominator for word in words]
        z = mpmath.expj(mpmath.mpf(omega))
        if form is Form.COUPLED:
            sigma, om, d, c1, c2 = w
            state = mpmath.matrix([[sigma, -om], [om, sigma]])
            x = mpmath.lu_solve(z * mpmath.eye(2) - state, mpmath.matrix([1, 0]))
            return complex(d + c1 * x[0] + c2 * x[1])
        if form is Form.FIRST_ORDERS:
            p1, p2, d, c1, c2 = w
            state = mpmath.matrix([[p1, 0], [1, p2]])
            x = mpmath.lu_solve(z * mpmath.eye(2) - state, mpmath.matrix([1, 0]))
            return complex(d + c1 * x[0] + c2 * x[1])
        if form is Form.SVF:
            g, k, m0, m1, m2 = w
            s = (z - 1) / (z + 1) / g
            return complex(m0 + (m1 * s + m2) / (s * s + k * s + 1))
        b0, b1, b2, a1, a2 = w
        return complex((b0 + b1 / z + b2 / z**2) / (1 + a1 / z + a2 / z**2))


@pytest.mark.parametrize("structure", STRUCTURES)
@pytest.mark.parametrize("name", ["f32", "q1.14", "q31"])
def test_rounded_response_against_the_state_equations(structure: Structure, name: str) -> None:
    """Roots of rounded words give the response that the structure's own equations give at 50 digits."""
    generator = np.random.default_rng(7)
    for _ in range(12):
        poles = pole_pair(1.0 - 10.0 ** generator.uniform(-3.0, -0.5), 10.0 ** generator.uniform(2.3, 4.2))
        zeros = ConjugatePair(1.0, poles.angle_rad * 1.01)
        words = round_section(PoleZero(poles, zeros, 0.7), parse_format(name), structure)
        made = pole_zero(words)
        assert made is not None
        omega = np.array([0.01, poles.angle_rad, 0.5, 2.0, 3.1])
        got = section_response(made, omega)
        wanted = np.array([_mp_response(words.words, words.form, float(one)) for one in omega])
        # Response from poles and zeros: some 1e-12 relative (the core's own figure), and an absolute part where a
        # zero is met.
        np.testing.assert_allclose(got, wanted, rtol=1e-11, atol=1e-12)


def test_leading_zero_becomes_delay() -> None:
    """A b0 that rounds to nothing is a sample of delay, not a lost section."""
    realised = PoleZero(RealRoots((0.5,)), RealRoots((-1000.0,)), 1e-5)  # b0 = 1e-5, b1 = 1e-2
    words = round_section(realised, Q15, Structure.DF1)
    made = pole_zero(words)
    assert words.transfer is not None
    assert words.transfer.b0 == 0
    assert made is not None
    assert (made.delay_samples, made.gain) == (1, float(words.transfer.b1))


def test_all_zero_numerator_is_silence() -> None:
    """A section whose numerator rounds to nothing has gain 0 and keeps its poles."""
    made = pole_zero(round_section(PoleZero(pole_pair(0.9, 1000.0), RealRoots(()), 1e-9), Q15, Structure.TDF2))
    assert made is not None
    assert made.gain == 0.0
    assert isinstance(made.poles, ConjugatePair)


def test_gains_are_words_too() -> None:
    """Chain gain and direct gain round to a word of their own: by hand on the grid of Q0.15 and Q1.14."""
    chain = Chain("", 48000.0, (), 20.0 * math.log10(5.0 / 3.0), "sum", 20.0 * math.log10(0.3))
    twin = round_chain(chain, parse_target("q15/df1"))
    assert twin.gain == 27307 / 2**14  # 5/3 needs one integer bit: 27306.67 rounds up
    assert twin.direct_gain == 9830 / 2**15  # 9830.4 rounds down
    assert round_chain(chain, parse_target("f32/df1")).gain == float(np.float32(10.0 ** (chain.gain_db / 20.0)))
    assert abs(twin.response(np.array([1000.0]))[0]) == pytest.approx(twin.gain * twin.direct_gain, rel=1e-15)
