"""The heat around a driver and what is worn: measured or estimated, always with a range.

Every default here is a judgement unless a source stands beside it; the screen says so.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Final, Literal, TypeAlias

import numpy as np

from planner.checks import QUANTITIES, checked
from planner.errors import InputError
from planner.hydration.model import CockpitConditions, Weighing
from planner.physiology.heat import humidity_in_warmer_air_pct
from planner.physiology.ranges import Range
from planner.physiology.sweat import HeatInputs

CarKind: TypeAlias = Literal["closed car", "open-wheel car"]


@dataclass(frozen=True)
class CarDefaults:
    """What a kind of car does to its driver, when nobody has measured."""

    metabolic_w_m2: tuple[float, float, float]  # low, best, high, as are the others
    above_ambient_c: tuple[float, float, float]
    air_speed_m_s: float


# Judgement. Published beside them: open-wheel 5.27 +- 0.47 MET (Beaune 2010), cockpits of 32 to 58 C.
CARS: Final[dict[CarKind, CarDefaults]] = {
    "closed car": CarDefaults((180.0, 230.0, 300.0), (10.0, 15.0, 25.0), 0.5),
    "open-wheel car": CarDefaults((230.0, 300.0, 450.0), (3.0, 6.0, 10.0), 2.0),
}
RADIANT_ABOVE_AIR_C: Final = 5.0
AMBIENT_C: Final = 25.0
AMBIENT_HUMIDITY_PCT: Final = 50.0
# How far a thermometer in the cockpit may be from what the driver feels (judgement).
MEASURED_WITHIN_C: Final = 2.0
MEASURED_WITHIN_PCT: Final = 5.0
ESTIMATED_WITHIN_PCT: Final = 15.0
EFFORT_WITHIN: Final = 0.15  # of a metabolic rate that was typed in
AIR_SPEED_WITHIN: Final = 2.0  # air speed past a seated body is known to a factor


@dataclass(frozen=True)
class ClothingEnsemble:
    """What is worn in the car, named. `Weighing.ensemble` is such a name; permeability is im."""

    name: str
    insulation_clo: float
    permeability: float
    permeability_low: float
    permeability_high: float
    source: str


FULL_SUIT: Final = ClothingEnsemble(
    "racing overalls, whole ensemble",
    1.56,
    0.34,
    0.30,
    0.38,
    "insulation published; permeability judgement, nobody has published one",
)
ENSEMBLES: Final = (
    FULL_SUIT,
    ClothingEnsemble("racing overalls without underwear", 1.2, 0.34, 0.30, 0.38, "judgement"),
    ClothingEnsemble("overalls down to the waist", 0.8, 0.38, 0.34, 0.42, "judgement"),
    ClothingEnsemble(
        "shorts and shirt", 0.5, 0.38, 0.34, 0.42, "judgement; ISO 7933 takes im 0.38 (published)"
    ),
)


def checked_ensemble(ensemble: ClothingEnsemble) -> ClothingEnsemble:
    """Return the ensemble, or refuse it.

    Raises: InputError naming the field.
    """
    if not ensemble.name.strip():
        raise InputError("ensemble", ensemble.name, "a name")
    for field, quantity in (
        ("insulation_clo", "insulation_clo"),
        ("permeability", "permeability"),
        ("permeability_low", "permeability"),
        ("permeability_high", "permeability"),
    ):
        value = checked(quantity, getattr(ensemble, field), field)
        if np.isnan(value):
            raise InputError(field, getattr(ensemble, field), "a number")
    if not ensemble.permeability_low <= ensemble.permeability <= ensemble.permeability_high:
        raise InputError(
            "permeability",
            ensemble.permeability,
            f"a figure within its range {ensemble.permeability_low:g} to {ensemble.permeability_high:g}",
        )
    return ensemble


def inputs_from_conditions(
    conditions: CockpitConditions,
    ensemble: ClothingEnsemble = FULL_SUIT,
    car: CarKind = "closed car",
    metabolic_w_m2: float | None = None,
) -> HeatInputs:
    """Inputs of the heat balance from a session's conditions; wider where they are estimated."""
    return _inputs(
        conditions.air_temperature_c,
        conditions.radiant_temperature_c,
        conditions.humidity_pct,
        conditions.air_speed_m_s,
        metabolic_w_m2,
        ensemble,
        car,
        measured=conditions.measured,
    )


