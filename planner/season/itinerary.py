"""One driver's itinerary: always whole, and edited only in ways that keep it whole.

Whole means: each entry begins at the instant at which the one before it ends, every change of place is a leg
between those two places, and nobody is in two places at once. An edit that would break this, or a fixed
appointment, is refused with the reason.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from itertools import pairwise
from typing import Final
from zoneinfo import ZoneInfo

from planner.errors import InputError
from planner.season.model import Commitment, Leg, Place, Round, Session, Stay
from planner.season.travel import LegTimes

UTC: Final = ZoneInfo("UTC")


class BrokenAppointmentError(InputError):
    """A change that would make the driver miss a fixed appointment; `sentence` says which."""

    def __init__(self, sentence: str) -> None:
        self.sentence = sentence
        super().__init__("itinerary", "this change", f"no broken appointment: {sentence}")


@dataclass(frozen=True)
class Fixed:
    """Where the driver has to be, and when: the sessions of a round or a commitment."""

    name: str
    place_id: int
    starts_at: datetime
    ends_at: datetime
    round_id: int | None = None
    commitment_id: int | None = None


@dataclass(frozen=True)
class Visit:
    """One stop of a stretch to be planned: where, from when, in which bed; until the next leg."""

    place_id: int
    arrive_at: datetime
    bed_elevation_m: float | None = None
    tent_oxygen_fraction: float | None = None
    tent_hours_per_night: float = 0.0


@dataclass(frozen=True)
class Itinerary:
    """The stays and legs of one driver in time order."""

    driver_id: int
    entries: tuple[Stay | Leg, ...]

    @classmethod
    def of(cls, driver_id: int, stays: Iterable[Stay], legs: Iterable[Leg]) -> Itinerary:
        """The itinerary of one driver out of everybody's stays and legs."""
        everybody: list[Stay | Leg] = [*stays, *legs]
        ours = [entry for entry in everybody if entry.driver_id == driver_id]
        return cls(driver_id, tuple(sorted(ours, key=lambda e: (starts_at(e), ends_at(e)))))

    @property
    def stays(self) -> tuple[Stay, ...]:
        return tuple(e for e in self.entries if isinstance(e, Stay))

    @property
    def legs(self) -> tuple[Leg, ...]:
        return tuple(e for e in self.entries if isinstance(e, Leg))

    def index_at(self, at: datetime) -> int | None:
        """Number of the entry that holds an instant; at a change, the one that begins."""
        for i, entry in enumerate(self.entries):
            if starts_at(entry) <= at < ends_at(entry):
                return i
        return None


@dataclass(frozen=True)
class Differences:
    """What has to be written so that one itinerary becomes another."""

    removed: tuple[Stay | Leg, ...]
    changed: tuple[Stay | Leg, ...]
    added: tuple[Stay | Leg, ...]


def starts_at(entry: Stay | Leg) -> datetime:
    """The instant at which a stay or leg begins."""
    return entry.arrive_at if isinstance(entry, Stay) else entry.depart_at


def ends_at(entry: Stay | Leg) -> datetime:
    """The instant at which a stay or leg ends."""
    return entry.depart_at if isinstance(entry, Stay) else entry.arrive_at


def begins_in(entry: Stay | Leg) -> int:
    """The place at which a stay or leg begins."""
    return entry.place_id if isinstance(entry, Stay) else entry.from_place_id


def ends_in(entry: Stay | Leg) -> int:
    """The place at which a stay or leg ends."""
    return entry.place_id if isinstance(entry, Stay) else entry.to_place_id


def fixed_points(
    rounds: Iterable[Round],
    sessions: Iterable[Session],
    commitments: Iterable[Commitment],
    *,
    driver_id: int,
) -> list[Fixed]:
    """Everything that ties one driver to a place, in time order: each round as a whole, each commitment."""
    by_round: dict[int, list[Session]] = {}
    for session in sessions:
        by_round.setdefault(session.round_id, []).append(session)
    points = [
        Fixed(
            r.name,
            r.place_id,
            min(s.starts_at for s in by_round[r.id]),
            max(s.ends_at for s in by_round[r.id]),
            round_id=r.id,
        )
        for r in rounds
        if r.id in by_round
    ]
    points += [
        Fixed(c.name, c.place_id, c.starts_at, c.ends_at, commitment_id=c.id)
        for c in commitments
        if c.driver_id == driver_id
    ]
    return sorted(points, key=lambda f: (f.starts_at, f.ends_at))


