"""The invented world: places, drivers, rounds, sessions, commitments.

No person, team, series or place in it exists. Zones are real, so that clocks behave; elevations and latitudes
suit them.
"""

from __future__ import annotations

from datetime import UTC, date, datetime, time, timedelta
from zoneinfo import ZoneInfo

import numpy as np

from planner.season.model import Commitment, Driver, Place, Round, Session

HEADING = "Invented data to try the program with: no person, team, series or place in it exists."
SEED = 2250
SEASON_FROM = date(2026, 1, 12)
SEASON_TO = date(2026, 12, 13)
NOW = datetime(2026, 6, 6, 13, 40, tzinfo=UTC)  # Saturday, 07:40 at the round at 2 250 m
TODAY = date(2026, 6, 6)
NOW_ROUND = 10


def generator(subject: str, number: int = 0) -> np.random.Generator:
    """Return a random generator of its own for each subject, so that a change in one moves no other."""
    return np.random.default_rng([SEED, number, *subject.encode()])


def at(day: date, clock: str, zone: str) -> datetime:
    """Return the instant at which the clocks of a zone show a time on a day."""
    return datetime.combine(day, time.fromisoformat(clock), ZoneInfo(zone)).astimezone(UTC)


# name, zone, track m, beds m, latitude, longitude, Sunday of the race; night races start late
_VENUES = (
    ("Marrowhead", "Australia/Adelaide", 45.0, 45.0, -34.61, 138.92, date(2026, 2, 15)),
    ("Zahrul Flats", "Asia/Dubai", 12.0, 12.0, 24.42, 54.94, date(2026, 3, 1)),
    ("Calvorre", "Europe/Madrid", 805.0, 690.0, 40.14, -3.21, date(2026, 3, 15)),
    ("Castelvireno", "Europe/Rome", 55.0, 55.0, 44.43, 11.38, date(2026, 3, 29)),
    ("Copperdrift", "America/Denver", 1610.0, 1690.0, 39.72, -104.81, date(2026, 4, 12)),
    ("Redmallow", "America/Chicago", 170.0, 170.0, 31.18, -97.09, date(2026, 4, 19)),
    ("Tsukigane", "Asia/Tokyo", 30.0, 30.0, 34.83, 136.41, date(2026, 5, 3)),
    ("Sandrill Bay", "America/Los_Angeles", 18.0, 18.0, 34.02, -118.39, date(2026, 5, 17)),
    ("Portmerrin", "America/New_York", 8.0, 8.0, 40.84, -73.12, date(2026, 5, 31)),
    ("Talquime", "America/Mexico_City", 2250.0, 2250.0, 19.38, -99.31, date(2026, 6, 7)),
    ("Hartsmere", "Europe/London", 140.0, 140.0, 52.13, -1.24, date(2026, 6, 28)),
    ("Torvelau", "Europe/Vienna", 690.0, 740.0, 47.31, 14.62, date(2026, 7, 5)),
    ("Holvinge", "Europe/Stockholm", 110.0, 110.0, 58.27, 14.91, date(2026, 7, 19)),
    ("Sumaqara", "America/Lima", 3200.0, 2900.0, -13.58, -72.14, date(2026, 8, 9)),
    ("Oruvanta", "America/Sao_Paulo", 15.0, 15.0, -23.91, -46.22, date(2026, 8, 16)),
    ("Wenchara", "Africa/Addis_Ababa", 2300.0, 2400.0, 9.11, 38.93, date(2026, 9, 13)),
    ("Kestrelrand", "Africa/Johannesburg", 1590.0, 1590.0, -26.12, 28.37, date(2026, 9, 20)),
    ("Temalik", "Asia/Singapore", 10.0, 10.0, 1.37, 103.81, date(2026, 10, 11)),
    ("Azambria", "Europe/Lisbon", 45.0, 45.0, 38.81, -9.08, date(2026, 10, 25)),
)
_NIGHT_RACES = ("Zahrul Flats", "Temalik")

