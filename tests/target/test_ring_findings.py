"""Findings about ringing: thresholds, both rings, wanted ones left alone, remedies that are true."""

import math

import pytest

from tests.target.cases import chain_of, found, free, only, pole_pair
from tonebench.core.kinds import Kind
from tonebench.core.ring import rings
from tonebench.core.roots import RealRoots
from tonebench.core.section import by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import check_chain
from tonebench.target.findings import Severity
from tonebench.target.thresholds import ring_limit_s

NOTCH = by_kind(Kind.NOTCH, 50.0, ("q", 8.0))


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


def test_a_wanted_ring_beside_an_unwanted_one() -> None:
    """A bell that is meant to ring is left alone although another section in its chain is not."""
    bell = by_kind(Kind.RESONATOR, 900.0, ("ring_s", 1.5))
    sharp = by_kind(Kind.PEAK, 300.0, ("q", 45.0), 12.0)
    findings = found(chain_of(bell, sharp, combine="sum"), "f64/tdf2", "ring-after-tone")
    assert [one.section for one in findings] == [2]


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
