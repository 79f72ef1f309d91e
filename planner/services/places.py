"""The air at a venue: by the model atmosphere, or by the pressure measured there."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from functools import lru_cache
from math import nan
from typing import Final, Literal, TypeAlias

import numpy as np

from planner.errors import InputError
from planner.physiology.air import site_pressure, station_pressure_from_altimeter_setting_hpa
from planner.season.exposure import MEASUREMENT_REACH
from planner.season.model import Place, PressureMeasurement, Round, Session
from planner.season.pressure import IMPLAUSIBLE_SHARE, model_pressure_hpa
from planner.services.air import SiteAir, capacity_there, site_air, straight_from_sea_level
from planner.services.typed import typed_value
from planner.store.store import Store
from planner.units import from_house

PressureKind: TypeAlias = Literal["station pressure", "altimeter setting"]

# On arrival (day 0) and after so many days there.
DAYS_SHOWN: Final = (0.0, 3.0, 7.0, 14.0)
# Beyond this a typed pressure is taken, but the screen asks to look again: judgement.
UNUSUAL_SHARE: Final = 0.025


@dataclass(frozen=True)
class DayThere:
    """What to expect of the population after so many days there, straight from sea level."""

    days: float
    low_pct: float
    mean_pct: float
    high_pct: float
    low_capacity_pct: float
    capacity_pct: float
    high_capacity_pct: float
    beyond_validity: bool


@dataclass(frozen=True)
class VenueAir:
    """The air at a venue's track and beds."""

    place: Place
    track: SiteAir
    beds: SiteAir

    @property
    def beds_differ(self) -> bool:
        """Whether the beds lie at another elevation than the track."""
        return self.place.bed_elevation_m != self.place.track_elevation_m


def venue_air(place: Place, measured_pressure_hpa: float = nan) -> VenueAir:
    """Return the air at a venue; a pressure measured at the track goes to the beds by the model's ratio.

    Raises: InputError when the pressure is out of range.
    """
    track = site_air(
        place.track_elevation_m, latitude_deg=place.latitude_deg, measured_pressure_hpa=measured_pressure_hpa
    )
    if place.bed_elevation_m == place.track_elevation_m:
        return VenueAir(place, track, track)
    beds_model_hpa = float(site_pressure(place.bed_elevation_m, place.latitude_deg).pressure_hpa)
    beds = site_air(
        place.bed_elevation_m,
        latitude_deg=place.latitude_deg,
        measured_pressure_hpa=measured_pressure_hpa * beds_model_hpa / model_pressure_hpa(place),
    )
    return VenueAir(place, track, beds)


@lru_cache(maxsize=256)
def days_there(air: SiteAir, days: tuple[float, ...] = DAYS_SHOWN) -> list[DayThere]:
    """Return what to expect at an elevation by days there, living and resting at that elevation."""
    at = np.asarray(days, dtype=np.float64)
    expected, capacity = straight_from_sea_level(air, at), capacity_there(air, at)
    return [
        DayThere(
            days=float(at[i]),
            low_pct=float(np.atleast_1d(expected.low_spo2_pct)[i]),
            mean_pct=float(np.atleast_1d(expected.mean_spo2_pct)[i]),
            high_pct=float(np.atleast_1d(expected.high_spo2_pct)[i]),
            low_capacity_pct=float(np.atleast_1d(capacity.low_pct)[i]),
            capacity_pct=float(np.atleast_1d(capacity.mean_pct)[i]),
            high_capacity_pct=float(np.atleast_1d(capacity.high_pct)[i]),
            beyond_validity=bool(np.atleast_1d(expected.beyond_validity)[i]),
        )
        for i in range(at.size)
    ]


def typed_pressure(
    place: Place, value: float, unit: str, kind: PressureKind, at: datetime
) -> PressureMeasurement:
    """Return what was typed as a station pressure at the track, not yet stored.

    Parameters: `unit` is hPa, mmHg or kPa; `kind` tells a station pressure from an altimeter setting
    (QNH), which is turned back into the station pressure.
    Raises: InputError when the value cannot be the pressure at this place.
    """
    if kind == "altimeter setting":
        setting = typed_value(kind, value, "altimeter_setting_hpa", "pressure", unit)
        pressure_hpa = float(station_pressure_from_altimeter_setting_hpa(setting, place.track_elevation_m))
    else:
        pressure_hpa = typed_value(kind, value, "pressure_hpa", "pressure", unit)
    model_hpa = model_pressure_hpa(place)
    if abs(pressure_hpa / model_hpa - 1.0) > IMPLAUSIBLE_SHARE:
        low, high = (
            from_house("pressure", model_hpa * (1.0 + sign * IMPLAUSIBLE_SHARE), unit) for sign in (-1, 1)
        )
        raise InputError(
            kind,
            f"{value:g} {unit}",
            f"a pressure that gives {low:.0f} to {high:.0f} {unit} at the track of {place.name}; "
            "a pressure reduced to sea level is not what the air there weighs",
        )
    return PressureMeasurement(place.id, at, pressure_hpa, typed=f"{kind} {value:g} {unit}")


def unusual_difference_hpa(place: Place, pressure_hpa: float) -> float | None:
    """How far above the model a pressure lies, when so far that the entry deserves a second look [hPa]."""
    model_hpa = model_pressure_hpa(place)
    away_hpa = pressure_hpa - model_hpa
    return away_hpa if abs(away_hpa) > UNUSUAL_SHARE * model_hpa else None


def pressures_of(store: Store, place: Place) -> list[PressureMeasurement]:
    """Return the measured pressures of a place, the newest first."""
    kept = store.all(PressureMeasurement, place_id=place.id)
    return sorted(kept, key=lambda each: each.measured_at, reverse=True)


def pressure_in_force(history: list[PressureMeasurement], at: datetime) -> PressureMeasurement | None:
    """Return the measurement that counts at an instant: the nearest one, if it is near enough in time."""
    nearest = min(history, key=lambda each: abs(each.measured_at - at), default=None)
    if nearest is None or abs(nearest.measured_at - at) >= MEASUREMENT_REACH:
        return None
    return nearest


def place_to_show(store: Store, known: Sequence[Place], at: datetime) -> Place:
    """Return the place of the round that is on or comes next, or the first of those known."""
    coming = sorted((s for s in store.all(Session) if s.ends_at > at), key=lambda each: each.starts_at)
    rounds = {each.id: each for each in store.all(Round)}
    by_id = {place.id: place for place in known}
    for session in coming:
        place = by_id.get(rounds[session.round_id].place_id)
        if place is not None:
            return place
    return known[0]
