"""A session's drinks: before, in the car, between sessions, after; sodium and the mass to expect.

Vectorised over drivers and sessions: every number of a `Setting` may be a scalar or an array, and all
broadcast. A plan for one driver is the same call with scalars.
"""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import Final

import numpy as np

from planner.checks import QUANTITIES, FloatArray, FloatLike, checked
from planner.constants import SEA_LEVEL_PRESSURE_HPA
from planner.errors import InputError
from planner.hydration.learning import Evidence, Learned, learn_ratio, prior_log_sd, rate_to_expect
from planner.physiology.drinking import (
    DEFAULT_CAP_L_PER_H,
    HIGHEST_LOSS_PCT,
    after_ml,
    four_hours_before_ml,
    hours_to_loss,
    in_car_ml,
    mass_lost_kg,
    sodium_lost_mg,
    sodium_range_mmol_l,
    two_hours_before_ml,
)
from planner.physiology.ranges import Range
from planner.physiology.sweat import HeatInputs, SweatPrediction, predicted_sweat

TIMELINE_FROM_H: Final = -4.0
TIMELINE_TO_H: Final = 2.0
TOP_UP_AT_H: Final = -2.0
# A learned ratio on a hot prediction may overshoot; nobody sweats more, and the guards refuse more.
HIGHEST_SWEAT_L_PER_H: Final = QUANTITIES["sweat_rate_l_per_h"].high


@dataclass(frozen=True)
class Setting:
    """Who drives how long, with what bottle, where. Scalars or arrays (drivers, sessions) that broadcast."""

    mass_kg: FloatLike
    height_cm: FloatLike
    session_hours: FloatLike
    pressure_hpa: FloatLike = SEA_LEVEL_PRESSURE_HPA
    stints: FloatLike = 1.0
    bottle_ml: FloatLike = 1000.0
    drink_cap_l_per_h: FloatLike = DEFAULT_CAP_L_PER_H
    sweat_sodium_mmol_l: FloatLike = np.nan  # whole body; NaN = never measured
    urine_dark: FloatLike = np.nan  # 1 dark or absent, 0 pale, NaN not known
    hours_to_next: FloatLike = np.nan  # from the end to the start of the next session; NaN = none


@dataclass(frozen=True)
class DrinksPlan:
    """The plan, each figure a range [mL, mg, %, h]; arrays (drivers, sessions), or floats after `one`.

    `in_car_ml`: best and high are the most that is safe, low what keeps the loss within 2 %. `between_ml` is
    the share of `after_ml` that goes in before the next session. `expected_mass_change_pct` is what sweat
    and drink make of the mass, never above 0; `hours_to_two_pct` may be infinite.
    """

    sweat_rate_l_per_h: Range
    four_hours_before_ml: Range
    two_hours_before_ml: Range
    before_ml: Range
    in_car_ml: Range
    between_ml: Range
    after_ml: Range
    sodium_mg: Range
    expected_mass_change_pct: Range
    hours_to_two_pct: Range
    ratio: FloatLike
    own_share: FloatLike
    weighings: FloatLike
    like_conditions: FloatLike
    raised_to_sea_level_l_per_h: FloatLike  # by how much the elevation's own prediction was lower
    beyond_validity: FloatLike

    def one(self, *index: int) -> DrinksPlan:
        """The plan of one driver and session, in Python floats."""

        def pick(value: FloatLike) -> float:
            return float(np.asarray(value)[index])

        def picked(value: Range | FloatLike) -> Range | float:
            if isinstance(value, Range):
                return Range(pick(value.low), pick(value.best), pick(value.high))
            return pick(value)

        return DrinksPlan(**{f.name: picked(getattr(self, f.name)) for f in fields(self)})  # type: ignore[arg-type]


@dataclass(frozen=True)
class TimelineStep:
    """One thing to drink: from and to [h from the start], how much [mL], and what it is called."""

    from_h: float
    to_h: float
    amount_ml: Range
    label: str


def plan_drinks(
    setting: Setting,
    inputs: HeatInputs,
    evidence: Evidence | None = None,
    *,
    acclimatised: bool = True,
) -> DrinksPlan:
    """Plan the drinks of sessions.

    The sweat is that of the heat balance corrected by the driver's weighings. It is never taken lower than
    the same driver, suit and absolute humidity would give at sea level: thin dry air takes more water by
    breath and kidneys, and urine misleads, so the drinks are not cut for altitude.

    Raises: InputError naming the field when a figure is out of range or a session has no length.
    """
    hours = checked("session_hours", setting.session_hours)
    if np.any(hours <= 0.0):
        raise InputError("session_hours", float(np.min(hours)), "a session that lasts")
    here = predicted_sweat(
        inputs, setting.mass_kg, setting.height_cm, setting.pressure_hpa, acclimatised=acclimatised
    )
    at_sea = predicted_sweat(inputs, setting.mass_kg, setting.height_cm, acclimatised=acclimatised)
    shape = np.broadcast_shapes(
        *(np.shape(getattr(setting, f.name)) for f in fields(setting)),
        np.shape(here.sweat_rate_l_per_h.best),
        () if evidence is None else np.shape(evidence.measured_l_per_h)[:-1],
    )
    full = replace(
        setting, **{f.name: np.broadcast_to(getattr(setting, f.name), shape) for f in fields(setting)}
    )
    raised = _best(at_sea) - _best(here)
    learned = _learned(np.maximum(_best(here), _best(at_sea)), here, evidence, shape)
    rates = [
        Range(*(np.minimum(np.broadcast_to(end, shape), HIGHEST_SWEAT_L_PER_H) for end in _ends(rate)))
        for rate in (rate_to_expect(here, learned), rate_to_expect(at_sea, learned))
    ]
    # Two plans, and what is drunk and eaten afterwards by the larger: with the larger sweat alone, a fuller
    # bottle in the car could leave less for afterwards than at sea level.
    plan = _plan(full, _larger(*rates), learned)
    sea_plan = _plan(full, rates[1], learned)
    return replace(
        plan,
        raised_to_sea_level_l_per_h=np.broadcast_to(np.maximum(raised, 0.0), shape) * learned.ratio,
        beyond_validity=np.broadcast_to(here.beyond_validity, shape),
        after_ml=_larger(plan.after_ml, sea_plan.after_ml),
        sodium_mg=_larger(plan.sodium_mg, sea_plan.sodium_mg),
    )


