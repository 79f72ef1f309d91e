"""The README says what is there: its pictures, its commands, its sub-commands, its settings."""

from __future__ import annotations

import re
from pathlib import Path

from planner.commands.registry import COMMANDS
from planner.services.workspace import STORE_FILE, STORE_VARIABLE
from planner.ui.server import DEFAULT_PORT

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def test_every_picture_is_there() -> None:
    named = re.findall(r"[(\"](\.screenshots/[^)\"]+\.png)", README)
    assert len(named) >= 4
    assert [name for name in named if not (ROOT / name).is_file()] == []
    kept = {f".screenshots/{path.name}" for path in (ROOT / ".screenshots").glob("*.png")}
    assert kept == set(named)


def test_every_sub_command_is_described() -> None:
    described = {
        name for cell in re.findall(r"^\| (`.*?) \|", README, re.M) for name in re.findall(r"`(\w+)", cell)
    }
    assert {command.name for command in COMMANDS} <= described


def test_every_sub_command_in_an_example_exists() -> None:
    names = {command.name for command in COMMANDS}
    used = re.findall(r"^\$ \.venv/bin/python -m planner (?:--store \S+ )?(\w+)", README, re.M)
    assert used
    assert set(used) <= names


def test_settings_are_called_as_they_are() -> None:
    assert STORE_VARIABLE in README
    assert STORE_FILE in README
    assert f"localhost:{DEFAULT_PORT}" in README


def test_the_two_commands_are_those_of_continuous_integration() -> None:
    command = "bash .ci/prepare --tests && .venv/bin/python -m pytest"
    assert command in README
    assert command in (ROOT / ".ci" / "run").read_text(encoding="utf-8")
