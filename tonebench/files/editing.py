"""Changes to one table of a preset's text through tomlkit: only values that differ are written anew."""

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

import tomlkit
from tomlkit.exceptions import TOMLKitError
from tomlkit.items import Array, Float, InlineTable, Integer, Trivia

from tonebench.core.kinds import parse_kind
from tonebench.errors import PresetError
from tonebench.files.keys import (
    REPEATED_TABLES,
    ROOT_KEYS,
    SINGLE_TABLES,
    WIDTH_KEYS,
    angle_from_degrees,
    degrees_text,
)
from tonebench.target.arithmetic import parse_target

# Keys whose value has several spellings; one that means the same stays as it was written.
_MEANINGS: dict[str, Callable[[str], object]] = {
    "kind": parse_kind,
    "arithmetic": lambda text: str(parse_target(text)),
    "section": str,
}


@dataclass(frozen=True, slots=True)
class Angle:
    """An angle that is written in degrees and must come back as the same radians."""

    angle_rad: float


def edited(text: str, table: str, values: Mapping[str, Any], *, is_repeated: bool) -> str:
    """Return a segment with its known keys set to these values; defaults that were never written stay unwritten.

    Raises
    ------
    PresetError
        If the segment is laid out in a way that cannot be edited.

    """
    try:
        return _edited(_with_width_renamed(text, values) if table == "section" else text, table, values, is_repeated)
    except (TOMLKitError, RecursionError) as error:
        raise PresetError(f"the layout of {table} cannot be edited without loss; save under another name") from error


def _edited(text: str, table: str, values: Mapping[str, Any], is_repeated: bool) -> str:
    document = tomlkit.parse(text)
    content: Any = document[table]
    if is_repeated:
        content = content[0]
    for key, default in {**SINGLE_TABLES, **REPEATED_TABLES}[table].items():
        value = values.get(key)
        if key not in content:
            if value is not None and value != default:
                content.add(key, _item(value))
        elif value is None:
            del content[key]
        else:
            _set(content, key, value)
    return tomlkit.dumps(document)


def _with_width_renamed(text: str, values: Mapping[str, Any]) -> str:
    """Give the line of the old width the new one's key, so that its place and comment are kept."""
    new = next((key for key in WIDTH_KEYS if values.get(key) is not None), None)
    found = re.findall(rf"^[ \t]*({'|'.join(WIDTH_KEYS)})[ \t]*=", text, re.MULTILINE)
    if new is None or len(found) != 1 or found[0] == new:
        return text
    return re.sub(rf"^([ \t]*){found[0]}([ \t]*=)", rf"\g<1>{new}\g<2>", text, count=1, flags=re.MULTILINE)


def _set(content: Any, key: str, value: Any) -> None:
    """Set a key that is there, in place as far as that goes."""
    if isinstance(value, Mapping) and isinstance(content[key], dict):
        _set_roots(content, key, value)
    elif isinstance(value, list) and isinstance(content[key], Array):
        _set_list(content[key], value)
    elif not _is_same(key, content[key], value):
        content[key] = _item(value)


def _set_roots(content: Any, key: str, value: Mapping[str, Any]) -> None:
    roots = content[key]
    if isinstance(roots, InlineTable) and (ROOT_KEYS.keys() & roots.keys()) != value.keys():
        table = tomlkit.inline_table()
        for part, one in value.items():
            table.append(part, _item(one))
        for part in roots.keys() - ROOT_KEYS.keys():
            table.append(part, roots[part])
        content[key] = table
        return
    for part in (ROOT_KEYS.keys() & roots.keys()) - value.keys():
        del roots[part]
    for part, one in value.items():
        if part in roots:
            _set(roots, part, one)
        else:
            roots[part] = _item(one)


def _set_list(items: Array, values: list[Any]) -> None:
    for index, value in enumerate(values):
        if index >= len(items):
            items.append(value)
        elif float(items[index]) != float(value):
            items[index] = value
    while len(items) > len(values):
        del items[len(items) - 1]


def _is_same(key: str, item: Any, value: Any) -> bool:
    if isinstance(value, Angle):
        degrees = Decimal(int(item)) if isinstance(item, Integer) else Decimal(item.as_string())
        return angle_from_degrees(degrees) == value.angle_rad
    if isinstance(value, bool) or isinstance(item, bool):
        return bool(isinstance(item, bool) and item == value)
    if key in _MEANINGS:
        meaning = _MEANINGS[key]
        return bool(meaning(str(item)) == meaning(value))
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
