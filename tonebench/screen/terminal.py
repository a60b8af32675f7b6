"""What this terminal can show: which set of marks the charts and panels use."""

import codecs
import os
import sys
from collections.abc import Mapping

MARK_NAMES = ("braille", "half-block", "ascii")


def choose_marks(environment: Mapping[str, str] = os.environ, encoding: str | None = None) -> str:
    """Return the set of marks: what TONEBENCH_MARKS says, else by the encoding of the terminal.

    An encoding other than UTF-8 has no braille and may lack every line and arrow, so it gets ASCII. Unknown values of
    the variable are passed over: a slip there must not keep the bench from opening.
    """
    wanted = environment.get("TONEBENCH_MARKS", "").strip().lower()
    if wanted in MARK_NAMES:
        return wanted
    name = encoding or getattr(sys.__stdout__, "encoding", None) or "ascii"
    try:
        is_unicode = codecs.lookup(name).name == "utf-8"
    except LookupError:
        is_unicode = False
    return "braille" if is_unicode else "ascii"
