"""This morning: who needs what, now. One row a driver, worst first, each with its reason and its evidence."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime, time, timedelta
from math import nan
from typing import Final, Literal, TypeAlias
from zoneinfo import ZoneInfo

from planner.errors import InputError
from planner.hydration.morning import MorningWater
from planner.monitoring.model import Notice, Outcome, Reading, SickPeriod
from planner.monitoring.mornings import JudgedReading, Morning
from planner.monitoring.outcome import (
    CONFIRMS_WITHIN,
    SEVERITY,
    SIGNS_LAST,
    ExpectedRange,
    Judgement,
    Sample,
    judge,
)
from planner.monitoring.own_range import own_range_in_words
from planner.season.model import Place
from planner.services.air import SiteAir, site_air
from planner.services.course import POSSESSIVES, DriverCourse, Whereabout
from planner.services.morning_water import morning_fluid_findings
from planner.services.own import Past
from planner.services.places import pressure_in_force
from planner.services.season import Calendar, read_calendar
from planner.services.workspace import now
from planner.store.store import Store
from planner.wording import counted, day_and_clock, per_cent, per_cent_range

RowOutcome: TypeAlias = Outcome | Literal["not measured"]

ORDER: Final[tuple[RowOutcome, ...]] = ("urgent", "refer", "repeat", "in range", "not measured")
MORNINGS_SHOWN: Final = 10
CLOCKS_DIFFER: Final = timedelta(minutes=2)  # a telephone may be ahead of this machine: judgement
MORNING_AT: Final = time(7)  # when a morning's range is drawn for, local: judgement
UTC: Final = ZoneInfo("UTC")


@dataclass(frozen=True)
class DriverRow:
    """One driver's morning. `reading` is the one that the outcome rests on, `last` the newest of all."""

    driver_id: int
    driver: str
    outcome: RowOutcome
    reasons: tuple[str, ...]
    advice: str
    expected: ExpectedRange
    where: Whereabout
    reading: Reading | None
    last: Reading | None
    mornings: tuple[Morning, ...]
    range_words: str = ""  # how much of the range is the driver's own
    notices: tuple[Notice, ...] = ()

    @property
    def zone(self) -> str:
        """The zone in which this driver's times are shown."""
        return self.where.place.zone


@dataclass(frozen=True)
class ThisMorning:
    """The whole screen: when and where, and a row a driver; `place` and `air` are where most drivers are."""

    at: datetime
    rows: tuple[DriverRow, ...]
    place: Place | None = None
    air: SiteAir | None = None
    elsewhere: int = 0

    @property
    def is_spread(self) -> bool:
        """Whether no one place speaks for the team: more drivers are elsewhere than there."""
        return self.elsewhere > len(self.rows) - self.elsewhere

    @property
    def sentence(self) -> str:
        """As "8 drivers: 1 refer, 2 repeat, 4 in range, 1 not measured"."""
        if not self.rows:
            return "No drivers yet."
        counts = Counter(row.outcome for row in self.rows)
        parts = [f"{counts[outcome]} {outcome}" for outcome in ORDER if counts[outcome]]
        return f"{counted(len(self.rows), 'driver')}: {', '.join(parts)}"


def morning(store: Store, day: date | None = None) -> tuple[DriverRow, ...]:
    """The rows of a day, worst first; of today up to now, of an earlier day up to its end.

    Raises: InputError for a day that has not come yet.
    """
    at = now(store)
    if day is not None:
        at = _end_of(day, this_morning(store, at), at)
    return this_morning(store, at).rows


