"""The body clock after crossing time zones: how far it lags, and the light that moves it.

The clock is described by its offset: the time zones that it still has to move, east positive. It moves
towards the local day at a steady rate, and the light windows move with it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like

# Aschoff 1975, from a secondary source (published): untreated shift a day.
EASTWARD_RATE_H_PER_DAY: Final = 57.0 / 60.0
WESTWARD_RATE_H_PER_DAY: Final = 92.0 / 60.0
# From this many zones east on the clock is led west instead (after Reilly & Waterhouse, published).
LED_WEST_FROM_ZONES: Final = 10.0
# Over this many zones east the clock may run the other way by itself (published).
MAY_REVERSE_FROM_ZONES: Final = 8.0
# The light table, as hours from the temperature minimum: six hours on either side, an hour off it
# (after Reilly & Waterhouse, published for a minimum at 04:00 body time).
LIGHT_NEAR_H: Final = 1.0
LIGHT_FAR_H: Final = 7.0
DEFAULT_WAKE_H: Final = 7.0  # gives the table's minimum at 04:00


@dataclass(frozen=True)
class LightWindows:
    """When to seek and when to avoid bright light: local wall-clock hours in [0, 24), one entry an offset."""

    seek_from_h: FloatArray
    seek_to_h: FloatArray
    avoid_from_h: FloatArray
    avoid_to_h: FloatArray


@dataclass(frozen=True)
class ClockDay:
    """One day after the flight; `day` 1 is the day of arrival. Times are local wall-clock hours, [0, 24)."""

    day: int
    offset_h: float
    seek_from_h: float
    seek_to_h: float
    avoid_from_h: float
    avoid_to_h: float


def clock_offset_h(zones_east_h: FloatLike) -> FloatLike:
    """The way the clock has to go after crossing time zones: ten or more east are led west.

    Parameters:
        zones_east_h: time zones crossed, east positive [h], scalar or array.
    Returns:
        The signed offset to be worked off [h], from -14 to just under 10, the shape of zones_east_h.
    Raises:
        InputError: zones_east_h outside -24 to 24.
    Valid:
        -24 to 24 h; whole days drop out.
    Source:
        Table after Reilly & Waterhouse: 10 or more zones east are treated as 24 - n west (published).
    Example:
        >>> clock_offset_h(10.0)
        -14.0
    """
    east = np.mod(checked("zones_east_h", zones_east_h), 24.0)
    return like(np.where(east < LED_WEST_FROM_ZONES, east, east - 24.0), zones_east_h)


def remaining_offset_h(offset_h: FloatLike, days: FloatLike) -> FloatLike:
    """What is left of an offset after some days in the new zone, without any treatment.

    Parameters:
        offset_h: offset on arrival, east positive [h], scalar or array.
        days: time since arrival [d], scalar or array.
    Returns:
        The offset still to be worked off [h], of the same sign, never beyond zero.
    Raises:
        InputError: offset_h outside -24 to 24, or days below 0.
    Valid:
        Mean rates; people differ, and light at the wrong time can turn the clock the other way.
    Source:
        Aschoff 1975, from a secondary source: 57 min a day east, 92 min a day west (published).
    Example:
        >>> remaining_offset_h(8.0, 2.0)
        6.1
    """
    offset = checked("zones_east_h", offset_h, "offset_h")
    passed = checked("days", days)
    rate = np.where(offset > 0.0, EASTWARD_RATE_H_PER_DAY, WESTWARD_RATE_H_PER_DAY)
    left = np.sign(offset) * np.maximum(np.abs(offset) - rate * passed, 0.0) + 0.0  # no minus zero
    return like(left, offset_h, days)


def days_to_adapt(offset_h: FloatLike) -> FloatLike:
    """How long an offset takes to wear off without treatment.

    Parameters:
        offset_h: offset on arrival, east positive [h], scalar or array.
    Returns:
        Time until the offset is gone [d].
    Raises:
        InputError: offset_h outside -24 to 24.
    Valid:
        Mean rates; people differ.
    Source:
        Aschoff 1975, from a secondary source: 57 min a day east, 92 min a day west (published).
    Example:
        >>> round(days_to_adapt(-9.2), 6)
        6.0
    """
    offset = checked("zones_east_h", offset_h, "offset_h")
    rate = np.where(offset > 0.0, EASTWARD_RATE_H_PER_DAY, WESTWARD_RATE_H_PER_DAY)
    return like(np.abs(offset) / rate, offset_h)


def temperature_minimum_h(wake_h: FloatLike, sleep_h: FloatLike = 8.0) -> FloatLike:
    """Body time of the lowest temperature, which divides light that delays from light that advances.

    Parameters:
        wake_h: habitual waking, wall clock [h], scalar or array.
        sleep_h: length of the habitual night's sleep [h], scalar or array.
    Returns:
        Wall-clock time of the minimum in the zone that the body is used to [h], in [0, 24).
    Raises:
        InputError: wake_h outside 0 to 24, or sleep_h outside 3 to 14.
    Valid:
        Regular sleepers; shift work and a recent flight move it.
    Source:
        About 3 h before waking, 2 h for sleep of 7 h or less (from memory).
    Example:
        >>> temperature_minimum_h(7.0)
        4.0
    """
    wake = checked("clock_time_h", wake_h, "wake_h")
    ahead = np.where(checked("sleep_h", sleep_h) <= 7.0, 2.0, 3.0)
    return like(np.mod(wake - ahead + np.where(np.isnan(sleep_h), np.nan, 0.0), 24.0), wake_h, sleep_h)


def light_windows(offset_h: FloatLike, minimum_h: FloatLike = 4.0) -> LightWindows:
    """When to seek and avoid bright light on a day on which the clock has `offset_h` still to go.

    Parameters:
        offset_h: offset on that day, east positive [h], scalar or array.
        minimum_h: body time of the temperature minimum [h], scalar or array.
    Returns:
        Windows [h] of local wall-clock time in [0, 24), arrays (0-d for scalars); NaN at an offset of zero,
        when there is nothing to move.
    Raises:
        InputError: offset_h outside -24 to 24, or minimum_h outside 0 to 24.
    Valid:
        Published for arrival after 3 to 9 zones east and 3 to 12 west with the minimum at 04:00; smaller
        offsets and later days follow the same windows about the minimum as it moves.
    Source:
        Table after Reilly & Waterhouse (published): n east avoid (n-3) to (n+3), seek (n+5) to (n+11); n west
        avoid (5-n) to (11-n), seek (21-n) to (27-n). Both are 1 to 7 h before and after the minimum at 4 + n.
    """
    offset = checked("zones_east_h", offset_h, "offset_h")
    minimum = checked("clock_time_h", minimum_h, "minimum_h") + offset
    minimum = np.where(offset == 0.0, np.nan, minimum)
    before = (np.mod(minimum - LIGHT_FAR_H, 24.0), np.mod(minimum - LIGHT_NEAR_H, 24.0))
    after = (np.mod(minimum + LIGHT_NEAR_H, 24.0), np.mod(minimum + LIGHT_FAR_H, 24.0))
    east = offset > 0.0
    return LightWindows(
        seek_from_h=np.where(east, after[0], before[0]),
        seek_to_h=np.where(east, after[1], before[1]),
        avoid_from_h=np.where(east, before[0], after[0]),
        avoid_to_h=np.where(east, before[1], after[1]),
    )


def clock_days(zones_east_h: float, wake_h: float = DEFAULT_WAKE_H, sleep_h: float = 8.0) -> list[ClockDay]:
    """The days from arrival until the clock has adapted, with the light to seek and to avoid on each.

    Parameters:
        zones_east_h: time zones crossed, east positive [h], scalar.
        wake_h: habitual waking in the old zone, wall clock [h], scalar.
        sleep_h: length of the habitual night's sleep [h], scalar.
    Returns:
        One entry a day [object] on which something is left to move; empty when no zone was crossed.
    Raises:
        InputError: a value outside its range.
    Valid:
        As light_windows and remaining_offset_h; over 8 zones east the clock may run the other way.
    Source:
        Table after Reilly & Waterhouse and rates of Aschoff 1975 (published).
    """
    offset = clock_offset_h(zones_east_h)
    whole_days = int(np.ceil(np.round(days_to_adapt(offset), 9)))
    left = np.asarray(remaining_offset_h(offset, np.arange(whole_days, dtype=np.float64)))
    windows = light_windows(left, temperature_minimum_h(wake_h, sleep_h))
    return [
        ClockDay(
            day=i + 1,
            offset_h=float(left[i]),
            seek_from_h=float(windows.seek_from_h[i]),
            seek_to_h=float(windows.seek_to_h[i]),
            avoid_from_h=float(windows.avoid_from_h[i]),
            avoid_to_h=float(windows.avoid_to_h[i]),
        )
        for i in range(whole_days)
    ]
