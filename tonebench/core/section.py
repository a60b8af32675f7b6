"""One section of a chain: how it is made, and what is added to it.

H(z) = polarity · g · z^−delay · Π(1 − q/z) / Π(1 − p/z), at most two zeros q and two poles p. Either a kind with
frequency, width and gain makes it, or its poles and zeros are set by hand. Values are immutable; an edit returns a
new section with the same identity, by which the engine keeps the state of a section that is being moved.
"""

import math
from dataclasses import dataclass, field, replace

from tonebench.core.kinds import Kind, Width, WidthKey, allowed_widths, has_first_order, has_gain
from tonebench.core.roots import NO_ROOTS, Roots
from tonebench.errors import InvalidValueError, must_be

LARGEST_GAIN_DB = 200.0
LARGEST_DELAY_SAMPLES = 65535


@dataclass(frozen=True, slots=True)
class ByKind:
    """A section made by a kind.

    Attributes
    ----------
    kind : Kind
        Any kind but ``free``.
    frequency_hz : float
        f0: centre, corner or peak. It is not the pole's angle.
    width : Width or None
        The width that was written or last typed; None only for first order.
    gain_db : float
        For the kinds that have one; else 0.
    order : int
        2, or 1 where the kind has a first-order form.
    is_pole_frequency : bool
        Resonator only: ``frequency_hz`` is the pole's angle instead of the peak of the response.

    """

    kind: Kind
    frequency_hz: float
    width: Width | None
    gain_db: float = 0.0
    order: int = 2
    is_pole_frequency: bool = False

    def __post_init__(self) -> None:
        if self.kind is Kind.FREE:
            raise InvalidValueError(must_be("kind", "a kind with a frequency", "free", "give poles and zeros instead"))
        if not (math.isfinite(self.frequency_hz) and self.frequency_hz > 0.0):
            raise InvalidValueError(must_be("frequency_hz", "a finite number over 0", self.frequency_hz))
        _check_gain(self.gain_db)
        if self.gain_db != 0.0 and not has_gain(self.kind):
            raise InvalidValueError(
                must_be("gain_db", f"left out for a {self.kind}, which has no gain of its own", self.gain_db)
            )
        self._check_order()
        if self.is_pole_frequency and self.kind is not Kind.RESONATOR:
            raise InvalidValueError(must_be("frequency_is", "left out for any kind but resonator", "pole"))

    def _check_order(self) -> None:
        if self.order not in (1, 2):
            raise InvalidValueError(must_be("order", "1 or 2", self.order))
        if self.order == 1:
            if not has_first_order(self.kind):
                raise InvalidValueError(must_be("order", f"2 for a {self.kind}", 1))
            if self.width is not None:
                raise InvalidValueError(
                    must_be(self.width.key.value, "left out for first order, which has no width", self.width.value)
                )
            return
        if self.width is None:
            choices = ", ".join(allowed_widths(self.kind))
            raise InvalidValueError(f"a {self.kind} needs one width; give one of {choices}")
        if self.width.key not in allowed_widths(self.kind):
            choices = ", ".join(allowed_widths(self.kind))
            raise InvalidValueError(
                must_be(self.width.key.value, f"left out: it has no meaning for a {self.kind}", self.width.value)
                + f"; give one of {choices}"
            )


@dataclass(frozen=True, slots=True)
class ByHand:
    """A free section: poles and zeros as they stand.

    Attributes
    ----------
    poles, zeros : Roots
        On, outside or inside the unit circle.
    gain_db : float
        |g| in dB; with ``gain_at_hz``, the section's level at that frequency, which is kept across sample rates.
    gain_at_hz : float or None

    """

    poles: Roots = NO_ROOTS
    zeros: Roots = NO_ROOTS
    gain_db: float = 0.0
    gain_at_hz: float | None = None

    def __post_init__(self) -> None:
        _check_gain(self.gain_db)
        if self.gain_at_hz is not None and not (math.isfinite(self.gain_at_hz) and self.gain_at_hz >= 0.0):
            raise InvalidValueError(must_be("gain_at_hz", "a finite frequency of 0 or more", self.gain_at_hz))


def _check_gain(gain_db: float) -> None:
    if not (math.isfinite(gain_db) and abs(gain_db) <= LARGEST_GAIN_DB):
        rule = f"between -{LARGEST_GAIN_DB:g} and {LARGEST_GAIN_DB:g} dB"
        raise InvalidValueError(must_be("gain_db", rule, gain_db))


@dataclass(frozen=True, slots=True)
class Section:
    """A section as the chain holds it.

    Attributes
    ----------
    made : ByKind or ByHand
    name : str
        Optional; empty means none.
    is_bypassed : bool
        Left out of the chain: the signal passes a series, and a sum loses this part.
    polarity : int
        1 or -1.
    delay_samples : int
        Whole samples, 0 or more.
    identity : int
        Given by the chain, kept through edits, never saved and never compared.

    """

    made: ByKind | ByHand
    name: str = ""
    is_bypassed: bool = False
    polarity: int = 1
    delay_samples: int = 0
    identity: int = field(default=0, compare=False)

    def __post_init__(self) -> None:
        if self.polarity not in (1, -1):
            raise InvalidValueError(must_be("polarity", "1 or -1", self.polarity))
        if self.delay_samples != int(self.delay_samples) or not 0 <= self.delay_samples <= LARGEST_DELAY_SAMPLES:
            rule = f"whole samples from 0 to {LARGEST_DELAY_SAMPLES}"
            raise InvalidValueError(must_be("delay", rule, self.delay_samples))

    @property
    def kind(self) -> Kind:
        """The kind, ``free`` for a section made by hand."""
        return self.made.kind if isinstance(self.made, ByKind) else Kind.FREE

    @property
    def gain_db(self) -> float:
        """The gain that was written, 0 where the kind has none."""
        return self.made.gain_db

    def with_gain_db(self, gain_db: float) -> "Section":
        """Return the section with another gain."""
        return replace(self, made=replace(self.made, gain_db=gain_db))

    def with_frequency_hz(self, frequency_hz: float) -> "Section":
        """Return the section with another f0; its width stays the one that was written.

        Raises
        ------
        InvalidValueError
            For a free section, which has no f0.

        """
        return replace(self, made=replace(self._by_kind("frequency_hz"), frequency_hz=frequency_hz))

    def with_width(self, key: WidthKey, value: float) -> "Section":
        """Return the section with another width, which is now the one that is kept."""
        return replace(self, made=replace(self._by_kind(key.value), width=Width(key, value)))

    def _by_kind(self, name: str) -> ByKind:
        if isinstance(self.made, ByHand):
            raise InvalidValueError(f"a free section has no {name}; move its poles and zeros instead")
        return self.made


def by_kind(kind: Kind, frequency_hz: float, width: tuple[str, float] | None = None, gain_db: float = 0.0) -> Section:
    """Make a plain section in one line, as tests and scripts need it: ``by_kind(Kind.PEAK, 320, ("q", 1.2), -4)``."""
    made_width = None if width is None else Width(WidthKey(width[0]), float(width[1]))
    order = 1 if width is None else 2
    return Section(ByKind(kind, float(frequency_hz), made_width, float(gain_db), order))
