"""The oracles themselves, on cases worked by hand or printed in a source."""

import math

import numpy as np
import pytest

from tests.core import oracles
from tests.core.oracles import MP


def test_cookbook_low_pass_has_the_printed_numbers() -> None:
    """LPF 1 kHz at 48 kHz, Q = 1/√2: facts.md 5.1, printed to eight digits."""
    b, a = oracles.cookbook("LPF", 1000.0, 48000.0, math.sqrt(0.5))
    printed = (0.00391613, 0.00783225, 0.00391613, -1.81534108, 0.83100559)
    assert [float(one) for one in (*b, *a[1:])] == pytest.approx(printed, abs=5.1e-9)  # half a unit of the last digit


def test_cookbook_at_a_quarter_of_the_rate_by_hand() -> None:
    """At fs/4, c = 0 and alpha = 1/(2Q): with Q = 1/2 the low-pass is (1 + 1/z)²/4, the notch (1 + z⁻²)/2."""
    assert [float(one) for one in oracles.cookbook("LPF", 1.0, 4.0, 0.5)[0]] == [0.25, 0.5, 0.25]
    b, a = oracles.cookbook("notch", 1.0, 4.0, 0.5)
    assert [float(one) for one in (*b, *a)] == pytest.approx([0.5, 0.0, 0.5, 1.0, 0.0, 0.0], abs=1e-40)


def test_first_order_at_a_quarter_of_the_rate_by_hand() -> None:
    """At fs/4, k = 1: the low-pass is (1 + 1/z)/2 and the all-pass a whole sample of delay."""
    assert [float(one) for one in oracles.first_order("LPF", 1.0, 4.0)[0]] == [0.5, 0.5, 0.0]
    assert [float(one) for one in oracles.first_order("APF", 1.0, 4.0)[0]] == pytest.approx([0.0, 1.0, 0.0], abs=1e-40)


def test_roots_and_responses_by_hand() -> None:
    """1 − 3/z + 2/z² has the roots 2 and 1, and 1/(1 − 0.5/z) is 2 at 0 Hz and 2/3 at half the rate."""
    assert {float(one.real) for one in oracles.roots_of((MP.mpf(1), MP.mpf(-3), MP.mpf(2)))} == {1.0, 2.0}
    at = [oracles.root_response([], [MP.mpf("0.5")], 1, 0, omega) for omega in (MP.mpf(0), MP.pi)]
    assert [float(abs(one)) for one in at] == pytest.approx([2.0, 2.0 / 3.0], rel=1e-15)
    b, a = (MP.mpf(1), MP.mpf(0), MP.mpf(0)), (MP.mpf(1), MP.mpf("-0.5"), MP.mpf(0))
    assert float(abs(oracles.polynomial_response(b, a, MP.pi))) == pytest.approx(2.0 / 3.0, rel=1e-15)


def test_group_delay_by_hand() -> None:
    """z^−3 is three samples late; 1/(1 − p/z) is p/(1 − p) late at 0 Hz."""
    late = oracles.group_delay_samples(lambda omega: oracles.root_response([], [], 1, 3, omega), MP.mpf("0.7"))
    assert float(late) == pytest.approx(3.0, rel=1e-15)
    one_pole = oracles.group_delay_samples(
        lambda omega: oracles.root_response([], [MP.mpf("0.75")], 1, 0, omega), MP.mpf(0)
    )
    assert float(one_pole) == pytest.approx(3.0, rel=1e-15)


def test_naive_filter_by_hand() -> None:
    """y[n] = x[n] + y[n−1] − y[n−2] answers a click with 1 1 0 −1 −1 0, here one sample late."""
    answer = oracles.naive_filter((1.0, 0.0, 0.0, 1.0, -1.0, 1.0), 1, [1.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0])
    assert answer.tolist() == [0.0, 1.0, 1.0, 0.0, -1.0, -1.0, 0.0]


def test_envelope_by_hand() -> None:
    """A tone of constant amplitude 2 has the envelope 2 (rounding only), and never falls under 1."""
    tone = 2.0 * np.cos(0.3 * np.arange(50) + 1.0)
    envelope = oracles.tail_envelope(tone, 0.3)
    assert envelope == pytest.approx(2.0, rel=1e-13)
    assert oracles.time_above(envelope, 1.0) == 48
    assert oracles.time_above(envelope, 3.0) == 0
