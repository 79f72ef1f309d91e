"""The driver's own range: which readings teach it, and what they have taught.

Ranges are computed anew from the readings as they stand, so a correction, a note or a sick period that comes
later is counted from then on as if it had always been there.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from datetime import UTC, datetime
from operator import attrgetter
from typing import Any, Final, Literal

import numpy as np
from numpy.typing import NDArray

from planner.monitoring.model import Reading, SickPeriod
from planner.monitoring.outcome import quality_fault
from planner.physiology.acclimatisation import ExposureHistory, ventilatory_state_at
from planner.physiology.learning import learned
from planner.physiology.person import PersonPosterior
from planner.wording import number, per_cent

# What a reading needs to be judged; the names of `Reading`'s fields and of the store's columns.
COLUMNS: Final = (
    "driver_id",
    "taken_at",
    "spo2_pct",
    "wakefulness",
    "circumstance",
    "device",
    "warm_hand",
    "quality_note",
    "emergency_signs",
    "left_out",
)
PLAIN_TYPES: Final[dict[str, type]] = {"driver_id": np.int64, "spo2_pct": np.float64, "warm_hand": np.bool_}
SIDES: Final[tuple[Literal["left"], Literal["right"]]] = ("left", "right")
MICROSECONDS_PER_HOUR: Final = 3.6e9


def why_it_teaches_nothing(reading: Reading, sick_periods: Iterable[SickPeriod] = ()) -> str:
    """Why a reading is left out of its driver's own range; empty when it teaches.

    Parameters: `sick_periods` of any drivers; those of the reading's driver count.
    """
    if reading.left_out:
        return f"left out: {reading.left_out}"
    if reading.wakefulness != "awake":
        return "asleep: another quantity with its own range"
    fault = quality_fault(reading)
    if fault:
        return fault
    if reading.emergency_signs:
        return "an emergency sign was stated"
    if any(_covers(period, reading) for period in sick_periods):
        return "marked ill"
    return ""


def own_ranges(
    readings: Iterable[Reading],
    histories: Mapping[int, ExposureHistory],
    sick_periods: Iterable[SickPeriod] = (),
    *,
    origin: datetime,
) -> dict[int, PersonPosterior]:
    """What the readings say of each driver that has a history; those of other drivers are passed over.

    Parameters: `readings` of any drivers in any order; `histories` by driver id, in hours since `origin`.
    """
    return own_ranges_from_columns(columns_of(list(readings)), histories, sick_periods, origin=origin)


def columns_of(readings: Sequence[Reading]) -> dict[str, NDArray[Any]]:
    """The fields that own ranges need as one array each, as the store hands them out."""
    fields = zip(*map(attrgetter(*COLUMNS), readings), strict=True) if readings else ((),) * len(COLUMNS)
    columns: dict[str, NDArray[Any]] = {}
    for name, values in zip(COLUMNS, fields, strict=True):
        if name == "taken_at":
            columns[name] = np.array([_in_utc(v) for v in values], dtype="datetime64[us]")
        else:
            columns[name] = (
                np.array(values, dtype=PLAIN_TYPES[name]) if name in PLAIN_TYPES else _objects(values)
            )
    return columns


def own_ranges_from_columns(
    columns: Mapping[str, NDArray[Any]],
    histories: Mapping[int, ExposureHistory],
    sick_periods: Iterable[SickPeriod] = (),
    *,
    origin: datetime,
) -> dict[int, PersonPosterior]:
    """As own_ranges, from `COLUMNS` as `Store.reading_columns` gives them: the fast way for many readings."""
    teaches = _teaches(columns)
    taken_at = columns["taken_at"]
    driver = columns["driver_id"]
    periods = list(sick_periods)
    hours = (taken_at - np.datetime64(_in_utc(origin), "us")).astype(np.float64) / MICROSECONDS_PER_HOUR
    order = np.lexsort((hours, driver))
    order = order[teaches[order]]
    of_driver = driver[order]
    ranges: dict[int, PersonPosterior] = {}
    for driver_id, history in histories.items():
        first, behind = (int(np.searchsorted(of_driver, driver_id, side=side)) for side in SIDES)
        ours = order[first:behind]
        ours = ours[~_in_sickness(taken_at[ours], [p for p in periods if p.driver_id == driver_id])]
        at_h = hours[ours]
        ranges[driver_id] = learned(
            inspired_po2_mmhg=history.inspired_at(at_h),
            ventilatory_state=np.asarray(ventilatory_state_at(history, at_h)),
            spo2_pct=columns["spo2_pct"][ours],
            devices=columns["device"][ours],
            at_h=at_h,
        )
    return ranges


def own_range_in_words(person: PersonPosterior, pronoun: str = "the driver's") -> str:
    """How much of a range is the driver's own, in a sentence.

    "12 readings, 3 of them above 1 500 m: the range is about 60 % her own." The share is that part of the
    variance between people and oximeters which the readings have removed at 2 300 m on the second day; what
    differs from day to day and from reading to reading stays in every range.
    """
    if person.readings == 0:
        return "No reading teaches yet: the range is the population's."
    noun = "reading" if person.readings == 1 else "readings"
    high = person.readings_above_1500_m
    above = f"{number(high) if high else 'none'} of them above {number(1500)} m"
    return f"{number(person.readings)} {noun}, {above}: the range is about {own_share(person)} {pronoun} own."


def own_share(person: PersonPosterior) -> str:
    """The share of the range that is the driver's own, to 5 %: more would say more than is known."""
    return per_cent(5.0 * round(20.0 * person.own_share))


def _objects(values: Sequence[Any]) -> NDArray[Any]:
    """Values as they are: numpy would make a second dimension of tuples."""
    column = np.empty(len(values), dtype=object)
    column[:] = values
    return column


def _teaches(columns: Mapping[str, NDArray[Any]]) -> NDArray[np.bool_]:
    """The rules of `why_it_teaches_nothing` but sickness, on columns."""
    signs = columns["emergency_signs"]
    return np.asarray(
        (columns["left_out"] == "")
        & (columns["wakefulness"] == "awake")
        & (columns["circumstance"] == "at rest")
        & columns["warm_hand"].astype(bool)
        & (columns["quality_note"] == "")
        & np.fromiter((not s for s in signs), dtype=bool, count=len(signs)),
        dtype=bool,
    )


def _in_sickness(taken_at: NDArray[Any], periods: Sequence[SickPeriod]) -> NDArray[np.bool_]:
    ill = np.zeros(taken_at.shape, dtype=bool)
    for period in periods:
        since = taken_at >= np.datetime64(_in_utc(period.starts_at), "us")
        if period.ends_at is not None:
            since &= taken_at <= np.datetime64(_in_utc(period.ends_at), "us")
        ill |= since
    return ill


def _covers(period: SickPeriod, reading: Reading) -> bool:
    ends = period.ends_at is None or reading.taken_at <= period.ends_at
    return period.driver_id == reading.driver_id and period.starts_at <= reading.taken_at and ends


def _in_utc(instant: datetime) -> datetime:
    """An instant without its zone, in UTC, as numpy keeps it."""
    utc = instant if instant.tzinfo is UTC else instant.astimezone(UTC)
    return utc.replace(tzinfo=None)
