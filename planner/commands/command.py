"""What a sub-command is, and the pieces that several share."""

from __future__ import annotations

import argparse
import math
from collections.abc import Callable, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, TypeAlias

if TYPE_CHECKING:
    from collections.abc import Iterator

    from planner.store.store import Store

Record: TypeAlias = Mapping[str, object]


@dataclass(frozen=True)
class Answer:
    """What a sub-command found out: one record or a row each, plus lines that only a person reads."""

    data: Record | Sequence[Record]
    notes: tuple[str, ...] = ()
    exit_status: int = 0


@dataclass(frozen=True)
class Command:
    """One sub-command: its word, one line of help, its arguments and what it does with them."""

    name: str
    summary: str
    add_arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], Answer]


def number(unit: str) -> Callable[[str], float]:
    """Return an argument type that reads a finite number and names the unit when it cannot."""

    def read(text: str) -> float:
        try:
            value = float(text)
        except ValueError:
            value = math.nan
        if not math.isfinite(value):
            raise argparse.ArgumentTypeError(f"{text!r} cannot be used, expected a number in {unit}")
        return value

    return read


@contextmanager
def opened_store(arguments: argparse.Namespace) -> Iterator[Store]:
    """Open the store that the command line names, and close it again."""
    # Imported here so that a command without a store need not wait for the database library.
    from planner.services.workspace import default_store_path, open_workspace

    given: Path | None = arguments.store
    store = open_workspace(given or default_store_path())
    try:
        yield store
    finally:
        store.close()
