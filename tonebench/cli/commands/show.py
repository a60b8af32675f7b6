"""``tonebench show``: chain, poles, zeros and response as text or JSON."""

import argparse
import math
from typing import Any

import numpy as np

from tonebench.cli.parser import add_format_arguments
from tonebench.cli.text import narrate, write_json, write_line, write_wrapped
from tonebench.core.design import realise
from tonebench.core.hearing import hearing
from tonebench.core.response import chain_response, group_delay_s, magnitude_db
from tonebench.core.ring import rings
from tonebench.core.roots import polar_points
from tonebench.core.section import ByKind
from tonebench.core.stability import is_stable, outermost_radius
from tonebench.core.widths import all_widths, ring_from_radius
from tonebench.files.bundled import find_preset
from tonebench.files.presets import load_preset

DESCRIPTION = "Print the chain of PRESET: sections, poles, zeros, rings, hearing numbers, and the response in numbers."
EXAMPLE = "tonebench show boathouse --json"

# Preferred thirds of octaves from 20 Hz (IEC 61260-1 nominal midbands), for a response that can be read aloud.
_NOMINAL_HZ = (
    *(20, 25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800),
    *(1000, 1250, 1600, 2000, 2500, 3150, 4000, 5000, 6300, 8000, 10000, 12500, 16000, 20000),
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the options of the command."""
    parser.add_argument("preset", metavar="PRESET", help="path or bundled name")
    add_format_arguments(parser)


def run(arguments: argparse.Namespace) -> int:
    """Show one preset."""
    loaded = load_preset(find_preset(arguments.preset))
    for note in loaded.notes:
        narrate(f"note: {note}")
    content = describe_chain(loaded.preset)
    if arguments.format == "json":
        write_json(content)
    else:
        _write_text(content)
    return 0


def describe_chain(preset: Any) -> dict[str, Any]:
    """Return everything that the charts show, as plain data."""
    chain = preset.chain
    numbers = hearing(chain)
    return {
        "name": chain.name,
        "sample_rate_hz": chain.sample_rate_hz,
        "combine": chain.combine,
        "gain_db": chain.gain_db,
        "direct_gain_db": chain.direct_gain_db,
        "target": str(preset.target),
        "stable": is_stable(chain),
        "outermost_radius": outermost_radius(chain),
        "sections": [_section(number, one, chain) for number, one in enumerate(chain.sections, start=1)],
        "rings": [_ring(one, chain) for one in rings(chain)],
        "hearing": {
            "largest_gain_db": numbers.largest_gain_db,
            "largest_gain_hz": numbers.largest_gain_hz,
            "worst_peak_db": numbers.worst_peak_db,
            "ring_s": numbers.ring_s,
        },
        "response": _response(chain),
    }


def _section(number: int, section: Any, chain: Any) -> dict[str, Any]:

    rate_hz = chain.sample_rate_hz
    realised = realise(section, rate_hz)
    entry: dict[str, Any] = {
        "number": number,
        "name": section.name,
        "kind": section.kind.value,
        "bypassed": section.is_bypassed,
        "polarity": section.polarity,
        "delay_samples": section.delay_samples,
        "gain_db": section.gain_db,
    }
    if isinstance(section.made, ByKind):
        entry["frequency_hz"] = section.made.frequency_hz
        entry["order"] = section.made.order
        entry["width_key"] = section.made.width.key.value if section.made.width else None
        entry["widths"] = {key.value: value for key, value in all_widths(section.made, rate_hz).items()}
    entry["linear_gain"] = realised.gain
    entry["poles"] = _roots(realised.poles, rate_hz)
    entry["zeros"] = _roots(realised.zeros, rate_hz)
    return entry


def _roots(roots: Any, rate_hz: float) -> list[dict[str, Any]]:

    return [
        {
            "radius": point.radius,
            "angle_deg": math.degrees(point.angle_rad),
            "frequency_hz": point.angle_rad * rate_hz / (2.0 * math.pi),
            "ring_s": ring_from_radius(point.radius, rate_hz),
            "conjugate": point.is_pair,
        }
        for point in polar_points(roots)
    ]


def _ring(ring: Any, chain: Any) -> dict[str, Any]:
    numbers = {one.identity: number for number, one in enumerate(chain.sections, start=1)}
    return {
        "frequency_hz": ring.frequency_hz,
        "t60_s": ring.t60_s,
        "growing": ring.is_growing,
        "click_level_db": ring.click_level_db,
        "tone_level_db": ring.tone_level_db,
        "click_ring_s": ring.click_ring_s,
        "tone_ring_s": ring.tone_ring_s,
        "sections": [numbers[one] for one in ring.identities],
    }


def _response(chain: Any) -> dict[str, Any]:

    frequency_hz = np.array([one for one in _NOMINAL_HZ if one < 0.5 * chain.sample_rate_hz], dtype=np.float64)
    response = chain_response(chain, frequency_hz)
    return {
        "frequency_hz": frequency_hz,
        "magnitude_db": magnitude_db(response),
        "phase_deg": np.degrees(np.angle(response)),
        "group_delay_s": group_delay_s(chain, frequency_hz),
    }


def _write_text(content: dict[str, Any]) -> None:
    state = "stable" if content["stable"] else "NOT STABLE"
    count = len(content["sections"])
    write_wrapped(
        f"{content['name']}: {count} {'section' if count == 1 else 'sections'} in {content['combine']}, "
        f"{content['sample_rate_hz']:g} Hz, {content['target']}, {state}"
    )
    if content["gain_db"]:
        write_line(f"chain gain {content['gain_db']:+g} dB")
    if content["direct_gain_db"] is not None:
        write_line(f"the input itself is added at {content['direct_gain_db']:+g} dB")
    for section in content["sections"]:
        _write_section(section)
    numbers = content["hearing"]
    write_line()
    if content["stable"]:
        write_wrapped(
            f"hearing: at most {numbers['largest_gain_db']:+.1f} dB at {numbers['largest_gain_hz']:.4g} Hz; no input "
            f"comes out more than {numbers['worst_peak_db']:+.1f} dB over its own peak; longest ring "
            f"{numbers['ring_s']:.3g} s. What that is as sound pressure depends on the equipment, which tonebench "
            "cannot know."
        )
    else:
        write_wrapped("hearing: a pole lies on or outside the unit circle: the output grows without bound.")
    write_line()
    write_line("       Hz        dB")
    for hz, level in zip(content["response"]["frequency_hz"], content["response"]["magnitude_db"], strict=True):
        write_line(f"{hz:>9g}  {level:>8.2f}")


def _write_section(section: dict[str, Any]) -> None:
    name = f' "{section["name"]}"' if section["name"] else ""
    parts = [f"{section['number']}{name} {section['kind']}"]
    if "frequency_hz" in section:
        parts.append(f"{section['frequency_hz']:g} Hz")
    if section["gain_db"]:
        parts.append(f"{section['gain_db']:+g} dB")
    parts += [f"{key} {value:.5g}" for key, value in section.get("widths", {}).items() if key != "radius"]
    if section["polarity"] < 0:
        parts.append("polarity -1")
    if section["delay_samples"]:
        parts.append(f"delay {section['delay_samples']} samples")
    if section["bypassed"]:
        parts.append("bypassed")
    write_wrapped(", ".join(parts), "    ")
    for what in ("poles", "zeros"):
        for root in section[what]:
            kind = "pair" if root["conjugate"] else "real"
            write_line(
                f"    {what[:-1]} {kind}  radius {root['radius']:.9f}  angle {root['angle_deg']:.6f} deg  "
                f"{root['frequency_hz']:.4f} Hz"
            )
