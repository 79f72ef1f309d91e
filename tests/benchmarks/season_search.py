"""The season search on a full season, against the number of plans that enumeration would have to go through.

Run as `python tests/benchmarks/season_search.py`. An invented season of 24 rounds, five of them high, with
five candidate places for free nights; one driver at the median of several runs, then 20 drivers with a
progress bar. The number of plans is counted exactly, without going through them.
"""

from __future__ import annotations

import sys
import time
from datetime import UTC, date, datetime, timedelta
from statistics import median
from zoneinfo import ZoneInfo

from planner.season.constraints import Limits
from planner.season.day_model import Rates
from planner.season.day_problem import DaySeason, day_season
from planner.season.evaluate import Setting, round_point
from planner.season.exposure import track_days
from planner.season.itinerary import Itinerary, fixed_points
from planner.season.model import Commitment, Driver, Place, Round, Session, Stay
from planner.season.search import count_plans, search
from planner.season.season_task import SeasonTask, Wish
from planner.season.travel import LegTimes

RUNS = 7
DRIVERS = 20
TARGET_S = 1.0
TARGET_FEWER = 1000.0
# A tent night and a flight cost half a night away, or a quarter; an hour of travel nothing.
HALVES, QUARTERS = Rates(0.5, 0.5, 0.0), Rates(0.25, 0.25, 0.0)
FIRST_RACE = date(2031, 3, 2)
# Weeks from one race to the next: singles and doubles, a break in summer.
WEEKS_BETWEEN = (1, 2, 1, 2, 2, 1, 2, 1, 2, 1, 1, 2, 4, 1, 2, 1, 2, 1, 2, 1, 1, 2, 1)
# Track elevation, zone and coordinates of the 24 venues; invented, the high ones are five.
VENUES = (
    (20, "Asia/Dubai", 24.4, 54.5), (45, "Australia/Adelaide", -34.6, 138.9), (30, "Asia/Tokyo", 34.8, 136.4),
    (160, "America/Chicago", 30.1, -97.6), (2250, "America/Mexico_City", 19.4, -99.3),
    (10, "America/New_York", 40.8, -73.1), (50, "Europe/Rome", 44.4, 11.4),
    (110, "Europe/Madrid", 41.5, 2.2), (60, "Europe/Paris", 43.7, 7.4),
    (1600, "America/Denver", 39.7, -104.8),
    (90, "America/Toronto", 43.7, -79.4), (140, "Europe/London", 52.1, -1.2),
    (690, "Europe/Vienna", 47.3, 14.6), (250, "Europe/Budapest", 47.6, 19.2),
    (400, "Europe/Brussels", 50.4, 6.0), (15, "Europe/Amsterdam", 52.4, 4.5),
    (2300, "Africa/Addis_Ababa", 9.1, 38.9), (1590, "Africa/Johannesburg", -26.1, 28.4),
    (10, "Asia/Singapore", 1.4, 103.8), (110, "Europe/Stockholm", 58.3, 14.9),
    (3000, "America/Lima", -13.6, -72.1), (750, "America/Sao_Paulo", -23.9, -46.2),
    (620, "America/Los_Angeles", 36.2, -115.1), (12, "Asia/Dubai", 25.5, 51.5),
)  # fmt: skip
STAGING = ((1800, "Europe/Paris", 45.1, 6.1), (2100, "America/Denver", 38.8, -105.0))
HOMES = (
    (80, "Europe/Oslo", 59.5, 10.6),
    (610, "America/Sao_Paulo", -22.5, -47.1),
    (40, "Asia/Tokyo", 35.6, 139.4),
    (90, "America/Toronto", 43.7, -79.4),
    (1500, "Africa/Nairobi", -1.3, 36.8),
)


def place(number: int, name: str, row: tuple[float, str, float, float]) -> Place:
    return Place(f"{name} {number}", row[1], row[0], row[0], row[2], row[3], id=number)


