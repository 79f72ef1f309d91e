"""`drink DRIVER SESSION`: what to drink before, in the car and after, with the reasons."""

from __future__ import annotations

import argparse

from planner.commands.command import Answer, Command, opened_store

FIGURES = ("before_ml", "in_car_ml", "after_ml", "sodium_mg", "expected_mass_change_pct")


def _stints(text: str) -> int:
    try:
        return int(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} cannot be used, expected a whole number") from None


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("driver", metavar="DRIVER", help="the driver's name, or how it begins")
    parser.add_argument(
        "session",
        metavar="SESSION",
        help='a session of the round now or next, as "Race"; of another as "Round name/Race"; or its id',
    )
    parser.add_argument(
        "--stints", metavar="N", type=_stints, default=1, help="stints, the bottle filled between (default 1)"
    )


def _run(arguments: argparse.Namespace) -> Answer:
    from planner.services.fluids import find_driver, find_session, plan_session
    from planner.services.season import read_calendar
    from planner.services.workspace import now

    with opened_store(arguments) as store:
        calendar = read_calendar(store)
        at = now(store)
        driver = find_driver(calendar, arguments.driver)
        session = find_session(calendar, arguments.session, at)
        drinks = plan_session(store, calendar, session, now=at, stints=arguments.stints)
    row = next(each for each in drinks.rows if each.driver.id == driver.id)
    record: dict[str, object] = {
        "driver": driver.name,
        "session": f"{session.round.name}/{session.session.name}",
        "sweat_rate_l_per_h": row.plan.sweat_rate_l_per_h.best,
        "low_sweat_rate_l_per_h": row.plan.sweat_rate_l_per_h.low,
        "high_sweat_rate_l_per_h": row.plan.sweat_rate_l_per_h.high,
    }
    for name in FIGURES:
        figure = getattr(row.plan, name)
        record |= {name: figure.best, f"low_{name}": figure.low, f"high_{name}": figure.high}
    record["reasons"] = list(row.reasons)
    return Answer(record)


COMMAND = Command("drink", "a driver's drinks for a session", _add_arguments, _run)
