"""What a name in a preset may hold: one line that cannot end a string or a comment of any exported language."""

import unicodedata

from tonebench.errors import InvalidValueError, must_be

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


def checked_name(name: str) -> str:
    """Return the name, or refuse it.

    Raises
    ------
    InvalidValueError
        With what is wrong with it.

    """
    complaint = complaint_about_name(name)
    if complaint:
        raise InvalidValueError(complaint)
    return name
