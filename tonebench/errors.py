"""Every error that tonebench raises on purpose lives here.

One root, so that the command line and the screen can turn any of them into one plain line; each subclass is also
the nearest builtin, so that library users can catch what they expect.
"""


class TonebenchError(Exception):
    """Root of all errors that carry a message written for the user."""


class InvalidValueError(TonebenchError, ValueError):
    """A number, name or combination that the data model refuses."""


class TypedLineError(InvalidValueError):
    """A typed line that does not parse or cannot be applied."""


class PresetError(TonebenchError, ValueError):
    """A preset file whose text or values are wrong; the message says where."""


class ClipError(TonebenchError, ValueError):
    """An audio file that cannot be used as a clip."""


class StorageError(TonebenchError, OSError):
    """A file or folder that cannot be found, read or written."""


class ExportError(TonebenchError, ValueError):
    """A chain and target that cannot be written in the language asked for."""


class EngineError(TonebenchError, RuntimeError):
    """The engine's process could not be started or no longer answers."""


def must_be(name: str, rule: str, got: object, remedy: str = "") -> str:
    """Compose the house wording: *name* must be *rule*, got *value*; then what to do."""
    shown = repr(got)
    if len(shown) > 80:
        shown = shown[:77] + "..."
    line = f"{name} must be {rule}, got {shown}"
    return f"{line}; {remedy}" if remedy else line
