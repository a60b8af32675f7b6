"""Second-order kinds against the Audio EQ Cookbook (W3C WG Note, R. Bristow-Johnson), scipy and closed facts."""

import math

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st
from scipy import signal

from tests.core import oracles
from tests.core.cases import PUBLISHED, STEADY, chain_of, kind_of, kinds_at_rate
from tests.core.oracles import MP
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain, section_row
from tonebench.core.design import realise
from tonebench.core.kinds import Kind, WidthKey
from tonebench.core.response import chain_response
from tonebench.core.roots import ConjugatePair, RealRoots, Roots
from tonebench.core.section import Section, by_kind
from tonebench.core.stability import is_stable
from tonebench.core.widths import all_widths


def published(section: Section, rate_hz: float) -> tuple[oracles.Polynomial, oracles.Polynomial]:
    """Return the Cookbook's b and a of a section whose Q is written; a resonator has its gain on b."""
    made = kind_of(section)
    assert made.width is not None
    b, a = oracles.cookbook(PUBLISHED[made.kind], made.frequency_hz, rate_hz, made.width.value, made.gain_db)
    if made.kind is Kind.RESONATOR:
        gain = MP.mpf(10) ** (MP.mpf(made.gain_db) / 20)
        b = (b[0] * gain, b[1] * gain, b[2] * gain)
    return b, a


def largest_error(found: tuple[float, ...], wanted: oracles.Polynomial) -> float:
    """Return the largest error of three coefficients over the largest of them."""
    scale = max(abs(one) for one in wanted)
    return float(max(abs(MP.mpf(x) - y) for x, y in zip(found, wanted, strict=True)) / scale)


@STEADY
@given(kinds_at_rate(smallest_q=0.05))
@example((by_kind(Kind.PEAK, 1000.0, ("q", 2.0), 12.0), 48000.0))
@example((by_kind(Kind.LOW_PASS, 5.0, ("q", 100.0)), 192000.0))
def test_coefficients_are_the_published_ones(case: tuple[Section, float]) -> None:
    """B and a of every kind; worst of 4000 random cases 2.3e-15 of the largest.

    Near half the rate tan(w0/2) multiplies the rounding of w0 by w0/sin w0, at most 34 at 0.47 fs: 34 × 1.1e-16 and
    a dozen roundings of the same size give 5e-14.
    """
    section, rate_hz = case
    b, a = published(section, rate_hz)
    row = section_row(realise(section, rate_hz))
    assert largest_error(row[:3], b) < 5e-14
    assert largest_error(row[3:], a) < 5e-14


def polar_error(roots: Roots, wanted: oracles.Polynomial) -> float:
    """Return the largest relative error of ln r and of the angle of a pair against the published polynomial's."""
    assert isinstance(roots, ConjugatePair)
    upper = max(oracles.roots_of(wanted), key=lambda one: one.imag)
    log_radius, angle = MP.log(abs(upper)), MP.arg(upper)
    found = MP.log(MP.mpf(roots.radius))
    # A double just under 1 can itself hold ln r only to half an ulp: 1.1e-16 in absolute terms.
    radius_error = max(abs(found - log_radius) - MP.mpf(2) ** -53, MP.mpf(0)) / abs(log_radius)
    return float(max(radius_error, abs(MP.mpf(roots.angle_rad) - angle) / angle))


@STEADY
@given(kinds_at_rate(smallest_q=3.0))
@example((by_kind(Kind.NOTCH, 5.0, ("q", 2000.0)), 192000.0))
def test_poles_keep_their_precision_in_polar_form(case: tuple[Section, float]) -> None:
    """−ln r and the angle, not the coefficients, are the truth; worst of 4000 cases 5.8e-16.

    The same amplification as above. From the coefficients, ln r would have lost ten digits at 5 Hz.
    """
    section, rate_hz = case
    if kind_of(section).kind is Kind.PEAK:
        section = section.with_gain_db(abs(section.gain_db))  # a boost has the pole Q of A·q: it stays conjugate
    _, a = published(section, rate_hz)
    assert polar_error(realise(section, rate_hz).poles, a) < 5e-14


@STEADY
@given(kinds_at_rate(smallest_q=0.05), st.floats(0.0, 1.0))
def test_response_is_the_published_one(case: tuple[Section, float], where: float) -> None:
    """H at any frequency against the Cookbook at 50 digits, relative to max(|H|, 1e-3·max|H|); worst seen 1.2e-10.

    That is a notch of Q 269 at its own zero: the rounding of w0 (2.2e-16) counts Q·w0/sin w0-fold, up to 316 × 34, and
    over the floor of 1e-3 another thousand times: 3e-9.
    """
    section, rate_hz = case
    b, a = published(section, rate_hz)
    frequency_hz = 0.5 * rate_hz * where
    at = [frequency_hz, kind_of(section).frequency_hz]
    wanted = [oracles.polynomial_response(b, a, 2 * MP.pi * MP.mpf(one) / MP.mpf(rate_hz)) for one in at]
    found = chain_response(chain_of(section, rate_hz=rate_hz), at)
    largest = max(abs(one) for one in wanted)
    for x, y in zip(found, wanted, strict=True):
        assert float(abs(MP.mpc(complex(x)) - y) / max(abs(y), 1e-3 * largest)) < 3e-9


