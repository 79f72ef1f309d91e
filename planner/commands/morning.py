"""`morning`: who needs what, a row a driver, worst first."""

from __future__ import annotations

import argparse
from datetime import date

from planner.commands.command import Answer, Command, opened_store


def _day(text: str) -> date:
    try:
        return date.fromisoformat(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} cannot be used, expected a day as 2026-05-14") from None


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--date", metavar="D", type=_day, help="the day, as 2026-05-14 (default today)")


def _run(arguments: argparse.Namespace) -> Answer:
    from planner.services.morning import morning

    with opened_store(arguments) as store:
        rows = morning(store, day=arguments.date)
    return Answer(
        [{"driver": row.driver, "outcome": row.outcome, "reasons": list(row.reasons)} for row in rows]
    )


COMMAND = Command("morning", "who needs what this morning, a row a driver", _add_arguments, _run)
