"""Findings about poles, notches and the response: each appears with its number, and stays away where it should."""

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest

from tests.target.cases import RATE_HZ, chain_of, found, free, low_bell, only, pole_pair
from tonebench.core.kinds import Kind
from tonebench.core.response import chain_response, magnitude_db
from tonebench.core.roots import ConjugatePair, RealRoots, root_values
from tonebench.core.section import by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import check_chain
from tonebench.target.findings import Severity, rank
from tonebench.target.remedies import alternatives, best_trial
from tonebench.target.rounded import round_chain
from tonebench.target.study import study_chain

NOTCH = by_kind(Kind.NOTCH, 50.0, ("q", 8.0))
PLAIN = by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 3.0)


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


@pytest.mark.parametrize("target", ["f32/tdf2", "q15/df1", "q1.14/coupled", "q15/svf", "q31/df2", "f64/tdf2"])
def test_pole_remedies_halve_the_fault(target: str) -> None:
    """Whatever is named leaves at most half of what the pole was off, in units of its distance from the circle."""
    named_any = False
    for frequency_hz, q in ((20.0, 5.0), (50.0, 2.0), (97.0, 8.0), (440.0, 30.0)):
        chain = chain_of(by_kind(Kind.PEAK, frequency_hz, ("q", q), 4.0))
        for finding in found(chain, target, "pole-moved"):
            if not finding.remedy:
                continue
            named_any = True
            faults = []
            for one in (target, finding.remedy.split(" ")[0]):
                made, ideal = round_chain(chain, parse_target(one)).realised[0], chain.realised()[0].poles
                assert made is not None
                (wanted, _), (got, _) = root_values(ideal), root_values(made.poles)
                faults.append(math.hypot(abs(got) - abs(wanted), cmath.phase(got) - cmath.phase(wanted)))
            assert faults[1] <= 0.5 * faults[0]
    assert named_any == (target not in ("f64/tdf2", "q31/df2"))


def test_no_remedy_is_invented() -> None:
    """A trial is only returned if it leaves at most half of the fault; f64 has nothing longer."""
    part = study_chain(chain_of(PLAIN), parse_target("f32/tdf2")).parts[0]
    assert best_trial(part, parse_target("f32/tdf2"), lambda _: 0.51, 1.0) is None
    first = best_trial(part, parse_target("f32/tdf2"), lambda _: 0.5, 1.0)
    assert first is not None
    assert str(first.target) == "f32/coupled"
    groups = [[str(one) for one in group] for group in alternatives(parse_target("q1.14/svf"))]
    assert groups == [["q1.14/tdf2", "q1.14/coupled"], ["q1.30/svf", "q1.30/tdf2", "q1.30/coupled"]]
    assert len(list(alternatives(parse_target("f64/df1")))) == 1
    assert len(list(alternatives(parse_target("q7.24/df1")))) == 2
    assert len(list(alternatives(parse_target("q8.24/df1")))) == 1  # twice its 33 bits are over 64


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
