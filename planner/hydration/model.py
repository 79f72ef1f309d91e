"""What is weighed and what the conditions were."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import Literal, TypeAlias

WeighingClothes: TypeAlias = Literal["towelled skin", "underwear", "suit"]


@dataclass(frozen=True)
class CockpitConditions:
    """The heat around a driver in one session; `measured` tells a thermometer from an estimate."""

    session_id: int
    air_temperature_c: float
    radiant_temperature_c: float
    humidity_pct: float
    air_speed_m_s: float
    measured: bool = False
    id: int = 0


@dataclass(frozen=True)
class Weighing:
    """One session's weigh-in and weigh-out; `mass_after_kg` is None until the weigh-out."""

    driver_id: int
    place_id: int
    starts_at: datetime
    ends_at: datetime | None
    mass_before_kg: float
    mass_after_kg: float | None = None
    drink_ml: float = 0.0
    food_g: float = 0.0
    urine_ml: float = 0.0
    clothes: WeighingClothes = "towelled skin"
    ensemble: str = ""  # name of the clothing worn in the car
    air_temperature_c: float | None = None  # in the cockpit
    radiant_temperature_c: float | None = None
    humidity_pct: float | None = None
    air_speed_m_s: float | None = None
    metabolic_w_m2: float | None = None
    session_id: int | None = None
    entered_by: str = ""
    id: int = 0


@dataclass(frozen=True)
class MorningMark:
    """A morning's mass and urine. Urine by colour (1-8) or specific gravity; thirst as stated."""

    driver_id: int
    at: datetime
    mass_kg: float | None = None
    urine_colour: int | None = None
    urine_specific_gravity: float | None = None
    thirsty: bool | None = None
    entered_by: str = ""
    id: int = 0