@pytest.mark.parametrize(("kind", "name"), [(Kind.LOW_PASS, "low"), (Kind.HIGH_PASS, "high")])
@pytest.mark.parametrize("frequency_hz", [80.0, 1000.0, 15000.0])
def test_butterworth_is_scipys(kind: Kind, name: str, frequency_hz: float) -> None:
    """Q = 1/√2 is butter(2) (facts.md 5.1); scipy's zpk route is good to some 1e-12 at 80 Hz."""
    b, a = signal.butter(2, frequency_hz, name, fs=48000.0)
    row = section_row(realise(by_kind(kind, frequency_hz, ("q", math.sqrt(0.5))), 48000.0))
    assert np.array(row) == pytest.approx(np.concatenate([b, a]), rel=1e-11, abs=1e-13)


@pytest.mark.parametrize(
    ("frequency_hz", "scipy_q", "printed"),
    [(1000.0, 30.0, 29.914352), (8000.0, 2.0, 1.616025), (15000.0, 1.0, 0.308658)],
)
@pytest.mark.parametrize("kind", [Kind.NOTCH, Kind.BAND_PASS, Kind.RESONATOR])
def test_notch_and_band_pass_are_scipys(kind: Kind, frequency_hz: float, scipy_q: float, printed: float) -> None:
    """The iirnotch/iirpeak Q fixes the digital width; facts.md 5.1 trap (d) prints the Cookbook's Q for it."""
    omega = 2.0 * math.pi * frequency_hz / 48000.0
    q = math.sin(omega) / (2.0 * math.tan(omega / (2.0 * scipy_q)))
    assert q == pytest.approx(printed, abs=6e-7)  # printed to six places
    design = signal.iirnotch if kind is Kind.NOTCH else signal.iirpeak
    b, a = design(frequency_hz, scipy_q, fs=48000.0)
    row = section_row(realise(by_kind(kind, frequency_hz, ("q", q)), 48000.0))
    assert np.array(row) == pytest.approx(np.concatenate([b, a]), rel=1e-12, abs=1e-14)  # a dozen roundings
    by_width = by_kind(kind, frequency_hz, ("bandwidth_hz", frequency_hz / scipy_q))
    assert np.array(section_row(realise(by_width, 48000.0))) == pytest.approx(np.array(row), rel=1e-12, abs=1e-14)


def level_db(section: Section, frequency_hz: float, rate_hz: float = 48000.0) -> float:
    """Return the level of one section at one frequency."""
    return 20.0 * math.log10(abs(chain_response(chain_of(section, rate_hz=rate_hz), [frequency_hz])[0]))


@STEADY
@given(st.sampled_from((Kind.LOW_SHELF, Kind.HIGH_SHELF)), st.floats(-24.0, 24.0), st.floats(20.0, 20000.0))
def test_shelves_are_half_way_at_f0_and_whole_at_the_end(kind: Kind, gain_db: float, frequency_hz: float) -> None:
    """Half the gain in dB at f0, all of it at one end, none at the other (facts.md 5.1); 1e-9 dB is rounding."""
    section = by_kind(kind, frequency_hz, ("q", 0.6), gain_db)
    low, high = (gain_db, 0.0) if kind is Kind.LOW_SHELF else (0.0, gain_db)
    assert level_db(section, frequency_hz) == pytest.approx(0.5 * gain_db, abs=1e-9)
    assert level_db(section, 0.0) == pytest.approx(low, abs=1e-9)
    assert level_db(section, 24000.0) == pytest.approx(high, abs=1e-9)


@pytest.mark.parametrize("kind", [Kind.LOW_SHELF, Kind.HIGH_SHELF])
@pytest.mark.parametrize("gain_db", [-12.0, 3.0, 9.0])
def test_shelf_slope_of_one_is_q_of_root_half(kind: Kind, gain_db: float) -> None:
    """S = 1 ⇔ Q = 1/√2 for every A, and is monotone; S = 1.3 at 9 dB overshoots by 0.150 dB (facts.md 5.1)."""
    grid = np.geomspace(1.0, 23999.0, 4000)
    levels = 20.0 * np.log10(
        np.abs(chain_response(chain_of(by_kind(kind, 1000.0, ("q", math.sqrt(0.5)), gain_db)), grid))
    )
    steps = np.diff(levels) * math.copysign(1.0, gain_db) * (1.0 if kind is Kind.HIGH_SHELF else -1.0)
    assert steps.min() > -1e-9  # rounding of a flat end
    a = 10.0 ** (9.0 / 40.0)
    q = 1.0 / math.sqrt((a + 1.0 / a) * (1.0 / 1.3 - 1.0) + 2.0)
    steep = 20.0 * np.log10(np.abs(chain_response(chain_of(by_kind(kind, 1000.0, ("q", q), 9.0)), grid)))
    assert steep.max() - 9.0 == pytest.approx(0.150, abs=5e-4)  # printed to three places
    assert -steep.min() == pytest.approx(0.150, abs=5e-4)