def inputs_from_weighing(
    weighing: Weighing, ensemble: ClothingEnsemble = FULL_SUIT, car: CarKind = "closed car"
) -> HeatInputs | None:
    """Inputs of the heat balance as noted with a weighing; None when the cockpit was not measured."""
    if weighing.air_temperature_c is None or weighing.humidity_pct is None:
        return None
    air_c = weighing.air_temperature_c
    radiant_c = weighing.radiant_temperature_c
    speed = weighing.air_speed_m_s
    return _inputs(
        air_c,
        air_c + RADIANT_ABOVE_AIR_C if radiant_c is None else radiant_c,
        weighing.humidity_pct,
        CARS[car].air_speed_m_s if speed is None else speed,
        weighing.metabolic_w_m2,
        ensemble,
        car,
        measured=True,
    )


def estimated_conditions(
    session_id: int,
    ambient_c: float = AMBIENT_C,
    ambient_humidity_pct: float = AMBIENT_HUMIDITY_PCT,
    car: CarKind = "closed car",
) -> CockpitConditions:
    """Conditions in a cockpit that nobody has measured, from the air outside; the water in it stays."""
    outside_c = float(checked("air_temperature_c", ambient_c, "ambient_c"))
    air_c = min(outside_c + CARS[car].above_ambient_c[1], QUANTITIES["air_temperature_c"].high)
    humidity = humidity_in_warmer_air_pct(ambient_humidity_pct, ambient_c, air_c)
    return CockpitConditions(
        session_id,
        air_c,
        air_c + RADIANT_ABOVE_AIR_C,
        float(humidity),
        CARS[car].air_speed_m_s,
        measured=False,
    )


def stacked(inputs: Sequence[HeatInputs]) -> HeatInputs:
    """Many scalar inputs as one with arrays."""

    def together(name: str) -> Range:
        ranges = [getattr(each, name) for each in inputs]
        return Range(
            np.array([each.low for each in ranges], dtype=np.float64),
            np.array([each.best for each in ranges], dtype=np.float64),
            np.array([each.high for each in ranges], dtype=np.float64),
        )

    return HeatInputs(**{field.name: together(field.name) for field in fields(HeatInputs)})


def _inputs(
    air_c: float,
    radiant_c: float,
    humidity_pct: float,
    air_speed_m_s: float,
    metabolic_w_m2: float | None,
    ensemble: ClothingEnsemble,
    car: CarKind,
    *,
    measured: bool,
) -> HeatInputs:
    defaults = CARS[car]
    if measured:
        below = above = MEASURED_WITHIN_C
        humidity_within = MEASURED_WITHIN_PCT
    else:
        least, usual, most = defaults.above_ambient_c
        below, above = usual - least, most - usual
        humidity_within = ESTIMATED_WITHIN_PCT
    if metabolic_w_m2 is None:
        effort = Range(*defaults.metabolic_w_m2)
    else:
        off = EFFORT_WITHIN * metabolic_w_m2
        effort = _range("metabolic_w_m2", metabolic_w_m2, off, off)
    slower, faster = air_speed_m_s * (1.0 - 1.0 / AIR_SPEED_WITHIN), air_speed_m_s * (AIR_SPEED_WITHIN - 1.0)
    return HeatInputs(
        air_temperature_c=_range("air_temperature_c", air_c, below, above),
        radiant_temperature_c=_range("radiant_temperature_c", radiant_c, below, above),
        humidity_pct=_range("humidity_pct", humidity_pct, humidity_within, humidity_within),
        air_speed_m_s=_range("air_speed_m_s", air_speed_m_s, slower, faster),
        metabolic_w_m2=effort,
        insulation_clo=Range.exactly(ensemble.insulation_clo),
        permeability=Range(ensemble.permeability_low, ensemble.permeability, ensemble.permeability_high),
    )


def _range(quantity: str, best: float, below: float, above: float) -> Range:
    """A figure with what it may be off by, the ends kept within what the quantity can be."""
    known = QUANTITIES[quantity]
    value = float(checked(quantity, best))
    return Range(max(value - below, known.low), value, min(value + above, known.high))
