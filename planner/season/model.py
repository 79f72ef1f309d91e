"""The season as data: who, where, when. Instants are zone-aware and kept in UTC; the zone to show them in
is the place's. `id` is 0 until the store has given one.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date, datetime
from typing import Literal, TypeAlias

# The classes of the published table of planned ascents; handed on with the records that hold one.
from planner.physiology.illness import AltitudeHistory as AltitudeHistory

Sex: TypeAlias = Literal["woman", "man"]
SessionKind: TypeAlias = Literal["practice", "qualifying", "race"]
TravelMode: TypeAlias = Literal["road", "flight"]


@dataclass(frozen=True)
class Place:
    """A venue, a home or a staging place. Track and beds may lie at different elevations."""

    name: str
    zone: str  # IANA name
    track_elevation_m: float
    bed_elevation_m: float
    latitude_deg: float
    longitude_deg: float
    id: int = 0


@dataclass(frozen=True)
class Driver:
    """A driver; health entries are what the team physician or the driver has stated, never inferred."""

    name: str
    sex: Sex
    home_place_id: int
    mass_kg: float
    height_cm: float
    bottle_ml: float = 1000.0  # capacity of the drinks bottle in the car
    sweat_sodium_mmol_l: float | None = None  # measured; None = the population's range
    altitude_history: AltitudeHistory = "none or mild"
    highest_bed_elevation_m: float | None = None  # limit set by the physician
    tent_note: str = ""  # the physician's note that allows an altitude tent; empty = no tent
    iron_checked_on: date | None = None
    wake_time: str = "07:00"  # habitual, local wall clock
    id: int = 0


@dataclass(frozen=True)
class Round:
    """One round of the calendar at one place."""

    number: int
    name: str
    place_id: int
    id: int = 0


@dataclass(frozen=True)
class Session:
    """One session of a round. `starts_at` and `ends_at` in UTC."""

    round_id: int
    kind: SessionKind
    name: str
    starts_at: datetime
    ends_at: datetime
    id: int = 0


@dataclass(frozen=True)
class Commitment:
    """Somewhere a driver has to be (factory, sponsor, physician)."""

    driver_id: int
    name: str
    place_id: int
    starts_at: datetime
    ends_at: datetime
    id: int = 0


@dataclass(frozen=True)
class Stay:
    """A driver at one place from arrival to departure. `tent_oxygen_fraction` with hours a night, if any."""

    driver_id: int
    place_id: int
    arrive_at: datetime
    depart_at: datetime
    bed_elevation_m: float | None = None  # None = the place's beds
    tent_oxygen_fraction: float | None = None
    tent_hours_per_night: float = 0.0
    id: int = 0


@dataclass(frozen=True)
class Leg:
    """A driver on the way from one place to another. Cabin altitude is the pressure altitude of the cabin."""

    driver_id: int
    from_place_id: int
    to_place_id: int
    depart_at: datetime
    arrive_at: datetime
    mode: TravelMode
    cabin_altitude_m: float | None = None  # None on the road; flights default to the planning value
    id: int = 0


@dataclass(frozen=True)
class PressureMeasurement:
    """A pressure measured or reported at a place; `pressure_hpa` is always the station pressure."""

    place_id: int
    measured_at: datetime
    pressure_hpa: float
    typed: str = ""  # what was typed, e.g. "altimeter setting 1025 hPa"
    id: int = 0
