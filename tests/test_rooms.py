"""The rooms of the house: who may import whom, and that linter and type checker have nothing to say."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PAGES = sorted((ROOT / "pages").glob("*.py"))

# A page reads widgets, calls a service and draws: it needs the screens' toolbox, the services, the charts,
# the records that they hand over, the words and units of the edge, and the errors that it shows.
FOR_PAGES = (
    "streamlit",
    "pandas",
    "planner.ui",
    "planner.services",
    "planner.charts",
    "planner.season.model",
    "planner.monitoring.model",
    "planner.hydration.model",
    "planner.wording",
    "planner.units",
    "planner.errors",
)


def imported_modules(source: str) -> list[str]:
    """Every absolute import of a module, as dotted names; relative ones begin with a dot."""
    found = []
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            found += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            module = "." * node.level + (node.module or "")
            # `from planner.season import model` imports planner.season.model.
            prefix = module if module.endswith(".") else f"{module}."
            found += [prefix + alias.name for alias in node.names]
    return found


def foreign_to_pages(source: str) -> list[str]:
    """The imports that a page may not have."""
    return [
        name
        for name in imported_modules(source)
        if name.split(".")[0] not in sys.stdlib_module_names
        and not any(name == known or name.startswith(f"{known}.") for known in FOR_PAGES)
    ]


def run(*command: str) -> subprocess.CompletedProcess[str]:
    """A tool of this environment, run at the root of the checkout."""
    return subprocess.run(
        [sys.executable, *command], cwd=ROOT, capture_output=True, text=True, check=False, timeout=600
    )


def test_there_are_pages() -> None:
    assert PAGES


@pytest.mark.parametrize("page", PAGES, ids=lambda path: path.name)
def test_page_imports_only_what_a_page_needs(page: Path) -> None:
    assert foreign_to_pages(page.read_text(encoding="utf-8")) == []


@pytest.mark.parametrize(
    ("source", "foreign"),
    [
        ("import streamlit as st\nfrom datetime import UTC\nimport pandas", []),
        ("from planner.ui.page import start_page\nfrom planner.season.model import Place", []),
        ("from planner.season import model\nfrom planner import units", []),
        ("from planner.store.store import Store", ["planner.store.store.Store"]),
        ("import sqlalchemy", ["sqlalchemy"]),
        ("import altair as alt", ["altair"]),
        ("from planner.physiology.air import site_pressure", ["planner.physiology.air.site_pressure"]),
        ("def late():\n    import numpy", ["numpy"]),
        ("from . import season", [".season"]),
        ("from planner.season.search import best", ["planner.season.search.best"]),
        ("from planner.unitsx import y", ["planner.unitsx.y"]),
    ],
)
def test_a_foreign_import_is_found(source: str, foreign: list[str]) -> None:
    assert foreign_to_pages(source) == foreign


def test_import_contracts_hold() -> None:
    done = run("-c", "import sys; from importlinter.cli import lint_imports; sys.exit(lint_imports())")
    assert done.returncode == 0, done.stdout + done.stderr
    assert "0 broken" in done.stdout


def test_linter_has_nothing_to_say() -> None:
    done = run("-m", "ruff", "check", ".")
    assert done.returncode == 0, done.stdout + done.stderr


def test_type_checker_has_nothing_to_say() -> None:
    done = run("-m", "mypy")
    assert done.returncode == 0, done.stdout + done.stderr
