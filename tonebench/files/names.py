"""What a name in a preset may hold: one line that cannot end a string or a comment of any exported language."""

import re
import unicodedata
from typing import TYPE_CHECKING

from tonebench.errors import must_be

if TYPE_CHECKING:
    from tonebench.files.reading import Reader

LONGEST_NAME = 80


def complaint_about_name(name: str) -> str:
    """Return what is wrong with a name, or an empty text."""
    if len(name) > LONGEST_NAME:
        return must_be("name", f"at most {LONGEST_NAME} characters", name)
    if '"' in name or "*/" in name or "/*" in name:
        return must_be("name", 'without double quotes, "/*" and "*/"', name, "choose another name")
    for one in name:
        # Cc: control characters, newlines among them. Cf: direction marks and other invisible ones.
        if unicodedata.category(one) in ("Cc", "Cf", "Cs", "Zl", "Zp"):
            return must_be("name", "one line of visible characters", name, f"remove {one!r}")
    return ""


def check_name(table: "Reader", key: str, name: str) -> str:
    """Return the name, or refuse it with its line."""
    complaint = complaint_about_name(name)
    if complaint:
        table.refuse(key, complaint)
    return name


def check_prefix(table: "Reader", key: str, prefix: str) -> str:
    """Return an export's prefix, or refuse it with its line."""
    if prefix and not re.fullmatch(r"[A-Za-z][A-Za-z0-9_]{0,40}", prefix):
        table.refuse(key, must_be(key, "a C identifier: a letter, then letters, digits and _, at most 41", prefix))
    return prefix
