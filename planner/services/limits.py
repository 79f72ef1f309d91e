"""The coach's limits: what is asked of every plan, each with its source or the word judgement."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import Final, TypeAlias, get_args

from planner.errors import InputError
from planner.monitoring.outcome import CONFIRMS_WITHIN
from planner.physiology.drinking import DEFAULT_CAP_L_PER_H, HIGHEST_CAP_L_PER_H, HIGHEST_LOSS_PCT
from planner.physiology.illness import (
    EXTRA_NIGHT_EVERY_M,
    FIRST_NIGHT_HIGH_M,
    FIRST_NIGHT_MODERATE_M,
    LARGEST_NIGHTLY_GAIN_M,
    LEAST_AMS_HOURS,
    LEAST_AMS_TOTAL,
    SLOW_ABOVE_M,
    RiskClass,
)
from planner.season.constraints import (
    HIGH_FROM_M,
    IRON_CHECK_FROM_M,
    IRON_CHECK_LATEST_WEEKS,
    IRON_CHECK_WEEKS,
    Limits,
)
from planner.store.store import Store
from planner.wording import UnitChoice, elevation

LimitValue: TypeAlias = float | str | None

SETTING: Final = "coach's limits"
DRINKS_CAP: Final = "drinks_cap_l_per_h"
HIGHEST_RISK: Final = "highest_risk"
RISKS: Final[tuple[RiskClass, ...]] = get_args(RiskClass)
_DEFAULTS: Final = Limits()


@dataclass(frozen=True)
class NumberLimit:
    """A limit that is a number. An `optional` one may be left out: then there is no such limit."""

    key: str
    meaning: str
    unit: str
    low: float
    high: float
    default: float | None
    source: str
    optional: bool = False


NUMBER_LIMITS: Final = (
    NumberLimit(
        "lowest_race_spo2_pct",
        "Lowest SpO2 wanted on race morning",
        "%",
        50.0,
        100.0,
        _DEFAULTS.lowest_race_spo2_pct,
        "judgement; no published figure says what a driver needs",
        optional=True,
    ),
    NumberLimit(
        "lowest_race_capacity_pct",
        "Lowest aerobic capacity wanted on race morning",
        "% of sea level",
        30.0,
        100.0,
        _DEFAULTS.lowest_race_capacity_pct,
        "judgement",
        optional=True,
    ),
    NumberLimit(
        "largest_clock_offset_h",
        "Furthest the body clock may be from local time on race morning",
        "h",
        0.0,
        12.0,
        _DEFAULTS.largest_clock_offset_h,
        "judgement",
        optional=True,
    ),
    NumberLimit(
        "shortest_landing_to_session_h",
        "Shortest time between landing and the first session",
        "h",
        0.0,
        240.0,
        _DEFAULTS.shortest_landing_to_session_h,
        "judgement",
    ),
    NumberLimit(
        "longest_travel_h_per_day",
        "Longest travel begun on one day",
        "h",
        1.0,
        48.0,
        _DEFAULTS.longest_travel_h_per_day,
        "judgement",
    ),
    NumberLimit(
        "most_nights_away",
        "Most nights away from home for one round",
        "nights",
        0.0,
        60.0,
        _DEFAULTS.most_nights_away,
        "judgement",
        optional=True,
    ),
    NumberLimit(
        DRINKS_CAP,
        "Most to drink in the car",
        "L/h",
        0.2,
        HIGHEST_CAP_L_PER_H,
        DEFAULT_CAP_L_PER_H,
        "judgement, below the 1.0–1.2 L/h that a stomach empties at best (from memory)",
    ),
)
RISK_SOURCE: Final = "classes: Wilderness Medical Society 2024 (published); which one to accept: judgement"


def kept_limits(store: Store) -> dict[str, LimitValue]:
    """Return every limit by its key, as the coach set it or by default."""
    kept: dict[str, LimitValue] = {each.key: each.default for each in NUMBER_LIMITS}
    kept[HIGHEST_RISK] = _DEFAULTS.highest_risk
    kept.update(json.loads(store.setting(SETTING) or "{}"))
    return kept


def keep_limits(store: Store, values: dict[str, LimitValue]) -> None:
    """Keep the coach's limits.

    Raises: InputError naming the first limit that cannot be used; then nothing is kept.
    """
    for each in NUMBER_LIMITS:
        _refuse_unusable(each, values[each.key])
    if values[HIGHEST_RISK] not in RISKS:
        raise InputError("Highest risk class", values[HIGHEST_RISK], f"one of {', '.join(RISKS)}")
    store.set_setting(SETTING, json.dumps(values))


def season_limits(store: Store) -> Limits:
    """Return the limits that a plan for a round has to keep to."""
    kept = {key: value for key, value in kept_limits(store).items() if key != DRINKS_CAP}
    nights = kept.pop("most_nights_away")
    return Limits(most_nights_away=None if nights is None else int(float(nights)), **kept)  # type: ignore[arg-type]


def drinks_cap_l_per_h(store: Store) -> float:
    """Return the most that a driver is asked to drink in the car."""
    return float(kept_limits(store)[DRINKS_CAP] or DEFAULT_CAP_L_PER_H)


@dataclass(frozen=True)
class FixedRule:
    """A rule that the program keeps to and that is not set here."""

    meaning: str
    source: str


def fixed_rules(units: UnitChoice) -> list[FixedRule]:
    """Return the rules that stand, in words, with where each comes from."""
    high, slow_above = elevation(HIGH_FROM_M, units), elevation(SLOW_ABOVE_M, units)
    gain, extra = elevation(LARGEST_NIGHTLY_GAIN_M, units), elevation(EXTRA_NIGHT_EVERY_M, units)
    moderate, severe = elevation(FIRST_NIGHT_MODERATE_M, units), elevation(FIRST_NIGHT_HIGH_M, units)
    iron_from, within_h = elevation(IRON_CHECK_FROM_M, units), CONFIRMS_WITHIN.total_seconds() / 3600.0
    return [
        FixedRule(
            f"Above {slow_above} at most {gain} more sleeping elevation a night, "
            f"an extra night every {extra}.",
            "Wilderness Medical Society 2024 (published)",
        ),
        FixedRule(
            f"First night from {moderate}: moderate risk of altitude illness; above {severe}: high.",
            "Wilderness Medical Society 2024 (published)",
        ),
        FixedRule(
            f"Acute mountain sickness: headache and {LEAST_AMS_TOTAL} points or more, after "
            f"{LEAST_AMS_HOURS:.0f} h up there.",
            "Lake Louise score 2018 (published)",
        ),
        FixedRule(f"A round is called high from {high}.", "judgement"),
        FixedRule(
            f"Iron is looked at {IRON_CHECK_LATEST_WEEKS} to {IRON_CHECK_WEEKS} weeks before the first round "
            f"from {iron_from}; what follows is the physician's.",
            "weeks from memory, elevation judgement",
        ),
        FixedRule(f"A second low reading within {within_h:.0f} h goes to the physician.", "judgement"),
        FixedRule(
            f"Drinking holds the loss within {HIGHEST_LOSS_PCT:.0f} % of body mass and never gains mass.",
            "American College of Sports Medicine 2007 (published)",
        ),
    ]


def _refuse_unusable(limit: NumberLimit, value: LimitValue) -> None:
    if value is None and limit.optional:
        return
    if not isinstance(value, float | int) or not limit.low <= value <= limit.high:
        raise InputError(limit.meaning, value, f"{limit.low:g} to {limit.high:g} {limit.unit}")