def this_morning(store: Store, at: datetime) -> ThisMorning:
    """Who needs what at an instant."""
    calendar = read_calendar(store)
    since = at - timedelta(days=MORNINGS_SHOWN + 1)
    readings = store.readings(since=since, until=at + CLOCKS_DIFFER)
    past = Past.of(store, at)
    sick = [s for s in past.sick_periods if s.starts_at <= at]
    notices = [n for n in store.all(Notice) if at - timedelta(hours=24) < n.at <= at]
    rows = []
    for driver in calendar.drivers:
        course = DriverCourse(calendar, driver, past, at)
        rows.append(
            _row(
                course,
                [r for r in readings if r.driver_id == driver.id],
                [s for s in sick if s.driver_id == driver.id],
                tuple(n for n in notices if n.driver_id == driver.id),
                at,
            )
        )
    water = morning_fluid_findings(store, at, calendar)
    rows = [_with_water(row, water.get(row.driver_id)) for row in rows]
    rows.sort(key=lambda row: (ORDER.index(row.outcome), row.driver))
    place, elsewhere = _main_place(rows)
    return ThisMorning(
        at=at,
        rows=tuple(rows),
        place=place,
        air=None if place is None else air_at(calendar, place, at),
        elsewhere=elsewhere,
    )


def air_at(calendar: Calendar, place: Place, at: datetime) -> SiteAir:
    """The air at a place's track, by the measured pressure when one is near enough in time."""
    history = [m for m in calendar.pressures if m.place_id == place.id]
    measured = pressure_in_force(history, at)
    return site_air(
        place.track_elevation_m,
        latitude_deg=place.latitude_deg,
        measured_pressure_hpa=nan if measured is None else measured.pressure_hpa,
    )


def judged(
    course: DriverCourse, readings: Sequence[Reading], sick: Sequence[SickPeriod]
) -> list[tuple[Sample, Judgement]]:
    """Every reading of a driver with its outcome, oldest first; each is judged by those before it."""
    samples = course.samples(sorted(readings, key=lambda r: r.taken_at))
    result = []
    for i, sample in enumerate(samples):
        taken_at = sample.reading.taken_at
        recent = [s for s in samples[:i] if taken_at - s.reading.taken_at <= max(CONFIRMS_WITHIN, SIGNS_LAST)]
        result.append((sample, judge(sample, recent, sick_at(sick, taken_at))))
    return result


def sick_at(sick: Sequence[SickPeriod], at: datetime) -> SickPeriod | None:
    """The sick period that covers an instant."""
    return next((s for s in sick if s.starts_at <= at and (s.ends_at is None or at < s.ends_at)), None)


def _row(
    course: DriverCourse,
    readings: Sequence[Reading],
    sick: Sequence[SickPeriod],
    notices: tuple[Notice, ...],
    at: datetime,
) -> DriverRow:
    where = course.where(at)
    zone = ZoneInfo(where.place.zone)
    today = at.astimezone(zone).date()
    days = [today - timedelta(days=i) for i in reversed(range(MORNINGS_SHOWN))]
    times = [datetime.combine(d, MORNING_AT, zone).astimezone(UTC) for d in days]
    *ranges, expected = course.expected([*times, at])
    all_judged = judged(course, readings, sick)
    last = all_judged[-1][0].reading if all_judged else None
    standing = _standing(all_judged, datetime.combine(today, time(), zone), at)
    if standing is None:
        outcome: RowOutcome = "not measured"
        reasons, advice, reading = _not_measured(expected, last, where, course.calendar), "", None
    else:
        sample, judgement = standing
        outcome, reasons, advice = judgement.outcome, judgement.reasons, judgement.advice
        reading = sample.reading
    return DriverRow(
        driver_id=course.driver.id,
        driver=course.driver.name,
        outcome=outcome,
        reasons=reasons,
        advice=advice,
        expected=expected,
        where=where,
        reading=reading,
        last=last,
        mornings=tuple(_mornings(days, ranges, all_judged, course)),
        range_words=_range_words(course),
        notices=notices,
    )


def _with_water(row: DriverRow, water: MorningWater | None) -> DriverRow:
    """The row with what mass, urine and thirst say, where they lie outside the driver's own range.

    The worse outcome stands and its reason comes first. A driver without a reading stays not measured
    unless the marks are for the physician.
    """
    if water is None or water.outcome == "in range":
        return row
    if row.outcome == "not measured":
        worse = SEVERITY[water.outcome] >= SEVERITY["refer"]
    else:
        worse = SEVERITY[water.outcome] > SEVERITY[row.outcome]
    said, advice = (water.sentence,), (row.advice, water.advice)
    return replace(
        row,
        outcome=water.outcome if worse else row.outcome,
        reasons=said + row.reasons if worse else row.reasons + said,
        advice=" ".join(dict.fromkeys(each for each in (advice[::-1] if worse else advice) if each)),
    )


