"""From a preset's value to its text, keeping what people wrote.

Comments, unknown keys and the form of every number that has not changed survive byte for byte; tomlkit edits one
table at a time, and tables are added, removed and put in order as whole segments.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

import tomlkit
from tomlkit.items import Float, InlineTable, Table, Trivia

from tonebench.core.chain import Chain
from tonebench.core.roots import ConjugatePair, Roots
from tonebench.core.section import ByHand, ByKind, Section
from tonebench.errors import PresetError
from tonebench.files.caution import caution_lines, is_caution, rounded_hearing
from tonebench.files.keys import REPEATED_TABLES, SINGLE_TABLES, angle_from_degrees, degrees_text, plain_number
from tonebench.files.reading import read_preset
from tonebench.files.segments import Segment, split_segments
from tonebench.session.preset import FORMAT_VERSION, Acceptance, ExportRequest, Preset

_NEW_TEXT = f"tonebench = {FORMAT_VERSION}                      # version of the format\n"
_ORDER = ("", "chain", "section", "target", "build", "export", "accept", "hearing")


@dataclass(frozen=True, slots=True)
class Angle:
    """An angle that is written in degrees and must come back as the same radians."""

    angle_rad: float


def preset_text(preset: Preset, like: str | None = None) -> str:
    """Return the text of a preset.

    Parameters
    ----------
    preset : Preset
        Its hearing numbers are computed here, whatever ``written_hearing`` says.
    like : str, optional
        The text as it stands in the file; what has not changed is kept.

    Raises
    ------
    PresetError
        If ``like`` cannot be edited without losing something.

    """
    segments = split_segments(_NEW_TEXT if like is None else like)
    old = None if like is None else read_preset(like, "the file")[0]
    result = [segment.text for segment in segments if segment.table not in _ORDER[1:]]
    head, others = result[0], result[1:]
    parts = [head]
    parts += [_single("chain", _chain_values(preset.chain), segments)]
    parts += _repeated("section", preset.chain.sections, old.chain.sections if old else (), segments)
    parts += [_single("target", _target_values(preset), segments)]
    if preset.build_rates_hz or any(one.table == "build" for one in segments):
        rates = [plain_number(rate_hz) for rate_hz in preset.build_rates_hz]
        parts += [_single("build", {"sample_rates_hz": rates}, segments)]
    parts += _repeated("export", preset.exports, old.exports if old else (), segments)
    parts += _repeated("accept", preset.acceptances, old.acceptances if old else (), segments)
    parts += [*others, _hearing(preset.chain, segments)]
    text = "".join(part if part.endswith("\n") or not part else part + "\n" for part in parts)
    _verify(preset, text)
    return text


def _verify(preset: Preset, text: str) -> None:
    again, _ = read_preset(text, "the preset")
    same = (
        again.chain == preset.chain
        and again.target == preset.target
        and again.build_rates_hz == preset.build_rates_hz
        and again.exports == preset.exports
        and again.acceptances == preset.acceptances
    )
    if not same:
        raise PresetError("this file's layout cannot be edited without loss; save under another name")


def _single(table: str, values: Mapping[str, Any], segments: list[Segment]) -> str:
    found = [one for one in segments if one.table == table]
    text = found[0].text if found else f"\n[{table}]\n"
    return _edited(text, table, values, is_repeated=False)


def _repeated(table: str, new: Sequence[Any], old: Sequence[Any], segments: list[Segment]) -> list[str]:
    """Return the text of each entry, built on the segment of the old entry that it continues."""
    found = [one.text for one in segments if one.table == table]
    texts = []
    for entry, index in zip(new, _continued(new, old), strict=True):
        text = f"\n[[{table}]]\n" if index is None else found[index]
        values = _entry_values(entry)
        texts.append(
            text if index is not None and old[index] == entry else _edited(text, table, values, is_repeated=True)
        )
    return texts


def _continued(new: Sequence[Any], old: Sequence[Any]) -> list[int | None]:
    """Pair each new entry with an old one: first the equal ones, then by kind and name, then in order."""
    free = list(range(len(old)))
    pairs: list[int | None] = [None] * len(new)
    tests = (lambda a, b: a == b, _is_alike, lambda a, b: type(a) is type(b) and len(new) == len(old))
    for is_same in tests:
        for position, entry in enumerate(new):
            if pairs[position] is not None:
                continue
            match = next((index for index in free if is_same(entry, old[index])), None)
            if match is not None:
                pairs[position] = match
                free.remove(match)
    return pairs


def _is_alike(one: Any, other: Any) -> bool:
    if isinstance(one, Section) and isinstance(other, Section):
        return one.kind == other.kind and (one.name == other.name or bool(one.name) != bool(other.name))
    if isinstance(one, ExportRequest) and isinstance(other, ExportRequest):
        return one.file == other.file
    return isinstance(one, Acceptance) and isinstance(other, Acceptance) and one.code == other.code


def _edited(text: str, table: str, values: Mapping[str, Any], *, is_repeated: bool) -> str:
    """Return a segment with its known keys set to these values; defaults that were never written stay unwritten."""
    document = tomlkit.parse(text)
    content: Any = document[table][0] if is_repeated else document[table]
    known = {**SINGLE_TABLES, **REPEATED_TABLES}[table]
    for key, default in known.items():
        value = values.get(key)
        is_default = value is None or value == default
        if key not in content:
            if not is_default:
                _put(content, key, value)
        elif value is None and default is None:
            del content[key]
        elif not _is_same(content[key], default if value is None else value):
            content[key] = _item(default if value is None else value)
    return tomlkit.dumps(document)


def _put(content: Table, key: str, value: Any) -> None:
    content.add(key, _item(value))


def _is_same(item: Any, value: Any) -> bool:
    if isinstance(value, Mapping):
        plain = dict(item) if isinstance(item, dict) else {}
        return all(key in plain and _is_same(plain[key], one) for key, one in value.items()) and not (
            {"radius", "angle_deg", "real"} & (plain.keys() - value.keys())
        )
    if isinstance(value, Angle):
        return angle_from_degrees(Decimal(item.as_string())) == value.angle_rad
    if isinstance(value, list):
        return isinstance(item, list) and [float(one) for one in item] == [float(one) for one in value]
    if isinstance(value, bool) or isinstance(item, bool):
        return bool(item is value or (isinstance(item, bool) and item == value))
    return bool(item == value)


def _item(value: Any) -> Any:
    if isinstance(value, Mapping):
        table: InlineTable = tomlkit.inline_table()
        for key, one in value.items():
            table.append(key, _item(one))
        return table
    if isinstance(value, Angle):
        text = degrees_text(value.angle_rad)
        return Float(float(text), Trivia(), text)
    return tomlkit.item(value)


def _entry_values(entry: Any) -> dict[str, Any]:
    if isinstance(entry, Section):
        return _section_values(entry)
    if isinstance(entry, ExportRequest):
        return {"to": entry.to, "file": entry.file, "prefix": entry.prefix}
    return {"code": entry.code, "section": entry.section, "up_to": entry.up_to, "because": entry.because}


def _chain_values(chain: Chain) -> dict[str, Any]:
    return {
        "name": chain.name,
        "sample_rate_hz": plain_number(chain.sample_rate_hz),
        "gain_db": chain.gain_db,
        "combine": chain.combine,
        "direct_gain_db": chain.direct_gain_db,
    }


def _section_values(section: Section) -> dict[str, Any]:
    made = section.made
    values: dict[str, Any] = {
        "name": section.name,
        "kind": section.kind.value,
        "bypass": section.is_bypassed,
        "polarity": section.polarity,
        "delay": section.delay_samples,
        "gain_db": made.gain_db,
    }
    if isinstance(made, ByKind):
        values["frequency_hz"] = plain_number(made.frequency_hz)
        values["frequency_is"] = "pole" if made.is_pole_frequency else "peak"
        values["order"] = made.order
        if made.width is not None:
            values[made.width.key.value] = plain_number(made.width.value)
        return values
    return {**values, **_hand_values(made)}


def _hand_values(made: ByHand) -> dict[str, Any]:
    return {
        "gain_at_hz": made.gain_at_hz,
        "poles": _root_values(made.poles),
        "zeros": _root_values(made.zeros),
    }


def _root_values(roots: Roots) -> dict[str, Any] | None:
    if isinstance(roots, ConjugatePair):
        return {"radius": roots.radius, "angle_deg": Angle(roots.angle_rad)}
    return {"real": list(roots.values)} if roots.values else None


def _target_values(preset: Preset) -> dict[str, Any]:
    target = preset.target
    return {
        "arithmetic": str(target),
        "accumulator_bits": target.accumulator_bits,
        "rounding": target.rounding.value,
        "products": target.products.value,
        "overflow": target.overflow.value,
        "fused": target.is_fused,
        "flush_subnormals": target.is_flushing_subnormals,
    }


def _hearing(chain: Chain, segments: list[Segment]) -> str:
    """Return the hearing table under its caution; comments that are not the caution are kept."""
    numbers = rounded_hearing(chain)
    values = {key: getattr(numbers, key) for key in SINGLE_TABLES["hearing"]}
    found = [one for one in segments if one.table == "hearing"]
    lines = list(found[0].lines) if found else ["\n", "[hearing]\n"]
    header = next(index for index, line in enumerate(lines) if line.lstrip().startswith("["))
    kept = [line for line in lines[:header] if not is_caution(line)]
    return _edited("".join([*kept, *caution_lines(numbers), *lines[header:]]), "hearing", values, is_repeated=False)
