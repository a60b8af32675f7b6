"""The resonator and the pole's own numbers: facts.md section 6 (J. O. Smith; Steiglitz, CMJ 18(4), 1994)."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.core.cases import STEADY, chain_of, frequencies_hz, kind_of
from tonebench.core.chain import Chain
from tonebench.core.coefficients import section_row
from tonebench.core.design import realise
from tonebench.core.kinds import Kind, Width, WidthKey
from tonebench.core.response import chain_response
from tonebench.core.roots import ConjugatePair
from tonebench.core.section import ByKind, Section, by_kind
from tonebench.core.widths import all_widths, radius_from_ring, ring_from_radius

RATE_HZ = 48000.0
# facts.md section 6: radius, B in Hz, T60 in ms at 48 kHz; printed to six digits.
TABLE = [
    (0.9, 1609.79, 1.36590),
    (0.99, 153.558, 14.3191),
    (0.999, 15.2865, 143.840),
    (0.9999, 1.52796, 1439.04),
    (0.99999, 0.152790, 14391.1),
]


@pytest.mark.parametrize(("radius", "bandwidth_hz", "t60_ms"), TABLE)
def test_table_of_radius_and_ring(radius: float, bandwidth_hz: float, t60_ms: float) -> None:
    """T60 from r, r from T60, and B = 2.198807/T60, to the six digits printed."""
    ring_s = ring_from_radius(radius, RATE_HZ)
    assert ring_s == pytest.approx(1e-3 * t60_ms, rel=5e-6)
    assert 2.198807 / ring_s == pytest.approx(bandwidth_hz, rel=5e-6)
    assert radius_from_ring(ring_s, RATE_HZ) == pytest.approx(radius, rel=1e-15)
    assert ring_from_radius(1.0 / radius, RATE_HZ) == pytest.approx(ring_s, rel=1e-9)  # outside: growth, same time


def test_ring_at_the_ends() -> None:
    """No pole, no ring; on the circle, for ever."""
    assert ring_from_radius(0.0, RATE_HZ) == 0.0
    assert ring_from_radius(1.0, RATE_HZ) == math.inf


@STEADY
@given(frequencies_hz(RATE_HZ), st.floats(-4.0, 1.3).map(lambda e: 10.0**e), st.floats(-60.0, 60.0))
def test_peak_is_exactly_the_gain_at_exactly_f0(frequency_hz: float, width_hz: float, gain_db: float) -> None:
    """|H(f0)| = gain and phase 0 there; level −3.01 dB at both edges of ``bandwidth_hz``."""
    chain = chain_of(by_kind(Kind.RESONATOR, frequency_hz, ("bandwidth_hz", min(width_hz, frequency_hz)), gain_db))
    peak = chain_response(chain, [frequency_hz])[0]
    g = 10.0 ** (gain_db / 20.0)
    # The frequency's own rounding turns the phase by 4e-16·w0/(pi·B/fs); 1e-4 Hz at 22 kHz makes that 2e-7.
    assert peak == pytest.approx(g, rel=1e-6)
    # A double holds the radius to 1.1e-16, which is that much over −ln r (pi·B/fs) in level.
    assert abs(peak) == pytest.approx(g, rel=1e-12 + 4e-16 / (math.pi * min(width_hz, frequency_hz) / RATE_HZ))
    around = np.abs(chain_response(chain, frequency_hz * np.array([0.9, 0.999, 1.001, 1.02])))
    assert around.max() < g


@STEADY
@given(st.floats(0.3, 0.999999), st.floats(0.01, 3.1))
def test_pole_and_peak_are_related_as_published(radius: float, theta: float) -> None:
    """Peak at cos w = 2r cos(theta)/(1 + r²), width 2·atan((1 − r²)/(1 + r²)) (facts.md 6)."""
    made = ByKind(
        Kind.RESONATOR, theta * RATE_HZ / (2.0 * math.pi), Width(WidthKey.RADIUS, radius), is_pole_frequency=True
    )
    poles = realise(Section(made), RATE_HZ).poles
    assert isinstance(poles, ConjugatePair)
    assert poles.radius == radius
    assert poles.angle_rad == pytest.approx(theta, rel=1e-9)  # near 0 the angle comes through a difference of squares
    peak = math.acos(2.0 * radius * math.cos(theta) / (1.0 + radius * radius))
    at = chain_response(chain_of(Section(made)), [peak * RATE_HZ / (2.0 * math.pi)])
    assert abs(at[0]) == pytest.approx(1.0, rel=1e-9)  # acos is good to 1e-16/sin w
    width_hz = math.atan((1.0 - radius**2) / (1.0 + radius**2)) * RATE_HZ / math.pi
    assert all_widths(made, RATE_HZ)[WidthKey.BANDWIDTH_HZ] == pytest.approx(width_hz, rel=1e-9)  # 1 − r² cancels


@STEADY
@given(st.sampled_from(tuple(WidthKey)), st.floats(50.0, 20000.0))
def test_pole_frequency_holds_for_every_width(key: WidthKey, pole_hz: float) -> None:
    """``is_pole_frequency`` puts the pole's angle there, and the written width is what the read-out gives back."""
    value = {"q": 9.0, "bandwidth_hz": 12.0, "bandwidth_oct": 0.2, "ring_s": 0.3, "radius": 0.998}[key.value]
    made = ByKind(Kind.RESONATOR, pole_hz, Width(key, value), is_pole_frequency=True)
    poles = realise(Section(made), RATE_HZ).poles
    assert isinstance(poles, ConjugatePair)
    assert poles.angle_rad * RATE_HZ / (2.0 * math.pi) == pytest.approx(pole_hz, rel=1e-11)  # rounding near fs/2
    widths = all_widths(made, RATE_HZ)
    centre_hz = _peak_hz(poles)
    for other, number in widths.items():
        plain = by_kind(Kind.RESONATOR, centre_hz, (other.value, number))
        assert section_row(realise(plain, RATE_HZ)) == pytest.approx(
            section_row(realise(Section(made), RATE_HZ)), rel=1e-8, abs=1e-10
        )  # the peak comes through acos: 1e-16/sin² w


