"""A driver's row on This morning: a line of a table on a laptop, a card on a phone."""

from __future__ import annotations

from datetime import datetime

from planner.charts.strip import strip
from planner.charts.theme import OUTCOME_STYLES
from planner.monitoring.model import Notice
from planner.services.course import Whereabout
from planner.services.morning import DriverRow
from planner.ui.text import escaped
from planner.wording import (
    DASH,
    UnitChoice,
    age,
    clock,
    day,
    day_and_clock,
    elevation,
    per_cent,
    pulse,
    zone_name,
)


def outcome_html(outcome: str) -> str:
    """An outcome in words with its shape in front."""
    style = OUTCOME_STYLES[outcome]
    return (
        f'<span class="p-out {outcome.replace(" ", "-")}"><span aria-hidden="true">{style.glyph}</span> '
        f"{escaped(outcome)}</span>"
    )


def row_html(row: DriverRow, now: datetime, units: UnitChoice, *, low_pct: float, elsewhere: bool) -> str:
    """The whole row.

    `low_pct` is the bottom of its strip, `elsewhere` adds where the driver is when most are not there.
    """
    names_place = elsewhere or row.where.on_the_way or not row.where.is_planned
    place = f'<div class="p-small">{escaped(_place(row, now, units))}</div>' if names_place else ""
    return (
        '<div class="p-row">'
        f'<div class="p-who"><h2 class="p-name">{escaped(row.driver)}</h2>{outcome_html(row.outcome)}'
        f"{place}</div>"
        f'<div class="p-number"><div class="p-value">{escaped(_value(row))}</div>'
        f"{_when(row, now)}</div>"
        f'<div class="p-wide"><div class="p-why">{_reasons(row)}</div>'
        f'<div class="p-small">{escaped(row.range_words)}</div>{_notices(row, now)}</div>'
        f'<div class="p-wide">{strip(row.mornings, low_pct)}</div>'
        "</div>"
    )


def whereabout_words(where: Whereabout, units: UnitChoice) -> str:
    """As "at Talquime, 2 250 m"; a guess is called one."""
    place = f"{where.place.name}, {elevation(where.bed_elevation_m, units)}"
    if where.on_the_way:
        return f"on the way to {place}"
    return f"at {place}" if where.is_planned else f"at {place} (guessed, no stay planned)"


def _place(row: DriverRow, now: datetime, units: UnitChoice) -> str:
    return f"{whereabout_words(row.where, units)}, {clock(now, row.zone)} {zone_name(row.zone, now)}"


def _value(row: DriverRow) -> str:
    return DASH if row.reading is None else per_cent(row.reading.spo2_pct)


def _when(row: DriverRow, now: datetime) -> str:
    reading = row.reading
    if reading is None:
        return ""
    asleep = " asleep" if reading.wakefulness == "asleep" else ""
    lines = [f"{clock(reading.taken_at, row.zone)}{asleep}, {age(now - reading.taken_at)}"]
    if reading.pulse_bpm is not None:
        lines.append(f"pulse {pulse(reading.pulse_bpm)}")
    return "".join(f'<div class="p-small">{escaped(text)}</div>' for text in lines)


def _reasons(row: DriverRow) -> str:
    text = escaped(" ".join(row.reasons))
    return f'{text} <span class="p-do">{escaped(row.advice)}</span>' if row.advice else text


def _notices(row: DriverRow, now: datetime) -> str:
    return "".join(
        f'<div class="p-small">{escaped(notice_words(n, row.zone, now))}</div>' for n in row.notices
    )


def notice_words(notice: Notice, zone: str, now: datetime) -> str:
    """As "Physician told 07:40 (coach): sees her at 9"; with the day when it was not today."""
    what = "Physician told" if notice.kind == "told the physician" else "Note"
    by = f" ({notice.entered_by})" if notice.entered_by else ""
    today = day(notice.at, zone) == day(now, zone)
    when = clock(notice.at, zone) if today else day_and_clock(notice.at, zone)
    return f"{what} {when}{by}" + (f": {notice.text}" if notice.text else "")
