"""What a weighing must fulfil before it is kept; asked by the store and by the preview of files."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, get_args

from planner.errors import InputError
from planner.hydration.model import CockpitConditions, MorningMark, Weighing, WeighingClothes
from planner.record_checks import Problem, after, flag, found, instant, number, reference, text, whole, word

WEIGHING_CLOTHES = get_args(WeighingClothes)

URINE_COLOURS = (1, 8)  # the published colour chart's first and last field


def _cockpit_conditions(r: CockpitConditions) -> tuple[Problem, ...]:
    return (
        reference("session_id", r.session_id),
        number("air_temperature_c", r.air_temperature_c, "air_temperature_c"),
        number("radiant_temperature_c", r.radiant_temperature_c, "radiant_temperature_c"),
        number("humidity_pct", r.humidity_pct, "humidity_pct"),
        number("air_speed_m_s", r.air_speed_m_s, "air_speed_m_s"),
        flag("measured", r.measured),
    )


def _weighing(r: Weighing) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        reference("place_id", r.place_id),
        instant("starts_at", r.starts_at),
        instant("ends_at", r.ends_at, optional=True),
        after("ends_at", r.ends_at, "starts_at", r.starts_at),
        number("mass_before_kg", r.mass_before_kg, "mass_kg"),
        number("mass_after_kg", r.mass_after_kg, "mass_kg", optional=True),
        number("drink_ml", r.drink_ml, "drink_ml"),
        number("food_g", r.food_g, "food_g"),
        number("urine_ml", r.urine_ml, "urine_ml"),
        word("clothes", r.clothes, WEIGHING_CLOTHES),
        text("ensemble", r.ensemble),
        number("air_temperature_c", r.air_temperature_c, "air_temperature_c", optional=True),
        number("radiant_temperature_c", r.radiant_temperature_c, "radiant_temperature_c", optional=True),
        number("humidity_pct", r.humidity_pct, "humidity_pct", optional=True),
        number("air_speed_m_s", r.air_speed_m_s, "air_speed_m_s", optional=True),
        number("metabolic_w_m2", r.metabolic_w_m2, "metabolic_w_m2", optional=True),
        reference("session_id", r.session_id, optional=True),
        text("entered_by", r.entered_by),
    )


def _morning_mark(r: MorningMark) -> tuple[Problem, ...]:
    return (
        reference("driver_id", r.driver_id),
        instant("at", r.at),
        number("mass_kg", r.mass_kg, "mass_kg", optional=True),
        whole("urine_colour", r.urine_colour, *URINE_COLOURS, optional=True),
        number("urine_specific_gravity", r.urine_specific_gravity, "urine_specific_gravity", optional=True),
        flag("thirsty", r.thirsty, optional=True),
        text("entered_by", r.entered_by),
    )


CHECKS: dict[type, Callable[[Any], tuple[Problem, ...]]] = {
    CockpitConditions: _cockpit_conditions,
    Weighing: _weighing,
    MorningMark: _morning_mark,
}


def problems(record: CockpitConditions | Weighing | MorningMark) -> list[InputError]:
    """All that is wrong with a record in itself, field by field; empty when it may be kept."""
    return found(CHECKS[type(record)](record))
