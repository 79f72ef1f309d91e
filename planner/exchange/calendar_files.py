"""A driver's itinerary as an iCalendar file (RFC 5545) and back.

Every entry has a UID made of the store's own id and the record's number, so a file that is sent again updates
the calendar instead of doubling it; what has been taken out of the plan is sent once more as cancelled. Times
carry the zone of their place. What a calendar has no field for (beds, tents, cabins) travels in properties of
our own, which other programs ignore.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from typing import Any, Final
from zoneinfo import ZoneInfo

from icalendar import Alarm, Calendar, Event

from planner.errors import InputError
from planner.exchange.context import folded
from planner.season.clock_course import LightDay, clock_hours
from planner.season.constraints import is_high
from planner.season.model import Driver, Leg, Place, Stay

PRODUCT_ID: Final = "-//planner//itinerary//EN"
MARK: Final = "X-PLANNER-"
STAY, LEG = "stay", "leg"
MEASURING: Final = timedelta(minutes=10)
MEASURE_TEXT: Final = (
    "Seated, quiet, warm hand, no exertion just before; watch two to three minutes and write down a typical"
    " value. A reading in range never proves safety: unwell means the team physician, at once."
)
LIGHT_TEXT: Final = "Bright light moves the body clock. People differ; the team physician advises."


@dataclass(frozen=True)
class CalendarParts:
    """What a driver's calendar holds besides stays and legs.

    `light` are the days with light windows; `cancelled` the stays and legs that were sent before and are no
    longer planned; `note` is a line for every stay, such as the coach's reason for setting a rule aside.
    """

    reminders: bool = True
    light: Sequence[LightDay] = ()
    cancelled: Collection[Stay | Leg] = ()
    note: str = ""


def write_itinerary(
    driver: Driver,
    entries: Iterable[Stay | Leg],
    places: Mapping[int, Place],
    *,
    store_uid: str,
    sequence: int,
    now: datetime,
    parts: CalendarParts | None = None,
) -> bytes:
    """One driver's itinerary as an iCalendar file.

    Parameters: `store_uid` and the records' numbers make the UIDs; `sequence` must not fall from one sending
    to the next; `now` becomes the time stamp.
    """
    parts = parts or CalendarParts()
    calendar = _calendar(f"{driver.name}: itinerary")
    stamp = _Stamp(store_uid, sequence, now)
    planned = list(entries)
    for entry in planned:
        calendar.add_component(_entry_event(entry, places, stamp, parts.note))
    for entry in parts.cancelled:
        event = _entry_event(entry, places, stamp, "")
        event.add("status", "CANCELLED")
        calendar.add_component(event)
    if parts.reminders:
        for stay in planned:
            if isinstance(stay, Stay) and is_high(places[stay.place_id]):
                _add_reminders(calendar, driver, stay, places[stay.place_id], stamp)
    for light in parts.light:
        _add_light(calendar, driver, light, places[light.place_id], stamp)
    return finished(calendar)


def read_itinerary(
    data: bytes, file: str, *, driver_id: int, places: Iterable[Place]
) -> tuple[list[Stay], list[Leg]]:
    """The stays and legs of a file that `write_itinerary` made, without numbers, in time order.

    Reminders, light windows, cancelled and foreign entries are passed over.
    Raises: InputError when the file is no calendar, or an entry names a place that is not known.
    """
    known = {folded(p.name): p for p in places}
    stays: list[Stay] = []
    legs: list[Leg] = []
    for event in parsed(data, file).walk("VEVENT"):
        kind = _mark(event, "KIND")
        if kind not in (STAY, LEG) or str(event.get("status", "")) == "CANCELLED":
            continue
        start, end = instant_of(event, "dtstart"), instant_of(event, "dtend")
        if kind == STAY:
            place = _place(known, _mark(event, "PLACE"), file)
            stays.append(
                Stay(
                    driver_id,
                    place.id,
                    start,
                    end,
                    _number(event, "BED-M"),
                    _number(event, "TENT-OXYGEN"),
                    _number(event, "TENT-HOURS") or 0.0,
                )
            )
        else:
            here, there = (_place(known, _mark(event, name), file) for name in ("FROM", "TO"))
            mode = "flight" if _mark(event, "MODE") == "flight" else "road"
            legs.append(
                Leg(driver_id, here.id, there.id, start, end, mode, _number(event, "CABIN-M"))  # type: ignore[arg-type]
            )
    return sorted(stays, key=lambda s: s.arrive_at), sorted(legs, key=lambda leg: leg.depart_at)


@dataclass(frozen=True)
class _Stamp:
    store_uid: str
    sequence: int
    now: datetime

    def event(self, uid: str, summary: str, start: datetime, end: datetime) -> Event:
        event = Event()
        event.add("uid", f"{uid}@{self.store_uid}")
        event.add("dtstamp", self.now.astimezone(UTC))
        event.add("sequence", self.sequence)
        event.add("summary", summary)
        event.add("dtstart", start)
        event.add("dtend", end)
        return event


def finished(calendar: Calendar) -> bytes:
    """The bytes of a calendar with the definitions of the zones that it uses, for the years it covers."""
    moments = [moment_of(event, name) for event in calendar.walk("VEVENT") for name in ("dtstart", "dtend")]
    days = [moment.date() if isinstance(moment, datetime) else moment for moment in moments]
    if days:
        calendar.add_missing_timezones(date(min(days).year - 1, 1, 1), date(max(days).year + 2, 1, 1))
        # They come in the order of a set, but the same plan must give the same file.
        calendar.subcomponents.sort(key=lambda part: str(part["tzid"]) if part.name == "VTIMEZONE" else "~")
    return bytes(calendar.to_ical())


def parsed(data: bytes, file: str) -> Calendar:
    """The calendar in a file. Raises: InputError when it holds none."""
    try:
        calendar = Calendar.from_ical(data.removeprefix(b"\xef\xbb\xbf"))
    except (ValueError, IndexError, KeyError) as error:
        reason = " ".join(str(error).split())[:80]
        raise InputError("file", file, f"an iCalendar file (.ics); it cannot be read ({reason})") from None
    if not isinstance(calendar, Calendar) or calendar.name != "VCALENDAR":
        raise InputError("file", file, "an iCalendar file (.ics) that begins with BEGIN:VCALENDAR")
    return calendar


def instant_of(event: Any, name: str) -> datetime:
    """An event's start or end as an instant in UTC.

    Raises: InputError when there is none, when it is a whole day, or when it has no zone.
    """
    moment = moment_of(event, name)
    if not isinstance(moment, datetime) or moment.tzinfo is None:
        raise InputError(name, str(moment), f"a time of day with its zone in {summary_of(event)}")
    return moment.astimezone(UTC)


def moment_of(event: Any, name: str) -> datetime | date:
    """An event's start or end as it stands; without an end, its duration counts from the start.

    Raises: InputError when it is missing or cannot be read.
    """
    given = event.get(name)
    if given is None and name == "dtend" and event.get("duration") is not None:
        start = moment_of(event, "dtstart")
        return start + event["duration"].dt  # type: ignore[no-any-return]
    try:
        moment = given.dt
    except (AttributeError, ValueError):
        moment = None
    if not isinstance(moment, datetime | date):
        raise InputError(name, str(given or ""), f"a date or a time in {summary_of(event)}")
    return moment


def summary_of(event: Any) -> str:
    """An event's title, for messages."""
    return str(event.get("summary", "an event without a title"))


