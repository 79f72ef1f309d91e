"""The ways to a round in words: what each gives and costs, its days, the first line of the page."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import datetime
from itertools import groupby

from planner.charts.arrival import KIND_STYLES
from planner.season.arrival import Option
from planner.season.clock_course import as_clock
from planner.season.constraints import HIGH_FROM_M
from planner.season.model import Leg, Place
from planner.services.arrival import Arrival
from planner.services.arrival_choice import is_planned
from planner.services.arrival_days import PlanDay
from planner.wording import (
    DASH,
    UnitChoice,
    clock,
    counted,
    day,
    day_and_clock,
    elevation,
    number,
    per_cent,
    per_cent_range,
    zone_name,
)


def headline(found: Arrival) -> str:
    """How this driver should reach this round, in one sentence."""
    best = found.options[0]
    who = f"{found.driver.name} to {found.round.name}"
    if not best.feasible:
        return f"{who}: no way keeps every limit. Nearest to them: {titled(found, best)}."
    outlook, costs = best.outlook, best.costs
    if outlook is None or costs is None:
        return f"{who}: {titled(found, best)}."
    return (
        f"{who}: {titled(found, best)}. {counted(costs.nights_away, 'night')} away, "
        f"{per_cent(outlook.race_spo2_pct.mean)} on race morning "
        f"({per_cent_range(outlook.race_spo2_pct.low, outlook.race_spo2_pct.high)})."
    )


def titled(found: Arrival, option: Option) -> str:
    """A way's title; the usual plan also says what it is."""
    if option.kind != "usual plan":
        return option.title
    on = found.arrives_on(option)
    arrives = "" if on is None else f", arriving {day(on)}"
    if is_planned(found, option):
        return f"as planned now{arrives}"
    return f"a plain trip{arrives}"


def planned_words(found: Arrival) -> str:
    """What is planned now, when that is not the way in the first line."""
    planned = next((option for option in found.options if is_planned(found, option)), None)
    if planned is None:
        return "Nothing is planned for this round yet."
    if planned is found.options[0] or planned.outlook is None or planned.costs is None:
        return ""
    place, on = found.options.index(planned) + 1, found.arrives_on(planned)
    arrives = "" if on is None else f"arriving {day(on)}, "
    return (
        f"Planned now: {arrives}{counted(planned.costs.nights_away, 'night')} away, "
        f"{per_cent(planned.outlook.race_spo2_pct.mean)} on race morning; number {place} of "
        f"{len(found.options)}."
    )


def against_the_plan(found: Arrival, option: Option) -> str:
    """What sets a way apart from what is planned; nothing to say of that itself."""
    return "" if is_planned(found, option) else option.difference


def round_words(found: Arrival) -> str:
    """When the round is, and since when the driver is free for it."""
    zone, point = found.venue.zone, found.point
    since = day_and_clock(found.gap.free_from, found.gap.place.zone)
    return (
        f"First session {day_and_clock(point.first_session_at, zone)}, race "
        f"{day_and_clock(point.race_at, zone)} {zone_name(zone, point.race_at)}. "
        f"Free in {found.gap.place.name} from {since}, after {found.gap.since}."
    )


def spread_words(found: Arrival) -> str:
    """How much the ways differ on race morning, beside how much one reading does."""
    given = [option.outlook.race_spo2_pct for option in found.options if option.outlook is not None]
    if len(given) < 2:
        return ""
    means = [each.mean for each in given]
    widest = max((each.high - each.low) / 2.0 for each in given)
    return (
        f"Between the ways lie {number(max(means) - min(means), 1)} points of SpO2 on race morning; a single "
        f"reading strays by ± {number(widest, 1)} points. The bar of each is the range of single readings."
    )


def way_words(option: Option) -> str:
    """A way with what it gives and costs, for the hint on its mark."""
    outlook, costs = option.outlook, option.costs
    if outlook is None or costs is None:
        return option.title
    return (
        f"{option.title}: {per_cent(outlook.race_spo2_pct.mean, 1)}, "
        f"{counted(costs.nights_away, 'night')} away, {counted(costs.flights, 'flight')}"
    )


def choice_words(rank: int, option: Option) -> str:
    """A way in the list to pick from."""
    fits = "" if option.feasible else " (misses a limit)"
    return f"{rank}  {KIND_STYLES[option.kind].glyph} {option.title}{fits}"


def way_row(found: Arrival, rank: int, option: Option) -> list[str]:
    """A way that can be built, as a row to compare."""
    outlook, costs = option.outlook, option.costs
    if outlook is None or costs is None:
        return [option.title, *[DASH] * 8]
    on = found.arrives_on(option)
    return [
        f"{rank}  {KIND_STYLES[option.kind].glyph} {titled(found, option)}",
        against_the_plan(found, option),
        DASH if on is None else day(on),
        str(costs.nights_away),
        str(costs.flights),
        f"{number(costs.travel_h)} h",
        f"{per_cent(outlook.race_spo2_pct.mean, 1)} "
        f"({per_cent_range(outlook.race_spo2_pct.low, outlook.race_spo2_pct.high)})",
        per_cent(outlook.race_capacity_pct.mean),
        outlook.risk,
        clock_words(outlook.clock_offset_h),
    ]


