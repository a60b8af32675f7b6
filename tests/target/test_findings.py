"""Each finding: a chain that makes it appear with the right number, and one that does not."""

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import pytest
from scipy import signal

from tests.target.cases import RATE_HZ, chain_of, free, low_bell, pole_pair, sixteen
from tonebench.core.chain import Chain
from tonebench.core.coefficients import from_chain
from tonebench.core.kinds import Kind
from tonebench.core.response import chain_response, magnitude_db
from tonebench.core.ring import rings
from tonebench.core.roots import ConjugatePair, RealRoots
from tonebench.core.section import by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import NOT_YET_JUDGED, check_chain
from tonebench.target.check_words import output_norms
from tonebench.target.findings import Finding, Severity, rank
from tonebench.target.rounded import round_chain
from tonebench.target.study import study_chain
from tonebench.target.thresholds import ring_limit_s

NOTCH = by_kind(Kind.NOTCH, 50.0, ("q", 8.0))
PLAIN = by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 3.0)


def found(chain: Chain, target: str, code: str, rates_hz: Sequence[float] = ()) -> list[Finding]:
    """Return the findings of one code."""
    return [one for one in check_chain(chain, parse_target(target), rates_hz) if one.code == code]


def only(chain: Chain, target: str, code: str, rates_hz: Sequence[float] = ()) -> Finding:
    """Return the one finding of a code."""
    (finding,) = found(chain, target, code, rates_hz)
    return finding


def test_severities_are_ordered() -> None:
    """A note is under a caution, a caution under a danger."""
    assert [rank(one) for one in (Severity.NOTE, Severity.CAUTION, Severity.DANGER)] == [0, 1, 2]


def test_a_plain_chain_has_no_findings() -> None:
    """A mild peak, nothing, and only bypassed sections are not nagged about, in floating point."""
    for target in ("f64/df1", "f32/tdf2", "f32/coupled", "f32/svf"):
        assert check_chain(chain_of(PLAIN), parse_target(target), (44100.0, 96000.0)) == ()
        assert check_chain(chain_of(), parse_target(target), (44100.0,)) == ()
        bypassed = replace(low_bell(), is_bypassed=True)
        assert check_chain(chain_of(bypassed), parse_target(target), (44100.0,)) == ()


@pytest.mark.parametrize("radius", [1.0, 1.001])
def test_unstable(radius: float) -> None:
    """A pole on or outside the circle is a danger at its section's number, and nothing is computed from it."""
    chain = chain_of(PLAIN, free(pole_pair(radius, 440.0)))
    findings = check_chain(chain, parse_target("f32/tdf2"))
    assert findings[0].code == "unstable"
    assert (findings[0].section, findings[0].measured, findings[0].limit) == (2, radius, 1.0)
    assert findings[0].severity is Severity.DANGER
    assert not {"gain-high", "response-changed", "unstable-rounded"} & {one.code for one in findings}
    assert not found(chain_of(free(pole_pair(0.9999, 440.0))), "f32/tdf2", "unstable")


def test_unstable_rounded_with_a_structure_that_works() -> None:
    """50 Hz, r = 0.99995 at 48 kHz in q1.14: a pole on the circle, danger, and a structure that keeps it."""
    finding = only(chain_of(low_bell()), "q1.14/df1", "unstable-rounded")
    assert (finding.severity, finding.section, finding.measured) == (Severity.DANGER, 1, 1.0)
    assert finding.remedy.startswith("q1.14/")
    named = finding.remedy.split(" ")[0]
    assert not found(chain_of(low_bell()), named, "unstable-rounded")
    kept = round_chain(chain_of(low_bell()), parse_target(named)).realised[0]
    assert kept is not None
    assert isinstance(kept.poles, ConjugatePair)
    assert f"keeps {kept.poles.angle_rad * RATE_HZ / (2.0 * math.pi):.6g} Hz" in finding.remedy
    assert not found(chain_of(low_bell()), "f32/df1", "unstable-rounded")


def test_pole_moved_with_its_number() -> None:
    """Direct q31 is fine; direct q1.14 takes a 1 kHz notch's neighbour at 100 Hz some cents off, as rounded by hand."""
    section = by_kind(Kind.PEAK, 100.0, ("q", 2.0), 6.0)
    finding = only(chain_of(section), "q1.14/df1", "pole-moved")
    ideal = chain_of(section).realised()[0].poles
    assert isinstance(ideal, ConjugatePair)
    a1 = round(-2.0 * ideal.radius * math.cos(ideal.angle_rad) * 2**14) / 2**14
    a2 = round(ideal.radius**2 * 2**14) / 2**14
    angle = math.acos(-a1 / (2.0 * math.sqrt(a2)))
    assert finding.measured == pytest.approx(1200.0 * abs(math.log2(angle / ideal.angle_rad)), rel=1e-9)
    assert finding.severity is Severity.CAUTION
    assert not found(chain_of(section), "q31/df1", "pole-moved")


