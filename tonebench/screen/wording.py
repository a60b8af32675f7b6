"""The words of the status row, and of findings. Nothing here is told by colour."""

from typing import TYPE_CHECKING

from tonebench.screen.panels.findings import FindingWords
from tonebench.screen.panels.rows import Fact

if TYPE_CHECKING:
    from collections.abc import Iterable

    from tonebench.engine.client import EngineStatus
    from tonebench.screen.bench import Bench
    from tonebench.target.findings import Finding

_LONGEST_NAME = 24


def status_facts(bench: "Bench", status: "EngineStatus") -> tuple[list[Fact], list[Fact]]:
    """Return what the status row says at its left and at its right edge."""
    session = bench.session
    name = session.chain.name or "untitled"
    if len(name) > _LONGEST_NAME:
        name = name[: _LONGEST_NAME - 1] + "…"
    count = len(session.chain.sections)
    left = [
        Fact(f"{name}*" if session.is_dirty else name, 0),
        Fact(_rate(bench), 6 if not bench.is_other_rate else 2, _kilohertz(bench.clip.sample_rate_hz)),
        Fact(f"{count} section{'' if count == 1 else 's'}", 8),
        Fact(f"step {session.step.pitch_cents:g} cents {session.step.ring_percent:g} %", 1),
        Fact(bench.clip.name, 10),
    ]
    right = [
        Fact(_phase(status), 0),
        Fact(f"hearing {status.hear}", 1, status.hear),
        Fact(f"level {status.level_db:g} dB", 2, f"{status.level_db:g} dB"),
        Fact(f"ceiling {status.ceiling_db:g}", 7),
        *_guard(status),
        Fact(f"{status.underflows} underflow{'' if status.underflows == 1 else 's'}", 3 if status.underflows else 9),
    ]
    return left, right


def _phase(status: "EngineStatus") -> str:
    if status.phase == "playing" and status.is_muted:
        return "playing, muted"
    if status.phase == "playing" and not status.is_sounding_device:
        return "playing, no sound"
    if status.phase == "stopped" and status.is_muted:
        return "stopped, muted"
    return {"starting": "sound starting", "faulted": "sound failed"}.get(status.phase, status.phase)


def _guard(status: "EngineStatus") -> list[Fact]:
    if status.guard == "tripped":
        return [Fact("GUARD TRIPPED, Space re-arms", 0, "TRIPPED", is_loud=True)]
    return [Fact("guard limiting", 1, "limiting", is_loud=True)] if status.guard == "limiting" else []


def _rate(bench: "Bench") -> str:
    clip = _kilohertz(bench.clip.sample_rate_hz)
    return f"{clip} (preset {_kilohertz(bench.session.chain.sample_rate_hz)})" if bench.is_other_rate else clip


def _kilohertz(rate_hz: float) -> str:
    return f"{rate_hz / 1000:g} kHz"


def finding_words(findings: "Iterable[Finding]") -> list[FindingWords]:
    """Return findings in words, in the order given."""
    return [
        FindingWords(
            one.severity.value,
            one.section,
            one.message,
            one.remedy,
            (one.because or "the preset says so") if one.accepted else "",
        )
        for one in findings
    ]
