"""What a driver's readings had taught by an instant; computed once for the same readings and course."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import UTC, datetime
from functools import lru_cache
from hashlib import blake2b
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from planner.monitoring.model import SickPeriod
from planner.monitoring.own_range import COLUMNS, own_ranges_from_columns
from planner.physiology.acclimatisation import ExposureHistory
from planner.physiology.person import PersonPosterior
from planner.store.store import Store

PERSONS_KEPT: Final = 512


@dataclass(frozen=True)
class Past:
    """All that was read before, of all drivers, as columns; and when they were ill."""

    columns: Mapping[str, NDArray[Any]]
    sick_periods: Sequence[SickPeriod] = ()

    @classmethod
    def of(cls, store: Store, until: datetime) -> Past:
        """Everything in the store up to an instant."""
        return cls(store.reading_columns(until=until), tuple(store.all(SickPeriod)))


@dataclass(frozen=True)
class _Question:
    """One driver's readings and course; the digest of all of it tells whether it was asked before."""

    digest: bytes
    driver_id: int = field(compare=False)
    columns: Mapping[str, NDArray[Any]] = field(compare=False)
    history: ExposureHistory = field(compare=False)
    sick_periods: tuple[SickPeriod, ...] = field(compare=False)
    origin: datetime = field(compare=False)


def person_before(
    driver_id: int, past: Past, before: datetime, history: ExposureHistory, origin: datetime
) -> PersonPosterior:
    """What one driver's readings before an instant say; `history` counts its hours from `origin`."""
    limit = np.datetime64(before.astimezone(UTC).replace(tzinfo=None), "us")
    ours = (past.columns["driver_id"] == driver_id) & (past.columns["taken_at"] < limit)
    columns = {name: past.columns[name][ours] for name in COLUMNS}
    sick = tuple(p for p in past.sick_periods if p.driver_id == driver_id)
    digest = blake2b(history.start_h.tobytes() + history.inspired_po2_mmhg.tobytes(), digest_size=16)
    digest.update(repr((origin, sick, [columns[name].tolist() for name in COLUMNS])).encode())
    return _learned(_Question(digest.digest(), driver_id, columns, history, sick, origin))


@lru_cache(maxsize=PERSONS_KEPT)
def _learned(asked: _Question) -> PersonPosterior:
    persons = own_ranges_from_columns(
        asked.columns, {asked.driver_id: asked.history}, asked.sick_periods, origin=asked.origin
    )
    return persons[asked.driver_id]