def test_pole_moved_remedy_is_true() -> None:
    """The target that is named really moves the pole to the frequency that is said."""
    section = by_kind(Kind.PEAK, 100.0, ("q", 2.0), 6.0)
    finding = only(chain_of(section), "q1.14/df1", "pole-moved")
    named = finding.remedy.split(" ")[0]
    other = found(chain_of(section), named, "pole-moved")
    assert not other or (other[0].measured or 0.0) <= 0.5 * (finding.measured or 0.0)


def test_poles_merged() -> None:
    """A low pair whose discriminant rounds to nothing becomes real; a high one does not."""
    section = by_kind(Kind.LOW_PASS, 100.0, ("q", 0.58))
    finding = only(chain_of(section), "q1.14/df1", "poles-merged")
    made = round_chain(chain_of(section), parse_target("q1.14/df1")).realised[0]
    assert made is not None
    assert isinstance(made.poles, RealRoots)
    assert finding.severity is Severity.CAUTION
    assert finding.remedy
    named = finding.remedy.split(" ")[0]
    assert not found(chain_of(section), named, "poles-merged")
    assert not found(chain_of(by_kind(Kind.LOW_PASS, 4000.0, ("q", 0.6))), "q1.14/df1", "poles-merged")


def test_ring_changed_only_where_a_ring_is_heard_or_wanted() -> None:
    """A resonator's ring in q1.14 is off by more than 5 %: a caution, since it was asked for; f64 keeps it."""
    bell = by_kind(Kind.RESONATOR, 440.0, ("ring_s", 0.73), -20.0)
    finding = only(chain_of(bell), "q1.14/tdf2", "ring-changed")
    made = round_chain(chain_of(bell), parse_target("q1.14/tdf2")).realised[0]
    assert made is not None
    assert isinstance(made.poles, ConjugatePair)
    ring_s = math.log(1000.0) / (-math.log(made.poles.radius) * RATE_HZ)
    assert finding.measured == pytest.approx(100.0 * abs(ring_s / 0.73 - 1.0), rel=1e-9)
    assert finding.severity is Severity.CAUTION
    assert not found(chain_of(bell), "f64/tdf2", "ring-changed")
    assert not found(chain_of(by_kind(Kind.PEAK, 500.0, ("q", 3.0), 4.0)), "q1.14/tdf2", "ring-changed")


def test_notch_shallower_and_missed() -> None:
    """The level left is the rounded section's own at f0: f64 none, f32 a note, q1.14 direct has no notch left."""
    chain = chain_of(NOTCH)
    assert not found(chain, "f64/tdf2", "notch-shallower")
    note = only(chain, "f32/tdf2", "notch-shallower")
    rounded = round_chain(chain, parse_target("f32/tdf2"))
    left_db = float(magnitude_db(rounded.response(np.array([50.0])))[0])
    assert note.measured == pytest.approx(left_db, abs=1e-6)  # both are the same response; the passband end is 0 dB
    assert note.severity is Severity.NOTE
    missed = only(chain, "q1.14/df1", "notch-missed")
    assert missed.severity is Severity.DANGER
    named = missed.remedy.split(" ")[0]
    assert not found(chain, named, "notch-missed")
    better = found(chain, named, "notch-shallower")
    assert not better or f"{better[0].measured:+.1f} dB" in missed.remedy


def test_a_notch_in_a_sum_is_none() -> None:
    """In a sum a section's zeros are not the chain's, so they are not judged."""
    assert not found(chain_of(NOTCH, combine="sum"), "q1.14/df1", "notch-missed")


