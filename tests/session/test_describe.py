"""Numbers and sections in plain words, as the screen and the command line show them."""

import math
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.strategies import STEADY, rates_hz, sections
from tonebench.core.kinds import Kind, WidthKey
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots
from tonebench.core.section import ByHand, ByKind, Section, by_kind
from tonebench.session.describe import (
    describe_pole,
    describe_section,
    format_angle_deg,
    format_frequency,
    format_gain_db,
    format_radius,
    format_ring,
    format_width,
)


@pytest.mark.parametrize(
    ("frequency_hz", "text"),
    [
        (0.0, "0 Hz"),
        (0.01234, "0.0123 Hz"),
        (5.0, "5 Hz"),
        (50.02, "50.02 Hz"),
        (50.019, "50.02 Hz"),
        (320.0, "320 Hz"),
        (1250.5, "1250.5 Hz"),
        (12000.04, "12000 Hz"),
    ],
)
def test_frequency(frequency_hz: float, text: str) -> None:
    """Hundredths under 1 kHz, tenths above, no trailing zeros."""
    assert format_frequency(frequency_hz) == text


@pytest.mark.parametrize(
    ("ring_s", "text"),
    [
        (0.44, "0.44 s"),
        (0.4396, "0.44 s"),
        (12.34, "12.3 s"),
        (1234.0, "1234 s"),
        (0.1, "0.1 s"),
        (0.01234, "12.3 ms"),
        (0.0000021, "0.0021 ms"),
        (0.0, "0 ms"),
        (math.inf, "endless"),
    ],
)
def test_ring(ring_s: float, text: str) -> None:
    """Three digits, milliseconds under a tenth of a second."""
    assert format_ring(ring_s) == text


@pytest.mark.parametrize(
    ("radius", "text"),
    [
        (0.0, "0.000 00"),
        (0.5, "0.500 00"),
        (0.99967, "0.999 670"),
        (0.9995, "0.999 500"),
        (0.99999, "0.999 990 0"),
        (1.0, "1.000 00"),
        (1.00001, "1.000 010 0"),
        (2.0, "2.000 00"),
    ],
)
def test_radius(radius: float, text: str) -> None:
    """Three digits of the distance from 1, in groups of three."""
    assert format_radius(radius) == text


@pytest.mark.parametrize(
    ("degrees", "text"), [(0.0, "0 deg"), (0.37467, "0.374 67 deg"), (30.0, "30 deg"), (180.0, "180 deg")]
)
def test_angle(degrees: float, text: str) -> None:
    """Five digits, grouped."""
    assert format_angle_deg(math.radians(degrees)) == text


@pytest.mark.parametrize(
    ("gain_db", "text"),
    [
        (0.0, "0 dB"),
        (-0.0, "0 dB"),
        (-0.0041, "0 dB"),
        (1.5, "+1.5 dB"),
        (-4.0, "-4.0 dB"),
        (0.25, "+0.25 dB"),
        (-60.0, "-60.0 dB"),
        (3.0102999, "+3.01 dB"),
    ],
)
def test_gain(gain_db: float, text: str) -> None:
    """Signed; hundredths only where there are some."""
    assert format_gain_db(gain_db) == text


@pytest.mark.parametrize(
    ("key", "value", "text"),
    [
        (WidthKey.Q, 1.2, "q 1.2"),
        (WidthKey.Q, 0.70710678, "q 0.7071"),
        (WidthKey.BANDWIDTH_HZ, 5.0367, "bandwidth 5.037 Hz"),
        (WidthKey.BANDWIDTH_OCT, 0.5, "bandwidth 0.5 oct"),
        (WidthKey.RING_S, 0.44, "ring 0.44 s"),
        (WidthKey.RADIUS, 0.9995, "radius 0.999 500"),
    ],
)
def test_width(key: WidthKey, value: float, text: str) -> None:
    """Its word, its value, its unit."""
    assert format_width(key, value) == text


