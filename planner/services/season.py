"""The season at a glance: the calendar's ground, a driver's course over it, and what the high rounds cost."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from functools import cached_property
from typing import Final
from zoneinfo import ZoneInfo

from planner.physiology.person import PersonPosterior
from planner.season.constraints import is_high
from planner.season.evaluate import RoundOutlook, Setting, outlooks, round_point
from planner.season.exposure import track_days, where_is
from planner.season.itinerary import Itinerary
from planner.season.model import Commitment, Driver, Leg, Place, PressureMeasurement, Round, Session, Stay
from planner.season.nights import MIDDLE_OF_THE_NIGHT
from planner.season.travel import LegTimes
from planner.store.store import Store

WINTER_BREAK: Final = timedelta(days=75)  # judgement: no series rests so long in mid-season
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

    def season_at(self, at: datetime) -> tuple[Round, ...]:
        """Return the rounds of the season that is on or comes next, else of the last one.

        A store may hold several years; a break longer than `WINTER_BREAK` parts two seasons.
        """
        season: list[Round] = []
        for given in self.rounds:
            if season and self.starts_at(given) - self.ends_at(season[-1]) > WINTER_BREAK:
                if self.ends_at(season[-1]) >= at:
                    break
                season = []
            season.append(given)
        return tuple(season)

    def is_high(self, given: Round) -> bool:
        """Return whether track or beds lie high enough to cost something."""
        return is_high(self.place_of(given))

    def itinerary_of(self, driver: Driver) -> Itinerary:
        """Return a driver's stays and legs."""
        return Itinerary.of(driver.id, self.stays, self.legs)


@dataclass(frozen=True)
class RoundCost:
    """What the present plan gives one driver at one high round; no outlook while no stay there is planned."""

    round: Round
    place: Place
    first_session: Session
    race: Session
    free_days_before: int | None  # None before the first fixed thing of the season
    free_since: str  # the last fixed thing before
    nights_there: int  # before the first session
    outlook: RoundOutlook | None


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


def round_costs(
    calendar: Calendar, driver: Driver, at: datetime, person: PersonPosterior | None = None
) -> list[RoundCost]:
    """Return what the plan gives the driver at every high round of the season, in time order.

    Parameters: `at` is an instant of that season; `person` is what readings have taught of the driver,
    None = the population.
    """
    high = [each for each in calendar.season_at(at) if calendar.is_high(each)]
    points = [
        round_point(
            each.id,
            each.name,
            calendar.place_of(each),
            calendar.starts_at(each),
            calendar.race_of(each).starts_at,
        )
        for each in high
    ]
    setting = Setting(
        driver=driver,
        places=calendar.places,
        times=LegTimes(calendar.places, calendar.legs),
        track_days=calendar.days_at_the_track,
        pressures=calendar.pressures,
        person=person,
    )
    (given,) = outlooks([calendar.itinerary_of(driver)], points, setting) or ([],)
    return [_cost(calendar, driver, each, outlook) for each, outlook in zip(high, given, strict=True)]


def _cost(calendar: Calendar, driver: Driver, given: Round, outlook: RoundOutlook) -> RoundCost:
    start = calendar.starts_at(given)
    holding = where_is(driver, start, calendar.stays, ())
    stay = holding if isinstance(holding, Stay) and holding.place_id == given.place_id else None
    before = _last_fixed_before(calendar, driver, given)
    return RoundCost(
        round=given,
        place=calendar.place_of(given),
        first_session=calendar.sessions[given.id][0],
        race=calendar.race_of(given),
        free_days_before=(start - before[0]) // ONE_DAY if before else None,
        free_since=before[1] if before else "the start of the season",
        nights_there=nights(stay, calendar.places, start) if stay else 0,
        outlook=outlook if stay else None,
    )


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
