"""Calendar files: a driver's itinerary there and back, reminders and light, rounds read from any calendar."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, date, datetime, timedelta

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from icalendar import Calendar
from invented_season import BAY, DRIVER, HOME, MESA, PLACES, PUNA, itinerary, rounds_and_sessions, setting

from planner.errors import InputError
from planner.exchange.calendar_files import CalendarParts, read_itinerary, write_itinerary
from planner.exchange.calendar_rounds import confirmed, matched_place, read_rounds, write_rounds
from planner.season.clock_course import LightDay
from planner.season.itinerary import Itinerary, Visit, replace_between
from planner.season.model import Leg, Place, Round, Session, Stay
from planner.services.importing import demo_folder, load_demo
from planner.store.store import Store

NOW = datetime(2031, 2, 1, 12, tzinfo=UTC)


def planned() -> Itinerary:
    """Across the clock changes of Berlin and Auckland, the date line, with a tent and low beds."""
    visits = [
        Visit(HOME.id, datetime(2031, 3, 10, 9, tzinfo=UTC), None, 0.16, 9.0),
        Visit(BAY.id, datetime(2031, 3, 20, 7, 31, tzinfo=UTC)),
        Visit(MESA.id, datetime(2031, 4, 2, 22, 5, tzinfo=UTC), 1800.0),
        Visit(HOME.id, datetime(2031, 4, 9, 6, tzinfo=UTC)),
    ]
    plan = replace_between(
        itinerary(),
        datetime(2031, 3, 1, tzinfo=UTC),
        datetime(2031, 5, 1, tzinfo=UTC),
        visits,
        setting().times,
    )
    return Itinerary(DRIVER.id, tuple(replace(e, id=i + 1) for i, e in enumerate(plan.entries)))


def written(entries: tuple[Stay | Leg, ...], parts: CalendarParts | None = None, sequence: int = 3) -> bytes:
    return write_itinerary(DRIVER, entries, PLACES, store_uid="abc", sequence=sequence, now=NOW, parts=parts)


def events(data: bytes, kind: str) -> list[object]:
    return [e for e in Calendar.from_ical(data).walk("VEVENT") if str(e.get("X-PLANNER-KIND", "")) == kind]


def to_the_minute(entry: Stay | Leg) -> Stay | Leg:
    def rounded(at: datetime) -> datetime:
        return (at + timedelta(seconds=30)).replace(second=0, microsecond=0)

    return replace(entry, arrive_at=rounded(entry.arrive_at), depart_at=rounded(entry.depart_at), id=0)


def test_an_itinerary_comes_back_the_same_to_the_minute() -> None:
    plan = planned()
    stays, legs = read_itinerary(written(plan.entries), "a.ics", driver_id=DRIVER.id, places=PLACES.values())
    assert stays == [to_the_minute(s) for s in plan.stays]
    assert legs == [to_the_minute(leg) for leg in plan.legs]


@given(
    start=st.datetimes(datetime(2031, 1, 1), datetime(2031, 12, 1)),  # noqa: DTZ001
    minutes=st.integers(1, 60 * 24 * 40),
    place=st.sampled_from([HOME, BAY, MESA, PUNA]),
    bed=st.sampled_from([None, 1234.5]),
)
@settings(max_examples=30, deadline=None)
def test_any_stay_comes_back_across_clock_changes(
    start: datetime, minutes: int, place: Place, bed: float | None
) -> None:
    at = start.replace(second=0, microsecond=0, tzinfo=UTC)
    stay = Stay(DRIVER.id, place.id, at, at + timedelta(minutes=minutes), bed, id=5)
    stays, _ = read_itinerary(written((stay,)), "a.ics", driver_id=DRIVER.id, places=PLACES.values())
    assert stays == [replace(stay, id=0)]


def test_uids_are_stable_and_what_is_taken_out_is_cancelled() -> None:
    plan = planned()
    first = {str(e["uid"]) for e in Calendar.from_ical(written(plan.entries)).walk("VEVENT")}
    gone = plan.entries[1]
    parts = CalendarParts(cancelled=(gone,))
    second = written((plan.entries[0], *plan.entries[2:]), parts, sequence=4)
    again = {str(e["uid"]): e for e in Calendar.from_ical(second).walk("VEVENT")}
    assert set(again) == first
    cancelled = [uid for uid, e in again.items() if str(e.get("status", "")) == "CANCELLED"]
    assert cancelled == [f"stay-{gone.id}@abc" if isinstance(gone, Stay) else f"leg-{gone.id}@abc"]
    assert all(int(e["sequence"]) == 4 for e in again.values())
    stays, legs = read_itinerary(second, "a.ics", driver_id=DRIVER.id, places=PLACES.values())
    assert len(stays) + len(legs) == len(plan.entries) - 1


def test_times_carry_the_zone_of_their_place() -> None:
    leg = planned().legs[0]
    event = events(written((leg,)), "leg")[0]
    assert str(event["dtstart"].params["TZID"]) == "Europe/Berlin"  # type: ignore[index]
    assert str(event["dtend"].params["TZID"]) == "Pacific/Auckland"  # type: ignore[index]
    zones = {str(z["tzid"]) for z in Calendar.from_ical(written((leg,))).walk("VTIMEZONE")}
    assert zones == {"Europe/Berlin", "Pacific/Auckland"}


def test_reminders_on_every_morning_at_high_rounds_only() -> None:
    plan = planned()
    reminders = events(written(plan.entries), "measure")
    # Stay in Far Mesa from 2 April 16:05 local to 8 April: mornings of 3 to 8 April at 07:00 local.
    days = [e["dtstart"].dt for e in reminders]  # type: ignore[index]
    assert [d.day for d in days] == list(range(3, 9))
    assert all((d.hour, d.minute) == (7, 0) for d in days)
    assert events(written(plan.entries, CalendarParts(reminders=False)), "measure") == []


def test_light_windows_over_midnight() -> None:
    light = LightDay(date(2031, 4, 2), MESA.id, -8.0, 13.0, 19.0, 21.0, 3.0)
    data = written((), CalendarParts(light=(light,)))
    (seek,), (avoid,) = events(data, "seek"), events(data, "avoid")
    assert seek["dtstart"].dt.hour == 13  # type: ignore[index]
    assert avoid["dtend"].dt - avoid["dtstart"].dt == timedelta(hours=6)  # type: ignore[index]


def test_a_note_travels_with_the_plan() -> None:
    data = written(planned().entries, CalendarParts(note="Ascent rule set aside: decided on 1 April"))
    assert all("set aside" in str(e["description"]) for e in events(data, "stay"))  # type: ignore[index]


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "iCalendar"),
        (b"garbage", "iCalendar"),
        (b"BEGIN:VEVENT\r\nEND:VEVENT\r\n", "BEGIN:VCALENDAR"),
        (b"\xff\xfe\x00", "iCalendar"),
    ],
)
def test_what_is_no_calendar_is_refused(data: bytes, words: str) -> None:
    with pytest.raises(InputError, match=words):
        read_itinerary(data, "a.ics", driver_id=7, places=PLACES.values())
    with pytest.raises(InputError, match=words):
        read_rounds(data, "a.ics", list(PLACES.values()))


def test_an_unknown_place_is_named() -> None:
    with pytest.raises(InputError, match="place: 'Far Mesa' cannot be used"):
        read_itinerary(written(planned().entries), "a.ics", driver_id=7, places=[HOME, BAY])


def test_rounds_come_back_the_same() -> None:
    rounds, sessions = rounds_and_sessions()
    data = write_rounds(rounds, sessions, PLACES, store_uid="abc", now=NOW)
    read = read_rounds(data, "season.ics", list(PLACES.values()))
    assert read.refused == ()
    assert all(r.certain for r in read.rounds)
    places = {r.location: r.place for r in read.rounds if r.place}
    kept = confirmed(read.rounds, places)
    assert [replace(r, id=0) for r, _ in kept] == [replace(r, id=0) for r in rounds]
    for (_, found), each in zip(kept, rounds, strict=True):
        expected = sorted((s for s in sessions if s.round_id == each.id), key=lambda s: s.starts_at)
        assert [(s.kind, s.name, s.starts_at, s.ends_at) for s in found] == [
            (s.kind, s.name, s.starts_at, s.ends_at) for s in expected
        ]


FOREIGN = """BEGIN:VCALENDAR
VERSION:2.0
PRODID:-//somebody//else//EN
BEGIN:VEVENT
UID:1
SUMMARY:Mesa Trophy - Qualifying 2
LOCATION:Far  mesa circuit
DTSTART;TZID=America/Denver:20310405T150000
DURATION:PT1H
END:VEVENT
BEGIN:VEVENT
UID:2
SUMMARY:Mesa Trophy - Race
LOCATION:Far  mesa circuit
DTSTART:20310406T140000
DTEND:20310406T160000
END:VEVENT
BEGIN:VEVENT
UID:3
SUMMARY:Fell Weekend
LOCATION:Nearby Fel
DTSTART;VALUE=DATE:20310502
DTEND;VALUE=DATE:20310505
END:VEVENT
BEGIN:VEVENT
UID:4
SUMMARY:Gala
STATUS:CANCELLED
DTSTART:20310406T140000Z
END:VEVENT
BEGIN:VEVENT
UID:5
SUMMARY:Broken
DTSTART:yesterday
END:VEVENT
BEGIN:VEVENT
UID:6
SUMMARY:Backwards: Race
LOCATION:Lowmere
DTSTART:20310406T140000Z
DTEND:20310406T130000Z
END:VEVENT
BEGIN:VEVENT
UID:7
SUMMARY:Nowhere Cup
LOCATION:Atlantis
DTSTART:20310601T140000Z
DTEND:20310601T150000Z
END:VEVENT
END:VCALENDAR
""".replace("\n", "\r\n").encode()


def test_a_foreign_calendar_waits_for_confirmation() -> None:
    read = read_rounds(b"\xef\xbb\xbf" + FOREIGN, "series.ics", list(PLACES.values()))
    assert [(r.name, r.place.name if r.place else None, r.certain) for r in read.rounds] == [
        ("Mesa Trophy", "Far Mesa", False),
        ("Fell Weekend", "Nearby Fell", False),
        ("Nowhere Cup", None, False),
    ]
    mesa, fell, nowhere = read.rounds
    assert [(s.name, s.kind) for s in mesa.sessions] == [("Qualifying 2", "qualifying"), ("Race", "race")]
    assert [s.kind for s in fell.sessions] == ["practice", "practice", "race"]  # whole days, exclusive end
    assert fell.notes == (
        "Whole-day entry: its sessions are placed from 09:00 to 18:00 local; type their times.",
    )
    assert len(read.refused) == 2
    assert "Broken" in read.refused[0]
    assert "Backwards" in read.refused[1]
    with pytest.raises(InputError, match="location: 'Atlantis'"):
        confirmed(read.rounds, {mesa.location: MESA, fell.location: PLACES[2]})
    kept = confirmed((mesa, fell), {mesa.location: MESA, fell.location: PLACES[2]}, first_number=5)
    assert [r.number for r, _ in kept] == [5, 6]
    # A time without a zone is the venue's: 14:00 in Denver's summer time is 20:00 UTC.
    assert kept[0][1][1].starts_at == datetime(2031, 4, 6, 20, tzinfo=UTC)
    assert kept[1][1][0].starts_at == datetime(2031, 5, 2, 7, tzinfo=UTC)
    assert nowhere.sessions[0].kind == "race"


def test_matching_of_places() -> None:
    places = list(PLACES.values())
    assert matched_place("far MESA", places) == (MESA, True)
    assert matched_place("Autodrome of Far Mesa, Colorado", places) == (MESA, False)
    assert matched_place("Far Mesaa", places) == (MESA, False)
    assert matched_place("Atlantis", places) == (None, False)
    assert matched_place("", places) == (None, False)


def test_the_demos_calendar_gives_the_same_rounds_as_its_csv(store: Store) -> None:
    load_demo(store)
    places = store.all(Place)
    read = read_rounds((demo_folder() / "calendar.ics").read_bytes(), "calendar.ics", places)
    assert read.refused == ()
    assert all(r.certain for r in read.rounds)
    kept = confirmed(read.rounds, {r.location: r.place for r in read.rounds if r.place})
    by_csv = store.all(Round)
    assert [(r.number, r.name, r.place_id) for r, _ in kept] == [
        (r.number, r.name, r.place_id) for r in by_csv
    ]
    for (_, found), each in zip(kept, by_csv, strict=True):
        expected = sorted(store.all(Session, round_id=each.id), key=lambda s: s.starts_at)
        assert [(s.kind, s.name, s.starts_at, s.ends_at) for s in found] == [
            (s.kind, s.name, s.starts_at, s.ends_at) for s in expected
        ]
