"""What the team drives and wears, and the heat in the cockpit: kept by choice, estimated until then."""

from __future__ import annotations

import json
from dataclasses import asdict
from typing import Final

from planner.errors import InputError, NotFoundError
from planner.hydration.cockpit import (
    AMBIENT_C,
    AMBIENT_HUMIDITY_PCT,
    CARS,
    ENSEMBLES,
    CarKind,
    ClothingEnsemble,
    checked_ensemble,
    estimated_conditions,
)
from planner.hydration.model import CockpitConditions
from planner.store.store import Store

CAR_SETTING: Final = "kind of car"
WORN_SETTING: Final = "clothing worn in the car"
ENSEMBLES_SETTING: Final = "clothing ensembles"
AMBIENT_SETTING: Final = "air outside the cockpit"


def car_of(store: Store) -> CarKind:
    """The kind of car that the team drives; a closed one until somebody says otherwise."""
    kept = store.setting(CAR_SETTING)
    return next((kind for kind in CARS if kind == kept), "closed car")


def choose_car(store: Store, car: CarKind) -> None:
    """Keep the kind of car."""
    if car not in CARS:
        raise InputError("kind of car", car, "one of: " + ", ".join(CARS))
    store.set_setting(CAR_SETTING, car)


def ensembles_of(store: Store) -> tuple[ClothingEnsemble, ...]:
    """Every ensemble by name: the given ones as edited, and those that were added."""
    kept = json.loads(store.setting(ENSEMBLES_SETTING) or "[]")
    by_name = {each.name: each for each in ENSEMBLES}
    by_name.update({each["name"]: ClothingEnsemble(**each) for each in kept})
    return tuple(by_name.values())


def keep_ensemble(store: Store, ensemble: ClothingEnsemble) -> ClothingEnsemble:
    """Keep an ensemble under its name; one with the same name is replaced.

    Raises: InputError naming the field.
    """
    tidy = checked_ensemble(ClothingEnsemble(**{**asdict(ensemble), "name": " ".join(ensemble.name.split())}))
    kept = {each["name"]: each for each in json.loads(store.setting(ENSEMBLES_SETTING) or "[]")}
    kept[tidy.name] = asdict(tidy)
    store.set_setting(ENSEMBLES_SETTING, json.dumps(list(kept.values())))
    return tidy


def worn_ensemble(store: Store) -> ClothingEnsemble:
    """The ensemble that plans are made for."""
    name = store.setting(WORN_SETTING)
    return next((each for each in ensembles_of(store) if each.name == name), ensembles_of(store)[0])


def choose_ensemble(store: Store, name: str) -> None:
    """Plan for this ensemble from now on."""
    if all(each.name != name for each in ensembles_of(store)):
        raise NotFoundError(f"clothing {name!r} is not known")
    store.set_setting(WORN_SETTING, name)


def conditions_of(store: Store, session_id: int) -> CockpitConditions | None:
    """The cockpit conditions noted for a session, the latest ones."""
    noted = store.all(CockpitConditions, session_id=session_id)
    return max(noted, key=lambda each: each.id, default=None)


def expected_conditions(store: Store, session_id: int) -> CockpitConditions:
    """Those noted, or an estimate from the air outside as last typed (judgement where never typed)."""
    noted = conditions_of(store, session_id)
    if noted is not None:
        return noted
    ambient_c, humidity_pct = ambient_of(store)
    return estimated_conditions(session_id, ambient_c, humidity_pct, car_of(store))


def ambient_of(store: Store) -> tuple[float, float]:
    """Temperature and humidity of the air outside, as last typed or by judgement."""
    kept = store.setting(AMBIENT_SETTING)
    if kept is None:
        return AMBIENT_C, AMBIENT_HUMIDITY_PCT
    air_c, humidity_pct = json.loads(kept)
    return float(air_c), float(humidity_pct)


def keep_ambient(store: Store, air_c: float, humidity_pct: float) -> None:
    """Keep the air outside for estimates.

    Raises: InputError when it cannot be.
    """
    estimated_conditions(0, air_c, humidity_pct)
    store.set_setting(AMBIENT_SETTING, json.dumps([air_c, humidity_pct]))


def keep_conditions(store: Store, conditions: CockpitConditions, *, by: str) -> CockpitConditions:
    """Keep a session's conditions in the place of those noted before.

    Raises: InputError naming the field.
    """
    noted = conditions_of(store, conditions.session_id)
    if noted is None:
        return store.add(conditions, by=by, why="cockpit conditions")
    changed = CockpitConditions(**{**asdict(conditions), "id": noted.id})
    return noted if changed == noted else store.change(changed, by=by, why="cockpit conditions")