def timeline(
    plan: DrinksPlan, session_hours: float, stints: int, hours_to_next: float = np.nan
) -> list[TimelineStep]:
    """The plan of one driver from four hours before the start to two after the end."""
    steps = [TimelineStep(TIMELINE_FROM_H, TOP_UP_AT_H, plan.four_hours_before_ml, "four hours before")]
    steps.append(TimelineStep(TOP_UP_AT_H, 0.0, plan.two_hours_before_ml, "two hours before"))
    a_stint = session_hours / stints
    for stint in range(stints):
        label = "in the car" if stints == 1 else f"in the car, stint {stint + 1}"
        steps.append(
            TimelineStep(stint * a_stint, (stint + 1) * a_stint, _share(plan.in_car_ml, 1.0 / stints), label)
        )
    end = session_hours + TIMELINE_TO_H
    if hours_to_next < TIMELINE_TO_H:
        steps.append(
            TimelineStep(
                session_hours, session_hours + hours_to_next, plan.between_ml, "before the next session"
            )
        )
    else:
        steps.append(TimelineStep(session_hours, end, plan.after_ml, "after"))
    return steps


def _share(amount: Range, part: float) -> Range:
    return Range(*(np.asarray(each) * part for each in (amount.low, amount.best, amount.high)))


def _best(prediction: SweatPrediction) -> FloatArray:
    return np.asarray(prediction.sweat_rate_l_per_h.best, dtype=np.float64)


def _larger(one: Range, other: Range) -> Range:
    return Range(*(np.maximum(a, b) for a, b in zip(_ends(one), _ends(other), strict=True)))


def _learned(
    expected_l_per_h: FloatArray,
    prediction: SweatPrediction,
    evidence: Evidence | None,
    shape: tuple[int, ...],
) -> Learned:
    if evidence is None:
        none = np.full((*shape, 0), np.nan)
        evidence = Evidence(none, none, none)
    prior = np.broadcast_to(prior_log_sd(prediction), shape)
    return learn_ratio(evidence, np.broadcast_to(expected_l_per_h, shape), prior)


def _plan(setting: Setting, sweat: Range, learned: Learned) -> DrinksPlan:
    mass = np.asarray(setting.mass_kg, dtype=np.float64)
    hours = np.asarray(setting.session_hours, dtype=np.float64)
    four = four_hours_before_ml(mass)
    two = two_hours_before_ml(mass, setting.urine_dark)
    in_car = in_car_ml(
        mass,
        sweat,
        hours,
        stints=setting.stints,
        bottle_ml=setting.bottle_ml,
        drink_cap_l_per_h=setting.drink_cap_l_per_h,
    )
    lost = mass_lost_kg(sweat, hours, in_car.best)
    drink_rate = np.asarray(in_car.best) / 1000.0 / hours
    litres = Range(*(np.asarray(each) * hours for each in (sweat.low, sweat.best, sweat.high)))
    # Between two sessions never more than the loss, so that nobody starts heavier, nor faster than the cap.
    room_l = np.asarray(setting.drink_cap_l_per_h) * np.asarray(setting.hours_to_next)
    between = [np.where(np.isnan(room_l), 0.0, np.fmin(each, room_l)) * 1000.0 for each in _ends(lost)]
    changes = [0.0 - 100.0 * each / mass for each in reversed(_ends(lost))]
    times = [
        np.asarray(hours_to_loss(mass, rate, drink_rate, HIGHEST_LOSS_PCT)) for rate in reversed(_ends(sweat))
    ]
    return DrinksPlan(
        sweat_rate_l_per_h=sweat,
        four_hours_before_ml=four,
        two_hours_before_ml=two,
        before_ml=Range(*(a + b for a, b in zip(_ends(four), _ends(two), strict=True))),
        in_car_ml=in_car,
        between_ml=Range(*between),
        after_ml=after_ml(lost, setting.hours_to_next),
        sodium_mg=sodium_lost_mg(litres, sodium_range_mmol_l(setting.sweat_sodium_mmol_l)),
        expected_mass_change_pct=Range(*changes),
        hours_to_two_pct=Range(*times),
        ratio=learned.ratio,
        own_share=learned.own_share,
        weighings=learned.weighings,
        like_conditions=learned.like_conditions,
        raised_to_sea_level_l_per_h=np.nan,
        beyond_validity=np.nan,
    )


def _ends(given: Range) -> list[FloatArray]:
    return [np.asarray(each, dtype=np.float64) for each in (given.low, given.best, given.high)]