@STEADY
@given(st.floats(5.0, 22000.0), st.floats(-1.0, 2.5), st.sampled_from((Kind.NOTCH, Kind.BAND_PASS, Kind.PEAK)))
def test_widths_are_exact_in_the_digital_section(frequency_hz: float, exponent: float, kind: Kind) -> None:
    """2·atan(alpha) wide, edges at −3 dB (a peak: half the gain), product of their tangents tan²(w0/2)."""
    q, gain_db = 10.0**exponent, 8.0 if kind is Kind.PEAK else 0.0
    omega = 2 * MP.pi * MP.mpf(frequency_hz) / 48000
    half_width = MP.atan(MP.sin(omega) / (2 * MP.mpf(q)))
    # tan a·tan b = t² gives cos(b + a) = cos(b − a)·(1 − t²)/(1 + t²), and (1 − t²)/(1 + t²) is cos w0.
    middle = MP.acos(MP.cos(half_width) * MP.cos(omega))
    wanted = 4.0 if kind is Kind.PEAK else -10.0 * math.log10(2.0)
    for edge in (middle - half_width, middle + half_width):
        edge_hz = float(edge * 48000 / (2 * MP.pi))
        # Near half the rate, and at an edge, a rounding of the frequency counts Q·w0/sin w0-fold: 1e-16·300·20·8 dB.
        assert level_db(by_kind(kind, frequency_hz, ("q", q), gain_db), edge_hz) == pytest.approx(wanted, abs=1e-9)


def test_prototype_q_is_not_the_digital_one() -> None:
    """Band-pass at 12 kHz, Q 2, 48 kHz is 3743 Hz wide, not 6000 (facts.md 5.1, trap (c))."""
    made = kind_of(by_kind(Kind.BAND_PASS, 12000.0, ("q", 2.0)))
    assert all_widths(made, 48000.0)[WidthKey.BANDWIDTH_HZ] == pytest.approx(3743.0, abs=0.5)  # printed to 1 Hz


@STEADY
@given(st.floats(5.0, 22000.0), st.floats(-1.0, 2.0), st.floats(-24.0, 24.0))
def test_peak_and_its_opposite_cancel(frequency_hz: float, exponent: float, gain_db: float) -> None:
    """Peak +g, then −g at the same Q, is a wire (facts.md 5.1); 1e-10 is rounding at a steep flank."""
    sections = [by_kind(Kind.PEAK, frequency_hz, ("q", 10.0**exponent), sign * gain_db) for sign in (1.0, -1.0)]
    grid = np.concatenate([np.geomspace(5.0, 23999.0, 40), [frequency_hz]])
    assert chain_response(chain_of(*sections), grid) == pytest.approx(np.ones(41), abs=1e-10)


@STEADY
@given(kinds_at_rate(smallest_q=0.05))
def test_every_kind_is_stable_and_ends_where_it_must(case: tuple[Section, float]) -> None:
    """Poles inside the circle; the gains at 0, f0 and fs/2 that each prototype has at 0, j and infinity."""
    section, rate_hz = case
    made = kind_of(section)
    assert is_stable(chain_of(section, rate_hz=rate_hz))
    assert made.width is not None
    q, g = made.width.value, 10.0 ** (made.gain_db / 20.0)
    ends = {
        Kind.LOW_PASS: (1.0, q, 0.0),
        Kind.HIGH_PASS: (0.0, q, 1.0),
        Kind.BAND_PASS: (0.0, 1.0, 0.0),
        Kind.RESONATOR: (0.0, g, 0.0),
        Kind.NOTCH: (1.0, 0.0, 1.0),
        Kind.ALL_PASS: (1.0, 1.0, 1.0),
        Kind.PEAK: (1.0, g, 1.0),
        Kind.LOW_SHELF: (g, math.sqrt(g), 1.0),
        Kind.HIGH_SHELF: (1.0, math.sqrt(g), g),
    }
    found = np.abs(chain_response(chain_of(section, rate_hz=rate_hz), [0.0, made.frequency_hz, 0.5 * rate_hz]))
    # Rounding: relative 1e-10, and at the zeros of a transfer 1e-10 of the largest (Q·w0/sin w0·1e-16 is 6e-13).
    assert found == pytest.approx(ends[made.kind], rel=1e-10, abs=1e-10 * max(ends[made.kind]))


