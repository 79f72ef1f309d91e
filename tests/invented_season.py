"""A small invented season as records: places on both sides of the date line, rounds, commitments, drivers."""

from __future__ import annotations

from datetime import UTC, date, datetime, timedelta
from zoneinfo import ZoneInfo

from planner.season.constraints import Limits, is_high
from planner.season.day_model import Rates
from planner.season.evaluate import RoundPoint, Setting, round_point
from planner.season.exposure import track_days
from planner.season.itinerary import Fixed, Itinerary, fixed_points
from planner.season.model import Commitment, Driver, Place, Round, Session, Stay
from planner.season.season_task import SeasonTask, Wish
from planner.season.travel import LegTimes

HOME = Place("Lowmere", "Europe/Berlin", 100.0, 100.0, 50.0, 10.0, id=1)
FELL = Place("Nearby Fell", "Europe/Berlin", 900.0, 900.0, 48.5, 10.5, id=2)
MESA = Place("Far Mesa", "America/Denver", 2250.0, 2250.0, 40.0, -105.0, id=3)
BAY = Place("Ostend Bay", "Pacific/Auckland", 10.0, 10.0, -37.0, 175.0, id=4)
HALF = Place("Halfway Gap", "America/Denver", 1600.0, 1600.0, 39.0, -104.0, id=5)
PUNA = Place("High Puna", "America/Lima", 3300.0, 3100.0, -14.0, -72.0, id=6)
PLACES = {p.id: p for p in (HOME, FELL, MESA, BAY, HALF, PUNA)}
DRIVER = Driver("Invented Driver", "woman", HOME.id, 60.0, 170.0, tent_note="physician, 1 March", id=7)

FROM_DAY = date(2031, 3, 1)
UNTIL_DAY = date(2031, 5, 20)
# Berlin changes its clocks on 30 March 2031, Denver on 9 March, Auckland on 6 April.
CALENDAR = (
    ("Fell round", FELL, date(2031, 3, 9)),
    ("Bay round", BAY, date(2031, 3, 23)),
    ("Mesa round", MESA, date(2031, 4, 6)),
    ("Puna round", PUNA, date(2031, 4, 27)),
)
COMMITMENTS = (
    Commitment(DRIVER.id, "factory day", HOME.id, datetime(2031, 4, 15, 8, tzinfo=UTC),
               datetime(2031, 4, 15, 15, tzinfo=UTC), id=1),
)  # fmt: skip


def rounds_and_sessions() -> tuple[list[Round], list[Session]]:
    rounds, sessions = [], []
    for i, (name, place, race_day) in enumerate(CALENDAR):
        rounds.append(Round(i + 1, name, place.id, id=10 + i))
        zone = ZoneInfo(place.zone)
        for kind, days, hour in (("practice", 2, 11), ("qualifying", 1, 15), ("race", 0, 14)):
            start = datetime(*(race_day - timedelta(days=days)).timetuple()[:3], hour, tzinfo=zone)
            start = start.astimezone(UTC)
            sessions.append(Session(10 + i, kind, kind, start, start + timedelta(hours=1.5)))  # type: ignore[arg-type]
    return rounds, sessions


def itinerary() -> Itinerary:
    """At home all season: what the searches start from."""
    start = datetime(2031, 2, 20, tzinfo=UTC)
    return Itinerary(DRIVER.id, (Stay(DRIVER.id, HOME.id, start, start + timedelta(days=120), id=1),))


def setting(driver: Driver = DRIVER) -> Setting:
    rounds, sessions = rounds_and_sessions()
    return Setting(driver, PLACES, LegTimes(PLACES), track_days(rounds, sessions, PLACES))


def fixed() -> list[Fixed]:
    rounds, sessions = rounds_and_sessions()
    return fixed_points(rounds, sessions, COMMITMENTS, driver_id=DRIVER.id)


def points() -> list[RoundPoint]:
    rounds, sessions = rounds_and_sessions()
    found = []
    for each in rounds:
        ours = [s for s in sessions if s.round_id == each.id]
        race = next(s for s in ours if s.kind == "race")
        first = min(s.starts_at for s in ours)
        found.append(round_point(each.id, each.name, PLACES[each.place_id], first, race.starts_at))
    return found


def task(limits: Limits | None = None, **changes: object) -> SeasonTask:
    asked = limits or Limits(largest_clock_offset_h=None)
    high = [p for p in points() if is_high(PLACES[p.place_id])]
    given: dict[str, object] = {
        "setting": setting(),
        "itinerary": itinerary(),
        "points": tuple(points()),
        "fixed": tuple(fixed()),
        "candidates": (HALF.id, MESA.id),
        "wishes": {p.round_id: Wish(1.0, asked) for p in high},
        "from_day": FROM_DAY,
        "until_day": UNTIL_DAY,
        "rates": Rates(0.25, 0.25, 0.0),
    }
    return SeasonTask(**{**given, **changes})  # type: ignore[arg-type]
