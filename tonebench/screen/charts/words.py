"""Numbers as the charts write them: short, with the unit, never cut."""

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from tonebench.screen.charts.levels import Curve


def frequency_label(frequency_hz: float) -> str:
    """Short label of an axis: 50, 2.5k, 0.01 (in Hz)."""
    if frequency_hz >= 1000:
        return f"{frequency_hz / 1000:.7g}k"
    return f"{frequency_hz:.7g}"


def frequency_text(frequency_hz: float) -> str:
    """Frequency with its unit, to about 5 significant digits: 50.02 Hz, 12.5 kHz."""
    if frequency_hz >= 10_000:
        return f"{frequency_hz / 1000:.5g} kHz"
    return f"{frequency_hz:.5g} Hz"


def time_text(time_s: float) -> str:
    """Time with the unit that suits it, to 2 significant digits: 0.44 s, 12 ms, 80 µs."""
    if math.isinf(time_s):
        return "for ever"
    if time_s >= 100:
        return f"{time_s:.0f} s"
    if time_s >= 0.1:
        return f"{_two_digits(time_s)} s"
    if time_s >= 1e-3:
        return f"{_two_digits(time_s * 1e3)} ms"
    return f"{_two_digits(time_s * 1e6)} µs"


def ring_label(time_s: float) -> str:
    """Label of a decade on a ring axis: 10 s, 1 s, 100 ms, 0.1 ms."""
    if time_s >= 0.9:
        return f"{time_s:.6g} s"
    return f"{time_s * 1e3:.6g} ms"


def level_label(level_db: float) -> str:
    """Label of a decibel axis with its sign: +6, 0, −24."""
    rounded = round(level_db, 3)
    if rounded == 0:
        return "0"
    return f"{rounded:+.6g}".replace("-", "−")


def level_text(level_db: float) -> str:
    """Level in words, to a tenth of a decibel: +1.5 dB, −23.1 dB, under −200 dB."""
    if level_db < -200:
        return "under −200 dB"
    rounded = round(level_db, 1)
    if rounded == 0:
        return "0 dB"
    return f"{rounded:+.1f} dB".replace("-", "−")


def describe_curve(curve: "Curve") -> str:
    """Return highest, lowest and round-frequency levels of a curve in words."""
    top, bottom = int(np.nanargmax(curve.level_db)), int(np.nanargmin(curve.level_db))
    parts = [
        f"highest {level_text(float(curve.level_db[top]))} at {frequency_text(float(curve.frequency_hz[top]))}",
        f"lowest {level_text(float(curve.level_db[bottom]))} at {frequency_text(float(curve.frequency_hz[bottom]))}",
    ]
    for frequency_hz in (31.5, 63, 125, 250, 500, 1000, 2000, 4000, 8000, 16_000):
        if curve.frequency_hz[0] <= frequency_hz <= curve.frequency_hz[-1]:
            level = float(np.interp(np.log(frequency_hz), np.log(curve.frequency_hz), curve.level_db))
            parts.append(f"{level_text(level)} at {frequency_text(frequency_hz)}")
    return "; ".join(parts)


def _two_digits(value: float) -> str:
    """Two significant digits without an exponent."""
    return f"{value:.2g}" if value < 100 else f"{value:.0f}"
