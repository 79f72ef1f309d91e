"""Weigh-in and weigh-out: whether the figures can be, and what they say about sweat and drink."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import timedelta
from typing import Final

import numpy as np

from planner.checks import FloatArray
from planner.constants import HPA_PER_MMHG
from planner.errors import InputError
from planner.hydration.cockpit import CarKind, ClothingEnsemble, inputs_from_weighing, stacked
from planner.hydration.learning import Evidence
from planner.hydration.model import Weighing
from planner.hydration.validation import problems
from planner.physiology.heat import body_surface_area_m2, vapour_pressure_kpa
from planner.physiology.mass_loss import gas_exchange_g_min, oxygen_uptake_l_min, respiratory_water_g_min
from planner.physiology.sweat import predicted_sweat, sweat_from_weighing_l_per_h, weighing_error_l_per_h
from planner.season.model import Driver
from planner.units import KG_PER_POUND
from planner.wording import number

MMHG_PER_KPA: Final = 10.0 / HPA_PER_MMHG

# Judgement: what a session can do at most; beyond it an entry is doubted, not a driver.
FROM_KNOWN_MASS: Final = 0.15  # of the driver's mass
LARGEST_CHANGE: Final = 0.06  # of the mass weighed in at
MOST_URINE_ML: Final = 2000.0
MOST_DRINK_ML_PER_H: Final = 3000.0
MOST_DRINK_ML_AT_ONCE: Final = 1500.0
LEAST_TYPED_ML: Final = 10.0  # a smaller drink was typed in litres
LONGEST: Final = timedelta(hours=12)
SHORTEST: Final = timedelta(minutes=10)
LARGEST_SWEAT_L_PER_H: Final = 4.0
LARGEST_NEGATIVE_SWEAT_L_PER_H: Final = -0.5
MASS_WORDS: Final = "the body mass in kilograms"

# Errors beside the scale's [g], judgement: what was drunk, and what dries or clings to the skin.
DRINK_SD_G: Final = 20.0
URINE_SD: Final = 0.10  # of the urine measured
UNDERWEAR_SD_G: Final = 60.0
SUIT_SD_G: Final = 200.0
DEFAULT_HUMIDITY_PCT: Final = 40.0  # of the air breathed, when nobody noted it
DEFAULT_AIR_C: Final = 35.0
DEFAULT_EFFORT_W_M2: Final = 230.0


@dataclass(frozen=True)
class Occasion:
    """A weighing with what belongs to it: the driver, the pressure there, the clothing and the car."""

    weighing: Weighing
    driver: Driver
    pressure_hpa: float
    ensemble: ClothingEnsemble
    car: CarKind = "closed car"


@dataclass(frozen=True)
class Weighed:
    """What a finished weighing says.

    `predicted_l_per_h` is NaN when the cockpit was not measured. `left_out` says why it teaches no ratio;
    empty when it does.
    """

    weighing: Weighing
    hours: float
    sweat_l_per_h: float
    error_l_per_h: float
    predicted_l_per_h: float
    mass_change_pct: float
    left_out: str

    @property
    def drunk_share(self) -> float:
        """Drink over sweat; infinite when no sweat was seen."""
        sweat_ml = self.sweat_l_per_h * self.hours * 1000.0
        return self.weighing.drink_ml / sweat_ml if sweat_ml > 0.0 else float("inf")


def check_weighing(weighing: Weighing, driver: Driver) -> None:
    """Refuse a weighing that cannot be, with the field that is wrong.

    Raises: InputError: a time, mass, drink or urine out of range, an end before its start, a mass that is
    in pounds or far from the driver's, more sweat than anybody sweats.
    """
    for problem in problems(weighing):
        raise _with_pounds_named(problem, driver)
    _check_mass("mass_before_kg", weighing.mass_before_kg, driver)
    if weighing.urine_ml > MOST_URINE_ML:
        raise InputError("urine_ml", weighing.urine_ml, f"0 to {MOST_URINE_ML:g} mL passed in a session")
    if 0.0 < weighing.drink_ml < LEAST_TYPED_ML:
        raise InputError("drink_ml", weighing.drink_ml, "millilitres; this looks like litres")
    if weighing.ends_at is None:
        if weighing.mass_after_kg is not None:
            raise InputError("ends_at", None, "the time of the weigh-out, since mass_after_kg is given")
        return
    lasted = weighing.ends_at - weighing.starts_at
    if not SHORTEST <= lasted <= LONGEST:
        raise InputError(
            "ends_at", weighing.ends_at.isoformat(sep=" "), "10 minutes to 12 hours after starts_at"
        )
    hours = lasted / timedelta(hours=1)
    if weighing.drink_ml > MOST_DRINK_ML_AT_ONCE + MOST_DRINK_ML_PER_H * hours:
        raise InputError(
            "drink_ml", weighing.drink_ml, f"what can be drunk in {number(hours, 1)} h, in millilitres"
        )
    if weighing.mass_after_kg is None:
        return
    _check_mass("mass_after_kg", weighing.mass_after_kg, driver)
    if abs(weighing.mass_after_kg - weighing.mass_before_kg) > LARGEST_CHANGE * weighing.mass_before_kg:
        raise InputError(
            "mass_after_kg",
            weighing.mass_after_kg,
            f"within {LARGEST_CHANGE:.0%} of mass_before_kg {weighing.mass_before_kg:g}",
        )
    sweat = float(
        sweat_from_weighing_l_per_h(
            weighing.mass_before_kg,
            weighing.mass_after_kg,
            hours,
            drink_ml=weighing.drink_ml,
            food_g=weighing.food_g,
            urine_ml=weighing.urine_ml,
        )
    )
    # The scale's own error may make a short session look like less than nothing.
    slack = 3.0 * float(weighing_error_l_per_h(hours))
    if not LARGEST_NEGATIVE_SWEAT_L_PER_H - slack <= sweat <= LARGEST_SWEAT_L_PER_H + slack:
        raise InputError(
            "mass_after_kg",
            weighing.mass_after_kg,
            f"a mass that gives a possible sweat rate; with this drink, food and urine it is {sweat:.1f} L/h",
        )


def is_finished(weighing: Weighing) -> bool:
    """Whether the weigh-out has been done."""
    return weighing.mass_after_kg is not None and weighing.ends_at is not None


def weigh_up(occasions: Sequence[Occasion]) -> list[Weighed]:
    """What finished weighings say, all in one pass; those without a weigh-out are passed over."""
    finished = [each for each in occasions if is_finished(each.weighing)]
    if not finished:
        return []
    hours = np.array([_hours(each.weighing) for each in finished])
    before = np.array([each.weighing.mass_before_kg for each in finished])
    after = np.array([each.weighing.mass_after_kg for each in finished], dtype=np.float64)
    drink = np.array([each.weighing.drink_ml for each in finished])
    urine = np.array([each.weighing.urine_ml for each in finished])
    sweat = np.asarray(
        sweat_from_weighing_l_per_h(
            before,
            after,
            hours,
            drink_ml=drink,
            food_g=np.array([each.weighing.food_g for each in finished]),
            urine_ml=urine,
            breath_g_per_h=_breath_g_per_h(finished),
        )
    )
    clothes = np.array([_clothes_sd_g(each.weighing) for each in finished])
    other = np.sqrt(np.where(drink > 0.0, DRINK_SD_G, 0.0) ** 2 + (URINE_SD * urine) ** 2 + clothes**2)
    error = np.asarray(weighing_error_l_per_h(hours, other_sd_g=other))
    predicted = _predicted_l_per_h(finished)
    change = 100.0 * (after / before - 1.0)
    return [
        Weighed(
            weighing=each.weighing,
            hours=float(hours[i]),
            sweat_l_per_h=float(sweat[i]),
            error_l_per_h=float(error[i]),
            predicted_l_per_h=float(predicted[i]),
            mass_change_pct=float(change[i]),
            left_out=_left_out(each.weighing, float(predicted[i])),
        )
        for i, each in enumerate(finished)
    ]


def evidence_for(drivers: Sequence[int], weighed: Sequence[Weighed]) -> Evidence:
    """The teaching weighings of each driver, padded with NaN: arrays (drivers, 1, most weighings)."""
    teaching = [[w for w in weighed if w.weighing.driver_id == d and not w.left_out] for d in drivers]
    width = max((len(each) for each in teaching), default=0)

    def table(field: str) -> FloatArray:
        rows = np.full((len(teaching), 1, width), np.nan)
        for i, each in enumerate(teaching):
            rows[i, 0, : len(each)] = [getattr(w, field) for w in each]
        return rows

    return Evidence(table("sweat_l_per_h"), table("error_l_per_h"), table("predicted_l_per_h"))


def _hours(weighing: Weighing) -> float:
    if weighing.ends_at is None:
        return float("nan")
    return (weighing.ends_at - weighing.starts_at) / timedelta(hours=1)


def _breath_g_per_h(occasions: Sequence[Occasion]) -> FloatArray:
    """Respiratory water and gas exchange, from the effort and the air breathed in."""

    def column(values: Sequence[float | None], default: float) -> FloatArray:
        return np.array([default if each is None else each for each in values], dtype=np.float64)

    weighings = [each.weighing for each in occasions]
    effort = column([w.metabolic_w_m2 for w in weighings], DEFAULT_EFFORT_W_M2)
    air = column([w.air_temperature_c for w in weighings], DEFAULT_AIR_C)
    humidity = column([w.humidity_pct for w in weighings], DEFAULT_HUMIDITY_PCT)
    surface = body_surface_area_m2(
        np.array([each.driver.mass_kg for each in occasions]),
        np.array([each.driver.height_cm for each in occasions]),
    )
    uptake = oxygen_uptake_l_min(effort, surface)
    # Air more humid than the breath gives no water back: the breath's formula stops at 0 there.
    vapour = np.minimum(np.asarray(vapour_pressure_kpa(air, humidity)) * MMHG_PER_KPA, 60.0)
    per_hour: FloatArray = 60.0 * (
        np.asarray(respiratory_water_g_min(uptake, vapour)) + np.asarray(gas_exchange_g_min(uptake))
    )
    return per_hour


def _predicted_l_per_h(occasions: Sequence[Occasion]) -> FloatArray:
    """What the heat balance predicts for each; NaN where nobody measured the cockpit."""
    predicted = np.full(len(occasions), np.nan)
    inputs = [inputs_from_weighing(each.weighing, each.ensemble, each.car) for each in occasions]
    known = [i for i, each in enumerate(inputs) if each is not None]
    if known:
        found = predicted_sweat(
            stacked([each for each in inputs if each is not None]),
            np.array([occasions[i].driver.mass_kg for i in known]),
            np.array([occasions[i].driver.height_cm for i in known]),
            np.array([occasions[i].pressure_hpa for i in known]),
        )
        predicted[known] = np.asarray(found.sweat_rate_l_per_h.best)
    return predicted


def _clothes_sd_g(weighing: Weighing) -> float:
    return {"towelled skin": 0.0, "underwear": UNDERWEAR_SD_G, "suit": SUIT_SD_G}[weighing.clothes]


def _left_out(weighing: Weighing, predicted_l_per_h: float) -> str:
    if weighing.clothes == "suit":
        return "weighed in the suit: the sweat it holds is not seen, so the rate is a lower bound"
    if np.isnan(predicted_l_per_h):
        return "the cockpit's temperature and humidity were not noted"
    if predicted_l_per_h <= 0.0:
        return "no sweat is predicted in such cool air"
    return ""


def _check_mass(field: str, mass_kg: float, driver: Driver) -> None:
    if abs(mass_kg - driver.mass_kg) <= FROM_KNOWN_MASS * driver.mass_kg:
        return
    expected = (
        f"within {FROM_KNOWN_MASS:.0%} of the driver's {driver.mass_kg:g} kg{_pounds_hint(mass_kg, driver)}"
    )
    raise InputError(field, mass_kg, expected)


def _with_pounds_named(problem: InputError, driver: Driver) -> InputError:
    if problem.field.startswith("mass_") and isinstance(problem.value, int | float):
        return InputError(
            problem.field, problem.value, problem.expected + _pounds_hint(float(problem.value), driver)
        )
    return problem


def _pounds_hint(typed: float, driver: Driver) -> str:
    in_kg = typed * KG_PER_POUND
    if abs(in_kg - driver.mass_kg) <= FROM_KNOWN_MASS * driver.mass_kg:
        return f"; {typed:g} lb would be {in_kg:.1f} kg"
    return ""
