"""Findings about ranges, forms and other sample rates."""

import math
import re
from dataclasses import replace

import numpy as np
import pytest
from scipy import signal

from tests.target.cases import chain_of, found, free, only, pole_pair
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check_words import output_norms
from tonebench.target.findings import Severity
from tonebench.target.study import study_chain

NOTCH = by_kind(Kind.NOTCH, 50.0, ("q", 8.0))
PLAIN = by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 3.0)


def test_overflow_possible_is_the_l1_norm() -> None:
    """A lone notch has ‖h‖₁ of about +7 dB [measured while planning: +7.1 dB]: over q15's range, under q2.29's."""
    chain = chain_of(by_kind(Kind.NOTCH, 500.0, ("q", 10.0)))
    finding = only(chain, "q15/df1", "overflow-possible")
    unit = np.zeros(65536)
    unit[0] = 1.0
    norm = float(np.sum(np.abs(signal.sosfilt(from_chain(chain).rows, unit))))
    assert 20.0 * math.log10(norm) == pytest.approx(7.1, abs=0.5)  # its Q was not written down
    assert finding.measured == pytest.approx(20.0 * math.log10(norm), abs=1e-4)  # 14 time constants: −122 dB is left
    assert (finding.severity, finding.limit) == (Severity.CAUTION, 0.0)
    assert not found(chain, "q2.29/df1", "overflow-possible")
    assert not found(chain, "f32/df1", "overflow-possible")
    wider = finding.remedy.rsplit(" ", 1)[1]
    assert not found(chain, f"{wider}/df1", "overflow-possible")


def test_overflow_estimate_of_a_long_ring() -> None:
    """Beyond what is summed, the geometric tail is added: within 2 % of the whole sum, and called an estimate."""
    chain = chain_of(free(pole_pair(0.9999, 700.0), RealRoots((1.0, -1.0)), -80.0))
    louder = replace(chain, gain_db=20.0)
    finding = only(louder, "q15/df1", "overflow-possible")
    unit = np.zeros(400_000)
    unit[0] = 10.0
    norm = float(np.sum(np.abs(signal.sosfilt(from_chain(louder).rows, unit))))
    assert finding.measured == pytest.approx(20.0 * math.log10(norm), abs=0.17)  # 2 %
    assert "estimate" in finding.message


def test_l1_norm_of_a_published_pole() -> None:
    """Radius 0.99 and θ = 0.3: ‖h‖₁ of 1/A is 216.436641 [numeric: recomputed with exact convolution]."""
    study = study_chain(chain_of(free(ConjugatePair(0.99, 0.3))), parse_target("q15/df1"))
    norms = output_norms(study)
    assert [one.number for one in norms] == [1, None]
    assert all(one.is_whole for one in norms)
    # Six printed decimals; what is left after 14 time constants is e^-14 of it.
    assert norms[0].value == pytest.approx(216.436641, rel=2e-6)


def test_norms_of_a_sum_hear_the_input() -> None:
    """In a sum each section hears the input, and the direct path is added once, before the chain's gain."""
    half = free(gain_db=20.0 * math.log10(0.5))
    chain = replace(chain_of(half, half, combine="sum"), direct_gain_db=0.0, gain_db=20.0 * math.log10(4.0))
    values = [one.value for one in output_norms(study_chain(chain, parse_target("q15/df1")))]
    assert values == pytest.approx([0.5, 0.5, 8.0], rel=1e-12)


def test_overflow_names_the_inner_output() -> None:
    """A boost that a later cut takes back overflows at the boost."""
    boost, cut = by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 24.0), by_kind(Kind.PEAK, 1000.0, ("q", 1.0), -24.0)
    assert only(chain_of(boost, cut), "q1.14/df1", "overflow-possible").section == 1


def test_coefficient_range() -> None:
    """Direct forms near 0 Hz need words up to 2: one note for all such sections; f32 needs no shift."""
    chain = chain_of(NOTCH, PLAIN)
    finding = only(chain, "q15/df1", "coefficient-range")
    assert (finding.section, finding.measured, finding.limit, finding.unit) == (None, 1.0, 0.0, "bits")
    assert finding.severity is Severity.NOTE
    assert "q1.14" in finding.remedy
    assert not found(chain, "q1.14/df1", "coefficient-range")
    assert not found(chain, "f32/df1", "coefficient-range")