def season(driver_number: int, limits: Limits, rates: Rates = HALVES) -> DaySeason:
    """The whole season of one driver as a day model."""
    venues = [place(i + 1, "Venue", row) for i, row in enumerate(VENUES)]
    staging = [place(50 + i, "Staging", row) for i, row in enumerate(STAGING)]
    home = place(60 + driver_number, "Home", HOMES[driver_number % len(HOMES)])
    places = {p.id: p for p in (*venues, *staging, home)}
    rounds, sessions = [], []
    race_day = FIRST_RACE
    for i, venue in enumerate(venues):
        rounds.append(Round(i + 1, f"Round {i + 1}", venue.id, id=i + 1))
        for kind, days, hour in (("practice", 2, 11), ("qualifying", 1, 15), ("race", 0, 14)):
            day = race_day - timedelta(days=days)
            start = datetime(day.year, day.month, day.day, hour, tzinfo=ZoneInfo(venue.zone)).astimezone(UTC)
            sessions.append(Session(i + 1, kind, kind, start, start + timedelta(hours=1.5)))
        if i < len(WEEKS_BETWEEN):
            race_day += timedelta(weeks=WEEKS_BETWEEN[i])
    driver = Driver(f"Driver {driver_number}", "woman", home.id, 60.0, 170.0, id=driver_number + 1)
    commitments = [
        Commitment(driver.id, f"factory {i}", venues[11].id, at, at + timedelta(hours=7), id=i + 1)
        for i, at in enumerate(
            datetime.combine(
                FIRST_RACE + timedelta(weeks=w, days=driver_number % 2 + 2), datetime.min.time(), UTC
            )
            + timedelta(hours=9)
            for w in (13, 20)
        )
    ]
    start = datetime.combine(FIRST_RACE - timedelta(days=40), datetime.min.time(), UTC)
    at_home = Stay(driver.id, home.id, start, start + timedelta(days=400), id=1)
    points = []
    for each in rounds:
        ours = [s for s in sessions if s.round_id == each.id]
        points.append(
            round_point(each.id, each.name, places[each.place_id], ours[0].starts_at, ours[-1].starts_at)
        )
    high = [p for p in points if places[p.place_id].track_elevation_m >= 1500.0]
    return day_season(
        SeasonTask(
            setting=Setting(driver, places, LegTimes(places), track_days(rounds, sessions, places)),
            itinerary=Itinerary(driver.id, (at_home,)),
            points=tuple(points),
            fixed=tuple(fixed_points(rounds, sessions, commitments, driver_id=driver.id)),
            candidates=(venues[4].id, venues[9].id, venues[16].id, *(s.id for s in staging)),
            wishes={p.round_id: Wish(1.0, limits) for p in high},
            from_day=FIRST_RACE - timedelta(days=21),
            until_day=race_day + timedelta(days=7),
            rates=rates,
        )
    )


def timed(model: DaySeason, most_extra_cost: float | None) -> tuple[float, float, int, int]:
    """Seconds on the wall and of the processor, points of the curve, partial plans touched."""
    start, busy = time.perf_counter(), time.process_time()
    curve = search(model.problem, most_extra_cost=most_extra_cost)
    return time.perf_counter() - start, time.process_time() - busy, len(curve.cost), curve.touched


def main() -> None:
    free, clocked = Limits(largest_clock_offset_h=None), Limits(largest_clock_offset_h=3.0)
    model = season(0, free)
    print(f"{model.problem.days} nights, {len(VENUES)} rounds, {len(model.problem.rounds)} of them high")
    runs = [timed(model, None) for _ in range(RUNS)]
    seconds, busy, points, touched = median(r[0] for r in runs), median(r[1] for r in runs), *runs[0][2:]
    print(f"one driver, whole curve, {points} points: {seconds:.2f} s, median of {RUNS} (target {TARGET_S})")
    print(f"of which the processor worked {busy:.2f} s; the rest is for what else the machine does")
    plans = count_plans(model.problem)
    print(f"plans that enumeration goes through: {plans} (about 10^{len(str(plans)) - 1})")
    fewer = plans // touched
    print(f"partial plans touched: {touched}, {fewer:.1e} times fewer (target {TARGET_FEWER:.0f})")
    part = median(timed(model, 30.0)[0] for _ in range(RUNS))
    print(f"the curve up to 30 nights above the cheapest: {part:.2f} s")
    quarters = median(timed(season(0, free, QUARTERS), None)[0] for _ in range(3))
    print(f"the whole curve with costs in quarters of a night: {quarters:.2f} s (median of 3)")
    clock = median(timed(season(0, clocked), 30.0)[0] for _ in range(3))
    print(f"up to 30 nights, body clock within 3 h at each high race: {clock:.2f} s (median of 3)")
    start = time.perf_counter()
    for number in range(DRIVERS):
        timed(season(number, free), None)
        done = (number + 1) * 40 // DRIVERS
        sys.stdout.write(f"\r{DRIVERS} drivers [{'#' * done}{'.' * (40 - done)}] {number + 1}")
        sys.stdout.flush()
    print(f"  {time.perf_counter() - start:.1f} s, whole curves")


if __name__ == "__main__":
    main()