def problems(itinerary: Itinerary, places: Mapping[int, Place]) -> list[str]:
    """What keeps an itinerary from being whole, one sentence each; empty = whole."""
    found: list[str] = []
    for entry in itinerary.entries:
        what = "stay" if isinstance(entry, Stay) else "leg"
        if starts_at(entry).utcoffset() is None or ends_at(entry).utcoffset() is None:
            return [f"A {what} has a time without a zone."]
        if ends_at(entry) <= starts_at(entry):
            found.append(f"The {what} from {_when(starts_at(entry))} ends before it begins.")
        if entry.driver_id != itinerary.driver_id:
            found.append(f"The {what} from {_when(starts_at(entry))} belongs to another driver.")
        for place_id in {begins_in(entry), ends_in(entry)} - places.keys():
            found.append(
                f"The {what} from {_when(starts_at(entry))} names place {place_id}, which is not known."
            )
        if isinstance(entry, Leg) and entry.from_place_id == entry.to_place_id:
            found.append(f"The leg from {_when(entry.depart_at)} ends where it begins.")
    for before, after in pairwise(itinerary.entries):
        if starts_at(after) > ends_at(before):
            found.append(f"Nothing is planned from {_when(ends_at(before))} to {_when(starts_at(after))}.")
        if starts_at(after) < ends_at(before):
            until = min(ends_at(before), ends_at(after))
            found.append(f"Two entries overlap from {_when(starts_at(after))} to {_when(until)}.")
        if begins_in(after) != ends_in(before):
            found.append(
                f"No leg leads from {_name(places, ends_in(before))} to {_name(places, begins_in(after))}"
                f" on {_when(starts_at(after))}."
            )
    return found


def broken(itinerary: Itinerary, fixed: Iterable[Fixed], places: Mapping[int, Place]) -> list[str]:
    """Which fixed appointments the itinerary misses, one sentence each, beyond its ends none."""
    if not itinerary.entries:
        return []
    first, last = starts_at(itinerary.entries[0]), ends_at(itinerary.entries[-1])
    found = []
    for point in fixed:
        if point.starts_at < first or point.ends_at > last:
            continue
        held = [e for e in itinerary.entries if starts_at(e) < point.ends_at and ends_at(e) > point.starts_at]
        if not all(isinstance(e, Stay) and e.place_id == point.place_id for e in held):
            found.append(
                f"{point.name} in {_name(places, point.place_id)} needs the driver there from"
                f" {_when(point.starts_at)} to {_when(point.ends_at)}."
            )
    return found


def insert_trip(
    itinerary: Itinerary,
    place_id: int,
    arrive_at: datetime,
    leave_at: datetime,
    times: LegTimes,
    fixed: Collection[Fixed] = (),
) -> Itinerary:
    """Go to a place and come back to where the driver would have been.

    Raises: InputError when the trip, with its travel, does not lie within one stay elsewhere, or would
    break a fixed appointment.
    """
    _zoned("arrive_at", arrive_at)
    _zoned("leave_at", leave_at)
    if leave_at <= arrive_at:
        raise InputError("leave_at", _when(leave_at), f"a time after the arrival on {_when(arrive_at)}")
    i = itinerary.index_at(arrive_at)
    base = itinerary.entries[i] if i is not None else None
    if not isinstance(base, Stay):
        raise InputError("arrive_at", _when(arrive_at), "a time at which the driver is not travelling")
    if base.place_id == place_id:
        raise InputError("place_id", _name(times.places, place_id), "a place where the driver is not already")
    out = times.leg(itinerary.driver_id, base.place_id, place_id, arrive_at=arrive_at)
    home = leave_at + timedelta(hours=times.between(place_id, base.place_id).hours)
    back = times.leg(itinerary.driver_id, place_id, base.place_id, arrive_at=home)
    here, there = _name(times.places, base.place_id), _name(times.places, place_id)
    if out.depart_at <= base.arrive_at:
        earliest = base.arrive_at + (arrive_at - out.depart_at)
        raise InputError(
            "arrive_at",
            _when(arrive_at),
            f"a time after {_when(earliest)}, the way from {here} to {there} counted",
        )
    if back.arrive_at >= base.depart_at:
        raise InputError(
            "leave_at",
            _when(leave_at),
            f"a return to {here} before {_when(base.depart_at)}, the way back counted",
        )
    trip: tuple[Stay | Leg, ...] = (
        replace(base, depart_at=out.depart_at),
        out,
        Stay(itinerary.driver_id, place_id, arrive_at, back.depart_at),
        back,
        replace(base, arrive_at=back.arrive_at, id=0),
    )
    return _spliced(itinerary, base, base, trip, times, fixed)


