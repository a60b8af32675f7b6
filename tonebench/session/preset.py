"""A preset as a value: a chain, what it ships in, and what its makers have written about it.

How it is read from and written to a file stands in ``files``; here are only the checks that need no file.
"""

import re
from dataclasses import dataclass, field

from tonebench.core.chain import LARGEST_SAMPLE_RATE_HZ, SMALLEST_SAMPLE_RATE_HZ, Chain
from tonebench.core.hearing import Hearing
from tonebench.errors import InvalidValueError, must_be
from tonebench.target.arithmetic import Target

FORMAT_VERSION = 1


@dataclass(frozen=True, slots=True)
class ExportRequest:
    """One file that the build needs.

    Attributes
    ----------
    to : str
        Language or data format, for example ``"c"``.
    file : str
        Relative to the preset, and inside its folder.
    prefix : str
        Of every exported name; empty means one made from the chain's name.

    """

    to: str
    file: str
    prefix: str = ""

    def __post_init__(self) -> None:
        if not self.to:
            raise InvalidValueError(must_be("to", "a language such as c", self.to))
        parts = re.split(r"[/\\]", self.file)
        is_rooted = self.file.startswith(("/", "\\", "~")) or re.match(r"[A-Za-z]:", self.file) is not None
        if not self.file or is_rooted or ".." in parts or parts[-1] in ("", "."):
            raise InvalidValueError(must_be("file", "a path inside the preset's own folder", self.file))


@dataclass(frozen=True, slots=True)
class Acceptance:
    """A finding that is wanted; it counts again above ``up_to``.

    Attributes
    ----------
    code : str
        For example ``"ring-after-tone"``.
    because : str
        The reason, in the maker's words.
    section : str
        Name or number of the section; empty means the whole chain, any section.
    up_to : float or None
        In the finding's unit; None accepts any value.

    """

    code: str
    because: str
    section: str = ""
    up_to: float | None = None

    def __post_init__(self) -> None:
        if not re.fullmatch(r"[a-z0-9]+(-[a-z0-9]+)*", self.code):
            raise InvalidValueError(must_be("code", "a finding's code such as pole-moved", self.code))
        if not self.because.strip():
            raise InvalidValueError(must_be("because", "a reason in words", self.because))


@dataclass(frozen=True, slots=True)
class Preset:
    """Everything that one preset file holds, unknown keys aside.

    Attributes
    ----------
    chain : Chain
    target : Target
    build_rates_hz : tuple of float
        Sample rates that the build runs at; empty means the chain's own.
    exports : tuple of ExportRequest
    acceptances : tuple of Acceptance
    written_hearing : Hearing or None
        As the file had it, to be compared; recomputed on every save.

    """

    chain: Chain
    target: Target = field(default_factory=Target)
    build_rates_hz: tuple[float, ...] = ()
    exports: tuple[ExportRequest, ...] = ()
    acceptances: tuple[Acceptance, ...] = ()
    written_hearing: Hearing | None = None

    def __post_init__(self) -> None:
        for rate_hz in self.build_rates_hz:
            if not SMALLEST_SAMPLE_RATE_HZ <= rate_hz <= LARGEST_SAMPLE_RATE_HZ:
                rule = f"between {SMALLEST_SAMPLE_RATE_HZ:g} and {LARGEST_SAMPLE_RATE_HZ:g}"
                raise InvalidValueError(must_be("sample_rates_hz", rule, rate_hz))
