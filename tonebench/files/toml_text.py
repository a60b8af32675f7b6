"""From a preset's text to plain TOML values: everything that can be wrong with the text itself is said here."""

import re
import tomllib
from decimal import Decimal, InvalidOperation
from typing import Any

from tonebench.errors import PresetError

_BYTE_ORDER_MARK = "\ufeff"


def toml_values(text: str, file_name: str) -> dict[str, Any]:
    """Return the values of a text; numbers with a point or an exponent are Decimal, exactly as written.

    Raises
    ------
    PresetError
        With file and line, if it is not TOML, or holds a number that no double can be.

    """
    if text.startswith(_BYTE_ORDER_MARK):
        raise PresetError(f"{file_name}: line 1: must not begin with a byte order mark; save it as UTF-8 without one")
    try:
        return tomllib.loads(text, parse_float=_decimal)
    except tomllib.TOMLDecodeError as error:
        raise PresetError(_syntax(file_name, text, str(error))) from error
    except RecursionError as error:
        raise PresetError(
            f"{file_name}: values must be nested a few levels at most; take the brackets apart"
        ) from error
    except _ExponentError as error:
        raise PresetError(_too_long(file_name, text, text.find(str(error)))) from error
    except ValueError as error:  # Python reads no whole number of more than 4300 digits
        digits = re.search(r"[0-9_]{4000,}", text)
        raise PresetError(_too_long(file_name, text, digits.start() if digits else 0)) from error


class _ExponentError(ValueError):
    """A number that even Decimal cannot hold; the message is the number."""


def _decimal(text: str) -> Decimal:
    try:
        return Decimal(text)
    except InvalidOperation as error:
        raise _ExponentError(text) from error


def _too_long(file_name: str, text: str, position: int) -> str:
    line = text.count("\n", 0, max(position, 0)) + 1
    return f"{file_name}: line {line}: a number must be of a size that can be computed with; shorten it"


def _syntax(file_name: str, text: str, message: str) -> str:
    """Put the line that tomllib names in front, as all other complaints have it."""
    reason, _, place = message.partition(" (at ")
    line = place.partition("line ")[2].partition(",")[0]
    number = line if line.isdecimal() else str(len(text.splitlines()) or 1)
    return f"{file_name}: line {number}: not valid TOML: {reason}; mend that line"