@pytest.mark.parametrize(
    ("section", "text"),
    [
        (replace(by_kind(Kind.NOTCH, 50.02, ("ring_s", 0.44)), name="hum"), "1 hum notch 50.02 Hz ring 0.44 s"),
        (by_kind(Kind.PEAK, 320, ("q", 0.4), -4.0), "1 peak 320 Hz -4.0 dB q 0.4"),
        (by_kind(Kind.HIGH_PASS, 80), "1 high-pass 1st order 80 Hz"),
        (
            replace(by_kind(Kind.BAND_PASS, 1000, ("radius", 0.99)), polarity=-1, delay_samples=7, is_bypassed=True),
            "1 band-pass 1000 Hz ring 14.3 ms inverted delay 7 (bypassed)",
        ),
        (Section(ByHand(ConjugatePair(1.0, 0.5), NO_ROOTS, -60.0)), "1 free -60.0 dB on the rim"),
        # ln(1000)/(48000·ln 1.01) = 14.463 ms, by hand.
        (Section(ByHand(ConjugatePair(1.01, 0.5))), "1 free grows in 14.5 ms"),
        (Section(ByHand(RealRoots((0.5,)))), "1 free"),
    ],
)
def test_section_in_one_line(section: Section, text: str) -> None:
    """Number, name, kind, frequency, gain, ring or width, and what is unusual."""
    assert describe_section(section, 1, 48000.0) == text


def test_pole_of_a_kind() -> None:
    """Place, ring, what was written and the other widths.

    By hand: ln r = -ln 1000/(0.3·48000) = -4.797e-4, q = sin(2π·50/48000)/(2·4.797e-4) = 6.822, bandwidth
    4.797e-4·48000/π = 7.329 Hz, 2·asinh(1/(2·6.822))/ln 2 = 0.2113 octaves.
    """
    lines = describe_pole(by_kind(Kind.NOTCH, 50, ("ring_s", 0.3)), 48000.0)
    assert lines == (
        "pole radius 0.999 520  ring 0.3 s",
        "  angle 0.373 99 deg  49.87 Hz",
        "f0 50 Hz  gain 0 dB",
        "q 6.822  bandwidth 7.329 Hz",
        "bandwidth 0.2113 oct  ring 0.3 s (kept)",
        "zero on the rim",
        "  angle 0.375 deg  50 Hz",
    )


def test_pole_by_hand() -> None:
    """Real poles ring too; a level kept at a frequency says where."""
    made = ByHand(RealRoots((0.5, -0.25)), ConjugatePair(2.0, math.pi / 2.0), -6.0, 1000.0)
    assert describe_pole(Section(made), 48000.0) == (
        "pole real 0.5  ring 0.208 ms",
        "pole real -0.25  ring 0.104 ms",
        "gain -6.0 dB at 1000 Hz",
        "zero radius 2.000 00  grows in 0.208 ms",
        "  angle 90 deg  12000 Hz",
    )


def test_resonator_by_its_pole_says_so() -> None:
    """The frequency that was asked for is the pole's."""
    made = by_kind(Kind.RESONATOR, 440, ("ring_s", 0.8)).made
    assert isinstance(made, ByKind)
    lines = describe_pole(Section(replace(made, is_pole_frequency=True)), 48000.0)
    assert lines[1].endswith("  440 Hz")
    assert lines[2] == "pole 440 Hz  gain 0 dB"


@settings(STEADY, max_examples=150)
@given(st.data(), rates_hz, st.integers(1, 128))
def test_any_section_fits_lines_of_plain_text(data: st.DataObject, rate_hz: float, number: int) -> None:
    """No empty line, no NaN, and read-outs no wider than the panel's 50 columns."""
    section = data.draw(sections(rate_hz, largest_pole_radius=1.2))
    line = describe_section(replace(section, name=""), number, rate_hz)
    lines = describe_pole(section, rate_hz)
    assert line.startswith(f"{number} {section.kind.value}")
    assert len(line) <= 80
    for one in (line, *lines):
        assert one.strip()
        assert len(one) <= 80
        assert "nan" not in one
