"""`backup FILE`: a consistent copy of the store, taken while the app may be running."""

from __future__ import annotations

import argparse
from pathlib import Path

from planner.commands.command import Answer, Command, opened_store


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", type=Path, help="where to write the copy; must not exist yet")


def _run(arguments: argparse.Namespace) -> Answer:
    target: Path = arguments.file
    with opened_store(arguments) as store:
        store.backup(target)
    return Answer({"backup": str(target), "size_bytes": target.stat().st_size})


COMMAND = Command("backup", "write a consistent copy of the store", _add_arguments, _run)
