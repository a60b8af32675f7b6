"""From what people write to what a compiler reads: identifiers, and text that cannot leave its comment.

Names and notes of a preset are hostile until they have passed through here. What is not on the short list of harmless
characters never reaches generated code, whatever language it is for.
"""

import re
import unicodedata

from tonebench.errors import ExportError, must_be

LARGEST_PREFIX = 48
LARGEST_COMMENT = 100
_FALLBACK = "chain"
# No slash, star, backslash, quote, question mark (trigraphs) or angle bracket: nothing that opens or closes anything.
_HARMLESS = re.compile(r"[^A-Za-z0-9 .,:;()+=%#@&-]+")
_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9]*(?:_[A-Za-z0-9]+)*")

# Keywords of C99 to C23 and of C++ to C++20, with the operators' names.
# fmt: off
RESERVED_WORDS = frozenset(
    {
        "alignas", "alignof", "and", "asm", "auto", "bool", "break", "case", "catch", "char", "class", "compl",
        "concept", "const", "consteval", "constexpr", "constinit", "continue", "co_await", "co_return", "co_yield",
        "decltype", "default", "delete", "do", "double", "dynamic_cast", "else", "enum", "explicit", "export",
        "extern", "false", "final", "float", "for", "friend", "goto", "if", "import", "inline", "int", "long",
        "module", "mutable", "namespace", "new", "noexcept", "not", "nullptr", "operator", "or", "override",
        "private", "protected", "public", "register", "reinterpret_cast", "requires", "restrict", "return", "short",
        "signed", "sizeof", "static", "static_assert", "static_cast", "struct", "switch", "template", "this",
        "thread_local", "throw", "true", "try", "typedef", "typeid", "typename", "typeof", "union", "unsigned",
        "using", "virtual", "void", "volatile", "wchar_t", "while", "xor",
    }
)
# fmt: on


def default_prefix(chain_name: str) -> str:
    """Return an identifier made from a chain's name: ``Boathouse charger`` becomes ``boathouse_charger``.

    Accents are dropped, everything else that is no letter or digit becomes one underscore; a name without any letter
    or digit becomes ``chain``.
    """
    words = re.findall(r"[a-z0-9]+", _plain(chain_name[: 40 * LARGEST_PREFIX]).lower())
    made = "_".join(words)[:LARGEST_PREFIX].rstrip("_")
    if not made:
        return _FALLBACK
    if made[0].isdigit() or made in RESERVED_WORDS:
        made = f"{_FALLBACK}_{made}"[:LARGEST_PREFIX].rstrip("_")
    return made


def checked_prefix(prefix: str) -> str:
    """Return a prefix that the user gave, if every language can use it.

    Raises
    ------
    ExportError
        If it is no identifier, a reserved word, or too long.

    """
    rule = f"letters, digits and single underscores, from a letter on, at most {LARGEST_PREFIX} of them"
    if len(prefix) > LARGEST_PREFIX or _IDENTIFIER.fullmatch(prefix) is None:
        raise ExportError(must_be("prefix", rule, prefix, f"try {default_prefix(prefix)}"))
    if prefix in RESERVED_WORDS:
        raise ExportError(must_be("prefix", "no reserved word", prefix, f"try {default_prefix(prefix)}"))
    return prefix


def comment_text(text: str) -> str:
    """Return text that may stand in a comment or string of any language: one line, plain ASCII, no way out.

    What is left out is shown as one underscore; over 100 characters are cut.
    """
    plain = _HARMLESS.sub("_", _plain(text[: 40 * LARGEST_COMMENT]))
    plain = re.sub(r" {2,}", " ", plain).strip()
    return plain if len(plain) <= LARGEST_COMMENT else plain[: LARGEST_COMMENT - 3] + "..."


def _plain(text: str) -> str:
    """Return text with its accents dropped; what has no plain letter stays, for the caller to replace."""
    decomposed = unicodedata.normalize("NFKD", text)
    return "".join(letter for letter in decomposed if not unicodedata.combining(letter))