def _calendar(name: str) -> Calendar:
    calendar = Calendar()
    calendar.add("prodid", PRODUCT_ID)
    calendar.add("version", "2.0")
    calendar.add("calscale", "GREGORIAN")
    calendar.add("method", "PUBLISH")
    calendar.add("x-wr-calname", name)
    return calendar


def _entry_event(entry: Stay | Leg, places: Mapping[int, Place], stamp: _Stamp, note: str) -> Event:
    if isinstance(entry, Stay):
        place = places[entry.place_id]
        start, end = (_local(at, place) for at in (entry.arrive_at, entry.depart_at))
        event = stamp.event(f"stay-{entry.id}", f"Stay in {place.name}", start, end)
        event.add("location", place.name)
        bed_m = place.bed_elevation_m if entry.bed_elevation_m is None else entry.bed_elevation_m
        lines = [f"Beds at {bed_m:.0f} m, track at {place.track_elevation_m:.0f} m."]
        if entry.tent_oxygen_fraction is not None:
            lines.append(
                f"Tent at {100.0 * entry.tent_oxygen_fraction:.1f} % oxygen,"
                f" {entry.tent_hours_per_night:g} h a night, as the physician's note allows."
            )
        marks: dict[str, object] = {
            "KIND": STAY,
            "PLACE": place.name,
            "BED-M": entry.bed_elevation_m,
            "TENT-OXYGEN": entry.tent_oxygen_fraction,
            "TENT-HOURS": entry.tent_hours_per_night or None,
        }
    else:
        here, there = places[entry.from_place_id], places[entry.to_place_id]
        start, end = _local(entry.depart_at, here), _local(entry.arrive_at, there)
        event = stamp.event(f"leg-{entry.id}", f"{here.name} to {there.name}", start, end)
        lines = ["By air." if entry.mode == "flight" else "By road."]
        marks = {
            "KIND": LEG,
            "FROM": here.name,
            "TO": there.name,
            "MODE": entry.mode,
            "CABIN-M": entry.cabin_altitude_m,
        }
    event.add("description", "\n".join([*lines, *([note] if note else [])]))
    event.add("transp", "TRANSPARENT")
    for name, value in marks.items():
        if value is not None:
            event.add(f"{MARK}{name}", str(value))
    return event


