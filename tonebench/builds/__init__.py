"""Chain and target to the text of a programming language or data format; no input or output."""

from tonebench.builds.languages import LANGUAGES, export_text
from tonebench.builds.naming import default_prefix

__all__ = ["LANGUAGES", "default_prefix", "export_text"]
