"""Aerobic capacity against the published rows, and what must hold whatever the constants are."""

from __future__ import annotations

import numpy as np
import pytest
from published_rows import Row, cases

from planner.errors import InputError
from planner.physiology.capacity import (
    GAIN_TIME_CONSTANT_D,
    LOSS_PCT_PER_KM,
    LOSS_PCT_PER_KM2,
    aerobic_capacity_pct,
    aerobic_capacity_range_pct,
)

ELEVATIONS = np.linspace(-400.0, 6000.0, 257)


@cases("aerobic_capacity")
def test_published_row(row: Row) -> None:
    row.check(aerobic_capacity_pct(row["elevation_m"], row["days"]))


@cases("aerobic_capacity")
def test_published_row_lies_in_the_range_between_people(row: Row) -> None:
    low, high = aerobic_capacity_range_pct(row["elevation_m"], row["days"])
    assert low < row.expected < high


def test_loss_is_the_least_squares_line_through_both_published_curves() -> None:
    # Computed by numpy's least squares from the two published formulas (from memory), one point per 100 m.
    low, high = np.arange(0.3, 2.81, 0.1), np.arange(0.0, 4.51, 0.1)
    loss = np.concatenate([6.3 * (low - 0.3), -(0.178 * high**3 - 1.43 * high**2 - 4.07 * high)])
    km = np.concatenate([low, high])
    (linear, quadratic), *_ = np.linalg.lstsq(np.column_stack([km, km**2]), loss, rcond=None)
    assert linear == pytest.approx(LOSS_PCT_PER_KM, abs=0.05)
    assert quadratic == pytest.approx(LOSS_PCT_PER_KM2, abs=0.005)


def test_time_constant_is_the_least_squares_one_through_the_gains_by_day() -> None:
    # Computed by a search over time constants, the gain in closed form for each; Schuler 2007 (published).
    days, gained = np.array([6.0, 13.0, 20.0]), np.array([3.2, 4.8, 5.5])
    constants = np.arange(4.0, 14.0, 0.1)
    adapted = 1.0 - np.exp(-days / constants[:, None])
    full = (adapted * gained).sum(axis=1) / (adapted**2).sum(axis=1)
    misses = ((full[:, None] * adapted - gained) ** 2).sum(axis=1)
    assert constants[misses.argmin()] == pytest.approx(GAIN_TIME_CONSTANT_D, abs=0.051)


@pytest.mark.parametrize("days", [0.0, 3.0, 14.0, 365.0])
def test_falls_with_elevation(days: float) -> None:
    assert (np.diff(aerobic_capacity_pct(ELEVATIONS[ELEVATIONS >= 0.0], days)) < 0.0).all()


def test_never_falls_with_time_and_never_beats_sea_level() -> None:
    by_day = aerobic_capacity_pct(ELEVATIONS[:, None], np.linspace(0.0, 60.0, 61))
    assert (np.diff(by_day, axis=1) >= 0.0).all()
    assert by_day.max() == 100.0


def test_range_holds_the_middle_and_widens_with_elevation() -> None:
    low, high = aerobic_capacity_range_pct(ELEVATIONS, 5.0)
    middle = aerobic_capacity_pct(ELEVATIONS, 5.0)
    assert ((low <= middle) & (middle <= high) & (high <= 100.0)).all()
    assert (np.diff(high - low) >= 0.0).all()
    assert aerobic_capacity_range_pct(8848.0)[0] >= 0.0


def test_range_is_as_wide_as_people_differ() -> None:
    """from memory: eight athletes lost 4.6 to 7.5 % per 1000 m above 300 m (Wehrlin & Hallen 2006); 95 of 100
    people spread wider than eight, but not twice as wide (judgement)."""
    low, high = aerobic_capacity_range_pct(2300.0)
    most, least = 100.0 - 2.0 * 7.5, 100.0 - 2.0 * 4.6
    assert low < most < least < high
    assert high - low < 2.0 * (least - most)


def test_scalar_equals_array_element_and_nan_passes() -> None:
    single = aerobic_capacity_pct(2300.0, 4.0)
    assert type(single) is float
    assert single == aerobic_capacity_pct(np.array([2300.0, np.nan]), 4.0)[0]
    assert np.isnan(aerobic_capacity_pct(np.array([2300.0, np.nan]), 4.0)[1])
    assert [type(end) for end in aerobic_capacity_range_pct(2300.0)] == [float, float]


def test_out_of_range_names_value_range_and_unit() -> None:
    with pytest.raises(InputError, match=r"elevation_m: 99999\.0 .* -430 to 9000 m"):
        aerobic_capacity_pct(99999.0)
    with pytest.raises(InputError, match=r"days: -1\.0 .* 0 to 3650 d"):
        aerobic_capacity_range_pct(2000.0, -1.0)
