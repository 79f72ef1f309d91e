"""Which readings teach a driver's own range, and that it follows every correction."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import numpy as np
import pytest
from simulated_drivers import LONG_AGO_H, history_of
from store_records import DRIVER, HOME

from planner.monitoring.model import Reading, SickPeriod
from planner.monitoring.own_range import (
    columns_of,
    own_range_in_words,
    own_ranges,
    own_ranges_from_columns,
    why_it_teaches_nothing,
)
from planner.store.store import Store

ORIGIN = datetime(2031, 3, 1, 6, 0, tzinfo=UTC)
HISTORY = history_of((LONG_AGO_H, 0.0), (240.0, 2300.0))


def morning(day: int, spo2_pct: float = 97.0, **more: object) -> Reading:
    return Reading(driver_id=1, place_id=1, taken_at=ORIGIN + timedelta(days=day), spo2_pct=spo2_pct, **more)


FORTNIGHT = [morning(day, 97.0 if day < 10 else 93.0, device="clip") for day in range(14)]
ILL = SickPeriod(
    driver_id=1,
    starts_at=ORIGIN + timedelta(days=3),
    ends_at=ORIGIN + timedelta(days=5),
    marked_by="physician",
)


def learn(readings: list[Reading], *ill: SickPeriod):
    return own_ranges(readings, {1: HISTORY}, ill, origin=ORIGIN)[1]


def same(one, other) -> bool:
    return np.array_equal(one.latents().weight, other.latents().weight) and np.array_equal(
        one.latents().offset_mean_pct, other.latents().offset_mean_pct
    )


def test_counts() -> None:
    person = learn(FORTNIGHT)
    assert person.readings == 14
    assert person.readings_above_1500_m == 4
    assert person.usual_device == "clip"


@pytest.mark.parametrize(
    ("change", "why"),
    [
        ({"left_out": "typing error"}, "left out: typing error"),
        ({"wakefulness": "asleep"}, "asleep"),
        ({"circumstance": "after a session"}, "after a session"),
        ({"warm_hand": False}, "cold hand"),
        ({"quality_note": "nail varnish"}, "nail varnish"),
        ({"emergency_signs": ("confusion",)}, "emergency sign"),
    ],
)
def test_what_teaches_nothing(change: dict[str, object], why: str) -> None:
    odd = replace(morning(14, 80.0), **change)
    assert why in why_it_teaches_nothing(odd)
    assert same(learn([*FORTNIGHT, odd]), learn(FORTNIGHT))


def test_sickness_is_left_out_and_counted_again_when_taken_back() -> None:
    ill_days = [r for r in FORTNIGHT if ILL.starts_at <= r.taken_at <= ILL.ends_at]
    assert [why_it_teaches_nothing(r, [ILL]) for r in ill_days] == ["marked ill"] * 3
    assert why_it_teaches_nothing(ill_days[0], [replace(ILL, driver_id=2)]) == ""
    well = [r for r in FORTNIGHT if r not in ill_days]
    assert same(learn(FORTNIGHT, ILL), learn(well))
    still_ill = replace(ILL, ends_at=None)
    assert learn(FORTNIGHT, still_ill).readings == 3
    for period in (ILL, still_ill):
        taught_by = [r for r in FORTNIGHT if not why_it_teaches_nothing(r, [period])]
        assert len(taught_by) == learn(FORTNIGHT, period).readings
    assert same(learn(FORTNIGHT), learn(list(FORTNIGHT)))


def test_a_corrected_reading_counts_as_corrected() -> None:
    mistyped = [replace(r, spo2_pct=91.0) if i == 4 else r for i, r in enumerate(FORTNIGHT)]
    corrected = [replace(r, spo2_pct=97.0) if i == 4 else r for i, r in enumerate(mistyped)]
    assert not same(learn(mistyped), learn(FORTNIGHT))
    assert same(learn(corrected), learn(FORTNIGHT))


def test_order_and_other_drivers_do_not_matter() -> None:
    stranger = replace(morning(2, 85.0), driver_id=2)
    shuffled = [*FORTNIGHT[7:], stranger, *FORTNIGHT[:7]]
    assert same(learn(shuffled), learn(FORTNIGHT))
    assert set(own_ranges(shuffled, {1: HISTORY}, origin=ORIGIN)) == {1}


def test_a_driver_without_readings_has_the_populations_range() -> None:
    person = own_ranges([], {7: HISTORY}, origin=ORIGIN)[7]
    assert person.readings == 0
    assert own_range_in_words(person) == "No reading teaches yet: the range is the population's."


def test_sentence() -> None:
    words = own_range_in_words(learn(FORTNIGHT), "her")
    assert words.startswith("14 readings, 4 of them above 1\u2009500 m: the range is about ")
    assert words.endswith(" % her own.") or words.endswith("\u00a0% her own.")
    low_down = own_range_in_words(learn(FORTNIGHT[:1]))
    assert low_down.startswith("1 reading, none of them above 1\u2009500 m")


def test_columns_of_the_store_give_the_same(store: Store) -> None:
    place_id = store.add(HOME, by="test").id
    driver_id = store.add(replace(DRIVER, home_place_id=place_id), by="test").id
    records = [
        *FORTNIGHT,
        morning(14, 80.0, warm_hand=False),
        morning(15, 80.0, emergency_signs=("confusion",)),
        morning(16, 80.0, left_out="fell asleep"),
    ]
    stored = [replace(r, driver_id=driver_id, place_id=place_id) for r in records]
    store.add_all(stored, by="test")
    histories = {driver_id: HISTORY}
    by_record = own_ranges(store.readings(), histories, origin=ORIGIN)[driver_id]
    by_column = own_ranges_from_columns(store.reading_columns(), histories, origin=ORIGIN)[driver_id]
    assert by_record.readings == 14
    assert same(by_record, by_column)
    assert columns_of(stored)["taken_at"].dtype == store.reading_columns()["taken_at"].dtype
