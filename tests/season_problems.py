"""Invented seasons in the day model, for the tests of the search and its benchmark."""

from __future__ import annotations

from collections.abc import Callable
from datetime import date

import numpy as np

from planner.checks import FloatArray
from planner.physiology.air import site_pressure
from planner.physiology.capacity import aerobic_capacity_pct
from planner.physiology.oxygen import inspired_po2_mmhg
from planner.physiology.ventilation import arterial_gases, ventilatory_target
from planner.season.day_model import ON_THE_WAY, Bed, DayProblem, DayRound, IntArray, Rates
from planner.season.evaluate import equivalent_days


def po2(elevation_m: float, oxygen_fraction: float = 0.2094) -> float:
    return float(inspired_po2_mmhg(site_pressure(elevation_m, 45.0).pressure_hpa, oxygen_fraction))


def value_at(elevation_m: float) -> Callable[[FloatArray], tuple[FloatArray, FloatArray]]:
    """SpO2 of the median person and aerobic capacity at an elevation, from the state."""
    inspired = po2(elevation_m)
    target = np.asarray(ventilatory_target(inspired))

    def value(state: FloatArray) -> tuple[FloatArray, FloatArray]:
        spo2 = np.asarray(arterial_gases(inspired, state).saturation_pct)
        return spo2, np.asarray(aerobic_capacity_pct(elevation_m, equivalent_days(state, target)))

    return value


def random_season(seed: int) -> DayProblem:
    """A small season with up to three rounds and every kind of constraint, each drawn at random."""
    rng = np.random.default_rng(seed)
    rounds_count = int(rng.integers(1, 4))
    nights = int(rng.integers(7, 10))
    elevations = [50.0, *(float(rng.choice([800.0, 1600.0, 2250.0, 2900.0, 3400.0])) for _ in range(2))]
    beds = [
        Bed("home", 0, elevations[0], elevations[0], po2(elevations[0]), po2(elevations[0]), is_home=True)
    ]
    for i in (1, 2):
        track_m = elevations[i] + float(rng.choice([0.0, 0.0, 300.0]))
        beds.append(Bed(f"place {i}", i, elevations[i], elevations[i], po2(elevations[i]), po2(track_m)))
    if rng.random() < 0.4:
        beds.append(
            Bed("tent at home", 0, 50.0, 2300.0, po2(50.0), po2(50.0), True, 0.16, po2(50.0, 0.16), 9.0)
        )
    count = len(beds)
    allowed = np.ones((nights, count), dtype=bool)
    air_ok = np.ones(nights, dtype=bool)
    bound = np.zeros(nights, dtype=bool)
    at_track = np.zeros((nights, count), dtype=bool)
    race_days = np.sort(rng.choice(np.arange(2, nights), size=rounds_count, replace=False))
    rounds = []
    for number, race_day in enumerate(int(d) for d in race_days):
        place = int(rng.integers(1, 3))
        # Neighbouring rounds at different places would leave no day to travel.
        if rounds and race_day - rounds[-1].race_day < 3:
            place = rounds[-1].round_id
        venue = np.array([bed.place_id == place for bed in beds])
        for night in (race_day - 1, race_day):
            allowed[night] &= venue
            air_ok[night] = False
        bound[race_day] = True
        at_track[race_day] = venue
        rounds.append(
            DayRound(
                name=f"round {number}",
                round_id=place,
                first_day=race_day,
                race_day=race_day,
                weight=float(rng.choice([0.0, 0.5, 1.0, 2.0])) if rounds_count > 1 else 1.0,
                value_of=value_at(elevations[place]),
                lowest_spo2_pct=_sometimes(rng, 0.2, float(rng.uniform(84.0, 93.0))),
                lowest_capacity_pct=_sometimes(rng, 0.15, float(rng.uniform(72.0, 90.0))),
                highest_risk=int(rng.choice([0, 1, 2, 2, 2, 2, 2])),
                largest_clock_offset_h=_sometimes(rng, 0.3, float(rng.uniform(0.5, 8.0))),
            )
        )
    if rng.random() < 0.3:  # a commitment at home
        day = int(rng.integers(0, nights))
        if air_ok[max(day - 1, 0) : day + 1].all():
            at_home = np.array([bed.place_id == 0 for bed in beds])
            for night in range(max(day - 1, 0), day + 1):
                allowed[night] &= at_home
                air_ok[night] = False
            bound[day] = True
    if rng.random() < 0.3:  # a locked choice
        night = int(rng.integers(0, nights))
        if air_ok[night]:
            allowed[night] &= np.arange(count) == int(rng.choice(np.flatnonzero(allowed[night])))
            air_ok[night] = False
    if rng.random() < 0.3:  # the physician's highest bed
        allowed &= np.array([bed.sleeping_m <= 3000.0 for bed in beds])
    zones = rng.choice([0.0, 0.0, 0.0, -8.0, 5.0, 9.0], size=3)
    zone_of = np.array([zones[bed.place_id] for bed in beds])
    east = (zone_of[None, :] - zone_of[:, None] + 12.0) % 24.0 - 12.0
    hours = rng.uniform(2.0, 20.0, size=(3, 3))
    place_of = np.array([bed.place_id for bed in beds])
    lost = rng.choice([0] * 12 + [1] * 2 + [-1], size=(nights, 3, 3))
    return DayProblem(
        first_day=date(2031, 3, 1),
        beds=tuple(beds),
        allowed=allowed,
        air_ok=air_ok,
        bound=bound,
        at_track=at_track,
        hours=hours[place_of][:, place_of],
        flights=(hours > 8.0).astype(np.intp)[place_of][:, place_of],
        way_po2_mmhg=np.full((count, count), po2(2000.0)),
        lost=lost[:, place_of][:, :, place_of],
        zones_east_h=np.broadcast_to(east, (nights, count, count)).copy(),
        rounds=tuple(rounds),
        start_bed=0,
        start_state=float(rng.choice([0.0, 0.0, 0.15])),
        low_m=1200.0,
        first_night_risk=np.array(
            [0 if b.sleeping_m < 2800 else 1 if b.sleeping_m <= 3500 else 2 for b in beds]
        ),
        history_risk=int(rng.choice([0] * 9 + [1])),
        rates=Rates(
            float(rng.choice([0.0, 0.25])), float(rng.choice([0.0, 0.5])), float(rng.choice([0.0, 0.02]))
        ),
        start_offset_h=0.0,
        ascent_rule=bool(rng.random() < 0.8),
        measure="SpO2" if rng.random() < 0.7 else "capacity",
        combination="weighted sum" if rng.random() < 0.7 else "worst",
    )


def all_plans(problem: DayProblem) -> IntArray:
    """Every assignment of a bed, or of the way, to every night, whether it makes sense or not."""
    choices = [
        np.concatenate([np.flatnonzero(problem.allowed[n]), [ON_THE_WAY] if problem.air_ok[n] else []])
        for n in range(problem.days)
    ]
    grids = np.meshgrid(*choices, indexing="ij")
    return np.stack([g.reshape(-1) for g in grids], axis=1).astype(np.intp)


def _sometimes(rng: np.random.Generator, share: float, value: float) -> float | None:
    return value if rng.random() < share else None
