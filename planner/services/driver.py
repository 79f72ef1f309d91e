"""How a driver responds: the course, the own range along it, and why each reading came out as it did."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime, time, timedelta
from functools import cached_property
from itertools import groupby
from math import ceil
from typing import Final, Literal, TypeAlias
from zoneinfo import ZoneInfo

from planner.monitoring.model import Reading
from planner.monitoring.outcome import CONFIRMS_WITHIN, SIGNS_LAST, ExpectedRange, Judgement, Sample
from planner.monitoring.own_range import own_range_in_words, why_it_teaches_nothing
from planner.physiology.expectation import Expectation, expected_spo2
from planner.physiology.person import PersonPosterior
from planner.season.model import Driver
from planner.services.course import ONE_HOUR, POSSESSIVES, DriverCourse
from planner.services.morning import CLOCKS_DIFFER, judged
from planner.services.own import Past, person_before
from planner.services.season import Calendar, RoundCost, round_costs
from planner.store.store import Store

Window: TypeAlias = Literal["12 weeks", "season", "all"]

# A chart of more days than this is drawn from every second, third, ... morning.
MOST_MORNINGS: Final = 366
MORNING: Final = time(6)  # UTC; the range hardly moves within a day
WEEKS_BEHIND, WEEKS_AHEAD = timedelta(weeks=10), timedelta(weeks=2)
MARGIN: Final = timedelta(days=14)
UTC: Final = ZoneInfo("UTC")


@dataclass(frozen=True)
class JudgedMark:
    """A reading with its outcome by what was known then; `teaches_nothing` says why it is left out."""

    sample: Sample
    judgement: Judgement
    teaches_nothing: str

    @property
    def reading(self) -> Reading:
        """The reading itself."""
        return self.sample.reading


@dataclass(frozen=True)
class BandPoint:
    """The range of a reading awake at rest at one instant: the driver's own and the population's."""

    at: datetime
    own: ExpectedRange
    population: ExpectedRange


@dataclass(frozen=True)
class Explanation:
    """One reading taken apart, by what was known when it was taken.

    `own` and `population` are the expectations for that instant, with the chain from air to blood and the
    parts of the spread; `residual_pct` is the reading less the middle of the own range.
    """

    mark: JudgedMark
    readings_known: int
    own: Expectation
    population: Expectation
    residual_pct: float


@dataclass(frozen=True)
class DriverView:
    """All that the Driver page shows of one driver at one state of the store."""

    calendar: Calendar
    driver: Driver
    readings: tuple[Reading, ...]
    past: Past
    now: datetime

    @cached_property
    def population(self) -> DriverCourse:
        """The course for somebody of whom nothing is known."""
        return DriverCourse(self.calendar, self.driver)

    @cached_property
    def person(self) -> PersonPosterior:
        """What all readings so far have taught."""
        course = self.population
        return person_before(self.driver.id, self.past, self.now, course.history, course.origin)

    @property
    def range_in_words(self) -> str:
        """How much of the range is the driver's own, in one sentence."""
        return own_range_in_words(self.person, POSSESSIVES[self.driver.sex])

    @cached_property
    def expected_now(self) -> ExpectedRange:
        """What to expect of a reading awake at rest now."""
        return self.course_at(self.now).expected([self.now])[0]

    @cached_property
    def beds(self) -> list[tuple[datetime, float]]:
        """The elevation at which the driver sleeps, at every arrival and departure."""
        points = []
        for stay in self.population.stays:
            bed_m = stay.bed_elevation_m
            if bed_m is None:
                bed_m = self.calendar.places[stay.place_id].bed_elevation_m
            points += [(stay.arrive_at, bed_m), (stay.depart_at, bed_m)]
        return points

    def marks(self, since: datetime, until: datetime) -> tuple[JudgedMark, ...]:
        """The readings of a window, oldest first, each judged as on its morning."""
        chosen = [i for i, r in enumerate(self.readings) if since <= r.taken_at <= until]
        sick = [period for period in self.past.sick_periods if period.driver_id == self.driver.id]
        found: list[JudgedMark] = []
        for course, part in self._by_stay([self.readings[i].taken_at for i in chosen]):
            ours = [self.readings[i] for i in chosen[part]]
            earliest = ours[0].taken_at - max(CONFIRMS_WITHIN, SIGNS_LAST)
            context = [r for r in self.readings[: chosen[part.start]] if r.taken_at >= earliest]
            results = judged(course, [*context, *ours], sick)[len(context) :]
            found += [
                JudgedMark(sample, judgement, why_it_teaches_nothing(sample.reading, sick))
                for sample, judgement in results
            ]
        return tuple(found)

    @cached_property
    def last_mark(self) -> JudgedMark | None:
        """The newest reading with its outcome."""
        if not self.readings:
            return None
        taken_at = self.readings[-1].taken_at
        return self.marks(taken_at, taken_at)[-1]

    def band(self, since: datetime, until: datetime) -> list[BandPoint]:
        """The own and the population's range along the course, with a step at every arrival.

        The own range is the one that was known then; for times to come, the one known now.
        """
        instants = self._instants(since, until)
        own: list[ExpectedRange] = []
        for course, ours in self._by_stay(instants):
            own += course.expected(instants[ours])
        population = self.population.expected(instants)
        return [BandPoint(*each) for each in zip(instants, own, population, strict=True)]

    @cached_property
    def costs(self) -> list[RoundCost]:
        """What the present plan gives at the high rounds, by what is known of the driver now."""
        return round_costs(self.calendar, self.driver, self.now, self.person)

    @cached_property
    def next_high_round(self) -> tuple[RoundCost, RoundCost] | None:
        """The next high round by what is known of the driver now, and by the population alone."""
        pairs = zip(self.costs, round_costs(self.calendar, self.driver, self.now), strict=True)
        return next((pair for pair in pairs if pair[0].first_session.starts_at > self.now), None)

    def explanation(self, reading_id: int) -> Explanation:
        """Take one reading apart: what was expected, from what, and how sure that was."""
        reading = next(each for each in self.readings if each.id == reading_id)
        [mark] = [
            each for each in self.marks(reading.taken_at, reading.taken_at) if each.reading.id == reading_id
        ]
        course = self.course_at(reading.taken_at)
        at_h = (reading.taken_at - course.origin) / ONE_HOUR
        own, population = (
            expected_spo2(course.history, at_h, wakefulness=reading.wakefulness, person=person)
            for person in (course.person, None)
        )
        return Explanation(
            mark=mark,
            readings_known=course.person.readings if course.person else 0,
            own=own,
            population=population,
            residual_pct=reading.spo2_pct - mark.sample.expected.mean_pct,
        )

    def window(self, chosen: Window) -> tuple[datetime, datetime]:
        """From when to when the chart runs."""
        if chosen == "12 weeks":
            return self.now - WEEKS_BEHIND, self.now + WEEKS_AHEAD
        rounds = self.calendar.season_at(self.now) if chosen == "season" else self.calendar.rounds
        begun = [self.calendar.starts_at(each) for each in rounds[:1]]
        if chosen == "all":
            begun += [reading.taken_at for reading in self.readings[:1]]
        ends = [self.calendar.ends_at(each) for each in rounds]
        return min([*begun, self.now]) - MARGIN, max([*ends, self.now]) + MARGIN

    def course_at(self, at: datetime) -> DriverCourse:
        """The course with what was known at an instant."""
        course = replace(self.population, past=self.past, as_of=at)
        # The itinerary is the same, so what was worked out of it need not be worked out for every stay.
        vars(course).update({name: getattr(self.population, name) for name in ("stays", "legs", "history")})
        return course

    def _by_stay(self, instants: Sequence[datetime]) -> list[tuple[DriverCourse, slice]]:
        """Split ascending instants where another stay, and with it another knowledge, begins."""

        def arrival(i: int) -> datetime:
            return self.population.where(instants[i]).arrived_at or instants[i]

        parts: list[tuple[DriverCourse, slice]] = []
        for _, group in groupby(range(len(instants)), key=arrival):
            numbers = list(group)
            parts.append((self.course_at(instants[numbers[0]]), slice(numbers[0], numbers[-1] + 1)))
        return parts

    def _instants(self, since: datetime, until: datetime) -> list[datetime]:
        days = (until - since).days + 1
        step = ceil(days / MOST_MORNINGS)
        first = since.astimezone(UTC).date()
        chosen = {datetime.combine(first + timedelta(days=i), MORNING, UTC) for i in range(0, days + 1, step)}
        if step == 1:
            for stay in self.population.stays:
                chosen |= {stay.arrive_at, stay.depart_at - timedelta(minutes=1)}
        # On the way the range would follow the cabin down and up again: there it is left out.
        on_the_way = [(leg.depart_at, leg.arrive_at) for leg in self.population.legs]
        return sorted(
            at
            for at in chosen
            if since <= at <= until and not any(depart <= at < arrive for depart, arrive in on_the_way)
        )


def driver_view(store: Store, calendar: Calendar, driver: Driver, now: datetime) -> DriverView:
    """Return what is known of a driver now."""
    until = now + CLOCKS_DIFFER
    readings = store.readings(driver_id=driver.id, until=until)
    return DriverView(calendar, driver, tuple(readings), Past.of(store, until), now)
