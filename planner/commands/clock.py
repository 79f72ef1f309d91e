"""`clock ZONES`: the body clock after a flight, a row a day, with the light to seek and to avoid."""

from __future__ import annotations

import argparse

from planner.commands.command import Answer, Command, number
from planner.errors import InputError

CAUTION = (
    "Mean rates without treatment; people differ. Times are the local wall clock. The physician advises."
)
MAY_REVERSE = "Over 8 zones east the clock may run the other way by itself."
SMALL = "Below 3 zones the published table ends: its windows carried on."
LARGEST_ZONES = 14.0


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "zones_east_h", metavar="ZONES", type=number("hours, east positive"),
        help="time zones crossed [h], east positive: 8 or -9",
    )  # fmt: skip
    parser.add_argument(
        "--wake", metavar="HH:MM", default="07:00", help="habitual waking before the flight (default 07:00)"
    )


def _run(arguments: argparse.Namespace) -> Answer:
    # Imported here: numpy is not needed to print a usage line.
    from planner.physiology.body_clock import MAY_REVERSE_FROM_ZONES, clock_days
    from planner.season.clock_course import as_clock, clock_hours

    zones: float = arguments.zones_east_h
    if not -LARGEST_ZONES <= zones <= LARGEST_ZONES:
        raise InputError("ZONES", zones, f"{-LARGEST_ZONES:g} to {LARGEST_ZONES:g} h, east positive")
    days = clock_days(zones, clock_hours(arguments.wake, "--wake"))
    rows = [
        {
            "day": d.day,
            "offset_h": d.offset_h,
            "seek_from": as_clock(d.seek_from_h),
            "seek_to": as_clock(d.seek_to_h),
            "avoid_from": as_clock(d.avoid_from_h),
            "avoid_to": as_clock(d.avoid_to_h),
        }
        for d in days
    ]
    notes = [f"Day 1 is the day of arrival; adapted on day {len(rows) + 1}." if rows else "No zone crossed."]
    if days and days[0].offset_h > MAY_REVERSE_FROM_ZONES:
        notes.append(MAY_REVERSE)
    if days and abs(days[0].offset_h) < 3.0:
        notes.append(SMALL)
    return Answer(rows, notes=(*notes, CAUTION))


COMMAND = Command("clock", "the body clock after a flight and the light that moves it", _add_arguments, _run)