WAY_HEAD = (
    "way",
    "against the usual plan",
    "arrives",
    "nights away",
    "flights",
    "travel",
    "SpO2 race morning",
    "aerobic capacity",
    "risk class",
    "body clock off",
)


def clock_words(offset_h: float) -> str:
    """How far the body clock is off, whichever way."""
    return f"{number(abs(offset_h), 1)} h" if abs(offset_h) >= 0.05 else "0 h"


def given_rows(option: Option, units: UnitChoice) -> list[list[str]]:
    """What a way gives and costs, a row each."""
    outlook, costs = option.outlook, option.costs
    if outlook is None or costs is None:
        return []
    first, race, capacity = (
        outlook.first_session_spo2_pct,
        outlook.race_spo2_pct,
        outlook.race_capacity_pct,
    )
    landed = outlook.hours_since_landing
    return [
        ["SpO2, first session", f"{per_cent(first.mean, 1)} ({per_cent_range(first.low, first.high)})"],
        ["SpO2, race morning", f"{per_cent(race.mean, 1)} ({per_cent_range(race.low, race.high)})"],
        [
            "aerobic capacity, race morning",
            f"{per_cent(capacity.mean)} ({per_cent_range(capacity.low, capacity.high)})",
        ],
        ["risk class of the ascent", outlook.risk],
        ["body clock off on race morning", clock_words(outlook.clock_offset_h)],
        ["from landing to the first session", DASH if landed is None else f"{number(landed)} h"],
        [
            f"nights from {elevation(HIGH_FROM_M, units)} up, dose",
            f"{outlook.nights_high}, {number(outlook.dose_km_h)} km h",
        ],
        ["nights away, in a tent", f"{costs.nights_away}, {costs.tent_nights}"],
        ["flights, hours of travel", f"{costs.flights}, {number(costs.travel_h)} h"],
    ]


def day_words(given: PlanDay, units: UnitChoice) -> str:
    """One morning for the hint on its mark."""
    if given.expected is None:
        return f"{day(given.day)}: on the way"
    return f"{day(given.day)}, {where(given, units)}: {expected(given)}"


def where(given: PlanDay, units: UnitChoice) -> str:
    """Where the night before was spent."""
    if given.woke_in is None:
        return "on the way"
    tent = ", in a tent" if given.in_tent else ""
    return f"{given.woke_in.name}, {elevation(given.bed_m, units)}{tent}"


def expected(given: PlanDay) -> str:
    """The range expected on waking."""
    return DASH if given.expected is None else per_cent_range(given.expected.low, given.expected.high)


def day_rows(days: Sequence[PlanDay], places: Mapping[int, Place], units: UnitChoice) -> list[list[str]]:
    """The days as rows; quiet ones that are alike make one row."""

    def alike(each: PlanDay) -> tuple[object, ...]:
        same = (where(each, units), expected(each))
        return same if each.is_quiet else (each.at,)

    rows = []
    for _, group in groupby(days, key=alike):
        together = list(group)
        first, last = together[0], together[-1]
        dates = day(first.day) if first is last else f"{day(first.day)} {DASH} {day(last.day)}"
        rows.append(
            [dates, where(first, units), expected(first), happens(first, places, units), light(first, places)]
        )
    return rows


def happens(given: PlanDay, places: Mapping[int, Place], units: UnitChoice) -> str:
    """The journeys and the track of a day."""
    parts = [journey(leg, places) for leg in given.legs]
    if given.track_m is not None:
        parts.append(f"at the track, {elevation(given.track_m, units)}")
    return "; ".join(parts)


def journey(leg: Leg, places: Mapping[int, Place]) -> str:
    """A leg in local times: "flight to Vallmora, 08:00 to Tue 2 Jun, 01:50"."""
    start, end = places[leg.from_place_id], places[leg.to_place_id]
    arrives = clock(leg.arrive_at, end.zone)
    if local_day(leg.arrive_at, end) != local_day(leg.depart_at, start):
        arrives = day_and_clock(leg.arrive_at, end.zone)
    return f"{leg.mode} to {end.name}, {clock(leg.depart_at, start.zone)} to {arrives}"


def local_day(at: datetime, place: Place) -> str:
    """The day at a place."""
    return day(at, place.zone)


def light(given: PlanDay, places: Mapping[int, Place]) -> str:
    """The light to seek and to avoid, on the wall clock of where one is."""
    found = given.light
    if found is None:
        return ""
    here = given.woke_in
    place = places[found.place_id]
    at = "" if here is not None and here.id == place.id else f"in {place.name}: "
    return (
        f"{at}seek {as_clock(found.seek_from_h)}{DASH}{as_clock(found.seek_to_h)}, "
        f"avoid {as_clock(found.avoid_from_h)}{DASH}{as_clock(found.avoid_to_h)}"
    )
