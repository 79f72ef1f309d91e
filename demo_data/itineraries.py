"""Where everybody is over the whole season: the usual plan, two or three days at a venue before its race."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, date, datetime, timedelta
from itertools import pairwise
from zoneinfo import ZoneInfo

from demo_data.world import (
    COMMITMENTS,
    PLACE_BY_ID,
    RACE_DAY,
    ROUNDS,
    SEASON_FROM,
    SEASON_TO,
    SESSIONS,
    at,
    generator,
)
from planner.season.model import Driver, Leg, Place, Stay
from planner.season.travel import estimated_travel

SHORTEST_TIME_AT_HOME = timedelta(days=3)  # a shorter gap is not worth the way home
FIVE_MINUTES = timedelta(minutes=5)


@dataclass(frozen=True)
class Visit:
    """A place that a driver must have reached by an instant and may leave from another on.

    Without `arrive_by` it is the way home, taken as soon as possible.
    """

    place: Place
    arrive_by: datetime | None
    leave_from: datetime


def itinerary(driver: Driver) -> tuple[list[Stay], list[Leg]]:
    """Return the stays and legs of one driver from the first to the last day, without a gap."""
    home = PLACE_BY_ID[driver.home_place_id]
    random = generator("itinerary", driver.id)
    cabin_altitude_m = float(random.integers(18, 24)) * 100.0
    stays: list[Stay] = []
    legs: list[Leg] = []
    arrived = free_from = at(SEASON_FROM, "00:00", home.zone)
    place = home
    for visit in _with_home_between(_visits(driver), home):
        if visit.place != place:
            leg = _leg(driver, place, free_from, visit, cabin_altitude_m)
            stays.append(Stay(driver.id, place.id, arrived, leg.depart_at))
            legs.append(leg)
            place, arrived = visit.place, leg.arrive_at
        free_from = visit.leave_from
    stays.append(Stay(driver.id, place.id, arrived, at(SEASON_TO, "00:00", place.zone)))
    return stays, legs


def _visits(driver: Driver) -> list[Visit]:
    """Return the rounds and commitments of a driver in time order."""
    visits = [_round_visit(driver, each.id) for each in ROUNDS]
    for commitment in COMMITMENTS:
        if commitment.driver_id == driver.id:
            place = PLACE_BY_ID[commitment.place_id]
            day_before = commitment.starts_at.astimezone(ZoneInfo(place.zone)).date() - timedelta(days=1)
            visits.append(Visit(place, at(day_before, "20:00", place.zone), commitment.ends_at))
    return sorted(visits, key=lambda visit: visit.leave_from)


def _round_visit(driver: Driver, round_id: int) -> Visit:
    """Arrive on Wednesday or Thursday before a race on Sunday, leave on Monday."""
    place = PLACE_BY_ID[ROUNDS[round_id - 1].place_id]
    race_day = RACE_DAY[round_id]
    on_thursday = (driver.id + round_id) % 2 == 0
    arrival_day: date = race_day - timedelta(days=3 if on_thursday else 4)
    race_ends = max(session.ends_at for session in SESSIONS if session.round_id == round_id)
    leave_from = max(race_ends, at(race_day + timedelta(days=1), "08:00", place.zone))
    return Visit(place, at(arrival_day, "18:00", place.zone), leave_from)


def _with_home_between(visits: list[Visit], home: Place) -> list[Visit]:
    """Go home wherever the gap leaves enough time there, and after the last visit."""
    course: list[Visit] = [visits[0]]
    for before, after in pairwise(visits):
        way = _travel(before.place, home) + _travel(home, after.place)
        if after.arrive_by and after.arrive_by - before.leave_from - way > SHORTEST_TIME_AT_HOME:
            course.append(Visit(home, None, before.leave_from))
        course.append(after)
    return [*course, Visit(home, None, visits[-1].leave_from)]


def _travel(start: Place, end: Place) -> timedelta:
    if start == end:
        return timedelta(0)
    hours = estimated_travel(start, end).hours
    return round(timedelta(hours=hours) / FIVE_MINUTES) * FIVE_MINUTES


def _leg(driver: Driver, start: Place, free_from: datetime, visit: Visit, cabin_altitude_m: float) -> Leg:
    """Return the latest journey that arrives in time, or the earliest one home; at decent hours if any."""
    travel = _travel(start, visit.place)
    if visit.arrive_by is None:
        departures = [free_from + timedelta(hours=later) for later in range(24)]
    else:
        departures = [visit.arrive_by - travel - timedelta(hours=earlier) for earlier in range(24)]
    depart_at = next(
        (each for each in departures if _decent(each, start) and _decent(each + travel, visit.place)),
        departures[0],
    )
    flies = estimated_travel(start, visit.place).mode == "flight"
    return Leg(
        driver.id,
        start.id,
        visit.place.id,
        depart_at.astimezone(UTC),
        (depart_at + travel).astimezone(UTC),
        "flight" if flies else "road",
        cabin_altitude_m if flies else None,
    )


def _decent(moment: datetime, place: Place) -> bool:
    return 6 <= moment.astimezone(ZoneInfo(place.zone)).hour < 23
