"""What every language writes down: numbers as the target stores them, names, digest, and whether it is stable."""

import math
from dataclasses import dataclass

from tonebench.builds.digest import digest
from tonebench.builds.naming import checked_prefix, default_prefix
from tonebench.core.chain import Chain
from tonebench.core.section import Section
from tonebench.core.stability import is_stable
from tonebench.errors import ExportError
from tonebench.target.arithmetic import Structure, Target
from tonebench.target.rounded import RoundedChain, round_chain
from tonebench.target.stability import is_section_stable

# Changes whenever the same chain and target give another text; a build can tell an old file from a stale one.
FORMAT_NUMBER = 1
_OFFERED = (Structure.DF1, Structure.DF2, Structure.TDF2)
_OFFER = "f32 or f64 with df1, df2 or tdf2"


@dataclass(frozen=True, slots=True)
class Build:
    """A chain made ready for export.

    Attributes
    ----------
    chain : Chain
    target : Target
    prefix : str
        A valid identifier.
    sections : tuple of (int, Section)
        The active ones, with their numbers from 1.
    rounded : RoundedChain
        Same order.
    warning : str
        Why it is not stable; empty if it is.
    digest : str

    """

    chain: Chain
    target: Target
    prefix: str
    sections: tuple[tuple[int, Section], ...]
    rounded: RoundedChain
    warning: str
    digest: str


def make_build(chain: Chain, target: Target, prefix: str, is_forced: bool) -> Build:
    """Round a chain for export and check that it may leave.

    Raises
    ------
    ExportError
        As ``export_text`` says.

    """
    if not target.number_format.is_float or target.structure not in _OFFERED:
        raise ExportError(f"{target} cannot be exported yet; what is offered is {_OFFER}")
    if target.is_fused:
        raise ExportError("fused multiply-add cannot be exported yet; leave it out of the target")
    rounded = round_chain(chain, target)
    sections = tuple((number, one) for number, one in enumerate(chain.sections, start=1) if not one.is_bypassed)
    numbers = [number for number, _ in sections]
    _check_held(rounded, numbers, target)
    warning = _instability(chain, rounded, numbers, target)
    if warning and not is_forced:
        raise ExportError(f"{warning}; make it stable, or force the export, which then says so in the file")
    name = checked_prefix(prefix) if prefix else default_prefix(chain.name)
    return Build(chain, target, name, sections, rounded, warning, digest(chain, target))


def _check_held(rounded: RoundedChain, numbers: list[int], target: Target) -> None:
    for number, one in zip(numbers, rounded.sections, strict=True):
        if not one.is_held:
            raise ExportError(f"section {number}: a coefficient is out of the range of {target.number_format}")
    if not (math.isfinite(rounded.gain) and math.isfinite(rounded.direct_gain)):
        raise ExportError(f"the chain's gain is out of the range of {target.number_format}")


def _instability(chain: Chain, rounded: RoundedChain, numbers: list[int], target: Target) -> str:
    bad = [str(n) for n, one in zip(numbers, rounded.sections, strict=True) if not is_section_stable(one)]
    if bad:
        return f"section {', '.join(bad)} of this chain is unstable with the coefficients of {target}"
    return "" if is_stable(chain) else "this chain has a pole on or outside the unit circle"