def test_response_changed_by_its_definition() -> None:
    """The deviation is found on a brute grid too: where the ideal is within 20 dB of its maximum, as a caution is."""
    chain = chain_of(by_kind(Kind.PEAK, 150.0, ("q", 4.0), 9.0))
    target = parse_target("q1.14/df1")
    finding = only(chain, "q1.14/df1", "response-changed")
    grid = np.geomspace(1.0, 24000.0, 200_001)
    ideal = magnitude_db(chain_response(chain, grid))
    rounded = magnitude_db(round_chain(chain, target).response(grid))
    weighty = ideal > np.max(ideal) - 20.0
    worst = float(np.max(np.abs(rounded - ideal)[weighty]))
    # The check's grid is much coarser than this one: within 3 % of the peak of a smooth difference.
    assert finding.measured == pytest.approx(worst, rel=0.03)
    assert finding.severity in (Severity.CAUTION, Severity.DANGER)
    assert not found(chain, "f32/df1", "response-changed")
    assert not found(chain_of(), "q1.14/df1", "response-changed")


def test_response_changed_near_a_notch_is_only_a_note() -> None:
    """The slope of a notch makes many dB of a tiny move; far from the maximum that is a note, and finite."""
    finding = only(chain_of(NOTCH), "f32/tdf2", "response-changed")
    assert finding.severity is Severity.NOTE
    assert finding.measured is not None
    assert finding.measured <= 60.0


def test_response_remedy_is_true() -> None:
    """The target that is named changes the response by no more than is said."""
    chain = chain_of(by_kind(Kind.PEAK, 150.0, ("q", 4.0), 9.0))
    finding = only(chain, "q1.14/df1", "response-changed")
    named, said = finding.remedy.split(" ")[0], float(finding.remedy.split(" ")[-2])
    other = found(chain, named, "response-changed")
    assert not other or (other[0].measured or 0.0) <= said + 0.05  # printed with one or two digits


def test_gain_high() -> None:
    """A free section of +60 dB at 1 kHz (r .999, 7.5°, zeros ±1; [measured while planning: +60.0 dB]) is a danger."""
    loud = chain_of(free(ConjugatePair(0.999, math.radians(7.5)), RealRoots((1.0, -1.0))))
    danger = only(loud, "f32/tdf2", "gain-high")
    assert danger.severity is Severity.DANGER
    assert danger.measured == pytest.approx(60.0, abs=0.05)  # the printed digit
    assert not found(replace(loud, gain_db=float(danger.remedy.split(" ")[4])), "f32/tdf2", "gain-high")
    caution = only(chain_of(by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 18.0)), "f32/tdf2", "gain-high")
    assert caution.severity is Severity.CAUTION
    assert caution.measured == pytest.approx(18.0, abs=1e-3)  # the grid holds f0's neighbourhood, not f0 itself


def test_ring_limits() -> None:
    """0.85 s at 32 Hz, 0.2 s above 100 Hz [Stephenson 2012, abstract]; straight in log-log between."""
    assert ring_limit_s(32.0) == ring_limit_s(5.0) == 0.85
    assert ring_limit_s(100.0) == ring_limit_s(8000.0) == 0.2
    middle = math.sqrt(32.0 * 100.0)
    assert ring_limit_s(middle) == pytest.approx(math.sqrt(0.85 * 0.2), rel=1e-12)


def test_ring_after_click_and_tone() -> None:
    """A peak of q 45 at 300 Hz rings 2.2·Q/f0 and more: both findings carry the mode's own T60; a resonator is free."""
    sharp = chain_of(by_kind(Kind.PEAK, 300.0, ("q", 45.0), 12.0))
    mode = rings(sharp)[0]
    for code in ("ring-after-click", "ring-after-tone"):
        level_db = mode.click_level_db if "click" in code else mode.tone_level_db
        assert level_db > -60.0
        finding = only(sharp, "f32/tdf2", code)
        assert finding.measured == mode.t60_s
        assert finding.severity is (Severity.CAUTION if mode.t60_s > 0.4 else Severity.NOTE)
        assert finding.limit == (0.4 if mode.t60_s > 0.4 else 0.2)
    for wanted in (by_kind(Kind.RESONATOR, 300.0, ("q", 45.0)), by_kind(Kind.PEAK, 300.0, ("ring_s", 0.8), 6.0)):
        codes = {one.code for one in check_chain(chain_of(wanted), parse_target("f32/tdf2"))}
        assert not {"ring-after-click", "ring-after-tone"} & codes


def test_a_ring_that_nobody_hears_is_not_judged() -> None:
    """A long mode that its own chain leaves under −60 dB does not count."""
    section = free(pole_pair(0.9999, 300.0), pole_pair(0.9999 + 1e-8, 300.0))
    mode = rings(chain_of(section))[0]
    assert mode.t60_s > 0.4
    assert max(mode.click_level_db, mode.tone_level_db) < -60.0
    assert not found(chain_of(section), "f64/tdf2", "ring-after-click")
    assert not found(chain_of(section), "f64/tdf2", "ring-after-tone")


