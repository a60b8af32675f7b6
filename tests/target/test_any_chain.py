"""Trouble with the numbers is data: no chain that the data model accepts makes a check raise."""

import math

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.target.cases import RATE_HZ, hostile_roots
from tonebench.core.chain import Chain
from tonebench.core.kinds import Kind
from tonebench.core.section import ByHand, Section, by_kind
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import check_chain
from tonebench.target.findings import Finding

_TARGETS = [
    f"{number_format}/{structure}"
    for number_format in ("f64", "f32", "q15", "q1.14", "q31", "q0.7")
    for structure in ("df1", "tdf2", "coupled", "svf")
]
_free = st.builds(
    lambda poles, zeros, gain_db, delay: Section(ByHand(poles, zeros, gain_db), delay_samples=delay),
    hostile_roots,
    hostile_roots,
    st.floats(-200.0, 200.0),
    st.integers(0, 40),
)
_made = st.builds(
    lambda kind, hz, q, gain_db: by_kind(
        kind, hz, ("q", q), gain_db if kind in (Kind.PEAK, Kind.LOW_SHELF, Kind.HIGH_SHELF, Kind.RESONATOR) else 0.0
    ),
    st.sampled_from([kind for kind in Kind if kind is not Kind.FREE]),
    st.floats(1.0, 23999.0),
    st.floats(0.05, 2000.0),
    st.floats(-40.0, 40.0),
)
_chains = st.builds(
    lambda sections, combine, gain_db: Chain("", RATE_HZ, tuple(sections), gain_db, combine),
    st.lists(st.one_of(_free, _made), max_size=4),
    st.sampled_from(["series", "sum"]),
    st.floats(-200.0, 200.0),
)


def _is_well_formed(finding: Finding) -> bool:
    numbers = [one for one in (finding.measured, finding.limit) if one is not None]
    has_words = bool(finding.message) and "nan" not in finding.message.split()
    return has_words and not any(math.isnan(one) for one in numbers)


@settings(max_examples=120, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(_chains, st.sampled_from(_TARGETS), st.sampled_from([(), (44100.0, 192000.0)]))
def test_no_chain_raises(chain: Chain, target: str, rates_hz: tuple[float, ...]) -> None:
    """Every finding has its words and no NaN, whatever the chain."""
    findings = check_chain(chain, parse_target(target), rates_hz)
    assert all(_is_well_formed(finding) for finding in findings)
    assert all(finding.section is None or 1 <= finding.section <= len(chain.sections) for finding in findings)
