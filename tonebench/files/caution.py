"""The hearing caution of a preset: its words, and its numbers as they are written."""

import math

from tonebench.core.chain import Chain
from tonebench.core.hearing import Hearing, hearing

_MARK = "# hearing: "


def rounded_hearing(chain: Chain) -> Hearing:
    """Return the hearing numbers as a preset holds them: 0.1 dB, 0.001 Hz, three digits of ring."""
    exact = hearing(chain)
    return Hearing(
        _rounded(exact.largest_gain_db, 1),
        _rounded(exact.largest_gain_hz, 3),
        _rounded(exact.worst_peak_db, 1),
        exact.ring_s if exact.ring_s is None or math.isinf(exact.ring_s) else float(f"{exact.ring_s:.3g}"),
    )


def _rounded(value: float | None, digits: int) -> float | None:
    return value if value is None or math.isinf(value) else round(value, digits) + 0.0


def caution_lines(numbers: Hearing) -> list[str]:
    """Return the caution as comment lines."""
    if numbers.largest_gain_db is None or math.isinf(numbers.largest_gain_db):
        first = "this chain is unstable: its output can grow without bound. Do not listen to it without a guard."
    else:
        first = (
            f"this chain changes a tone by at most {numbers.largest_gain_db:+.1f} dB, and the peak of any sound by "
            f"at most {_db(numbers.worst_peak_db)}."
        )
    sentences = [
        first,
        "Start low and raise the level slowly. tonebench cannot know the sound pressure at your ears: that depends on",
        "amplifier and headphones. Only a measurement by a qualified person tells it; your employer's noise programme",
        "and local rules say how long is too long; for ringing or muffled hearing, see an audiologist.",
    ]
    return [f"{_MARK}{one}\n" for one in sentences]


def _db(value: float | None) -> str:
    return "an unknown amount" if value is None else f"{value:+.1f} dB"


def is_caution(line: str) -> bool:
    """Tell whether a comment line is one of the caution's own."""
    return line.startswith(_MARK)