def move_arrival(
    itinerary: Itinerary,
    stay: Stay,
    arrive_at: datetime,
    times: LegTimes,
    fixed: Collection[Fixed] = (),
) -> Itinerary:
    """Let a stay begin earlier or later: the leg moves along, the stay before gives or takes time.

    Raises: InputError when there is no leg into the stay, when either stay would vanish, or when a fixed
    appointment would break.
    """
    _zoned("arrive_at", arrive_at)
    if stay not in itinerary.entries:
        raise InputError("stay", _when(stay.arrive_at), "a stay of this itinerary")
    i = itinerary.entries.index(stay)
    before, leg = itinerary.entries[max(i - 2, 0)], itinerary.entries[max(i - 1, 0)]
    if i < 2 or not isinstance(leg, Leg) or not isinstance(before, Stay):
        raise InputError("stay", _when(stay.arrive_at), "a stay that is reached by a leg from another stay")
    departs = leg.depart_at + (arrive_at - stay.arrive_at)
    if departs <= before.arrive_at:
        here = _name(times.places, before.place_id)
        expected = f"a departure after {_when(before.arrive_at)}, when the stay in {here} begins"
        raise InputError("arrive_at", _when(arrive_at), expected)
    if arrive_at >= stay.depart_at:
        expected = f"a time before the departure on {_when(stay.depart_at)}"
        raise InputError("arrive_at", _when(arrive_at), expected)
    moved: tuple[Stay | Leg, ...] = (
        replace(before, depart_at=departs),
        replace(leg, depart_at=departs, arrive_at=arrive_at),
        replace(stay, arrive_at=arrive_at),
    )
    return _spliced(itinerary, before, stay, moved, times, fixed)


def replace_between(
    itinerary: Itinerary,
    start: datetime,
    end: datetime,
    visits: Sequence[Visit],
    times: LegTimes,
    fixed: Collection[Fixed] = (),
) -> Itinerary:
    """Plan the stretch between two fixed points anew.

    It leads from where the driver is at `start`, also when leaving just then, through the visits, the last
    of which must be where the driver is at `end`. Each leg arrives when its visit begins and takes as long
    as `times` says; a visit to the place where the driver already is changes only the bed.
    Raises: InputError naming the visit that cannot be reached in time, or the appointment that would break.
    """
    first = _stay_ending_at(itinerary, start) or _stay_at(itinerary, "start", start)
    last = _stay_at(itinerary, "end", end)
    if not visits or visits[-1].place_id != last.place_id:
        raise InputError("visits", len(visits), f"a last visit to {_name(times.places, last.place_id)}")
    stretch: list[Stay | Leg] = [first]
    free_from = start
    for visit in visits:
        stretch[-1:] = _leave_for(itinerary.driver_id, stretch[-1], visit, free_from, times)
        stretch.append(_stay_of(itinerary.driver_id, visit, last.depart_at))
        free_from = visit.arrive_at
    if free_from > end or last.depart_at <= free_from:
        raise InputError("visits", _when(free_from), f"a last arrival by {_when(end)}")
    if last is not first:
        stretch[-1] = replace(stretch[-1], id=last.id)
    return _spliced(itinerary, first, last, tuple(stretch), times, fixed)


