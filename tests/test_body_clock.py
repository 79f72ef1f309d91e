"""The body clock against the published light table and rates."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.physiology.body_clock import (
    clock_days,
    clock_offset_h,
    days_to_adapt,
    light_windows,
    remaining_offset_h,
    temperature_minimum_h,
)

ROWS = list(csv.DictReader((Path(__file__).parent / "published" / "body_clock.csv").open(encoding="utf-8")))


@pytest.mark.parametrize("row", ROWS, ids=lambda r: f"{r['case']} {r['quantity']}")
def test_published_row(row: dict[str, str]) -> None:
    zones = float(row["zones_east_h"])
    if row["quantity"] == "minutes_per_day":
        found = 60.0 * (abs(zones) - abs(float(remaining_offset_h(zones, 1.0))))
    else:
        found = getattr(clock_days(zones)[0], row["quantity"])
    assert found == pytest.approx(float(row["expected"]), abs=float(row["tolerance"]))


# Computed by hand from the closed form with n = 8 - 0.95 d and n = 9 - (92/60) d, published table and rates.
def test_eight_hours_east_day_by_day() -> None:
    days = clock_days(8.0)
    assert [d.day for d in days] == list(range(1, 10))  # 8 h / 57 min = 8.42 days
    for d in days:
        left = 8.0 - 0.95 * (d.day - 1)
        assert d.offset_h == pytest.approx(left)
        assert d.avoid_from_h == pytest.approx((left - 3.0) % 24.0)
        assert d.avoid_to_h == pytest.approx((left + 3.0) % 24.0)
        assert d.seek_from_h == pytest.approx((left + 5.0) % 24.0)
        assert d.seek_to_h == pytest.approx((left + 11.0) % 24.0)


def test_nine_hours_west_day_by_day() -> None:
    days = clock_days(-9.0)
    assert [d.day for d in days] == list(range(1, 7))  # 9 h / 92 min = 5.87 days
    for d in days:
        left = 9.0 - 92.0 / 60.0 * (d.day - 1)
        assert d.offset_h == pytest.approx(-left)
        assert d.avoid_from_h == pytest.approx((5.0 - left) % 24.0)
        assert d.avoid_to_h == pytest.approx((11.0 - left) % 24.0)
        assert d.seek_from_h == pytest.approx((21.0 - left) % 24.0)
        assert d.seek_to_h == pytest.approx((27.0 - left) % 24.0)


def test_waking_time_moves_the_windows() -> None:
    # From memory: the minimum lies 3 h before waking, 2 h for a sleep of 7 h or less.
    assert temperature_minimum_h(8.5) == pytest.approx(5.5)
    assert temperature_minimum_h(7.0, 7.0) == pytest.approx(5.0)
    assert temperature_minimum_h(1.0) == pytest.approx(22.0)
    # Computed by hand: E6 seeks 11-17 at a minimum of 04:00, so 12:30-18:30 at 05:30.
    assert clock_days(6.0, wake_h=8.5)[0].seek_from_h == pytest.approx(12.5)
    assert clock_days(6.0, wake_h=8.5)[0].seek_to_h == pytest.approx(18.5)


def test_no_zone_crossed_means_nothing_to_do() -> None:
    assert clock_days(0.0) == []
    assert clock_days(24.0) == []
    assert np.isnan(light_windows(0.0).seek_from_h)


@pytest.mark.parametrize(
    ("zones", "offset"), [(9.5, 9.5), (10.0, -14.0), (12.0, -12.0), (-13.0, -13.0), (-15.0, 9.0)]
)
def test_the_way_it_is_led(zones: float, offset: float) -> None:
    # Computed by the published rule: ten or more east are treated as 24 - n west.
    assert clock_offset_h(zones) == offset


@given(zones=st.floats(-24.0, 24.0), days=st.floats(0.0, 30.0), more=st.floats(0.0, 30.0))
@settings(max_examples=100, deadline=None)
def test_the_offset_only_shrinks_and_keeps_its_side(zones: float, days: float, more: float) -> None:
    offset = float(clock_offset_h(zones))
    left = float(remaining_offset_h(offset, days))
    assert abs(left) <= abs(offset)
    assert left * offset >= 0.0
    assert float(remaining_offset_h(left, more)) == pytest.approx(
        float(remaining_offset_h(offset, days + more)), abs=1e-9
    )
    assert remaining_offset_h(offset, float(days_to_adapt(offset))) == pytest.approx(0.0, abs=1e-9)
    assert clock_offset_h(offset) == pytest.approx(offset)


def test_scalars_arrays_and_nan() -> None:
    zones = np.array([[3.0, -6.0], [np.nan, 12.0]])
    offsets = clock_offset_h(zones)
    assert isinstance(offsets, np.ndarray)
    assert offsets.shape == (2, 2)
    assert isinstance(clock_offset_h(3.0), float)
    assert offsets[0, 1] == clock_offset_h(-6.0)
    assert np.isnan(offsets[1, 0])
    assert np.isnan(np.asarray(remaining_offset_h(offsets, 1.0))[1, 0])
    assert np.isnan(temperature_minimum_h(float("nan")))
    assert np.isnan(temperature_minimum_h(7.0, float("nan")))


def test_out_of_range_is_named() -> None:
    with pytest.raises(InputError, match=r"zones_east_h: 30\.0 cannot be used, expected -24 to 24 h"):
        clock_offset_h(30.0)
    with pytest.raises(InputError, match="wake_h"):
        clock_days(3.0, wake_h=25.0)
