"""One driver's course through the season: where since when, and what a reading there is expected to be."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from functools import cached_property
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from planner.monitoring.model import Reading, Wakefulness
from planner.monitoring.outcome import LOW_GROUND_M, ExpectedRange, Sample
from planner.physiology.acclimatisation import ExposureHistory
from planner.physiology.air import site_pressure
from planner.physiology.expectation import expected_spo2
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.person import PersonPosterior
from planner.season.exposure import exposure_history, where_is
from planner.season.model import Driver, Leg, Place, Stay
from planner.services.own import Past, person_before
from planner.services.season import Calendar

ONE_HOUR: Final = timedelta(hours=1)
ONE_DAY: Final = timedelta(days=1)
PRONOUNS: Final = {"woman": "her", "man": "him"}
POSSESSIVES: Final = {"woman": "her", "man": "his"}
LAST_DAY_NAMED: Final = 28  # later on the place says more than the count of days


@dataclass(frozen=True)
class Whereabout:
    """Where a driver is: the place, the beds' elevation and the arrival there; None for what is not known.

    Without a stay or leg at the instant it is a guess, and screens say so: where the last stay ended, else
    at home.
    """

    place: Place
    bed_elevation_m: float
    arrived_at: datetime | None
    on_the_way: bool = False  # then the place is the one that the journey leads to
    is_planned: bool = True


@dataclass(frozen=True)
class DriverCourse:
    """A driver with all stays and legs, and what readings had taught when the present stay began.

    What is measured during a stay teaches the range from the next stay on (judgement): a course that goes
    wrong must not become its own yardstick. Without a `past` the range is the population's.
    """

    calendar: Calendar
    driver: Driver
    past: Past | None = None
    as_of: datetime | None = None

    @cached_property
    def stays(self) -> list[Stay]:
        """The driver's stays, oldest first."""
        return [s for s in self.calendar.stays if s.driver_id == self.driver.id]

    @cached_property
    def legs(self) -> list[Leg]:
        """The driver's legs, oldest first."""
        return [each for each in self.calendar.legs if each.driver_id == self.driver.id]

    @cached_property
    def home(self) -> Place:
        """The driver's home."""
        return self.calendar.places[self.driver.home_place_id]

    @cached_property
    def origin(self) -> datetime:
        """The instant that the history's hours count from."""
        starts = [s.arrive_at for s in self.stays] + [each.depart_at for each in self.legs]
        return min(starts) if starts else datetime(2000, 1, 1, tzinfo=ZoneInfo("UTC"))

    @cached_property
    def history(self) -> ExposureHistory:
        """What the driver breathed, by the itinerary."""
        return exposure_history(
            self.home,
            self.stays,
            self.legs,
            self.calendar.places,
            origin=self.origin,
            pressures=self.calendar.pressures,
            track_days=self.calendar.days_at_the_track,
        )

    @cached_property
    def person(self) -> PersonPosterior | None:
        """What the readings before the present stay say of this driver; None = the population."""
        if self.past is None or self.as_of is None:
            return None
        arrived_at = self.where(self.as_of).arrived_at
        before = self.as_of - ONE_DAY if arrived_at is None else min(arrived_at, self.as_of)
        return person_before(self.driver.id, self.past, before, self.history, self.origin)

    def where(self, at: datetime) -> Whereabout:
        """Where the driver is: by the stay or leg, else where the last stay ended, else at home."""
        entry = where_is(self.driver, at, self.stays, self.legs)
        is_planned = entry is not None
        if entry is None:
            ended = [s for s in self.stays if s.depart_at <= at]
            entry = max(ended, key=lambda s: s.depart_at, default=None)
        if entry is None:
            return Whereabout(self.home, self.home.bed_elevation_m, None, is_planned=False)
        if isinstance(entry, Leg):
            place = self.calendar.places[entry.to_place_id]
            return Whereabout(place, place.bed_elevation_m, entry.arrive_at, on_the_way=True)
        place = self.calendar.places[entry.place_id]
        bed_m = place.bed_elevation_m if entry.bed_elevation_m is None else entry.bed_elevation_m
        return Whereabout(place, bed_m, entry.arrive_at, is_planned=is_planned)

    def expected(
        self, instants: Sequence[datetime], wakefulness: Wakefulness = "awake"
    ) -> list[ExpectedRange]:
        """The range expected at each instant where the itinerary has the driver."""
        ranges = self._ranges(self.history, instants, wakefulness)
        return [
            replace(r, words=self._words(self.where(at), at)) for r, at in zip(ranges, instants, strict=True)
        ]

    def samples(self, readings: Sequence[Reading]) -> list[Sample]:
        """Each reading beside its range, in the order given.

        A reading that was typed for another place than the itinerary's is judged by the air of its own
        place, with the acclimatisation that the itinerary gave until then.
        """
        sampled: dict[int, Sample] = {}
        for wakefulness in ("awake", "asleep"):
            ours = [(i, r) for i, r in enumerate(readings) if r.wakefulness == wakefulness]
            if ours:
                ranges = self.expected([r.taken_at for _, r in ours], wakefulness)
                for (i, reading), expected in zip(ours, ranges, strict=True):
                    sampled[i] = self._sample(reading, expected)
        return [sampled[i] for i in range(len(readings))]

    def _sample(self, reading: Reading, expected: ExpectedRange) -> Sample:
        where = self.where(reading.taken_at)
        if where.place.id == reading.place_id and not where.on_the_way:
            hours = None if where.arrived_at is None else (reading.taken_at - where.arrived_at) / ONE_HOUR
            return Sample(reading, expected, where.bed_elevation_m, hours)
        place = self.calendar.places[reading.place_id]
        (found,) = self._ranges(self._history_to(reading), [reading.taken_at], reading.wakefulness)
        there = replace(found, words=f"for {self._whom} at {place.name}")
        return Sample(reading, there, place.bed_elevation_m)

    def _history_to(self, reading: Reading) -> ExposureHistory:
        """The itinerary's history until a reading, then the air of the place that was typed with it."""
        place = self.calendar.places[reading.place_id]
        at_h = (reading.taken_at - self.origin) / ONE_HOUR
        before = self.history.start_h < at_h
        # A history needs a beginning: its first tension is the steady state before all else.
        before[0] = True
        pressure_hpa = site_pressure(place.bed_elevation_m, place.latitude_deg).pressure_hpa
        start_h = np.append(self.history.start_h[before], max(at_h, self.history.start_h[0]))
        inspired = np.append(self.history.inspired_po2_mmhg[before], inspired_po2_mmhg(pressure_hpa))
        return ExposureHistory(start_h=start_h, inspired_po2_mmhg=inspired)

    def _ranges(
        self, history: ExposureHistory, instants: Sequence[datetime], wakefulness: Wakefulness
    ) -> list[ExpectedRange]:
        at_h = np.array([(at - self.origin) / ONE_HOUR for at in instants], dtype=np.float64)
        found = expected_spo2(history, at_h, wakefulness=wakefulness, person=self.person)
        columns = zip(
            np.atleast_1d(found.low_spo2_pct),
            np.atleast_1d(found.mean_spo2_pct),
            np.atleast_1d(found.high_spo2_pct),
            np.atleast_1d(found.beyond_validity),
            strict=True,
        )
        return [
            ExpectedRange(float(low), float(mean), float(high), beyond_validity=bool(beyond))
            for low, mean, high, beyond in columns
        ]

    @property
    def _whom(self) -> str:
        return PRONOUNS[self.driver.sex]

    def _words(self, where: Whereabout, at: datetime) -> str:
        if where.on_the_way:
            return f"for {self._whom} on the way"
        if where.place.id == self.home.id:
            return f"for {self._whom} at home"
        day = day_there(where, at)
        if day is None or day > LAST_DAY_NAMED or where.bed_elevation_m < LOW_GROUND_M:
            return f"for {self._whom} at {where.place.name}"
        return f"for {self._whom} on day {day}"


def day_there(where: Whereabout, at: datetime) -> int | None:
    """The day of a stay by the local calendar; the day of arrival is day 1."""
    if where.arrived_at is None:
        return None
    zone = ZoneInfo(where.place.zone)
    return (at.astimezone(zone).date() - where.arrived_at.astimezone(zone).date()).days + 1
