"""`arrive ROUND`: the ways for one driver to a round, ranked as the Arrival page ranks them."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from planner.commands.command import Answer, Command, opened_store

if TYPE_CHECKING:
    from planner.season.arrival import Option
    from planner.services.arrival import Arrival


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("round", metavar="ROUND", help="the round's number, its name, or how it begins")
    parser.add_argument(
        "--driver", metavar="D", help="the driver's name, or how it begins (default the first by name)"
    )


def _run(arguments: argparse.Namespace) -> Answer:
    from planner.errors import NotFoundError
    from planner.services.arrival import arrival, find_round
    from planner.services.fluids import find_driver
    from planner.services.season import read_calendar
    from planner.services.workspace import now

    with opened_store(arguments) as store:
        calendar = read_calendar(store)
        if not calendar.drivers:
            raise NotFoundError("there are no drivers yet: add them on Team")
        asked = arguments.driver
        driver = calendar.drivers[0] if asked is None else find_driver(calendar, asked)
        found = arrival(store, driver, find_round(calendar, arguments.round, now(store)))
    fit = sum(option.feasible for option in found.options)
    return Answer(
        [_row(found, option) for option in found.options],
        notes=(
            f"{driver.name} to {found.round.name}: {fit} of {len(found.options)} ways keep every limit; "
            f"those first, by {found.order}.",
        ),
    )


def _row(found: Arrival, option: Option) -> dict[str, object]:
    """One way under the headless keys; what cannot be built has no figures."""
    arrives_on, outlook, costs = found.arrives_on(option), option.outlook, option.costs
    named = option.title[:1].upper() + option.title[1:]
    return {
        "arrive_on": arrives_on,
        "nights_away": None if costs is None else costs.nights_away,
        "flights": None if costs is None else costs.flights,
        "race_spo2_pct": None if outlook is None else outlook.race_spo2_pct.mean,
        "race_capacity_pct": None if outlook is None else outlook.race_capacity_pct.mean,
        "risk": None if outlook is None else outlook.risk,
        "clock_offset_h": None if outlook is None else outlook.clock_offset_h,
        "feasible": option.feasible,
        "why": [f"{named}: {option.difference[:1].lower()}{option.difference[1:]}", *option.why],
    }


COMMAND = Command("arrive", "the ways for one driver to a round, ranked", _add_arguments, _run)
