"""What the names in a file refer to: the drivers, places, rounds and sessions known; and the present time."""

from __future__ import annotations

import unicodedata
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from functools import cached_property, lru_cache

from planner.season.model import Driver, Place, Round, Session, Stay


@lru_cache(maxsize=4096)  # the cells of a long file hold the same few names over and over
def folded(name: str) -> str:
    """Return a name as it is compared: case, spacing and the way accents are composed do not matter."""
    return " ".join(unicodedata.normalize("NFC", name).split()).casefold()


@dataclass(frozen=True)
class FileContext:
    """The records that a file may name, and what counts as now."""

    now: datetime
    drivers: tuple[Driver, ...] = ()
    places: tuple[Place, ...] = ()
    rounds: tuple[Round, ...] = ()
    sessions: tuple[Session, ...] = ()
    stays: tuple[Stay, ...] = ()  # tell where a driver was when the file does not

    @cached_property
    def driver_called(self) -> Mapping[str, Driver]:
        """Drivers by folded name."""
        return {folded(driver.name): driver for driver in self.drivers}

    @cached_property
    def place_called(self) -> Mapping[str, Place]:
        """Places by folded name."""
        return {folded(place.name): place for place in self.places}

    @cached_property
    def round_called(self) -> Mapping[str, Round]:
        """Rounds by folded name."""
        return {folded(each.name): each for each in self.rounds}

    @cached_property
    def driver(self) -> Mapping[int, Driver]:
        """Drivers by id."""
        return {driver.id: driver for driver in self.drivers}

    @cached_property
    def place(self) -> Mapping[int, Place]:
        """Places by id."""
        return {place.id: place for place in self.places}

    @cached_property
    def round(self) -> Mapping[int, Round]:
        """Rounds by id."""
        return {each.id: each for each in self.rounds}

    @cached_property
    def session(self) -> Mapping[int, Session]:
        """Sessions by id."""
        return {session.id: session for session in self.sessions}

    @cached_property
    def stays_by_driver(self) -> Mapping[int, list[Stay]]:
        """The stays of each driver by the driver's id."""
        stays: dict[int, list[Stay]] = {}
        for stay in self.stays:
            stays.setdefault(stay.driver_id, []).append(stay)
        return stays

    def sessions_of(self, round_id: int) -> Mapping[str, Session]:
        """Return the sessions of a round by folded name."""
        return {folded(each.name): each for each in self.sessions if each.round_id == round_id}
