"""From a chain to what charts and panels show: marks, curves, rows, words. No widgets; numpy is needed."""

import math
from typing import TYPE_CHECKING

import numpy as np

from tonebench.core.design import realise
from tonebench.core.response import (
    chain_response,
    feature_frequencies_hz,
    magnitude_db,
    section_response,
    to_omega_rad,
)
from tonebench.core.roots import ConjugatePair, is_on_rim, polar_points
from tonebench.core.section import ByKind
from tonebench.core.widths import ring_from_radius
from tonebench.screen.charts.levels import Curve
from tonebench.screen.charts.rim_marks import RimLeader, RimMark, RimPicture
from tonebench.screen.panels.chain import ChainRow
from tonebench.session.describe import (
    describe_pole,
    format_frequency,
    format_gain_db,
    format_ring,
    format_width,
)

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from tonebench.core.section import Section
    from tonebench.screen.bench import Bench

_HIGHEST_DB = 200.0  # stands for infinity on a chart


def rim_picture(bench: "Bench") -> RimPicture:
    """Return poles, zeros and f0 of all sections, as they run."""
    chain = bench.running
    marks, leaders = [], []
    selected = bench.session.section
    for section in chain.sections:
        number = bench.number_of(section.identity)
        realised = realise(section, chain.sample_rate_hz)
        is_selected = selected is not None and section.identity == selected.identity
        for role, roots in (("pole", realised.poles), ("zero", realised.zeros)):
            for point in polar_points(roots):
                frequency_hz = point.angle_rad * chain.sample_rate_hz / (2.0 * math.pi)
                marks.append(
                    RimMark(
                        number, role, frequency_hz, point.radius, is_selected and role == "pole", section.is_bypassed
                    )
                )
        if isinstance(section.made, ByKind):
            leaders.append(RimLeader(number, section.made.frequency_hz))
    return RimPicture(chain.sample_rate_hz, tuple(marks), tuple(leaders))


def features_hz(bench: "Bench") -> "NDArray[np.float64]":
    """Return frequencies that a curve of the response must not miss."""
    return feature_frequencies_hz(bench.running, 0.0, 0.5 * bench.running.sample_rate_hz)


def chain_curve(bench: "Bench", frequency_hz: "NDArray[np.float64]") -> Curve:
    """Return the response of the whole chain."""
    return Curve(frequency_hz, _finite(magnitude_db(chain_response(bench.running, frequency_hz))))


def section_curve(bench: "Bench", frequency_hz: "NDArray[np.float64]") -> Curve | None:
    """Return the response of the selected section alone; None if there is none at this rate."""
    section = running_section(bench)
    if section is None:
        return None
    rate_hz = bench.running.sample_rate_hz
    response = section_response(realise(section, rate_hz), to_omega_rad(frequency_hz, rate_hz))
    return Curve(frequency_hz, _finite(magnitude_db(response)))


def running_section(bench: "Bench") -> "Section | None":
    """Return the selected section as it runs."""
    selected = bench.session.section
    if selected is None:
        return None
    return next((one for one in bench.running.sections if one.identity == selected.identity), None)


def f0_hz(bench: "Bench") -> float | None:
    """Return the f0 of the selected section."""
    section = running_section(bench)
    return section.made.frequency_hz if section is not None and isinstance(section.made, ByKind) else None


def after_curve(bench: "Bench", before: Curve) -> Curve:
    """Return a spectrum as the chain's magnitude leaves it."""
    return Curve(before.frequency_hz, before.level_db + chain_curve(bench, before.frequency_hz).level_db)


def _finite(level_db: "NDArray[np.float64]") -> "NDArray[np.float64]":
    return np.nan_to_num(np.minimum(level_db, _HIGHEST_DB), nan=0.0)


def chain_rows(bench: "Bench") -> list[ChainRow]:
    """Return one row per section of the session's chain."""
    left_out = {number for number, loss in bench.rate_change.lost if loss.startswith("left out")}
    chain = bench.session.chain
    return [
        _row(section, number, chain.sample_rate_hz, "(not at this rate)" if number in left_out else "")
        for number, section in enumerate(chain.sections, start=1)
    ]


def _row(section: "Section", number: int, sample_rate_hz: float, note: str) -> ChainRow:
    made = section.made
    poles = realise(section, sample_rate_hz).poles
    if isinstance(poles, ConjugatePair) and is_on_rim(poles.radius):
        ring = "on the rim"
    elif isinstance(poles, ConjugatePair):
        word = "grows in " if poles.radius > 1.0 else ""
        ring = f"{word}{format_ring(ring_from_radius(poles.radius, sample_rate_hz))}"
    elif isinstance(made, ByKind) and made.width is not None:
        ring = format_width(made.width.key, made.width.value)
    else:
        ring = "1st order" if isinstance(made, ByKind) else "real poles"
    if isinstance(made, ByKind):
        frequency = format_frequency(made.frequency_hz)
    elif isinstance(poles, ConjugatePair):
        frequency = format_frequency(poles.angle_rad * sample_rate_hz / (2.0 * math.pi))
    else:
        frequency = ""
    gain = format_gain_db(section.gain_db) if section.gain_db else ""
    return ChainRow(number, section.name, section.kind.value, frequency, gain, ring, section.is_bypassed, note)


def pole_words(bench: "Bench") -> tuple[str, tuple[str, ...]]:
    """Return title and lines of the pole's read-out, in the preset's own sample rate."""
    section = bench.session.section
    if section is None:
        return "pole", ("no section is selected",)
    rate_hz = bench.session.chain.sample_rate_hz
    title = f"pole of section {bench.session.selected + 1}"
    if bench.is_other_rate:
        title += f", at {rate_hz:g} Hz"
    return title, describe_pole(section, rate_hz)