def test_coefficient_that_no_word_holds() -> None:
    """A gain of 150 dB does not go into 16 bits: a danger, and no exception."""
    finding = only(chain_of(free(pole_pair(0.5, 1000.0), gain_db=150.0)), "q15/df1", "coefficient-range")
    assert (finding.severity, finding.section) == (Severity.DANGER, 1)


def test_first_order_fallback() -> None:
    """Coupled holds conjugate poles only; the finding says so for real ones and for none else."""
    chain = chain_of(PLAIN, by_kind(Kind.HIGH_PASS, 80.0))
    assert only(chain, "f32/coupled", "first-order-fallback").section == 2
    assert not found(chain, "f32/svf", "first-order-fallback")


def test_series_of_resonators() -> None:
    """0 dB resonators at 440 and 880 Hz ringing 2 s: −62 dB at 440 Hz in series [measured while planning]."""
    bells = [by_kind(Kind.RESONATOR, hz, ("ring_s", 2.0)) for hz in (440.0, 880.0)]
    finding = only(chain_of(*bells), "f64/tdf2", "series-of-resonators")
    assert finding.measured == pytest.approx(62.0, abs=1.0)  # the worse of the two bells
    assert re.fullmatch(r'combine = "sum" brings (440|880) Hz to [+-]0\.0 dB', finding.remedy)
    assert not found(chain_of(*bells, combine="sum"), "f64/tdf2", "series-of-resonators")
    assert not found(chain_of(bells[0]), "f64/tdf2", "series-of-resonators")


def test_rate_lost() -> None:
    """22 kHz cannot exist at 32 kHz: a danger; a free section's level changes: a caution; at its own rate neither."""
    chain = chain_of(free(pole_pair(0.9, 500.0)), by_kind(Kind.PEAK, 22000.0, ("q", 1.0), 3.0))
    lost = found(chain, "f32/tdf2", "rate-lost", (32000.0,))
    assert {(one.section, one.severity) for one in lost} == {(1, Severity.CAUTION), (2, Severity.DANGER)}
    assert not found(chain, "f32/tdf2", "rate-lost", (48000.0,))


def test_rate_findings_keep_their_section_number() -> None:
    """After a section that a rate cannot hold, the next one keeps its own number."""
    chain = chain_of(by_kind(Kind.PEAK, 22000.0, ("q", 1.0), 3.0), NOTCH)
    assert {one.section for one in found(chain, "q1.14/df1", "pole-moved", (32000.0,))} == {2}


def test_poles_are_checked_at_build_rates() -> None:
    """A high-pass that is fine at 48 kHz lands on the circle at 192 kHz in q15: found there, and the rate is named."""
    chain = chain_of(by_kind(Kind.HIGH_PASS, 60.0, ("q", 0.707)))
    assert not found(chain, "q15/df1", "unstable-rounded")
    finding = only(chain, "q15/df1", "unstable-rounded", (96000.0,))
    assert finding.message.startswith("at 96000 Hz: ")
    assert finding.severity is Severity.DANGER


def test_the_worst_of_several_rates_is_kept() -> None:
    """The same pole goes further at 192 kHz than at 48 kHz: one finding, with the larger number, whatever the order."""
    chain = chain_of(by_kind(Kind.PEAK, 20.0, ("q", 0.8), 6.0))
    here = only(chain, "f32/tdf2", "pole-moved")
    there = only(chain, "f32/tdf2", "pole-moved", (192000.0,))
    assert here.severity is there.severity
    assert (there.measured or 0.0) > (here.measured or 0.0)
    assert there.message.startswith("at 192000 Hz: ")
    assert only(chain, "f32/tdf2", "pole-moved", (96000.0, 192000.0)) == there
    assert only(chain, "f32/tdf2", "pole-moved", (192000.0, 96000.0)) == there


def test_near_nyquist() -> None:
    """20 kHz is 83 % of half of 48 kHz, and 42 % of half of 96 kHz."""
    high = by_kind(Kind.PEAK, 20000.0, ("q", 1.0), 3.0)
    finding = only(chain_of(high), "f32/tdf2", "near-nyquist")
    assert finding.measured == pytest.approx(100.0 * 20.0 / 24.0)
    assert not found(chain_of(high, rate_hz=96000.0), "f32/tdf2", "near-nyquist")
    assert found(chain_of(high, rate_hz=96000.0), "f32/tdf2", "near-nyquist", (44100.0,))
