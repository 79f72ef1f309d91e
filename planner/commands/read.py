"""`read FILE`: imports a file of readings."""

from __future__ import annotations

import argparse
from pathlib import Path

from planner.commands.command import Answer, Command, opened_store
from planner.errors import InputError


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", type=Path, help="readings as CSV")


def _run(arguments: argparse.Namespace) -> Answer:
    from planner.services.importing import import_readings
    from planner.services.workspace import now

    path: Path = arguments.file
    try:
        data = path.read_bytes()
    except OSError as error:
        raise InputError("FILE", str(path), f"a file that can be read ({error.strerror})") from None
    with opened_store(arguments) as store:
        report = import_readings(store, data, path.name, by="command line", now=now(store))
    record = {
        "taken": report.taken,
        "already_there": report.already_there,
        "refused": report.refused_lines,
        "refusals": [str(each) for each in report.refused],
    }
    return Answer(record)


COMMAND = Command("read", "import readings from a CSV file", _add_arguments, _run)
