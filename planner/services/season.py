"""The season at a glance: the calendar's ground, a driver's course over it, and what the high rounds cost."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from functools import cached_property
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from planner.physiology.capacity import aerobic_capacity_pct
from planner.physiology.expectation import expected_spo2
from planner.season.exposure import exposure_history, track_days, where_is
from planner.season.model import Commitment, Driver, Leg, Place, PressureMeasurement, Round, Session, Stay
from planner.store.store import Store

# From here on a round is called high: judgement. Below about 1 500 m saturation hardly moves at rest.
HIGH_FROM_M: Final = 1500.0
# A night counts as slept where the driver is at this local time: judgement.
MIDDLE_OF_THE_NIGHT: Final = time(3)
ONE_DAY: Final = timedelta(days=1)


@dataclass(frozen=True)
class Calendar:
    """What the store holds of the season, read once."""

    places: Mapping[int, Place]
    drivers: tuple[Driver, ...]
    rounds: tuple[Round, ...]  # those with sessions, in time order
    sessions: Mapping[int, tuple[Session, ...]]  # by round, in time order
    commitments: tuple[Commitment, ...]
    stays: tuple[Stay, ...]
    legs: tuple[Leg, ...]
    pressures: tuple[PressureMeasurement, ...]

    @cached_property
    def days_at_the_track(self) -> frozenset[tuple[int, date]]:
        """The (place, local date) pairs with a session."""
        every = [session for sessions in self.sessions.values() for session in sessions]
        return track_days(self.rounds, every, self.places)

    def place_of(self, given: Round) -> Place:
        """Return where a round is held."""
        return self.places[given.place_id]

    def starts_at(self, given: Round) -> datetime:
        """Return the start of a round's first session."""
        return self.sessions[given.id][0].starts_at

    def ends_at(self, given: Round) -> datetime:
        """Return the end of a round's last session."""
        return max(session.ends_at for session in self.sessions[given.id])

    def race_of(self, given: Round) -> Session:
        """Return the round's first race, or its last session when none is called a race."""
        sessions = self.sessions[given.id]
        return next((session for session in sessions if session.kind == "race"), sessions[-1])

    def is_high(self, given: Round) -> bool:
        """Return whether track or beds lie high enough to cost something."""
        place = self.place_of(given)
        return max(place.track_elevation_m, place.bed_elevation_m) >= HIGH_FROM_M


@dataclass(frozen=True)
class ReadingRange:
    """What a reading at rest is expected to be: middle and 95 % range."""

    low_pct: float
    mean_pct: float
    high_pct: float


@dataclass(frozen=True)
class RoundCost:
    """What the present plan gives one driver at one high round.

    The ranges and the capacity are None while no stay there is planned.
    """

    round: Round
    place: Place
    first_session: Session
    race: Session
    nights_there: int  # before the first session
    free_days_before: int | None  # None before the first fixed thing of the season
    free_since: str  # the last fixed thing before
    at_first_session: ReadingRange | None
    at_race: ReadingRange | None
    race_capacity_pct: float | None


@dataclass(frozen=True)
class Whereabouts:
    """Where a driver is at an instant, and where the next move leads."""

    driver: Driver
    holding: Stay | Leg | None
    nights_there: int
    next_leg: Leg | None


def read_calendar(store: Store) -> Calendar:
    """Return the whole season as the store holds it."""
    by_round: dict[int, list[Session]] = {}
    for session in sorted(store.all(Session), key=lambda each: each.starts_at):
        by_round.setdefault(session.round_id, []).append(session)
    rounds = [each for each in store.all(Round) if each.id in by_round]
    return Calendar(
        places={place.id: place for place in store.all(Place, include_removed=True)},
        drivers=tuple(sorted(store.all(Driver), key=lambda each: each.name)),
        rounds=tuple(sorted(rounds, key=lambda each: by_round[each.id][0].starts_at)),
        sessions={key: tuple(each) for key, each in by_round.items()},
        commitments=tuple(store.all(Commitment)),
        stays=tuple(sorted(store.all(Stay), key=lambda each: each.arrive_at)),
        legs=tuple(sorted(store.all(Leg), key=lambda each: each.depart_at)),
        pressures=tuple(store.all(PressureMeasurement)),
    )