_OTHER_PLACES = (
    ("Brackenford Works", "Europe/London", 95.0, 95.0, 52.02, -0.91),
    ("Port Sennaby", "America/Toronto", 90.0, 90.0, 43.71, -79.38),
    ("Skarnviken", "Europe/Oslo", 25.0, 25.0, 59.48, 10.61),
    ("Itaruna", "America/Sao_Paulo", 610.0, 610.0, -22.52, -47.13),
    ("Nyandela", "Africa/Nairobi", 1540.0, 1540.0, -0.92, 36.88),
    ("Vessaly", "Europe/Paris", 160.0, 160.0, 47.21, 2.09),
    ("Ashlarne", "Europe/Dublin", 70.0, 70.0, 53.12, -7.91),
    ("Okunagi", "Asia/Tokyo", 40.0, 40.0, 35.63, 139.37),
    ("Banoora", "Australia/Brisbane", 35.0, 35.0, -27.31, 152.94),
    ("Suryagar", "Asia/Kolkata", 560.0, 560.0, 18.42, 73.71),
)

PLACES = tuple(
    Place(name, zone, track_m, beds_m, latitude, longitude, id=number)
    for number, (name, zone, track_m, beds_m, latitude, longitude) in enumerate(
        (*(venue[:6] for venue in _VENUES), *_OTHER_PLACES), start=1
    )
)
PLACE = {place.name: place for place in PLACES}
PLACE_BY_ID = {place.id: place for place in PLACES}

FACTORY = "Brackenford Works"
SPONSOR = "Port Sennaby"


def _driver(
    number: int, name: str, sex: str, home: str, mass_kg: float, height_cm: float, **more: object
) -> Driver:
    return Driver(name, sex, PLACE[home].id, mass_kg, height_cm, id=number, **more)  # type: ignore[arg-type]


DRIVERS = (
    _driver(1, "Ilse Varnholt", "woman", "Skarnviken", 58.5, 166.0, bottle_ml=750.0, sweat_sodium_mmol_l=38.0,
            iron_checked_on=date(2026, 2, 3), wake_time="06:30"),
    _driver(2, "Tomé Ariquara", "man", "Itaruna", 74.0, 178.0, bottle_ml=1000.0,
            iron_checked_on=date(2026, 2, 3), wake_time="06:45",
            tent_note="Team physician, 19 January: tent at home allowed, not below 16 %"),
    _driver(3, "Wambui Kerinyo", "woman", "Nyandela", 61.0, 170.0, bottle_ml=1000.0, sweat_sodium_mmol_l=51.0,
            iron_checked_on=date(2026, 2, 4), wake_time="06:00"),
    _driver(4, "Bastien Corvelle", "man", "Vessaly", 79.0, 183.0, bottle_ml=1500.0,
            iron_checked_on=date(2026, 2, 3), wake_time="07:00"),
    _driver(5, "Maeve Dunlarrin", "woman", "Ashlarne", 65.5, 173.0, bottle_ml=1000.0,
            altitude_history="moderate or severe", highest_bed_elevation_m=3000.0,
            iron_checked_on=date(2026, 5, 19), wake_time="06:45"),
    _driver(6, "Ren Asakiri", "man", "Okunagi", 66.0, 171.0, bottle_ml=750.0, sweat_sodium_mmol_l=62.0,
            iron_checked_on=date(2026, 2, 4), wake_time="06:15"),
    _driver(7, "Jory Tallowmere", "man", "Banoora", 82.0, 186.0, bottle_ml=2000.0, wake_time="06:30",
            iron_checked_on=date(2026, 2, 3),
            tent_note="Team physician, 19 January: tent at home allowed, not below 15 %"),
    _driver(8, "Priya Kandovar", "woman", "Suryagar", 55.0, 162.0, bottle_ml=750.0, wake_time="07:00"),
)  # fmt: skip
DRIVER_BY_ID = {driver.id: driver for driver in DRIVERS}

