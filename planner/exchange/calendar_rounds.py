"""A season's rounds as an iCalendar file: ours, or anybody's, with its places matched by name."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import UTC, date, datetime, time, timedelta
from difflib import get_close_matches
from typing import Any, Final
from zoneinfo import ZoneInfo

from icalendar import Calendar, Event

from planner.errors import InputError
from planner.exchange.calendar_files import finished, moment_of, parsed, summary_of
from planner.exchange.context import folded
from planner.season.model import Place, Round, Session, SessionKind

PRODUCT_ID: Final = "-//planner//rounds//EN"
# Between the name of the round and that of the session, the longest first.
SEPARATORS: Final = (" – ", " - ", ": ")
# Words that tell the kind of a session, in the order in which they are looked for.
KIND_WORDS: Final[tuple[tuple[str, SessionKind], ...]] = (
    ("practice", "practice"),
    ("training", "practice"),
    ("test", "practice"),
    ("warm", "practice"),
    ("shakedown", "practice"),
    ("quali", "qualifying"),
    ("grid", "qualifying"),
    ("race", "race"),
)
# Sessions of one round lie no further apart than this: judgement.
ONE_ROUND: Final = timedelta(days=8)
# What a whole-day entry is taken for until its sessions are typed: judgement.
DAY_FROM, DAY_TO = time(9), time(18)


@dataclass(frozen=True)
class ProposedSession:
    """One session as the file has it: instants, or wall-clock times until the place is confirmed."""

    name: str
    kind: SessionKind
    starts_at: datetime
    ends_at: datetime


@dataclass(frozen=True)
class ProposedRound:
    """One round as the file has it, to be confirmed. `place` is what its location most likely means.

    `certain` says that the location is the name of the place; otherwise the coach confirms it.
    """

    name: str
    location: str
    place: Place | None
    certain: bool
    sessions: tuple[ProposedSession, ...]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class ReadRounds:
    """The rounds of a file in time order, and what was refused, one sentence each."""

    rounds: tuple[ProposedRound, ...]
    refused: tuple[str, ...]


def write_rounds(
    rounds: Iterable[Round],
    sessions: Iterable[Session],
    places: Mapping[int, Place],
    *,
    store_uid: str,
    now: datetime,
    heading: str = "",
) -> bytes:
    """The rounds of a season as an iCalendar file, one entry a session."""
    calendar = Calendar()
    calendar.add("prodid", PRODUCT_ID)
    calendar.add("version", "2.0")
    calendar.add("x-wr-calname", "Rounds")
    if heading:
        calendar.add("x-wr-caldesc", heading)
    by_round: dict[int, list[Session]] = {}
    for session in sessions:
        by_round.setdefault(session.round_id, []).append(session)
    for each in rounds:
        place = places[each.place_id]
        zone = ZoneInfo(place.zone)
        for number, session in enumerate(sorted(by_round.get(each.id, ()), key=lambda s: s.starts_at)):
            event = Event()
            event.add("uid", f"round-{each.id}-session-{session.id or number}@{store_uid}")
            event.add("dtstamp", now.astimezone(UTC))
            event.add("summary", f"{each.name}: {session.name}")
            event.add("location", place.name)
            event.add("categories", [session.kind])
            event.add("dtstart", session.starts_at.astimezone(zone))
            event.add("dtend", session.ends_at.astimezone(zone))
            calendar.add_component(event)
    return finished(calendar)


def read_rounds(data: bytes, file: str, places: Collection[Place]) -> ReadRounds:
    """The rounds of a season out of a calendar file; nothing is taken that the coach has not confirmed.

    An entry is a session; its title is "round: session", its location the venue. Entries of one title and
    venue within eight days are one round. A whole-day entry is a round whose sessions are not known yet.
    Raises: InputError when the file is no calendar or holds no entry.
    """
    found: list[tuple[str, str, ProposedSession, str]] = []
    refused: list[str] = []
    events = parsed(data, file).walk("VEVENT")
    for event in events:
        if str(event.get("status", "")).upper() == "CANCELLED":
            continue
        try:
            found += _sessions_of(event)
        except InputError as error:
            refused.append(f"{summary_of(event)}: {error}")
    if not events:
        raise InputError("file", file, "a calendar with at least one entry")
    return ReadRounds(tuple(_grouped(found, places)), tuple(refused))


def confirmed(
    proposed: Sequence[ProposedRound], place_of: Mapping[str, Place], first_number: int = 1
) -> list[tuple[Round, list[Session]]]:
    """Rounds and their sessions with the places that the coach has confirmed, `place_of` by location.

    Sessions carry the round's position in the list as `round_id`, to be replaced when the round is kept.
    Raises: InputError naming the first location without a place.
    """
    result = []
    for i, each in enumerate(proposed):
        place = place_of.get(each.location)
        if place is None:
            raise InputError("location", each.location, f"a confirmed place for {each.name}")
        sessions = [
            Session(i, s.kind, s.name, _in_zone(s.starts_at, place), _in_zone(s.ends_at, place))
            for s in each.sessions
        ]
        result.append((Round(first_number + i, each.name, place.id), sessions))
    return result


def matched_place(location: str, places: Collection[Place]) -> tuple[Place | None, bool]:
    """The place that a location most likely means, and whether it is its name to the letter."""
    by_name = {folded(p.name): p for p in places}
    wanted = folded(location)
    if wanted in by_name:
        return by_name[wanted], True
    inside = [p for name, p in by_name.items() if name in wanted or (wanted and wanted in name)]
    if len(inside) == 1:
        return inside[0], False
    close = get_close_matches(wanted, list(by_name), n=1, cutoff=0.75)
    return (by_name[close[0]], False) if close else (None, False)


def _sessions_of(event: Any) -> list[tuple[str, str, ProposedSession, str]]:
    title = " ".join(str(event.get("summary", "")).split())
    if not title:
        raise InputError("summary", "", "a title")
    name, session_name = _split(title)
    location = " ".join(str(event.get("location", "")).split()) or name
    start, end = moment_of(event, "dtstart"), moment_of(event, "dtend") if _has_end(event) else None
    if not isinstance(start, datetime):
        return [(name, location, s, _WHOLE_DAY) for s in _whole_days(start, end)]
    if not isinstance(end, datetime) or (start.tzinfo is None) != (end.tzinfo is None) or end <= start:
        raise InputError("dtend", str(end or ""), "a time of day after the start")
    kind = _kind(event, session_name)
    return [(name, location, ProposedSession(session_name, kind, start, end), "")]


_WHOLE_DAY: Final = "Whole-day entry: its sessions are placed from 09:00 to 18:00 local; type their times."


def _has_end(event: Any) -> bool:
    return event.get("dtend") is not None or event.get("duration") is not None


def _whole_days(first: date, end: datetime | date | None) -> list[ProposedSession]:
    """A session for each day of a whole-day entry, whose end is the day after the last."""
    if isinstance(end, datetime):
        raise InputError("dtend", str(end), "a day, as the start is one")
    count = max((end - first).days, 1) if end else 1
    return [_whole_day(first + timedelta(days=i), i + 1, is_last=i == count - 1) for i in range(count)]


def _whole_day(day: date, number: int, *, is_last: bool) -> ProposedSession:
    kind: SessionKind = "race" if is_last else "practice"
    start, end = datetime.combine(day, DAY_FROM), datetime.combine(day, DAY_TO)
    return ProposedSession(f"Day {number}, times not known", kind, start, end)


def _split(title: str) -> tuple[str, str]:
    for separator in SEPARATORS:
        name, found, session = title.rpartition(separator)
        if found and name.strip() and session.strip():
            return name.strip(), session.strip()
    return title, "Race"


def _kind(event: Any, session_name: str) -> SessionKind:
    given = event.get("categories")
    cats = getattr(given, "cats", given if isinstance(given, list) else [])
    for text in [*(str(c) for c in cats or []), session_name]:
        for word, kind in KIND_WORDS:
            if word in text.casefold():
                return kind
    return "race"


def _grouped(
    found: list[tuple[str, str, ProposedSession, str]], places: Collection[Place]
) -> list[ProposedRound]:
    rounds: list[ProposedRound] = []
    for name, location, session, note in sorted(found, key=lambda f: _comparable(f[2].starts_at)):
        begun = next(
            (
                i
                for i, r in enumerate(rounds)
                if (folded(r.name), folded(r.location)) == (folded(name), folded(location))
                and _comparable(session.starts_at) - _comparable(r.sessions[0].starts_at) <= ONE_ROUND
            ),
            None,
        )
        if begun is None:
            place, certain = matched_place(location, places)
            rounds.append(ProposedRound(name, location, place, certain, (session,), (note,) if note else ()))
        else:
            rounds[begun] = replace(rounds[begun], sessions=(*rounds[begun].sessions, session))
    return rounds


def _comparable(at: datetime) -> datetime:
    """Wall-clock times of unknown zone are put in order as if they were UTC."""
    return at if at.tzinfo else at.replace(tzinfo=UTC)


def _in_zone(at: datetime, place: Place) -> datetime:
    return (at if at.tzinfo else at.replace(tzinfo=ZoneInfo(place.zone))).astimezone(UTC)
