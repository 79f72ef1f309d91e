"""The ways to reach a round: the free time before it, and each kind of plan for it as a list of visits."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime, time, timedelta
from typing import Final, Literal, TypeAlias
from zoneinfo import ZoneInfo

from planner.errors import InputError
from planner.season.constraints import bed_refused, local_date
from planner.season.evaluate import RoundPoint, Setting
from planner.season.itinerary import (
    Fixed,
    Itinerary,
    Visit,
    begins_in,
    ends_at,
    ends_in,
    insert_trip,
    starts_at,
)
from planner.season.model import Place, Stay
from planner.season.nights import ONE_DAY, sleeping_elevation_m
from planner.season.travel import great_circle_km

Kind: TypeAlias = Literal[
    "usual plan",
    "the morning itself",
    "straight there",
    "home first",
    "half-way stop",
    "tent at home",
    "sleep lower",
]

# How far back a plan for one round may reach when no appointment stands before it: judgement.
LONGEST_GAP: Final = timedelta(days=28)
EARLIEST_DEPARTURE: Final = time(8)  # on the morning after the appointment before: judgement
# Hours of arrival to try, best first, so that neither end of a journey falls into the night: judgement.
ARRIVAL_HOURS: Final = (18, 17, 16, 15, 14, 13, 12, 19, 20, 21, 11, 10, 9, 22)
DECENT_FROM_H: Final = 6
DECENT_TO_H: Final = 23
# Days before the first session on which arriving is tried, besides the earliest possible one: judgement.
DAYS_BEFORE: Final = (1, 2, 3, 4, 5, 6, 7, 10, 14, 17, 21)
LONGEST_WAIT_DAYS: Final = 3  # nobody waits longer where the appointment before was, but goes home: judgement
THE_MORNING_ITSELF: Final = timedelta(hours=4)  # arrival before the first session
# Half-way: beds at this share of the venue's bed elevation, and this many places: judgement.
HALF_WAY_SHARE: Final = (0.35, 0.95)
HALF_WAY_PLACES: Final = 2
# On the way is what makes the journey no longer than this many times the straight one, and some: judgement.
LARGEST_DETOUR: Final = 1.5
SMALLEST_DETOUR_KM: Final = 800.0
LEAST_HALF_WAY_NIGHTS: Final = 2
HALF_WAY_NIGHTS: Final = 3  # when there is time
# A tent night when nothing else is agreed: judgement. A physician's note allows it, and may allow less.
TENT_OXYGEN_FRACTION: Final = 0.16
TENT_HOURS_PER_NIGHT: Final = 9.0


@dataclass(frozen=True)
class Gap:
    """The free time before a round: where the driver is then, from when, and what ends it."""

    free_from: datetime
    place: Place
    since: str
    base: Itinerary


@dataclass(frozen=True)
class Sketch:
    """One way to the round before it is built; `why` says what already stands against it."""

    kind: Kind
    title: str
    visits: tuple[Visit, ...] = ()
    itinerary: Itinerary | None = None
    why: str = ""


def gap_before(
    itinerary: Itinerary,
    point: RoundPoint,
    fixed: Sequence[Fixed],
    setting: Setting,
    not_before: datetime | None = None,
) -> Gap:
    """The free time before a round, with an itinerary that reaches the round.

    What lies before `not_before` is past and stays as it is.
    Raises: InputError when the driver is travelling, or bound, until the round begins.
    """
    base = _reaching(itinerary, point, fixed, setting)
    before = [f for f in fixed if f.ends_at <= point.first_session_at and f.round_id != point.round_id]
    bound = max(before, key=lambda f: f.ends_at, default=None)
    earliest = point.first_session_at - LONGEST_GAP
    if bound is None or bound.ends_at < earliest:
        since = "the weeks before"
        free_from, start = _at_a_place(base, max(starts_at(base.entries[0]), earliest))
    else:
        since = bound.name
        venue = setting.places[bound.place_id]
        free_from = _next_at(bound.ends_at, EARLIEST_DEPARTURE, venue)
        # The plan may already leave on the evening before; what is planned can be kept.
        start = base.index_at(bound.ends_at - timedelta(minutes=1))
        if start is None:
            free_from, start = _at_a_place(base, free_from)
        elif base.entries[start].depart_at <= free_from:
            free_from = max(bound.ends_at, base.entries[start].depart_at)
    if not_before is not None and not_before > free_from:
        free_from, start = _at_a_place(base, not_before)
    entry = base.entries[start] if start is not None else None
    if not isinstance(entry, Stay) or free_from >= point.first_session_at:
        raise InputError("round", point.name, f"a round with free time before it; {since} leaves none")
    return Gap(free_from, setting.places[entry.place_id], since, base)


def _reaching(itinerary: Itinerary, point: RoundPoint, fixed: Sequence[Fixed], setting: Setting) -> Itinerary:
    """The itinerary, with a plain trip to the round put in when it does not go there yet."""
    ends = max((f.ends_at for f in fixed if f.round_id == point.round_id), default=point.race_at)
    base = _covering(itinerary, point.first_session_at - LONGEST_GAP, ends + LONGEST_GAP, ends, setting)
    i = base.index_at(point.first_session_at)
    entry = base.entries[i] if i is not None else None
    if isinstance(entry, Stay) and entry.place_id == point.place_id:
        return base
    venue = setting.places[point.place_id]
    day = local_date(point.first_session_at, venue) - ONE_DAY
    arrive = datetime.combine(day, time(18), ZoneInfo(venue.zone)).astimezone(ZoneInfo("UTC"))
    return insert_trip(
        base, venue.id, arrive, _next_at(ends, EARLIEST_DEPARTURE, venue), setting.times, fixed
    )


def _covering(
    itinerary: Itinerary, from_at: datetime, until: datetime, round_ends_at: datetime, setting: Setting
) -> Itinerary:
    """The itinerary, with time at home before or after it when the round lies outside of it."""
    driver_id, home = itinerary.driver_id, setting.home
    if not itinerary.entries:
        return Itinerary(driver_id, (Stay(driver_id, home.id, from_at, until),))
    entries = list(itinerary.entries)
    first, last = entries[0], entries[-1]
    if ends_at(last) <= round_ends_at:
        leaves = ends_at(last)
        if ends_in(last) != home.id:
            way = timedelta(hours=setting.times.between(ends_in(last), home.id).hours)
            entries.append(setting.times.leg(driver_id, ends_in(last), home.id, arrive_at=leaves + way))
            leaves += way
        entries.append(Stay(driver_id, home.id, leaves, max(until, leaves + ONE_DAY)))
    if starts_at(first) >= from_at + LONGEST_GAP:
        arrives = starts_at(first)
        if begins_in(first) != home.id:
            entries.insert(0, setting.times.leg(driver_id, home.id, begins_in(first), arrive_at=arrives))
            arrives = starts_at(entries[0])
        entries.insert(0, Stay(driver_id, home.id, min(from_at, arrives - ONE_DAY), arrives))
    return Itinerary(driver_id, tuple(entries))


def _at_a_place(itinerary: Itinerary, at: datetime) -> tuple[datetime, int | None]:
    """The first instant from then on at which the driver is known to be at a place, and that entry."""
    for i, entry in enumerate(itinerary.entries):
        if isinstance(entry, Stay) and entry.depart_at > at:
            return max(at, entry.arrive_at), i
    return at, None


def sketches(gap: Gap, point: RoundPoint, setting: Setting, lower_bed_m: float | None) -> Iterator[Sketch]:
    venue, home = setting.places[point.place_id], setting.home
    first_day = local_date(point.first_session_at, venue)
    morning = Visit(venue.id, point.first_session_at - THE_MORNING_ITSELF)
    home_first = (_via(gap, home, venue, first_day, setting)[0], morning)
    late = home_first if _home_for_a_night(home_first, setting) else (morning,)
    yield Sketch("the morning itself", "arrive on the morning of the first session", late)
    earliest = gap.free_from + timedelta(hours=setting.times.between(gap.place.id, venue.id).hours)
    days = [first_day - timedelta(days=n) for n in DAYS_BEFORE]
    days = [d for d in days if d >= local_date(earliest, venue)]
    early = local_date(earliest, venue)
    if early not in days and early < first_day:
        days.append(early)
    for day in days:
        words = _days_before(first_day, day)
        wait = "" if gap.place.id == home.id else f", waiting in {gap.place.name}"
        kind: Kind = "home first" if gap.place.id == home.id else "straight there"
        if day == early:
            yield Sketch(
                kind,
                f"go as early as the gap allows: {words}",
                (_arrival(gap.place, venue, day, earliest, setting),),
            )
            continue
        if not wait or (day - early).days <= LONGEST_WAIT_DAYS:
            yield Sketch(kind, f"arrive {words}{wait}", (_arrival(gap.place, venue, day, earliest, setting),))
        if gap.place.id != home.id:
            yield Sketch("home first", f"home first, arrive {words}", _via(gap, home, venue, day, setting))
    yield from _half_way(gap, venue, first_day, setting)
    yield from _tents(gap, venue, first_day, setting)
    yield _lower(gap, venue, first_day, setting, lower_bed_m, earliest)


def _half_way(gap: Gap, venue: Place, first_day: date, setting: Setting) -> Iterator[Sketch]:
    low, high = (share * venue.bed_elevation_m for share in HALF_WAY_SHARE)
    places = [
        p
        for p in setting.places.values()
        if low <= p.bed_elevation_m <= high and p.id not in (gap.place.id, venue.id, setting.home.id)
    ]
    places = [p for p in places if _is_on_the_way(gap.place, p, venue)]
    places.sort(key=lambda p: _detour_km(gap.place, p, venue))
    if not places:
        why = f"No place with beds between {low:.0f} and {high:.0f} m is known that lies on the way."
        yield Sketch("half-way stop", "stop half-way", why=why)
    found = [
        sketch
        for place in places[:HALF_WAY_PLACES]
        for days in (1, 2, 3)
        if (sketch := _stop(gap, place, venue, first_day, days, setting)) is not None
    ]
    if places and not found:
        why = f"The time since {gap.since} leaves no {LEAST_HALF_WAY_NIGHTS} nights on the way."
        yield Sketch("half-way stop", f"stop half-way in {places[0].name}", why=why)
    yield from found


def _stop(
    gap: Gap, place: Place, venue: Place, first_day: date, days: int, setting: Setting
) -> Sketch | None:
    """A few nights half-way, home before them when there is time; None when there is none for the stop."""
    there = _arrival(place, venue, first_day - timedelta(days=days), None, setting)
    last_day = local_date(there.arrive_at, venue)
    soonest = gap.free_from + timedelta(hours=setting.times.between(gap.place.id, place.id).hours)
    stop = _arrival(gap.place, place, local_date(soonest, place), soonest, setting)
    if (last_day - local_date(stop.arrive_at, place)).days < LEAST_HALF_WAY_NIGHTS:
        return None
    title = f"stop half-way in {place.name}, arrive {_days_before(first_day, last_day)}"
    home_first = _via(gap, setting.home, place, last_day - timedelta(days=HALF_WAY_NIGHTS), setting)
    if _home_for_a_night(home_first, setting):
        on_the_way = _is_on_the_way(setting.home, place, venue)
        return Sketch("half-way stop", title, (*home_first, there)) if on_the_way else None
    return Sketch("half-way stop", title, (stop, there))


def _home_for_a_night(visits: tuple[Visit, ...], setting: Setting) -> bool:
    """Whether a way that leads home first leaves at least a night there."""
    home, after = visits[0], visits[1]
    leaves = after.arrive_at - timedelta(hours=setting.times.between(home.place_id, after.place_id).hours)
    return local_date(leaves, setting.home) > local_date(home.arrive_at, setting.home)


def _tents(gap: Gap, venue: Place, first_day: date, setting: Setting) -> Iterator[Sketch]:
    home = setting.home
    sleeping_m = sleeping_elevation_m(home, home.bed_elevation_m, TENT_OXYGEN_FRACTION)
    refused = bed_refused(setting.driver, home.bed_elevation_m, TENT_OXYGEN_FRACTION, sleeping_m)
    for days in (1, 3):
        words = _days_before(first_day, first_day - timedelta(days=days))
        title = f"tent nights at home, arrive {words}"
        if refused:
            yield Sketch("tent at home", title, why=refused)
            return
        visits = _via(gap, home, venue, first_day - timedelta(days=days), setting)
        tent = replace(
            visits[0], tent_oxygen_fraction=TENT_OXYGEN_FRACTION, tent_hours_per_night=TENT_HOURS_PER_NIGHT
        )
        yield Sketch("tent at home", title, (tent, *visits[1:]))


def _lower(
    gap: Gap, venue: Place, first_day: date, setting: Setting, lower_bed_m: float | None, earliest: datetime
) -> Sketch:
    title = "sleep lower than the track"
    if lower_bed_m is None:
        lowest_m = min(venue.track_elevation_m, venue.bed_elevation_m)
        why = f"No beds lower than {lowest_m:.0f} m are known near {venue.name}; type their elevation."
        return Sketch("sleep lower", title, why=why)
    if lower_bed_m >= venue.bed_elevation_m:
        return Sketch(
            "sleep lower", title, why=f"{lower_bed_m:.0f} m is not lower than the beds of {venue.name}."
        )
    day = first_day - timedelta(days=2)
    arrival = replace(_arrival(gap.place, venue, day, earliest, setting), bed_elevation_m=lower_bed_m)
    return Sketch(
        "sleep lower", f"sleep at {lower_bed_m:.0f} m, arrive {_days_before(first_day, day)}", (arrival,)
    )


def _via(gap: Gap, home: Place, venue: Place, day: date, setting: Setting) -> tuple[Visit, ...]:
    """Home as soon as possible, then the venue on a day; the same for somebody who is at home already."""
    soonest = gap.free_from + timedelta(hours=setting.times.between(gap.place.id, home.id).hours)
    if gap.place.id == home.id:
        soonest = gap.free_from + timedelta(minutes=1)
    return Visit(home.id, soonest), _arrival(home, venue, day, None, setting)


def _arrival(start: Place, end: Place, day: date, earliest: datetime | None, setting: Setting) -> Visit:
    """The arrival on a local day, so that neither end of the way falls into the night if possible."""
    way = timedelta(hours=setting.times.between(start.id, end.id).hours)
    tries = [
        datetime.combine(day, time(hour), ZoneInfo(end.zone)).astimezone(ZoneInfo("UTC"))
        for hour in ARRIVAL_HOURS
    ]
    possible = [at for at in tries if earliest is None or at >= earliest]
    decent = [
        at
        for at in possible
        if DECENT_FROM_H <= (at - way).astimezone(ZoneInfo(start.zone)).hour < DECENT_TO_H
    ]
    return Visit(end.id, (decent or possible or [earliest or tries[0]])[0])


def _days_before(first_day: date, day: date) -> str:
    days = (first_day - day).days
    return "the day before the first session" if days == 1 else f"{days} days before the first session"


def _next_at(after: datetime, wall: time, place: Place) -> datetime:
    zone = ZoneInfo(place.zone)
    day = after.astimezone(zone).date()
    candidates = [datetime.combine(day + timedelta(days=i), wall, zone) for i in (0, 1)]
    return next(c for c in candidates if c >= after).astimezone(ZoneInfo("UTC"))


def _is_on_the_way(start: Place, stop: Place, end: Place) -> bool:
    longest_km = LARGEST_DETOUR * _detour_km(start, end, end) + SMALLEST_DETOUR_KM
    return _detour_km(start, stop, end) <= longest_km


def _detour_km(start: Place, stop: Place, end: Place) -> float:
    def km(a: Place, b: Place) -> float:
        return float(great_circle_km(a.latitude_deg, a.longitude_deg, b.latitude_deg, b.longitude_deg))

    return km(start, stop) + km(stop, end)
