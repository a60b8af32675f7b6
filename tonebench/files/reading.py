"""From a preset's text to its value, with every complaint naming line and key."""

import contextlib
import difflib
import math
import re
from collections.abc import Callable, Mapping
from decimal import Decimal
from typing import Any, NoReturn

from tonebench.core.chain import LARGEST_SECTION_COUNT, Chain
from tonebench.core.hearing import Hearing
from tonebench.core.kinds import Kind, Width, WidthKey, allowed_widths, parse_kind
from tonebench.core.roots import NO_ROOTS, ConjugatePair, RealRoots, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.errors import InvalidValueError, PresetError, must_be
from tonebench.files.keys import (
    REPEATED_TABLES,
    ROOT_KEYS,
    SINGLE_TABLES,
    WIDTH_KEYS,
    angle_from_degrees,
)
from tonebench.files.segments import Segment, split_segments
from tonebench.files.toml_text import toml_values
from tonebench.session.names import complaint_about_name
from tonebench.session.preset import FORMAT_VERSION, Acceptance, ExportRequest, Preset
from tonebench.target.arithmetic import Overflow, Products, Rounding, Target, parse_format, parse_target

_REQUIRED: Any = object()
_LARGEST_WHOLE = 10**18  # far over any key's own limit, and short enough to be shown


class Reader:
    """One table of the file: typed access to its keys, and where they stand."""

    def __init__(self, file_name: str, segment: Segment | None, values: Mapping[str, Any], table: str) -> None:
        self.file_name = file_name
        self.segment = segment
        self.values = values
        self.table = table

    def refuse(self, key: str, message: str) -> NoReturn:
        """Raise with file, line and key."""
        line = 1 if self.segment is None else self.segment.line_of(key)
        raise PresetError(f"{self.file_name}: line {line}, {key}: {message}")

    def number(self, key: str, default: Any = _REQUIRED) -> Any:
        """Return a float; True is no number."""
        value = self._get(key, default, "a number")
        if value is default:
            return value
        if isinstance(value, bool) or not isinstance(value, int | Decimal):
            self.refuse(key, must_be(key, "a number", _shown(value)))
        return self.double(key, value)

    def whole(self, key: str, default: Any = _REQUIRED) -> Any:
        """Return an int."""
        value = self._get(key, default, "a whole number")
        if value is default:
            return value
        if isinstance(value, bool) or not isinstance(value, int):
            self.refuse(key, must_be(key, "a whole number", _shown(value)))
        if abs(value) > _LARGEST_WHOLE:
            self.refuse(key, f"{key} must be a whole number of at most 18 digits, got a longer one; shorten it")
        return value

    def double(self, key: str, value: int | Decimal) -> float:
        """Return a number as a double, or refuse what none can hold."""
        with contextlib.suppress(OverflowError):
            return float(value)
        return self.refuse(key, f"{key} must be a number of at most 300 digits, got a longer one; shorten it")

    def flag(self, key: str) -> bool:
        """Return true or false, false where it is left out."""
        value = self.values.get(key, False)
        if not isinstance(value, bool):
            self.refuse(key, must_be(key, "true or false", _shown(value)))
        return value

    def text(self, key: str, default: Any = _REQUIRED) -> Any:
        """Return a text."""
        value = self._get(key, default, "a text in quotes")
        if value is not default and not isinstance(value, str):
            self.refuse(key, must_be(key, "a text in quotes", _shown(value)))
        return value

    def name(self, name: str) -> str:
        """Return a name, or refuse it."""
        if complaint := complaint_about_name(name):
            self.refuse("name", complaint)
        return name

    def attempt(self, key: str, make: Callable[[], Any]) -> Any:
        """Run a constructor; if it refuses, name the key that its message starts with, or else this one."""
        try:
            return make()
        except InvalidValueError as error:
            message = str(error).removeprefix("section 1: ")
            first = message.split(" ", 1)[0]
            self.refuse(first if first in self.values else key, message)

    def _get(self, key: str, default: Any, what: str) -> Any:
        if key in self.values:
            return self.values[key]
        if default is _REQUIRED:
            self.refuse(key, f"{key} is missing in [{self.table}]; give {what}")
        return default


