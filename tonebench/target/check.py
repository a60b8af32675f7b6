"""All findings of a chain for a target, worst first.

Each check stands in a module of its own and yields findings; here they are gathered, the worst rate of each is kept,
and the preset's acceptances are applied.
"""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace
from typing import Protocol

import numpy as np

from tonebench.core.chain import Chain
from tonebench.target.arithmetic import Target
from tonebench.target.check_levels import check_levels
from tonebench.target.check_poles import check_poles
from tonebench.target.check_rates import check_rates
from tonebench.target.check_rings import check_rings
from tonebench.target.check_words import check_held, check_words
from tonebench.target.check_zeros import check_zeros
from tonebench.target.findings import Finding
from tonebench.target.study import study_chain

NOT_YET_JUDGED = (
    "Not yet judged: round-off noise, limit cycles, float32 sections that never fall silent, subnormal tails, and the "
    "peaks of a structure's inner states. The overflow finding is a bound at the outputs, not a run."
)
_CHECKS = (check_poles, check_zeros, check_rings, check_levels, check_words)


class Acceptance(Protocol):
    """A finding that the preset wants; what the session's value of that name has."""

    @property
    def code(self) -> str:
        """The finding's code."""

    @property
    def section(self) -> str:
        """Name or number of the section; empty for any."""

    @property
    def up_to(self) -> float | None:
        """Largest measured value that is still wanted; None for any."""

    @property
    def because(self) -> str:
        """The reason."""


def check_chain(
    chain: Chain,
    target: Target,
    build_rates_hz: Sequence[float] = (),
    acceptances: Sequence[Acceptance] = (),
) -> tuple[Finding, ...]:
    """Return what will happen to a chain in a target's words, worst first, accepted findings last.

    Parameters
    ----------
    chain : Chain
    target : Target
    build_rates_hz : sequence of float
        Rates at which poles are checked too; of several rates the worst is kept per code and section.
    acceptances : sequence
        Values with ``code``, ``section``, ``up_to`` and ``because``.

    """
    # Roots and gains far outside the trade overflow on the way; what comes of it is a finding, never a warning.
    with np.errstate(all="ignore"):
        found = list(_found(chain, target, build_rates_hz))
    judged = [_accepted(finding, chain, acceptances) for finding in _worst(found)]
    return tuple(sorted(judged, key=_order))


def _found(chain: Chain, target: Target, build_rates_hz: Sequence[float]) -> Iterator[Finding]:
    study = study_chain(chain, target)
    if not study.is_computable:
        yield from check_poles(study)
        yield from check_held(study)
        return
    for check in _CHECKS:
        yield from check(study)
    yield from check_rates(chain, target, build_rates_hz)


def _worst(findings: Iterable[Finding]) -> list[Finding]:
    """Keep one finding per code and section: the most severe, then the one that measured most."""
    kept: dict[tuple[str, int | None], Finding] = {}
    for finding in findings:
        key = (finding.code, finding.section)
        if key not in kept or _weight(finding) > _weight(kept[key]):
            kept[key] = finding
    return list(kept.values())


def _weight(finding: Finding) -> tuple[int, float]:
    return (finding.severity.rank, finding.measured or 0.0)


def _order(finding: Finding) -> tuple[bool, int, bool, int, str]:
    is_lesser = not finding.code.startswith("unstable")  # what never falls silent comes before what is only wrong
    return (finding.accepted, -finding.severity.rank, is_lesser, finding.section or 0, finding.code)


def _accepted(finding: Finding, chain: Chain, acceptances: Sequence[Acceptance]) -> Finding:
    for one in acceptances:
        if one.code == finding.code and _is_meant(one.section, finding, chain) and _is_within(one.up_to, finding):
            return replace(finding, accepted=True, because=one.because)
    return finding


def _is_meant(wanted: str, finding: Finding, chain: Chain) -> bool:
    if not wanted:
        return True
    if finding.section is None:
        return False
    return wanted in (str(finding.section), chain.sections[finding.section - 1].name)


def _is_within(up_to: float | None, finding: Finding) -> bool:
    return up_to is None or (finding.measured is not None and finding.measured <= up_to)
