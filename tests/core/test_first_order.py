"""First-order kinds against their analogue prototypes under the exact bilinear transform, and against scipy."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import signal

from tests.core import oracles
from tests.core.cases import PUBLISHED, STEADY, chain_of, frequencies_hz, gains_db, rates_hz
from tests.core.oracles import MP
from tonebench.core.coefficients import section_row
from tonebench.core.design import realise
from tonebench.core.kinds import Kind, has_first_order, has_gain
from tonebench.core.response import chain_response
from tonebench.core.section import by_kind

FIRST_ORDER = [kind for kind in Kind if has_first_order(kind)]


@STEADY
@given(st.data(), st.sampled_from(FIRST_ORDER), rates_hz, gains_db)
def test_coefficients_are_the_prototypes(data: st.DataObject, kind: Kind, rate_hz: float, gain_db: float) -> None:
    """B and a of every kind; near half the rate tan multiplies a rounding by 34 (see test_kinds): 5e-14."""
    frequency_hz = data.draw(frequencies_hz(rate_hz))
    gain_db = gain_db if has_gain(kind) else 0.0
    b, a = oracles.first_order(PUBLISHED[kind], frequency_hz, rate_hz, gain_db)
    row = section_row(realise(by_kind(kind, frequency_hz, None, gain_db), rate_hz))
    for found, wanted in ((row[:3], b), (row[3:], a)):
        scale = max(abs(one) for one in wanted)
        assert float(max(abs(MP.mpf(x) - y) for x, y in zip(found, wanted, strict=True)) / scale) < 5e-14


@STEADY
@given(st.sampled_from(FIRST_ORDER), st.floats(5.0, 22000.0), gains_db)
def test_gains_at_the_ends_and_at_f0(kind: Kind, frequency_hz: float, gain_db: float) -> None:
    """Level at 0 Hz, f0 and half the rate: −3.01 dB or half the shelf's gain at f0; 1e-10 is rounding."""
    gain_db = gain_db if has_gain(kind) else 0.0
    g, half = 10.0 ** (gain_db / 20.0), math.sqrt(0.5)
    wanted = {
        Kind.LOW_PASS: (1.0, half, 0.0),
        Kind.HIGH_PASS: (0.0, half, 1.0),
        Kind.ALL_PASS: (1.0, 1.0, 1.0),
        Kind.LOW_SHELF: (g, math.sqrt(g), 1.0),
        Kind.HIGH_SHELF: (1.0, math.sqrt(g), g),
    }[kind]
    response = chain_response(chain_of(by_kind(kind, frequency_hz, None, gain_db)), [0.0, frequency_hz, 24000.0])
    assert np.abs(response) == pytest.approx(wanted, rel=1e-10, abs=1e-10)


@STEADY
@given(st.floats(5.0, 22000.0))
def test_all_pass_turns_a_quarter_at_f0(frequency_hz: float) -> None:
    """(1 − s)/(1 + s) at s = j is −j, whatever f0; 1e-10 is rounding."""
    at = chain_response(chain_of(by_kind(Kind.ALL_PASS, frequency_hz)), [0.0, frequency_hz])
    assert at == pytest.approx(np.array([1.0, -1.0j]), abs=1e-10)


@pytest.mark.parametrize(("kind", "name"), [(Kind.LOW_PASS, "low"), (Kind.HIGH_PASS, "high")])
def test_low_and_high_pass_are_scipys(kind: Kind, name: str) -> None:
    """butter(1) at four corners; both are a few roundings from exact."""
    for frequency_hz in (5.0, 300.0, 12000.0, 22000.0):
        b, a = signal.butter(1, frequency_hz, name, fs=48000.0)
        row = section_row(realise(by_kind(kind, frequency_hz), 48000.0))
        assert np.array(row) == pytest.approx([b[0], b[1], 0.0, a[0], a[1], 0.0], rel=1e-11, abs=1e-13)