def _shown(value: Any) -> Any:
    """Return what a complaint shows; a whole number may be too long for Python to write out."""
    if isinstance(value, Decimal):
        return float(value)
    return math.inf if isinstance(value, int) and abs(value) > _LARGEST_WHOLE else value


def read_preset(text: str, file_name: str) -> tuple[Preset, tuple[str, ...]]:
    """Return the preset and one note per unknown key that looks like a slip.

    Raises
    ------
    PresetError
        With file, line, key, what it must be, what it was, and what to do.

    """
    values = toml_values(text, file_name)
    segments = split_segments(text)
    top = Reader(file_name, segments[0], values, "the top of the file")
    version = top.whole("tonebench")
    if version != FORMAT_VERSION:
        top.refuse("tonebench", must_be("tonebench", f"{FORMAT_VERSION}, the format's version", version))
    singles, repeated = _tables(file_name, segments, values)
    preset = _preset(singles, repeated)
    return preset, _slips(values)


def _tables(
    file_name: str, segments: list[Segment], values: Mapping[str, Any]
) -> tuple[dict[str, Reader], dict[str, list[Reader]]]:
    """Pair each table's values with its segment; a table must have a header of its own."""
    singles: dict[str, Reader] = {}
    repeated: dict[str, list[Reader]] = {}
    for table in SINGLE_TABLES:
        found = [one for one in segments if one.table == table]
        content = values.get(table, {})
        if not isinstance(content, dict) or (table in values and len(found) != 1):
            raise PresetError(f"{file_name}: {table} must be one table under the header [{table}]; write it so")
        singles[table] = Reader(file_name, found[0] if found else None, content, table)
    for table in REPEATED_TABLES:
        found = [one for one in segments if one.table == table and one.is_repeated]
        contents = values.get(table, [])
        if not isinstance(contents, list) or len(found) != len(contents):
            raise PresetError(f"{file_name}: each {table} must have a header [[{table}]] of its own; write it so")
        readers = zip(found, contents, strict=True)
        repeated[table] = [Reader(file_name, segment, content, table) for segment, content in readers]
    return singles, repeated


def _preset(singles: dict[str, Reader], repeated: dict[str, list[Reader]]) -> Preset:
    chain = _chain(singles["chain"], repeated["section"])
    build = singles["build"]
    hearing = singles["hearing"]
    rates = _numbers(build, "sample_rates_hz")
    preset = Preset(
        chain=chain,
        target=_target(singles["target"]),
        exports=tuple(_export(one) for one in repeated["export"]),
        acceptances=tuple(_acceptance(one) for one in repeated["accept"]),
        written_hearing=_hearing(hearing) if hearing.segment is not None else None,
    )
    made: Preset = build.attempt("sample_rates_hz", lambda: _with_rates(preset, rates))
    return made


def _with_rates(preset: Preset, rates: tuple[float, ...]) -> Preset:
    return Preset(preset.chain, preset.target, rates, preset.exports, preset.acceptances, preset.written_hearing)


def _chain(table: Reader, sections: list[Reader]) -> Chain:
    if len(sections) > LARGEST_SECTION_COUNT:
        sections[LARGEST_SECTION_COUNT].refuse(
            "section",
            must_be("the number of sections", f"at most {LARGEST_SECTION_COUNT}", len(sections), "leave some out"),
        )
    name = table.name(table.text("name"))
    rate_hz = table.number("sample_rate_hz")
    combine = table.text("combine", "series")
    gain_db = table.number("gain_db", 0.0)
    direct_gain_db = table.number("direct_gain_db", None)
    empty: Chain = table.attempt("combine", lambda: Chain(name, rate_hz, (), gain_db, combine, direct_gain_db))
    made = []
    for one in sections:
        section = _section(one)
        _check_at_rate(one, section, rate_hz)
        made.append(section)
    return empty.with_sections(made)


def _check_at_rate(table: Reader, section: Section, rate_hz: float) -> None:
    """Refuse what the sample rate cannot hold, while the section's line is at hand."""
    table.attempt("kind", lambda: Chain("", rate_hz, (section,)))