@STEADY
@given(st.floats(5.0, 22000.0), st.floats(-1.5, 3.0), st.floats(0.0, 24000.0))
def test_all_pass_passes_all(frequency_hz: float, exponent: float, at_hz: float) -> None:
    """|H| = 1 everywhere; the zero's radius 1/r is rounded by 1e-16, over −ln r of 3e-7 (5 Hz, Q 1000): 3e-10."""
    chain = chain_of(by_kind(Kind.ALL_PASS, frequency_hz, ("q", 10.0**exponent)))
    assert abs(chain_response(chain, [at_hz, frequency_hz])) == pytest.approx(np.ones(2), abs=1e-9)


def test_all_pass_with_a_pole_at_the_origin() -> None:
    """At fs/4 and q = 1/2 both poles are at (nearly) 0: the all-pass is z^−2, whose phase at fs/4 is −180 degrees."""
    chain = Chain("", 48000.0, (by_kind(Kind.ALL_PASS, 12000.0, ("q", 0.5)),))
    at = chain_response(chain, [6000.0, 12000.0])
    assert at == pytest.approx(np.array([-1.0j, -1.0]), abs=1e-7)  # a root of the 1e-16 that tan(pi/4) is off
    assert from_chain(chain).rows.shape == (1, 6)


@STEADY
@given(st.floats(5.0, 20000.0), st.sampled_from((44100.0, 48000.0, 192000.0)))
def test_notch_zero_is_on_the_circle_exactly(frequency_hz: float, rate_hz: float) -> None:
    """Radius exactly 1, at f0's own angle to half an ulp per operation: the notch reaches −200 dB at f0 and below."""
    section = by_kind(Kind.NOTCH, frequency_hz, ("q", 30.0))
    zeros = realise(section, rate_hz).zeros
    assert isinstance(zeros, ConjugatePair)
    assert zeros.radius == 1.0
    exact = 2 * MP.pi * MP.mpf(frequency_hz) / MP.mpf(rate_hz)
    assert float(abs(MP.mpf(zeros.angle_rad) - exact) / exact) < 5e-16
    assert abs(chain_response(chain_of(section, rate_hz=rate_hz), [frequency_hz])[0]) < 1e-10


@pytest.mark.parametrize("frequency_hz", [5.0, 50.0, 1000.0, 20000.0])
@pytest.mark.parametrize("kind", [kind for kind in PUBLISHED if kind is not Kind.FREE])
def test_radius_is_kept_to_the_last_bit_up_to_the_edges(kind: Kind, frequency_hz: float) -> None:
    """Radius 0.99999 from 5 Hz to 20 kHz at 192 kHz: the written radius, and the Cookbook's poles for the Q shown."""
    section = by_kind(kind, frequency_hz, ("radius", 0.99999))
    poles = realise(section, 192000.0).poles
    assert isinstance(poles, ConjugatePair)
    assert poles.radius == 0.99999
    # The published relation: r² = (1 − alpha)/(1 + alpha) and cos(theta) = cos(w0)/√(1 − alpha²) (facts.md 5.1).
    r2 = MP.mpf(0.99999) ** 2
    alpha = (1 - r2) / (1 + r2)
    theta = MP.acos(MP.cos(2 * MP.pi * MP.mpf(frequency_hz) / 192000) / MP.sqrt(1 - alpha**2))
    assert float(abs(MP.mpf(poles.angle_rad) - theta) / theta) < 1e-14  # a dozen roundings


def test_poles_are_not_at_f0() -> None:
    """facts.md 11: notch 50.02 Hz, r .99967 → 49.956 Hz; r .995 → 32.2 Hz; peak 1 kHz Q .7 +6 dB → 864 Hz."""
    cases = [
        (by_kind(Kind.NOTCH, 50.02, ("radius", 0.99967)), 49.956, 0.005),  # the radius is printed to five places
        (by_kind(Kind.NOTCH, 50.02, ("radius", 0.995)), 32.2, 0.05),
        (by_kind(Kind.PEAK, 1000.0, ("q", 0.7), 6.0), 864.0, 0.5),
        (by_kind(Kind.HIGH_PASS, 80.0, ("q", math.sqrt(0.5))), 56.6, 0.05),
    ]
    for section, wanted_hz, slack_hz in cases:
        poles = realise(section, 48000.0).poles
        assert isinstance(poles, ConjugatePair)
        assert poles.angle_rad * 48000.0 / (2.0 * math.pi) == pytest.approx(wanted_hz, abs=slack_hz)
    assert isinstance(realise(by_kind(Kind.PEAK, 1000.0, ("q", 0.7), -6.0), 48000.0).poles, RealRoots)
