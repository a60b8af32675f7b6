"""The house's own checks: lint, format, types, layers, sizes, and what an import drags along."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
SOURCES = sorted((ROOT / "tonebench").rglob("*.py"))
LARGEST_MODULE_LINES = 400


@pytest.mark.parametrize(
    "command",
    [
        ["-m", "ruff", "check", "."],
        ["-m", "ruff", "format", "--check", "."],
        ["-m", "mypy"],
        ["-c", "from importlinter.cli import lint_imports_command; lint_imports_command()"],
    ],
    ids=["lint", "format", "types", "layers"],
)
def test_checks_pass(command: list[str]) -> None:
    """Each tool is happy with the whole checkout, as configured in pyproject.toml."""
    done = subprocess.run(
        [sys.executable, *command], cwd=ROOT, capture_output=True, text=True, check=False, timeout=280
    )
    assert done.returncode == 0, done.stdout[-3000:] + done.stderr[-3000:]


@pytest.mark.parametrize("path", SOURCES, ids=lambda path: str(path.relative_to(ROOT)))
def test_module_has_a_docstring_and_at_most_400_lines(path: Path) -> None:
    """Every module opens with what lives there, and is short."""
    text = path.read_text(encoding="utf-8")
    assert ast.get_docstring(ast.parse(text))
    assert len(text.splitlines()) <= LARGEST_MODULE_LINES


def _loaded(code: str) -> set[str]:
    """Return the top-level modules that a fresh Python has loaded after some code."""
    program = f"import sys\n{code}\nprint(' '.join({{name.split('.')[0] for name in sys.modules}}))"
    done = subprocess.run(
        [sys.executable, "-c", program], cwd=ROOT, capture_output=True, text=True, check=True, timeout=60
    )
    return set(done.stdout.split())


def test_help_loads_nothing_heavy() -> None:
    """``tonebench --help`` is argparse and no more."""
    code = "from tonebench.cli.parser import build_parser\nbuild_parser(None).format_help()"
    assert not _loaded(code) & {"numpy", "textual", "scipy", "sounddevice", "soundfile", "tomlkit", "dataclasses"}


def test_shell_paints_without_numpy() -> None:
    """What the first picture needs is the drawing library alone."""
    loaded = _loaded("import tonebench.screen.start, tonebench.screen.app")
    assert "textual" in loaded
    assert not loaded & {"numpy", "scipy", "sounddevice", "soundfile"}


def test_nothing_on_the_screens_path_loads_scipy_or_sounddevice() -> None:
    """All that is loaded after the first picture, the engine's client included."""
    rooms = [
        ".".join(path.relative_to(ROOT).with_suffix("").parts)
        for path in SOURCES
        if path.parts[-2] in ("core", "target", "hum", "builds", "session", "files", "screen", "charts", "panels")
    ]
    loaded = _loaded("import tonebench.engine.client\n" + "\n".join(f"import {name}" for name in rooms))
    assert "textual" in loaded
    assert not loaded & {"scipy", "sounddevice"}