def _section(table: Reader) -> Section:
    kind: Kind = table.attempt("kind", lambda: parse_kind(table.text("kind")))
    made = _by_hand(table) if kind is Kind.FREE else _by_kind(table, kind)
    name = table.name(table.text("name", ""))
    polarity = table.whole("polarity", 1)
    delay = table.whole("delay", 0)
    is_bypassed = table.flag("bypass")
    section: Section = table.attempt("kind", lambda: Section(made, name, is_bypassed, polarity, delay))
    return section


def _by_kind(table: Reader, kind: Kind) -> ByKind:
    for key in ("poles", "zeros", "gain_at_hz"):
        if key in table.values:
            table.refuse(key, f'{key} belongs to a section of kind = "free"; leave it out of a {kind}')
    frequency_hz = table.number("frequency_hz")
    frequency_is = table.text("frequency_is", "peak")
    if frequency_is not in ("peak", "pole"):
        table.refuse("frequency_is", must_be("frequency_is", '"peak" or "pole"', frequency_is))
    order = table.whole("order", 2)
    gain_db = table.number("gain_db", 0.0)
    width = _width(table, kind)
    made: ByKind = table.attempt(
        "kind", lambda: ByKind(kind, frequency_hz, width, gain_db, order, frequency_is == "pole")
    )
    return made


def _width(table: Reader, kind: Kind) -> Width | None:
    keys = [key for key in WIDTH_KEYS if key in table.values]
    if len(keys) > 1:
        table.refuse(keys[1], f"one width is enough, got {' and '.join(keys)}; leave all but one out")
    if not keys:
        return None
    key = WidthKey(keys[0])
    if key not in allowed_widths(kind):
        choices = ", ".join(allowed_widths(kind))
        rule = f"left out: it has no meaning for a {kind}"
        table.refuse(key, must_be(key, rule, _shown(table.values[key]), f"give one of {choices}"))
    value = table.number(key)
    width: Width = table.attempt(key, lambda: Width(key, value))
    return width


def _by_hand(table: Reader) -> ByHand:
    for key in ("frequency_hz", "frequency_is", "order", *WIDTH_KEYS):
        if key in table.values:
            table.refuse(key, f"{key} has no meaning for a free section; give poles and zeros")
    gain_at_hz = table.number("gain_at_hz", None)
    gain_db = table.number("gain_db", 0.0)
    poles, zeros = _roots(table, "poles"), _roots(table, "zeros")
    made: ByHand = table.attempt("kind", lambda: ByHand(poles, zeros, gain_db, gain_at_hz))
    return made


def _roots(table: Reader, key: str) -> Roots:
    if key not in table.values:
        return NO_ROOTS
    content = table.values[key]
    rule = "{ radius = ..., angle_deg = ... } or { real = [...] }"
    if not isinstance(content, dict):
        table.refuse(key, must_be(key, rule, _shown(content)))
    if "real" in content:
        if "radius" in content or "angle_deg" in content:
            table.refuse(key, f"{key} must be {rule}, not both; leave one out")
        values = _number_list(table, key, content["real"])
        return table.attempt(key, lambda: RealRoots(values))  # type: ignore[no-any-return]
    for part in ("radius", "angle_deg"):
        value = content.get(part)
        if isinstance(value, bool) or not isinstance(value, int | Decimal):
            table.refuse(key, must_be(f"{part} of {key}", "a number", _shown(value)))
    angle_deg = Decimal(content["angle_deg"])
    if not angle_deg.is_finite() or not 0 <= angle_deg <= 180:
        table.refuse(key, must_be(f"angle_deg of {key}", "between 0 and 180", _shown(content["angle_deg"])))
    radius, angle = table.double(key, content["radius"]), angle_from_degrees(angle_deg)
    return table.attempt(key, lambda: ConjugatePair(radius, angle))  # type: ignore[no-any-return]


def _number_list(table: Reader, key: str, content: Any) -> tuple[float, ...]:
    if not isinstance(content, list):
        table.refuse(key, must_be(key, "a list of numbers in [ ]", _shown(content)))
    for one in content:
        if isinstance(one, bool) or not isinstance(one, int | Decimal):
            table.refuse(key, must_be(key, "a list of numbers in [ ]", _shown(one)))
    return tuple(table.double(key, one) for one in content)


