"""``tonebench check``: what will happen to the chain in the arithmetic that ships."""

import argparse
from dataclasses import asdict
from typing import Any

from tonebench.cli.parser import add_format_arguments
from tonebench.cli.text import narrate, write_json, write_line, write_wrapped
from tonebench.core.stability import is_stable
from tonebench.files.bundled import find_preset
from tonebench.files.presets import load_preset
from tonebench.target.arithmetic import parse_target
from tonebench.target.check import NOT_YET_JUDGED, check_chain

DESCRIPTION = (
    "List what will happen to each PRESET in the arithmetic that ships: its own target, or each --target given. Exit "
    "code 1 if a finding that is not accepted is at or above --fail-on."
)
EXAMPLE = "tonebench check boathouse --target q15/df1 --fail-on caution"
SEVERITIES = ("note", "caution", "danger")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("presets", metavar="PRESET", nargs="+", help="path or bundled name")
    parser.add_argument("--target", metavar="NAME", action="append", default=[], help="arithmetic such as f32/tdf2")
    parser.add_argument("--fail-on", choices=SEVERITIES, default="danger", help="default: danger")
    add_format_arguments(parser)


def run(arguments: argparse.Namespace) -> int:
    """Check every preset for every target."""
    targets = [parse_target(one) for one in arguments.target]
    loaded = [(name, load_preset(find_preset(name))) for name in arguments.presets]
    reports = []
    for name, one in loaded:
        for note in one.notes:
            narrate(f"note: {note}")
        reports += [_report(name, one.preset, target) for target in targets or [one.preset.target]]
    if arguments.format == "json":
        write_json(reports[0] if len(reports) == 1 else {"reports": reports})
    else:
        for report in reports:
            _write_report(report)
        write_wrapped(NOT_YET_JUDGED)
    worst = max((_rank(finding) for report in reports for finding in report["findings"]), default=-1)
    return 1 if worst >= SEVERITIES.index(arguments.fail_on) else 0


def _report(name: str, preset: Any, target: Any) -> dict[str, Any]:

    findings = check_chain(preset.chain, target, preset.build_rates_hz, preset.acceptances)
    is_rounded_stable = not any(one.code in ("unstable", "unstable-rounded") for one in findings)
    return {
        "preset": name,
        "chain": preset.chain.name,
        "target": str(target),
        "stable": is_stable(preset.chain) and is_rounded_stable,
        "findings": [asdict(one) for one in findings],
    }


def _rank(finding: dict[str, Any]) -> int:
    return -1 if finding["accepted"] else SEVERITIES.index(finding["severity"])


def _write_report(report: dict[str, Any]) -> None:
    count = len(report["findings"])
    word = "finding" if count == 1 else "findings"
    state = "stable" if report["stable"] else "NOT STABLE"
    write_line(f"{report['preset']} · {report['target']} · {state} · {count} {word}")
    for finding in report["findings"]:
        where = "chain" if finding["section"] is None else f"section {finding['section']}"
        severity = "accepted" if finding["accepted"] else finding["severity"]
        write_wrapped(f"  {severity:<8} {where}: {finding['code']}: {finding['message']}", " " * 9)
        if finding["accepted"]:
            write_wrapped(f"           because: {finding['because']}")
        elif finding["remedy"]:
            write_wrapped(f"           remedy: {finding['remedy']}")
    write_line()
