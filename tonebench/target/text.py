"""How numbers are written in findings: one format per quantity, so that all findings read alike."""

import math


def in_hz(frequency_hz: float) -> str:
    """Write a frequency with six significant digits: a rounded pole differs in the fourth or fifth."""
    return f"{frequency_hz:.6g} Hz"


def in_seconds(seconds: float) -> str:
    """Write a duration with three significant digits."""
    if math.isinf(seconds):
        return "for ever"
    return f"{seconds * 1000.0:.3g} ms" if seconds < 0.1 else f"{seconds:.3g} s"


def in_db(level_db: float) -> str:
    """Write a level with its sign and one digit after the point."""
    if math.isinf(level_db):
        return "inf dB" if level_db > 0.0 else "-inf dB"
    return f"{level_db:+.1f} dB"


def in_db_unsigned(level_db: float) -> str:
    """Write a difference, a depth or a size in dB."""
    return f"{abs(level_db):.1f} dB" if abs(level_db) >= 1.0 else f"{abs(level_db):.2f} dB"


def in_words(numbers: list[int]) -> str:
    """Write section numbers as ``2``, ``2 and 3`` or ``2, 3 and 5``."""
    texts = [str(number) for number in numbers]
    if len(texts) < 2:
        return "".join(texts)
    return f"{', '.join(texts[:-1])} and {texts[-1]}"