def _numbers(table: Reader, key: str) -> tuple[float, ...]:
    return _number_list(table, key, table.values[key]) if key in table.values else ()


def _target(table: Reader) -> Target:
    if table.segment is None:
        return Target()
    base: Target = table.attempt("arithmetic", lambda: parse_target(table.text("arithmetic")))
    choices = {"rounding": Rounding, "products": Products, "overflow": Overflow}
    picked: dict[str, Any] = {}
    for key, sort in choices.items():
        value = table.text(key, None)
        known = [one.value for one in sort]
        if value is not None and value not in known:
            table.refuse(key, must_be(key, f"one of {', '.join(known)}", value))
        if value is not None:
            picked[key] = sort(value)
    accumulator_bits = table.whole("accumulator_bits", None)
    fused, flushing = table.flag("fused"), table.flag("flush_subnormals")
    target: Target = table.attempt(
        "arithmetic",
        lambda: Target(
            number_format=parse_format(str(base.number_format)),
            structure=base.structure,
            accumulator_bits=accumulator_bits,
            is_fused=fused,
            is_flushing_subnormals=flushing,
            **picked,
        ),
    )
    return target


def _export(table: Reader) -> ExportRequest:
    prefix = _checked_prefix(table, table.text("prefix", ""))
    to, file = table.text("to"), table.text("file")
    request: ExportRequest = table.attempt("file", lambda: ExportRequest(to, file, prefix))
    return request


def _checked_prefix(table: Reader, prefix: str) -> str:
    if prefix and not re.fullmatch(r"[A-Za-z][A-Za-z0-9_]{0,40}", prefix):
        rule = "a C identifier: a letter, then letters, digits and _, at most 41"
        table.refuse("prefix", must_be("prefix", rule, prefix))
    return prefix


def _acceptance(table: Reader) -> Acceptance:
    section = table.values.get("section", "")
    if isinstance(section, bool) or not isinstance(section, int | str):
        table.refuse("section", must_be("section", "a section's name or number", _shown(section)))
    up_to = table.number("up_to", None)
    if up_to is not None and math.isnan(up_to):
        table.refuse("up_to", must_be("up_to", "a number in the finding's unit", up_to, "or leave it out"))
    code, because = table.text("code"), table.text("because")
    accepted: Acceptance = table.attempt("code", lambda: Acceptance(code, because, str(section), up_to))
    return accepted


def _hearing(table: Reader) -> Hearing:
    keys = ("largest_gain_db", "largest_gain_hz", "worst_peak_db", "ring_s")
    return Hearing(*(table.number(key, None) for key in keys))


def _slips(values: Mapping[str, Any]) -> tuple[str, ...]:
    """Return a note for each unknown key that is close to a known one; unknown keys are kept."""
    notes = []
    known_tables = [*SINGLE_TABLES, *REPEATED_TABLES]
    for table, content in values.items():
        if table not in known_tables:
            notes += _slip(table, [*known_tables, "tonebench"], "")
        entries = content if isinstance(content, list) else [content]
        known = {**SINGLE_TABLES, **REPEATED_TABLES}.get(table, {})
        for number, entry in enumerate(entries, start=1):
            if isinstance(entry, dict) and known:
                where = f" in {table} {number}" if table in REPEATED_TABLES else f" in [{table}]"
                for key, value in entry.items():
                    notes += _slip(key, list(known), where) if key not in known else []
                    if key in ("poles", "zeros") and isinstance(value, dict):
                        for part in value:
                            notes += _slip(part, list(ROOT_KEYS), where) if part not in ROOT_KEYS else []
    return tuple(notes)


def _slip(key: str, known: list[str], where: str) -> list[str]:
    if key == "tonebench":
        return []
    near = difflib.get_close_matches(key, known, n=1, cutoff=0.75)
    return [f"{key}{where} is no key that tonebench knows and is ignored; did you mean {near[0]}?"] if near else []