@pytest.mark.parametrize("frequency_hz", [40.0, 60.0, 90.0, 300.0, 3000.0])
@pytest.mark.parametrize("kind", [Kind.NOTCH, Kind.PEAK, Kind.BAND_PASS])
def test_ring_remedy_is_true(kind: Kind, frequency_hz: float) -> None:
    """With the q that is named, and nothing else changed, the ring is no finding any more."""
    gain_db = 6.0 if kind is Kind.PEAK else 0.0
    section = by_kind(kind, frequency_hz, ("q", 0.9 * frequency_hz), gain_db)
    finding = only(chain_of(section), "f64/svf", "ring-after-tone")
    q = float(finding.remedy.split(" ")[3])
    calmer = by_kind(kind, frequency_hz, ("q", q), gain_db)
    assert not found(chain_of(calmer), "f64/svf", "ring-after-tone")
    # It is the longest one: 2 % more is over the limit again (three digits are rounded down, at most 1 %).
    assert found(chain_of(by_kind(kind, frequency_hz, ("q", 1.02 * q), gain_db)), "f64/svf", "ring-after-tone")


def test_ring_remedy_of_a_free_section_is_true() -> None:
    """The radius that is named no longer rings too long."""
    section = free(pole_pair(0.99995, 50.0), RealRoots((1.0, -1.0)), -90.0)
    finding = only(chain_of(section), "f64/svf", "ring-after-click")
    radius = float(finding.remedy.split(" ")[3])
    calmer = free(pole_pair(radius, 50.0), RealRoots((1.0, -1.0)), -90.0)
    assert not found(chain_of(calmer), "f64/svf", "ring-after-click")


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


def test_near_nyquist() -> None:
    """20 kHz is 83 % of half of 48 kHz, and 42 % of half of 96 kHz."""
    high = by_kind(Kind.PEAK, 20000.0, ("q", 1.0), 3.0)
    finding = only(chain_of(high), "f32/tdf2", "near-nyquist")
    assert finding.measured == pytest.approx(100.0 * 20.0 / 24.0)
    assert not found(chain_of(high, rate_hz=96000.0), "f32/tdf2", "near-nyquist")
    assert found(chain_of(high, rate_hz=96000.0), "f32/tdf2", "near-nyquist", (44100.0,))


@dataclass(frozen=True)
class Wanted:
    """An acceptance as a preset gives it."""

    code: str
    section: str = ""
    up_to: float | None = None
    because: str = "it is meant"


def _accepted(wanted: Wanted) -> Finding:
    named = replace(by_kind(Kind.PEAK, 300.0, ("q", 45.0), 12.0), name="singer")
    findings = check_chain(chain_of(PLAIN, named), parse_target("f32/tdf2"), (), (wanted,))
    (finding,) = [one for one in findings if one.code == "ring-after-tone"]
    return finding


@pytest.mark.parametrize("section", ["", "2", "singer"])
def test_acceptance_by_code_and_section(section: str) -> None:
    """An acceptance meets its finding by number, by name, or anywhere; the reason is carried over."""
    finding = _accepted(Wanted("ring-after-tone", section, 0.8))
    assert finding.accepted
    assert finding.because == "it is meant"


@pytest.mark.parametrize(
    "wanted",
    [
        Wanted("ring-after-click", "singer"),
        Wanted("ring-after-tone", "1"),
        Wanted("ring-after-tone", "other"),
        Wanted("ring-after-tone", "singer", 0.3),
    ],
)
def test_acceptance_that_does_not_meet(wanted: Wanted) -> None:
    """Another code, another section, or a value over up_to: the finding counts."""
    assert not _accepted(wanted).accepted


def test_order_is_worst_first_and_accepted_last() -> None:
    """Dangers, cautions, notes, then what was accepted."""
    findings = check_chain(sixteen(), parse_target("q15/df1"), (96000.0,), (Wanted("notch-missed"),))
    order = [(one.accepted, -one.severity.rank) for one in findings]
    assert order == sorted(order)
    assert {one.accepted for one in findings} == {False, True}
    keys = [(one.code, one.section) for one in findings]
    assert len(keys) == len(set(keys))


def test_what_is_not_judged_is_said() -> None:
    """The closing line names what this slice does not compute."""
    for word in ("round-off noise", "limit cycles", "subnormal"):
        assert word in NOT_YET_JUDGED