def _peak_hz(poles: ConjugatePair) -> float:
    cosine = 2.0 * poles.radius * math.cos(poles.angle_rad) / (1.0 + poles.radius**2)
    return math.acos(cosine) * RATE_HZ / (2.0 * math.pi)


def test_trap_of_the_peak_beside_the_pole() -> None:
    """facts.md 6: r = .99, theta = .05 with zeros at ±1 peaks at .050999 rad."""
    made = ByKind(
        Kind.RESONATOR, 0.05 * RATE_HZ / (2.0 * math.pi), Width(WidthKey.RADIUS, 0.99), is_pole_frequency=True
    )
    grid = np.linspace(0.0500, 0.0520, 20001)
    level = np.abs(chain_response(chain_of(Section(made)), grid * RATE_HZ / (2.0 * math.pi)))
    assert grid[int(np.argmax(level))] == pytest.approx(0.050999, abs=6e-7)  # printed to six places, grid of 1e-7


def test_too_wide_at_its_pole_is_refused() -> None:
    """Below Q = cos(theta)/2·… no conjugate pair has that Q: the message asks to narrow it."""
    made = ByKind(Kind.RESONATOR, 1000.0, Width(WidthKey.Q, 0.4), is_pole_frequency=True)
    with pytest.raises(
        ValueError, match=r"^q must be narrow enough for conjugate poles at this angle, got 0\.4; narrow"
    ):
        realise(Section(made), RATE_HZ)


def test_bells_in_series_and_as_a_sum() -> None:
    """facts.md 11: 440 and 880 Hz ringing 2 s are −62 dB at 440 Hz in series, 0.0 dB as a sum."""
    bells = [by_kind(Kind.RESONATOR, hz, ("ring_s", 2.0)) for hz in (440.0, 880.0)]
    series, added = (Chain("", RATE_HZ, tuple(bells), combine=how) for how in ("series", "sum"))
    assert 20.0 * math.log10(abs(chain_response(series, [440.0])[0])) == pytest.approx(-62.0, abs=0.5)
    assert 20.0 * math.log10(abs(chain_response(added, [440.0])[0])) == pytest.approx(0.0, abs=0.05)
    assert kind_of(bells[0]).gain_db == 0.0
