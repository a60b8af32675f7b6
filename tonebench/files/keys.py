"""The keys of a preset file, table by table, and how numbers are written."""

import math
from decimal import Decimal, localcontext

WIDTH_KEYS = ("q", "bandwidth_hz", "bandwidth_oct", "ring_s", "radius")

# Known keys in the order in which they are written, with the value that a missing one stands for.
SECTION_KEYS: dict[str, object] = {
    "name": "",
    "kind": None,
    "bypass": False,
    "polarity": 1,
    "delay": 0,
    "frequency_hz": None,
    "frequency_is": "peak",
    **dict.fromkeys(WIDTH_KEYS),
    "gain_db": 0.0,
    "gain_at_hz": None,
    "order": 2,
    "poles": None,
    "zeros": None,
}
CHAIN_KEYS: dict[str, object] = {
    "name": None,
    "sample_rate_hz": None,
    "gain_db": 0.0,
    "combine": "series",
    "direct_gain_db": None,
}
TARGET_KEYS: dict[str, object] = {
    "arithmetic": None,
    "accumulator_bits": None,
    "rounding": "nearest",
    "products": "full",
    "overflow": "saturate",
    "fused": False,
    "flush_subnormals": False,
}
BUILD_KEYS: dict[str, object] = {"sample_rates_hz": []}
EXPORT_KEYS: dict[str, object] = {"to": None, "file": None, "prefix": ""}
ACCEPT_KEYS: dict[str, object] = {"code": None, "section": "", "up_to": None, "because": None}
HEARING_KEYS: dict[str, object] = {
    "largest_gain_db": None,
    "largest_gain_hz": None,
    "worst_peak_db": None,
    "ring_s": None,
}
ROOT_KEYS: dict[str, object] = {"radius": None, "angle_deg": None, "real": None}

SINGLE_TABLES = {"chain": CHAIN_KEYS, "target": TARGET_KEYS, "build": BUILD_KEYS, "hearing": HEARING_KEYS}
REPEATED_TABLES = {"section": SECTION_KEYS, "export": EXPORT_KEYS, "accept": ACCEPT_KEYS}

_PI = Decimal("3.14159265358979323846264338327950288419716939937510")


def angle_from_degrees(degrees: Decimal) -> float:
    """Return radians, rounded once; a product of doubles would not reach every double."""
    with localcontext() as context:
        context.prec = 60
        return float(degrees * _PI / 180)


def degrees_text(angle_rad: float) -> str:
    """Return the shortest decimal of degrees that ``angle_from_degrees`` reads back to exactly this angle."""
    with localcontext() as context:
        context.prec = 60
        degrees = Decimal(angle_rad) * 180 / _PI
    for digits in range(1, 25):
        text = f"{degrees:.{digits}g}"
        if angle_from_degrees(Decimal(text)) == angle_rad:
            return _as_float(text)
    return _as_float(str(degrees))


def _as_float(text: str) -> str:
    plain = f"{Decimal(text):f}"
    return plain if "." in plain else f"{plain}.0"


def plain_number(value: float) -> float | int:
    """Return whole numbers of moderate size as int, so that rates read ``48000``."""
    if math.isfinite(value) and value == int(value) and abs(value) < 1e7:
        return int(value)
    return value
