"""How long it takes from one place to another: what is typed wins, else an estimate from the distance."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta
from functools import lru_cache
from typing import Final
from zoneinfo import ZoneInfo

import numpy as np

from planner.checks import FloatArray, FloatLike, checked, like
from planner.errors import NotFoundError
from planner.season.exposure import PLANNING_CABIN_ALTITUDE_M
from planner.season.model import Leg, Place, TravelMode
from planner.units import to_house

MEAN_EARTH_RADIUS_KM: Final = 6371.0088  # IUGG mean radius (published)

# Estimates for journeys whose times nobody has typed: all judgement.
ROAD_DETOUR: Final = 1.3  # road length over great-circle distance
ROAD_SPEED_KM_PER_H: Final = 70.0
LONGEST_ROAD_H: Final = 5.0  # beyond it one flies
CRUISE_SPEED_KM_PER_H: Final = 850.0
FLIGHT_OVERHEAD_H: Final = 5.0  # door to airport, check-in, climb, descent, baggage, airport to door
LONGEST_DIRECT_FLIGHT_KM: Final = 9000.0  # beyond it one changes aircraft
CONNECTION_H: Final = 2.5


@dataclass(frozen=True)
class TravelTime:
    """A journey door to door. `source` says whether the time was typed or estimated."""

    mode: TravelMode
    hours: float
    flights: int
    distance_km: float
    source: str


@dataclass(frozen=True)
class Airport:
    """An airport near a place, as a suggestion for its elevation and zone."""

    name: str
    code: str  # ICAO
    elevation_m: float
    zone: str
    distance_km: float


def great_circle_km(
    latitude_deg: FloatLike, longitude_deg: FloatLike, to_latitude_deg: FloatLike, to_longitude_deg: FloatLike
) -> FloatLike:
    """Shortest distance over the ground between two points [km], by the haversine formula on a sphere.

    Raises: InputError when a coordinate is out of range.
    """
    lat, to_lat = (np.radians(checked("latitude_deg", v)) for v in (latitude_deg, to_latitude_deg))
    lon, to_lon = (np.radians(checked("longitude_deg", v)) for v in (longitude_deg, to_longitude_deg))
    half = (
        np.sin((to_lat - lat) / 2.0) ** 2 + np.cos(lat) * np.cos(to_lat) * np.sin((to_lon - lon) / 2.0) ** 2
    )
    distance: FloatArray = 2.0 * MEAN_EARTH_RADIUS_KM * np.arcsin(np.sqrt(np.clip(half, 0.0, 1.0)))
    return like(distance, latitude_deg, longitude_deg, to_latitude_deg, to_longitude_deg)


def estimated_travel(start: Place, end: Place) -> TravelTime:
    """A journey door to door estimated from the distance alone (judgement): by road if short, else by air."""
    km = float(great_circle_km(start.latitude_deg, start.longitude_deg, end.latitude_deg, end.longitude_deg))
    road_h = km * ROAD_DETOUR / ROAD_SPEED_KM_PER_H
    if road_h <= LONGEST_ROAD_H:
        return TravelTime("road", max(round(road_h, 1), 0.5), 0, km, "estimated")
    flights = 1 if km <= LONGEST_DIRECT_FLIGHT_KM else 2
    hours = FLIGHT_OVERHEAD_H + km / CRUISE_SPEED_KM_PER_H + (flights - 1) * CONNECTION_H
    return TravelTime("flight", round(hours, 1), flights, km, "estimated")


class LegTimes:
    """Travel times between places: a typed leg of the same way wins, then one of the way back."""

    def __init__(self, places: Mapping[int, Place], typed: Iterable[Leg] = ()) -> None:
        self.places = places
        # Of several typed legs for one way the latest counts.
        self._typed = {
            (leg.from_place_id, leg.to_place_id): leg for leg in sorted(typed, key=lambda x: x.depart_at)
        }
        self._known: dict[tuple[int, int], TravelTime] = {}

    def between(self, from_place_id: int, to_place_id: int) -> TravelTime:
        """The journey between two places. Raises: NotFoundError for a place that is not known."""
        way = (from_place_id, to_place_id)
        if way not in self._known:
            self._known[way] = self._looked_up(*way)
        return self._known[way]

    def leg(self, driver_id: int, from_place_id: int, to_place_id: int, *, arrive_at: datetime) -> Leg:
        """The leg that arrives at an instant. Raises: NotFoundError for a place that is not known."""
        journey = self.between(from_place_id, to_place_id)
        return Leg(
            driver_id=driver_id,
            from_place_id=from_place_id,
            to_place_id=to_place_id,
            depart_at=arrive_at - timedelta(hours=journey.hours),
            arrive_at=arrive_at,
            mode=journey.mode,
            cabin_altitude_m=PLANNING_CABIN_ALTITUDE_M if journey.mode == "flight" else None,
        )

    def _looked_up(self, from_place_id: int, to_place_id: int) -> TravelTime:
        for place_id in (from_place_id, to_place_id):
            if place_id not in self.places:
                raise NotFoundError(f"there is no place number {place_id}")
        guess = estimated_travel(self.places[from_place_id], self.places[to_place_id])
        leg = self._typed.get((from_place_id, to_place_id)) or self._typed.get((to_place_id, from_place_id))
        if leg is None:
            return guess
        hours = (leg.arrive_at - leg.depart_at) / timedelta(hours=1)
        flights = max(guess.flights, 1) if leg.mode == "flight" else 0
        return TravelTime(leg.mode, hours, flights, guess.distance_km, "typed")


def zones_east_h(start: Place, end: Place, at: datetime) -> float:
    """Time zones crossed from one place to another on that day, east positive, within -12 to 12 hours."""
    there, here = (at.astimezone(ZoneInfo(p.zone)).utcoffset() or timedelta(0) for p in (end, start))
    shift = (there - here) / timedelta(hours=1)
    # Across the date line the calendar jumps by a day, the sun does not.
    return (shift + 12.0) % 24.0 - 12.0


def nearest_airport(latitude_deg: float, longitude_deg: float) -> Airport:
    """The airport with a scheduled-service code nearest to a point, from the offline table of `airportsdata`.

    A suggestion only: its elevation is the airport's, not the venue's.
    Raises: InputError when a coordinate is out of range.
    """
    rows, latitudes, longitudes = _airports()
    km = np.asarray(great_circle_km(latitude_deg, longitude_deg, latitudes, longitudes))
    best = int(np.argmin(km))
    name, code, elevation_m, zone = rows[best]
    return Airport(name, code, elevation_m, zone, float(km[best]))


@lru_cache(maxsize=1)
def _airports() -> tuple[list[tuple[str, str, float, str]], FloatArray, FloatArray]:
    # Imported here: the table is large and only a suggestion needs it.
    import airportsdata

    table = [row for row in airportsdata.load("ICAO").values() if row["iata"]]
    rows = [
        (r["name"], r["icao"], to_house("elevation", float(r["elevation"]), "ft"), r["tz"]) for r in table
    ]
    latitudes = np.array([r["lat"] for r in table], dtype=np.float64)
    longitudes = np.array([r["lon"] for r in table], dtype=np.float64)
    return rows, latitudes, longitudes