def round_costs(calendar: Calendar, driver: Driver) -> list[RoundCost]:
    """Return what the plan gives the driver at every high round, in time order."""
    high = [each for each in calendar.rounds if calendar.is_high(each)]
    instants = [
        instant for each in high for instant in (calendar.starts_at(each), calendar.race_of(each).starts_at)
    ]
    ranges = expected_along(calendar, driver, instants)
    return [_cost(calendar, driver, each, *ranges[2 * i : 2 * i + 2]) for i, each in enumerate(high)]


def _cost(
    calendar: Calendar, driver: Driver, given: Round, at_first: ReadingRange, at_race: ReadingRange
) -> RoundCost:
    start, race, place = calendar.starts_at(given), calendar.race_of(given), calendar.place_of(given)
    holding = where_is(driver, start, calendar.stays, ())
    stay = holding if isinstance(holding, Stay) and holding.place_id == place.id else None
    before = _last_fixed_before(calendar, driver, given)
    capacity = None
    if stay is not None:
        days = float(nights(stay, calendar.places, race.starts_at))
        capacity = float(aerobic_capacity_pct(place.track_elevation_m, days))
    return RoundCost(
        round=given,
        place=place,
        first_session=calendar.sessions[given.id][0],
        race=race,
        nights_there=nights(stay, calendar.places, start) if stay else 0,
        free_days_before=(start - before[0]) // ONE_DAY if before else None,
        free_since=before[1] if before else "the start of the season",
        at_first_session=at_first if stay else None,
        at_race=at_race if stay else None,
        race_capacity_pct=capacity,
    )


def expected_along(calendar: Calendar, driver: Driver, instants: Sequence[datetime]) -> list[ReadingRange]:
    """Return what to expect of the driver's readings, awake at rest, at instants of the planned course."""
    if not instants:
        return []
    origin = min(instants)
    history = exposure_history(
        calendar.places[driver.home_place_id],
        [stay for stay in calendar.stays if stay.driver_id == driver.id],
        [leg for leg in calendar.legs if leg.driver_id == driver.id],
        calendar.places,
        origin=origin,
        pressures=calendar.pressures,
        track_days=calendar.days_at_the_track,
    )
    at_h = np.array([(instant - origin) / timedelta(hours=1) for instant in instants])
    expected = expected_spo2(history, at_h)
    columns = (expected.low_spo2_pct, expected.mean_spo2_pct, expected.high_spo2_pct)
    return [ReadingRange(*values) for values in np.column_stack(columns).tolist()]


def whereabouts(calendar: Calendar, at: datetime) -> list[Whereabouts]:
    """Return where everybody is at an instant, by name."""
    found = []
    for driver in calendar.drivers:
        holding = where_is(driver, at, calendar.stays, calendar.legs)
        coming = [leg for leg in calendar.legs if leg.driver_id == driver.id and leg.depart_at > at]
        found.append(
            Whereabouts(
                driver=driver,
                holding=holding,
                nights_there=nights(holding, calendar.places, at) if isinstance(holding, Stay) else 0,
                next_leg=coming[0] if coming else None,
            )
        )
    return found


def nights(stay: Stay, places: Mapping[int, Place], until: datetime) -> int:
    """Return how many nights of a stay have been slept by an instant."""
    zone = ZoneInfo(places[stay.place_id].zone)
    end = min(until, stay.depart_at)
    night = stay.arrive_at.astimezone(zone).date()
    slept = 0
    while (middle := datetime.combine(night, MIDDLE_OF_THE_NIGHT, zone)) <= end:
        slept += middle >= stay.arrive_at
        night += ONE_DAY
    return slept


def _last_fixed_before(calendar: Calendar, driver: Driver, given: Round) -> tuple[datetime, str] | None:
    """Return when the last fixed thing before a round ends, and its name; None before the first one."""
    start = calendar.starts_at(given)
    fixed = [(calendar.ends_at(other), other.name) for other in calendar.rounds]
    fixed += [(one.ends_at, one.name) for one in calendar.commitments if one.driver_id == driver.id]
    return max((pair for pair in fixed if pair[0] <= start), default=None)

