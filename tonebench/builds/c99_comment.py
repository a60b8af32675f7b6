"""The comment that opens a C export: what it is, in which convention, and from which chain."""

import math
import textwrap

from tonebench.builds.build import FORMAT_NUMBER, Build
from tonebench.builds.c99_numbers import type_name
from tonebench.builds.naming import comment_text
from tonebench.core.design import realise
from tonebench.core.roots import polar_points
from tonebench.core.section import ByHand, Section

_COLUMNS = 100


def header_comment(build: Build) -> list[str]:
    """Return the comment's lines; every text of the preset in it is made harmless."""
    lines = ["/*"]
    for paragraph in (*_opening(build), *_convention(build), *_section_lines(build)):
        lines += textwrap.wrap(paragraph, _COLUMNS, initial_indent=" * ", subsequent_indent=" *   ")
    return [*lines, f" * preset digest {build.digest}", f" * format {FORMAT_NUMBER}", " */"]


def _opening(build: Build) -> list[str]:
    chain = build.chain
    lines = [comment_text(chain.name) or "chain without a name"]
    if build.warning:
        lines.append(f"UNSTABLE: {build.warning}. It was exported by force and will not fall silent.")
    gains = f"chain gain {chain.gain_db:g} dB, {_direct(build)}"
    count = f"{len(build.sections)} section{'' if len(build.sections) == 1 else 's'}"
    lines.append(f"sample rate {chain.sample_rate_hz:.12g} Hz, {chain.combine}, {gains}target {build.target}, {count}")
    return lines


def _convention(build: Build) -> tuple[str, str, str]:
    name, kind = build.prefix, type_name(build.target)
    equation = (
        "Each section is y = b0 x + b1 x1 + b2 x2 - a1 y1 - a2 y2, x1 and y1 being one frame old, x2 and y2 two: the "
        "denominator is 1 + a1/z + a2/z^2, and is subtracted. Gain and polarity of a section are inside b."
    )
    rounding = (
        f"Coefficients are computed in double precision from poles and zeros and rounded once to {kind}, to nearest; "
        f"each is the shortest decimal that reads back to the same {kind}."
    )
    use = (
        f"Use: one {name}_state per channel, {name}_reset once, then {name}_process for each block, in place if "
        "wanted. No allocation, no library call. The results are the same bits everywhere only if the compiler does "
        "not contract products and sums (for example with -ffp-contract=off)."
    )
    return (equation, rounding, use)


def _direct(build: Build) -> str:
    level_db = build.chain.direct_gain_db
    return "" if level_db is None else f"input added at {level_db:g} dB, "


def _section_lines(build: Build) -> list[str]:
    left_out = len(build.chain.sections) - len(build.sections)
    lines = [_describe(number, section, build.chain.sample_rate_hz) for number, section in build.sections]
    if left_out:
        lines.append(f"{left_out} bypassed section{'s' if left_out > 1 else ''} left out")
    return lines


def _describe(number: int, section: Section, sample_rate_hz: float) -> str:
    made, parts = section.made, [f"{number}: {section.kind}"]
    if section.name:
        parts[0] += f" ({comment_text(section.name)})"
    if not isinstance(made, ByHand):
        parts.append(f"f0 {made.frequency_hz:.10g} Hz")
        parts.append("first order" if made.width is None else f"{made.width.key} {made.width.value:.10g}")
    if made.gain_db:
        parts.append(f"gain {made.gain_db:g} dB")
    if section.polarity < 0:
        parts.append("polarity -1")
    if section.delay_samples:
        parts.append(f"delay {section.delay_samples} frames")
    for point in polar_points(realise(section, sample_rate_hz).poles):
        angle_hz = point.angle_rad * sample_rate_hz / (2.0 * math.pi)
        what = "pole pair" if point.is_pair else "pole"
        degrees = math.degrees(point.angle_rad)
        parts.append(f"{what} radius {point.radius:.12g} angle {degrees:.9g} deg ({angle_hz:.9g} Hz)")
    return ", ".join(parts)