def _leave_for(
    driver_id: int, current: Stay | Leg, visit: Visit, free_from: datetime, times: LegTimes
) -> list[Stay | Leg]:
    """The current stay, ended so that the next visit begins in time, and the leg there if it takes one."""
    _zoned("arrive_at", visit.arrive_at)
    here, there = ends_in(current), visit.place_id
    legs = [] if here == there else [times.leg(driver_id, here, there, arrive_at=visit.arrive_at)]
    departs = legs[0].depart_at if legs else visit.arrive_at
    earliest = max(free_from, starts_at(current))
    if departs < free_from or departs <= starts_at(current):
        way = visit.arrive_at - departs
        raise InputError(
            f"arrival in {_name(times.places, there)}",
            _when(visit.arrive_at),
            f"{_when(earliest + way)} or later, because the way from {_name(times.places, here)}"
            f" takes {way / timedelta(hours=1):.1f} h",
        )
    return [_with_end(current, departs), *legs]


def differences(old: Itinerary, new: Itinerary) -> Differences:
    """What to remove, change and add so that `old` becomes `new`; entries keep their number if they can."""
    before = {(type(e), e.id): e for e in old.entries if e.id}
    kept = {(type(e), e.id) for e in new.entries if e.id}
    return Differences(
        removed=tuple(e for key, e in before.items() if key not in kept),
        changed=tuple(e for e in new.entries if e.id and before.get((type(e), e.id)) != e),
        added=tuple(e for e in new.entries if not e.id),
    )


def _spliced(
    itinerary: Itinerary,
    first: Stay | Leg,
    last: Stay | Leg,
    stretch: tuple[Stay | Leg, ...],
    times: LegTimes,
    fixed: Collection[Fixed],
) -> Itinerary:
    """The itinerary with the entries from `first` to `last` replaced, unless that breaks an appointment."""
    i, j = itinerary.entries.index(first), itinerary.entries.index(last)
    new = Itinerary(itinerary.driver_id, (*itinerary.entries[:i], *stretch, *itinerary.entries[j + 1 :]))
    already = set(broken(itinerary, fixed, times.places))
    for sentence in broken(new, fixed, times.places):
        if sentence not in already:
            raise BrokenAppointmentError(sentence)
    return new


def _stay_at(itinerary: Itinerary, field: str, at: datetime) -> Stay:
    _zoned(field, at)
    i = itinerary.index_at(at)
    entry = itinerary.entries[i] if i is not None else None
    if not isinstance(entry, Stay):
        raise InputError(field, _when(at), "a time at which the driver is at a place and not travelling")
    return entry


def _stay_ending_at(itinerary: Itinerary, at: datetime) -> Stay | None:
    """The stay that a leg leaves at an instant, if one does."""
    for stay, leg in pairwise(itinerary.entries):
        if isinstance(stay, Stay) and isinstance(leg, Leg) and stay.depart_at == at == leg.depart_at:
            return stay
    return None


def _stay_of(driver_id: int, visit: Visit, depart_at: datetime) -> Stay:
    return Stay(
        driver_id, visit.place_id, visit.arrive_at, depart_at,
        visit.bed_elevation_m, visit.tent_oxygen_fraction, visit.tent_hours_per_night,
    )  # fmt: skip


def _with_end(entry: Stay | Leg, at: datetime) -> Stay | Leg:
    return replace(entry, depart_at=at) if isinstance(entry, Stay) else replace(entry, arrive_at=at)


def _zoned(field: str, at: datetime) -> None:
    if at.utcoffset() is None:
        raise InputError(field, str(at), "a time with its zone")


def _when(at: datetime) -> str:
    return at.astimezone(UTC).strftime("%a %-d %b %Y %H:%M UTC")


def _name(places: Mapping[int, Place], place_id: int) -> str:
    return places[place_id].name if place_id in places else f"place {place_id}"
