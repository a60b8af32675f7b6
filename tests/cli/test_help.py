"""Every command explains itself."""

import shlex
from importlib import import_module
from pathlib import Path

import pytest

from tests.cli.running import assert_refused, tonebench
from tonebench.cli.parser import COMMANDS, parse


@pytest.mark.parametrize("command", list(COMMANDS))
def test_help_shows_an_example_in_80_columns(command: str, tmp_path: Path) -> None:
    """``--help`` leaves with 0, shows the example, and fits."""
    result = tonebench(command, "--help", cwd=tmp_path)
    assert result.returncode == 0
    assert "example:" in result.stdout
    assert max(len(line) for line in result.stdout.splitlines()) <= 80


@pytest.mark.parametrize("command", list(COMMANDS))
def test_example_parses(command: str) -> None:
    """The example in the help is accepted by the grammar of options, and is of that command."""
    example = shlex.split(import_module(f"tonebench.cli.commands.{command}").EXAMPLE)
    assert example[0] == "tonebench"
    assert parse(example[1:]).command == command


def test_general_help_names_every_command_in_80_columns(tmp_path: Path) -> None:
    """``tonebench --help`` lists all commands."""
    result = tonebench("--help", cwd=tmp_path)
    assert result.returncode == 0
    assert all(f"\n    {command}" in result.stdout for command in COMMANDS)
    assert max(len(line) for line in result.stdout.splitlines()) <= 80


def test_unknown_option_is_one_line_with_a_suggestion(tmp_path: Path) -> None:
    """A misspelt option is named, and the right one suggested."""
    assert_refused(tonebench("show", "boathouse", "--jsn", cwd=tmp_path), "--jsn", "did you mean --json?")


def test_misspelt_command_is_one_line_with_a_suggestion(tmp_path: Path) -> None:
    """A word that is no command, file or preset gets the nearest command."""
    assert_refused(tonebench("chekc", cwd=tmp_path), "chekc", "did you mean check?")


@pytest.mark.parametrize("command", ["play", "check", "show", "edit", "render", "export"])
def test_missing_preset_is_one_line(command: str, tmp_path: Path) -> None:
    """A command without its preset says what is missing."""
    assert_refused(tonebench(command, cwd=tmp_path), "PRESET")


def test_screen_without_a_terminal_is_refused_in_one_line(tmp_path: Path) -> None:
    """Opening the screen with a pipe for output names the commands that work without one."""
    assert_refused(tonebench(cwd=tmp_path), "terminal", "tonebench show")
