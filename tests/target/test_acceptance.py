"""Acceptances, and the order in which findings are returned."""

from dataclasses import dataclass, replace

import pytest

from tests.target.cases import chain_of, sixteen
from tonebench.core.kinds import Kind
from tonebench.core.section import by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import NOT_YET_JUDGED, check_chain
from tonebench.target.findings import Finding, Severity

PLAIN = by_kind(Kind.PEAK, 1000.0, ("q", 1.0), 3.0)


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
    codes = [one.code for one in findings if one.severity is Severity.DANGER and not one.accepted]
    assert codes[0] == "unstable-rounded"
    keys = [(one.code, one.section) for one in findings]
    assert len(keys) == len(set(keys))


def test_what_is_not_judged_is_said() -> None:
    """The closing line names what this slice does not compute."""
    for word in ("round-off noise", "limit cycles", "subnormal"):
        assert word in NOT_YET_JUDGED
