"""Findings about the other sample rates that the build runs at, and about frequencies near half of any of them."""

from collections.abc import Iterator, Sequence
from dataclasses import replace

from tonebench.core.chain import Chain
from tonebench.core.rates import at_rate
from tonebench.core.section import ByHand
from tonebench.target import thresholds as limits
from tonebench.target.arithmetic import Target
from tonebench.target.check_poles import check_poles
from tonebench.target.findings import Finding, Severity
from tonebench.target.study import study_chain
from tonebench.target.text import in_hz


def check_rates(chain: Chain, target: Target, build_rates_hz: Sequence[float]) -> Iterator[Finding]:
    """Yield, for each build rate, what is lost, unstable or moved there; and what lies near half of a rate."""
    yield from _near_nyquist(chain, chain.sample_rate_hz)
    for rate_hz in dict.fromkeys(build_rates_hz):
        if rate_hz == chain.sample_rate_hz:
            continue
        yield from _near_nyquist(chain, rate_hz)
        change = at_rate(chain, rate_hz)
        left_out = set()
        for number, loss in change.lost:
            finding = _lost(chain, number, rate_hz, loss)
            if finding.severity is Severity.DANGER:
                left_out.add(number)
            if not chain.sections[number - 1].is_bypassed:
                yield finding
        kept = [number for number in range(1, len(chain.sections) + 1) if number not in left_out]
        for finding in check_poles(study_chain(change.chain, target)):
            place = None if finding.section is None else kept[finding.section - 1]
            yield replace(finding, section=place, message=f"at {in_hz(rate_hz)}: {finding.message}")


def _lost(chain: Chain, number: int, rate_hz: float, loss: str) -> Finding:
    is_left_out = len(at_rate(chain.with_sections(chain.sections[number - 1 : number]), rate_hz).chain.sections) == 0
    remedy = f"lower its frequency under {in_hz(0.5 * rate_hz)}, or bypass it at this rate" if is_left_out else ""
    if "gain_at_hz" in loss and not is_left_out:
        remedy = "give gain_at_hz, the frequency at which gain_db is to hold at every rate"
    message = loss if is_left_out else f"at {in_hz(rate_hz)}: {loss}"
    severity = Severity.DANGER if is_left_out else Severity.CAUTION
    return Finding("rate-lost", severity, number, None, None, "", message, remedy)


def _near_nyquist(chain: Chain, rate_hz: float) -> Iterator[Finding]:
    for number, section in enumerate(chain.sections, start=1):
        if section.is_bypassed or isinstance(section.made, ByHand):
            continue
        percent = 100.0 * section.made.frequency_hz / (0.5 * rate_hz)
        if limits.NEAR_NYQUIST_PERCENT < percent < 100.0:
            yield Finding(
                "near-nyquist",
                Severity.NOTE,
                number,
                percent,
                limits.NEAR_NYQUIST_PERCENT,
                "%",
                f"{in_hz(section.made.frequency_hz)} is {percent:.3g} % of half the sampling rate of {in_hz(rate_hz)}: "
                f"its upper side is squeezed to less than half its width",
                f"run at {in_hz(2.0 * rate_hz)}, where it is {0.5 * percent:.3g} %",
            )