def _standing(
    all_judged: Sequence[tuple[Sample, Judgement]], midnight: datetime, at: datetime
) -> tuple[Sample, Judgement] | None:
    """What the row rests on: the last reading awake today, unless something worse stands beside it.

    Worse may be a reading asleep of today, or one of the last hours before midnight that was for the
    physician: no new day makes that go away. A reading asleep alone does not make a driver measured.
    """
    since = min(midnight, at - SIGNS_LAST)
    newest: dict[str, tuple[Sample, Judgement]] = {}
    for sample, judgement in all_judged:
        if sample.reading.taken_at >= since:
            newest[sample.reading.wakefulness] = (sample, judgement)

    def counts(sample: Sample, judgement: Judgement) -> bool:
        measured = sample.reading.wakefulness == "awake" and sample.reading.taken_at >= midnight
        return measured or SEVERITY[judgement.outcome] >= SEVERITY["refer"]

    standing = [each for each in newest.values() if counts(*each)]
    return max(
        standing,
        key=lambda each: (SEVERITY[each[1].outcome], each[0].reading.wakefulness == "awake"),
        default=None,
    )


def _not_measured(
    expected: ExpectedRange, last: Reading | None, where: Whereabout, calendar: Calendar
) -> tuple[str, ...]:
    limits = per_cent_range(expected.low_pct, expected.high_pct)
    words = f" {expected.words}" if expected.words else ""
    text = f"No reading yet today, expected {limits}{words}."
    if last is None:
        return (f"{text} None in the last {MORNINGS_SHOWN} days.",)
    place = calendar.places[last.place_id]
    there = "" if place.id == where.place.id else f" in {place.name}"
    return (f"{text} Last {per_cent(last.spo2_pct)} on {day_and_clock(last.taken_at, place.zone)}{there}.",)


def _range_words(course: DriverCourse) -> str:
    person = course.person
    return "" if person is None else own_range_in_words(person, POSSESSIVES[course.driver.sex])


def _mornings(
    days: Sequence[date],
    ranges: Sequence[ExpectedRange],
    all_judged: Sequence[tuple[Sample, Judgement]],
    course: DriverCourse,
) -> list[Morning]:
    by_day: dict[date, list[JudgedReading]] = {}
    for sample, judgement in all_judged:
        reading = sample.reading
        zone = course.calendar.places[reading.place_id].zone
        on = reading.taken_at.astimezone(ZoneInfo(zone)).date()
        by_day.setdefault(on, []).append(
            JudgedReading(
                reading, judgement.outcome, day_and_clock(reading.taken_at, zone), judgement.reasons[0]
            )
        )
    return [
        Morning(on, expected, tuple(by_day.get(on, ()))) for on, expected in zip(days, ranges, strict=True)
    ]


def _main_place(rows: Sequence[DriverRow]) -> tuple[Place | None, int]:
    """Where most drivers are, and how many are elsewhere."""
    if not rows:
        return None, 0
    here = Counter(row.where.place.id for row in rows)
    place_id, amount = here.most_common(1)[0]
    return next(row.where.place for row in rows if row.where.place.id == place_id), len(rows) - amount


def _end_of(day: date, today: ThisMorning, at: datetime) -> datetime:
    zone = ZoneInfo("UTC" if today.place is None else today.place.zone)
    if day > at.astimezone(zone).date():
        raise InputError("date", day.isoformat(), f"a day up to today, {at.astimezone(zone).date()}")
    end = datetime.combine(day + timedelta(days=1), time(), zone).astimezone(UTC)
    return min(end - timedelta(seconds=1), at)