ROUNDS = tuple(
    Round(number, f"{venue[0]} Round", PLACE[venue[0]].id, id=number)
    for number, venue in enumerate(_VENUES, start=1)
)
RACE_DAY = {number: venue[6] for number, venue in enumerate(_VENUES, start=1)}

# kind, name, days before the race day, from, to; by day and by night
_BY_DAY = (
    ("practice", "Practice 1", 2, "11:00", "12:00"),
    ("practice", "Practice 2", 2, "15:00", "16:00"),
    ("qualifying", "Qualifying", 1, "15:00", "16:00"),
    ("race", "Race", 0, "14:00", "15:45"),
)
_BY_NIGHT = (
    ("practice", "Practice 1", 2, "16:30", "17:30"),
    ("practice", "Practice 2", 2, "20:00", "21:00"),
    ("qualifying", "Qualifying", 1, "20:00", "21:00"),
    ("race", "Race", 0, "19:00", "20:45"),
)


def _sessions() -> tuple[Session, ...]:
    sessions: list[Session] = []
    for each in ROUNDS:
        place = PLACE_BY_ID[each.place_id]
        for kind, name, before, start, end in _BY_NIGHT if place.name in _NIGHT_RACES else _BY_DAY:
            day = RACE_DAY[each.number] - timedelta(days=before)
            sessions.append(
                Session(
                    each.id,
                    kind,  # type: ignore[arg-type]
                    name,
                    at(day, start, place.zone),
                    at(day, end, place.zone),
                    id=len(sessions) + 1,
                )
            )
    return tuple(sessions)


SESSIONS = _sessions()

# name, place, first day, last day, drivers
_APPOINTMENTS = (
    ("Seat fitting", FACTORY, date(2026, 2, 2), date(2026, 2, 4), (1, 2, 3, 4, 5, 6, 7, 8)),
    ("Simulator", FACTORY, date(2026, 3, 19), date(2026, 3, 20), (1, 4, 5, 7)),
    ("Simulator", FACTORY, date(2026, 3, 23), date(2026, 3, 24), (2, 3, 6, 8)),
    ("Sponsor day", SPONSOR, date(2026, 4, 22), date(2026, 4, 22), (2, 4, 8)),
    ("Sponsor evening", "Tsukigane", date(2026, 4, 29), date(2026, 4, 29), (1, 6)),
    ("Simulator", FACTORY, date(2026, 5, 7), date(2026, 5, 8), (1, 3, 5)),
    ("Sponsor day", "Portmerrin", date(2026, 6, 2), date(2026, 6, 2), (3, 6)),
    ("Simulator", FACTORY, date(2026, 6, 16), date(2026, 6, 17), (1, 2, 4, 8)),
    ("Simulator", FACTORY, date(2026, 6, 22), date(2026, 6, 23), (3, 5, 6, 7)),
    ("Iron and lung function check", FACTORY, date(2026, 7, 9), date(2026, 7, 9), (1, 2, 3, 4, 5, 6, 7, 8)),
    ("Simulator", FACTORY, date(2026, 7, 27), date(2026, 7, 28), (1, 2, 3, 4)),
    ("Sponsor day", SPONSOR, date(2026, 8, 26), date(2026, 8, 26), (5, 6, 7)),
    ("Simulator", FACTORY, date(2026, 9, 2), date(2026, 9, 3), (2, 4, 8)),
    ("Simulator", FACTORY, date(2026, 9, 30), date(2026, 10, 1), (1, 3, 5, 7)),
    ("Season review", FACTORY, date(2026, 11, 4), date(2026, 11, 5), (1, 2, 3, 4, 5, 6, 7, 8)),
)


def _commitments() -> tuple[Commitment, ...]:
    commitments: list[Commitment] = []
    for name, where, first, last, drivers in _APPOINTMENTS:
        place = PLACE[where]
        for driver_id in drivers:
            commitments.append(
                Commitment(
                    driver_id,
                    name,
                    place.id,
                    at(first, "09:30", place.zone),
                    at(last, "17:00", place.zone),
                    id=len(commitments) + 1,
                )
            )
    return tuple(commitments)


COMMITMENTS = _commitments()
