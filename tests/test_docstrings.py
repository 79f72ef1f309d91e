"""The docstring of every public formula is a contract: it matches the signature, and its examples run."""

from __future__ import annotations

import doctest
import importlib
import inspect
import pkgutil
import re
from collections.abc import Callable

import pytest

import planner.physiology

MODULES = [
    importlib.import_module(f"planner.physiology.{found.name}")
    for found in pkgutil.iter_modules(planner.physiology.__path__)
]
FUNCTIONS = [
    function
    for module in MODULES
    for name, function in inspect.getmembers(module, inspect.isfunction)
    if not name.startswith("_") and function.__module__ == module.__name__
]
SECTIONS = ("Parameters", "Returns", "Raises", "Valid", "Source", "Example")
KINDS = ("published", "from memory", "computed", "judgement", "common practice")


def sections_of(docstring: str) -> dict[str, list[str]]:
    """The lines of each section, indentation kept; the text before the first one is under ''."""
    found: dict[str, list[str]] = {"": []}
    current = ""
    for line in docstring.splitlines():
        heading = re.fullmatch(r"([A-Z][a-z]+):", line)
        if heading:
            current = heading[1]
            assert current not in found, f"section {current} stands twice"
            found[current] = []
        else:
            found[current].append(line)
    return found


def parameters_of(lines: list[str]) -> dict[str, str]:
    """Documented parameters and what is said of each, continuation lines joined."""
    found: dict[str, str] = {}
    name = ""
    for line in lines:
        start = re.fullmatch(r" {4}(\w+): (.*)", line)
        if start:
            name = start[1]
            found[name] = start[2]
        elif line.strip():
            assert name, f"text before the first parameter: {line!r}"
            found[name] += " " + line.strip()
    return found


def check_docstring(function: Callable[..., object]) -> None:
    """Assert that a docstring keeps the layout laid down in DEVELOPERS.md."""
    docstring = inspect.getdoc(function)
    assert docstring, "no docstring"
    summary, *rest = docstring.splitlines()
    assert summary.endswith("."), "the summary is one line and ends with a full stop"
    assert not rest or not rest[0].strip(), "the summary is followed by an empty line"

    sections = sections_of(docstring)
    order = [name for name in sections if name]
    unknown = set(order) - set(SECTIONS)
    assert not unknown, f"unknown sections {unknown}"
    assert order == [name for name in SECTIONS if name in order], f"sections out of order: {order}"

    signature = list(inspect.signature(function).parameters)
    documented = parameters_of(sections.get("Parameters", []))
    assert list(documented) == signature, "documented parameters differ from the signature"
    for name, text in documented.items():
        assert re.search(r"\[[^\]]+\]", text), f"no [unit] for {name}"

    for name in ("Returns", "Valid", "Source"):
        assert "".join(sections.get(name, [])).strip(), f"no {name}"
    source = " ".join(sections["Source"]).lower()
    assert any(kind in source for kind in KINDS), f"Source says none of {', '.join(KINDS)}"

    code = inspect.getsource(function)
    if "raise " in code or "checked(" in code:
        assert "".join(sections.get("Raises", [])).strip(), "raises something and does not say so"


def test_there_is_something_to_check() -> None:
    assert len(FUNCTIONS) >= 15


@pytest.mark.parametrize(
    "function", FUNCTIONS, ids=lambda f: f"{f.__module__.rsplit('.', 1)[-1]}.{f.__name__}"
)
def test_docstring(function: Callable[..., object]) -> None:
    check_docstring(function)


@pytest.mark.parametrize("module", MODULES, ids=lambda m: m.__name__.rsplit(".", 1)[-1])
def test_examples_run(module) -> None:
    failed, _ = doctest.testmod(module)
    assert failed == 0


def test_every_formula_of_air_and_blood_has_an_example() -> None:
    chosen = ("air", "oxygen", "blood", "chain", "capacity")
    for function in FUNCTIONS:
        if function.__module__.rsplit(".", 1)[-1] in chosen:
            assert ">>> " in str(inspect.getdoc(function)), function.__name__


GOOD = """Pressure of something.

Parameters:
    elevation_m: elevation [m], scalar
        or array.
Returns:
    Pressure [hPa].
Raises:
    InputError: out of range.
Valid:
    0 to 9000 m.
Source:
    Somebody 1999 (published).
"""


def documented_by(docstring: str) -> Callable[..., object]:
    """A function with this docstring, for showing that the check can fail."""

    def example(elevation_m: float) -> float:
        if elevation_m < 0.0:
            raise ValueError
        return elevation_m

    example.__doc__ = docstring
    return example


def test_a_good_docstring_passes() -> None:
    check_docstring(documented_by(GOOD))


@pytest.mark.parametrize(
    ("was", "becomes", "message"),
    [
        ("something.", "something", "full stop"),
        ("elevation_m: ", "height_m: ", "differ from the signature"),
        (" [m]", "", "no .unit. for elevation_m"),
        ("Valid:\n    0 to 9000 m.\n", "", "no Valid"),
        ("Source:\n    Somebody 1999 (published).\n", "", "no Source"),
        (" (published)", "", "Source says none of"),
        ("Raises:\n    InputError: out of range.\n", "", "does not say so"),
        ("Returns:", "Gives:", "unknown sections"),
        ("Returns:\n    Pressure [hPa].\n", "", "no Returns"),
    ],
)
def test_a_poor_docstring_is_found(was: str, becomes: str, message: str) -> None:
    assert was in GOOD
    with pytest.raises(AssertionError, match=message):
        check_docstring(documented_by(GOOD.replace(was, becomes)))
