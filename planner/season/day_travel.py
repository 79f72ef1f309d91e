"""Journeys in the day model: which nights they take, when they land, whether they are allowed."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from datetime import UTC, datetime, time, timedelta
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from planner.checks import FloatArray
from planner.physiology.air import standard_pressure_hpa
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.season.day_model import IMPOSSIBLE, MOST_NIGHTS_LOST, Bed, BoolArray
from planner.season.exposure import PLANNING_CABIN_ALTITUDE_M
from planner.season.model import Place
from planner.season.season_task import LANDING, TRAVEL, SeasonTask, midnight, points_within

EARLIEST_ARRIVAL_H: Final = (
    8.0  # when it would land on the day before, it leaves later and lands at this hour
)


class Travel:
    """Journeys between beds for every day of departure, as DayProblem takes them.

    `arrive_at_h` (days, beds, beds) is the landing in hours since the first day 00:00 UTC.
    """

    def __init__(
        self, task: SeasonTask, beds: Sequence[Bed], departs_h: FloatArray, without: Collection[str]
    ) -> None:
        setting = task.setting
        spots = [setting.places[bed.place_id] for bed in beds]
        ways = [[setting.times.between(a.id, b.id) if a.id != b.id else None for b in spots] for a in spots]
        self.hours = np.array([[w.hours if w else 0.0 for w in row] for row in ways])
        self.flights = np.array([[w.flights if w else 0 for w in row] for row in ways], dtype=np.intp)
        cabin = float(inspired_po2_mmhg(standard_pressure_hpa(PLANNING_CABIN_ALTITUDE_M)))
        ground = np.array([bed.bed_po2_mmhg for bed in beds])
        flies = np.array([[w is not None and w.mode == "flight" for w in row] for row in ways])
        self.way_po2_mmhg = np.where(flies, cabin, (ground[:, None] + ground[None, :]) / 2.0)
        days = np.arange(task.days, dtype=np.float64)[:, None, None]
        zone_h = _zone_hours(task, spots)
        here, there = zone_h[:, :, None], zone_h[:, None, :]
        arrive = 24.0 * days + departs_h[:, None, None] - here + self.hours
        landing_day = np.floor((arrive + there) / 24.0)
        too_early = landing_day < days
        self.arrive_at_h = np.where(too_early, 24.0 * days + EARLIEST_ARRIVAL_H - there, arrive)
        lost = np.where(too_early, 0.0, landing_day - days).astype(np.intp)
        lost[lost > MOST_NIGHTS_LOST] = IMPOSSIBLE
        if TRAVEL not in without:
            lost[:, self.hours > task.rules.longest_travel_h_per_day] = IMPOSSIBLE
        if LANDING not in without:
            lost[self._lands_too_late(task, beds)] = IMPOSSIBLE
        self.lost = lost
        self.zones_east_h = (there - here + 12.0) % 24.0 - 12.0

    def _lands_too_late(self, task: SeasonTask, beds: Sequence[Bed]) -> BoolArray:
        """Whether a journey lands too shortly before a first session at that place."""
        late = np.zeros(self.arrive_at_h.shape, dtype=bool)
        first = midnight(task.from_day)
        for point in points_within(task):
            session_h = (point.first_session_at - first) / timedelta(hours=1)
            ahead = session_h - self.arrive_at_h
            venue = np.array([bed.place_id == point.place_id for bed in beds])
            late |= venue & (ahead >= 0.0) & (ahead < task.rules.shortest_landing_to_session_h)
        return late


def _zone_hours(task: SeasonTask, spots: Sequence[Place]) -> FloatArray:
    """Hours that each place's wall clock is ahead of UTC at noon of each day, (days, beds)."""
    noons = [datetime.combine(task.from_day, time(12), UTC) + timedelta(days=i) for i in range(task.days)]

    def ahead_h(zone: ZoneInfo) -> list[float]:
        return [(n.astimezone(zone).utcoffset() or timedelta(0)) / timedelta(hours=1) for n in noons]

    by_zone = {zone: ahead_h(ZoneInfo(zone)) for zone in {spot.zone for spot in spots}}
    return np.array([by_zone[spot.zone] for spot in spots], dtype=np.float64).T
