"""The high rounds on Season: what the present plan gives one driver there."""

from __future__ import annotations

from planner.season.constraints import HIGH_FROM_M
from planner.season.evaluate import Spread
from planner.season.model import Driver
from planner.services.season import RoundCost
from planner.ui.driver_cached import costs_of
from planner.ui.page import Context, line
from planner.ui.tables import note, table
from planner.wording import DASH, day, elevation, per_cent, per_cent_range


def draw_high_rounds(ctx: Context, driver: Driver) -> None:
    """Draw what the present plan gives this driver at the high rounds."""
    costs = costs_of(ctx, driver)
    if not costs:
        return
    table(
        [
            "high round",
            "first session",
            "track",
            "free days before",
            "nights there",
            "SpO2 first session",
            "SpO2 race morning",
            "aerobic capacity",
        ],
        [_cost_row(ctx, each) for each in costs],
        right=(2, 4, 5, 6, 7),
        caption=f"What the present plan gives {driver.name} at the high rounds",
        stack=True,
    )
    unplanned = [each.round.name for each in costs if each.outlook is None]
    if unplanned:
        line(f"A dash: no stay is planned there yet ({', '.join(unplanned)}).")
    note(
        "SpO2 awake at rest: the driver's own range, which holds 95 % of single readings. Free days lie "
        "between the last fixed thing before (a round or a commitment) and the first session; nights there "
        "are those before it. "
        "Aerobic capacity on race morning is per cent of one's own at sea level and no measure of lap time. "
        f"A round is called high from {elevation(HIGH_FROM_M, ctx.units)} (judgement)."
    )


def _cost_row(ctx: Context, cost: RoundCost) -> list[str]:
    """One high round in words."""
    free = DASH if cost.free_days_before is None else str(cost.free_days_before)
    given = cost.outlook
    return [
        cost.round.name,
        day(cost.first_session.starts_at, cost.place.zone),
        elevation(cost.place.track_elevation_m, ctx.units),
        f"{free} after {cost.free_since}",
        DASH if given is None else str(cost.nights_there),
        DASH if given is None else _in_words(given.first_session_spo2_pct),
        DASH if given is None else _in_words(given.race_spo2_pct),
        DASH if given is None else per_cent(given.race_capacity_pct.mean),
    ]


def _in_words(found: Spread) -> str:
    """A 95 % range in whole per cent."""
    return per_cent_range(found.low, found.high)
