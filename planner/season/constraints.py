"""What a plan for a high round must keep to: the coach's limits, the physician's, and the rules of ascent."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import date, datetime, timedelta
from typing import Final, get_args
from zoneinfo import ZoneInfo

from planner.checks import checked
from planner.errors import InputError
from planner.physiology.illness import RiskClass
from planner.season.itinerary import Fixed
from planner.season.model import Driver, Place

RISK_CLASSES: Final[tuple[RiskClass, ...]] = get_args(RiskClass)

# From here on a place is high: judgement. Below it saturation at rest hardly moves.
HIGH_FROM_M: Final = 1500.0
# Ferritin is looked at this long before the first high round that asks the blood for iron: 4 to 6 weeks ahead
# (from memory), from 2 000 m up (judgement). What follows from it is the physician's.
IRON_CHECK_WEEKS: Final = 6
IRON_CHECK_LATEST_WEEKS: Final = 4
IRON_CHECK_FROM_M: Final = 2000.0
# A check counts for this long: judgement.
IRON_CHECK_GOOD_FOR: Final = timedelta(days=183)


@dataclass(frozen=True)
class Limits:
    """What the coach asks of a plan for one round; None = no limit. The defaults are judgement.

    `ascent_override` is the coach's reason for which the ascent rule above 3 000 m is set aside; it travels
    with the plan. Empty = the rule holds.
    """

    lowest_race_spo2_pct: float | None = None
    lowest_race_capacity_pct: float | None = None
    highest_risk: RiskClass = "moderate"
    largest_clock_offset_h: float | None = 3.0
    shortest_landing_to_session_h: float = 15.0
    longest_travel_h_per_day: float = 30.0
    most_nights_away: int | None = None
    ascent_override: str = ""

    def __post_init__(self) -> None:
        for name in ("lowest_race_spo2_pct", "lowest_race_capacity_pct"):
            value = getattr(self, name)
            if value is not None:
                checked("saturation_pct", value, name)
        if self.highest_risk not in RISK_CLASSES:
            raise InputError("highest_risk", self.highest_risk, f"one of {', '.join(RISK_CLASSES)}")
        for name in (
            "largest_clock_offset_h",
            "shortest_landing_to_session_h",
            "longest_travel_h_per_day",
            "most_nights_away",
        ):
            value = getattr(self, name)
            if value is not None and not value >= 0:
                raise InputError(name, value, "a number of 0 or more")


@dataclass(frozen=True)
class IronCheck:
    """When a driver's iron is to be looked at, and for which round; `done_on` if that has been done."""

    round_name: str
    due_from: date
    due_by: date
    done_on: date | None


def bed_refused(
    driver: Driver, bed_elevation_m: float, tent_oxygen_fraction: float | None, sleeping_m: float
) -> str:
    """Why a driver may not sleep in a bed, in one sentence; empty = may.

    `sleeping_m` is the elevation that the night amounts to: the bed's, or the tent's equivalent.
    """
    if tent_oxygen_fraction is not None and not driver.tent_note.strip():
        return f"{driver.name} has no physician's note that allows a tent."
    highest = driver.highest_bed_elevation_m
    if highest is not None and max(bed_elevation_m, sleeping_m) > highest:
        return (
            f"The physician lets {driver.name} sleep no higher than {highest:.0f} m,"
            f" this bed amounts to {max(bed_elevation_m, sleeping_m):.0f} m."
        )
    return ""


def iron_check(driver: Driver, points: Iterable[Fixed], places: Mapping[int, Place]) -> IronCheck | None:
    """The iron check before the driver's first round from 2 000 m up; None when there is no such round."""
    needing = [
        p
        for p in points
        if p.round_id is not None and places[p.place_id].bed_elevation_m >= IRON_CHECK_FROM_M
    ]
    if not needing:
        return None
    first = min(needing, key=lambda p: p.starts_at)
    day = local_date(first.starts_at, places[first.place_id])
    done = driver.iron_checked_on
    counts = done is not None and day - IRON_CHECK_GOOD_FOR <= done <= day
    return IronCheck(
        round_name=first.name,
        due_from=day - timedelta(weeks=IRON_CHECK_WEEKS),
        due_by=day - timedelta(weeks=IRON_CHECK_LATEST_WEEKS),
        done_on=done if counts else None,
    )


def is_high(place: Place) -> bool:
    """Whether track or beds of a place lie high enough to cost something."""
    return max(place.track_elevation_m, place.bed_elevation_m) >= HIGH_FROM_M


def worse(risk: RiskClass, than: RiskClass) -> bool:
    """Whether a risk class is worse than another."""
    return RISK_CLASSES.index(risk) > RISK_CLASSES.index(than)


def local_date(at: datetime, place: Place) -> date:
    """The calendar day of an instant at a place."""
    return at.astimezone(ZoneInfo(place.zone)).date()