def _add_reminders(calendar: Calendar, driver: Driver, stay: Stay, place: Place, stamp: _Stamp) -> None:
    """One entry a morning of the stay, at the driver's waking time, with an alarm."""
    zone = ZoneInfo(place.zone)
    wake_h = clock_hours(driver.wake_time, "wake_time")
    wake = time(int(wake_h), round(wake_h % 1.0 * 60.0))
    day = stay.arrive_at.astimezone(zone).date()
    while (at := datetime.combine(day, wake, zone)) < stay.depart_at:
        if at > stay.arrive_at:
            event = stamp.event(f"measure-{driver.id}-{day:%Y%m%d}", "Measure SpO2", at, at + MEASURING)
            event.add("location", place.name)
            event.add("description", MEASURE_TEXT)
            event.add(f"{MARK}KIND", "measure")
            alarm = Alarm()
            alarm.add("action", "DISPLAY")
            alarm.add("description", "Measure SpO2")
            alarm.add("trigger", timedelta(0))
            event.add_component(alarm)
            calendar.add_component(event)
        day += timedelta(days=1)


def _add_light(calendar: Calendar, driver: Driver, light: LightDay, place: Place, stamp: _Stamp) -> None:
    zone = ZoneInfo(place.zone)
    windows = (
        ("seek", "Seek bright light", light.seek_from_h, light.seek_to_h),
        ("avoid", "Avoid bright light", light.avoid_from_h, light.avoid_to_h),
    )
    for name, summary, from_h, to_h in windows:
        start = _at_hour(light.day, from_h, zone)
        end = _at_hour(light.day + timedelta(days=1) if to_h <= from_h else light.day, to_h, zone)
        event = stamp.event(f"{name}-{driver.id}-{light.day:%Y%m%d}", summary, start, end)
        event.add("description", LIGHT_TEXT)
        event.add("transp", "TRANSPARENT")
        event.add(f"{MARK}KIND", name)
        calendar.add_component(event)


def _at_hour(day: date, hours: float, zone: ZoneInfo) -> datetime:
    minutes = round(hours * 60.0)
    return datetime.combine(day, time(minutes // 60 % 24, minutes % 60), zone)


def _local(at: datetime, place: Place) -> datetime:
    """To the minute, in the zone of the place."""
    rounded = (at.astimezone(UTC) + timedelta(seconds=30)).replace(second=0, microsecond=0)
    return rounded.astimezone(ZoneInfo(place.zone))


def _mark(event: Any, name: str) -> str:
    return str(event.get(f"{MARK}{name}", ""))


def _number(event: Any, name: str) -> float | None:
    text = _mark(event, name)
    try:
        return float(text) if text else None
    except ValueError:
        raise InputError(f"{MARK}{name}", text, f"a number in {summary_of(event)}") from None


def _place(known: Mapping[str, Place], name: str, file: str) -> Place:
    place = known.get(folded(name))
    if place is None:
        raise InputError("place", name, f"the name of a known place in {file}")
    return place
