"""The languages that a chain can be exported to, and the one way in.

A language is a function from ``Build`` to text. Everything that is refused for any language is refused here.
"""

from collections.abc import Callable

from tonebench.builds.build import Build, make_build
from tonebench.builds.c99 import c99_text
from tonebench.core.chain import Chain
from tonebench.errors import ExportError, must_be
from tonebench.target.arithmetic import Target

_WRITERS: dict[str, Callable[[Build], str]] = {"c": c99_text}
LANGUAGES: tuple[str, ...] = tuple(_WRITERS)


def export_text(chain: Chain, target: Target, language: str, prefix: str = "", *, is_forced: bool = False) -> str:
    """Return a chain as source text for a build.

    Parameters
    ----------
    chain : Chain
    target : Target
        ``f32`` or ``f64`` with ``df1``, ``df2`` or ``tdf2``.
    language : str
        One of ``LANGUAGES``.
    prefix : str
        Of every exported name; empty makes one from the chain's name.
    is_forced : bool
        Export an unstable chain all the same; the text then says that it is.

    Raises
    ------
    ExportError
        If the language, the target or the prefix is not offered, a coefficient does not fit, or the chain is unstable
        and not forced.

    """
    writer = _WRITERS.get(language)
    if writer is None:
        raise ExportError(must_be("language", f"one of {', '.join(LANGUAGES)}", language))
    return writer(make_build(chain, target, prefix, is_forced))
