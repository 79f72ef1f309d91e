"""Between records and rows: the fields of each kind, their validation, their JSON in the log of changes."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, fields, replace
from datetime import UTC, date, datetime
from typing import Any, TypeAlias, TypeVar

import numpy as np
from sqlalchemy import Date, Table

from planner.errors import InputError
from planner.hydration import validation as hydration_validation
from planner.hydration.model import CockpitConditions, MorningMark, Weighing
from planner.monitoring import validation as monitoring_validation
from planner.monitoring.model import Notice, Reading, SickPeriod
from planner.record_checks import Problem, found
from planner.season import validation as season_validation
from planner.season.model import (
    Commitment,
    Driver,
    Leg,
    Place,
    PressureMeasurement,
    Round,
    Session,
    Stay,
)
from planner.store.columns import UtcInstant, Words
from planner.store.schema import TABLES

Record: TypeAlias = (
    Place
    | Driver
    | Round
    | Session
    | Commitment
    | Stay
    | Leg
    | PressureMeasurement
    | Reading
    | SickPeriod
    | Notice
    | CockpitConditions
    | Weighing
    | MorningMark
)
R = TypeVar("R", bound=Record)

_CHECKS: dict[type, Callable[[Any], tuple[Problem, ...]]] = {
    **season_validation.CHECKS,
    **monitoring_validation.CHECKS,
    **hydration_validation.CHECKS,
}


@dataclass(frozen=True, eq=False)  # there is one object a kind
class Kind:
    """One kind of record: its class, its table, and its fields other than the id, in order."""

    record: type
    table: Table
    fields: tuple[str, ...]

    @property
    def name(self) -> str:
        """The name in the log of changes."""
        return self.record.__name__

    @property
    def words(self) -> str:
        """The name in messages."""
        return self.table.name.replace("_", " ")


KINDS: dict[type, Kind] = {
    record: Kind(record, table, tuple(f.name for f in fields(record) if f.name != "id"))
    for record, table in TABLES.items()
}
KIND_BY_NAME: dict[str, Kind] = {kind.name: kind for kind in KINDS.values()}
KIND_BY_TABLE: dict[str, Kind] = {kind.table.name: kind for kind in KINDS.values()}

# Frames and arrays hand out numpy's scalars, which the database driver would keep as raw bytes.
_PLAIN: dict[type, Callable[[Any], object]] = {
    np.bool_: bool,
    np.str_: str,
    **dict.fromkeys((np.float64, np.float32), float),
    **dict.fromkeys((np.int64, np.int32), int),
}


def kind_of(record: type) -> Kind:
    """The kind of a class of records. Raises: InputError for a class that the store does not keep."""
    try:
        return KINDS[record]
    except KeyError:
        raise InputError("kind", getattr(record, "__name__", record), "a kind of record") from None


def validate(record: Record) -> None:
    """Raises: InputError for the first field that cannot be kept."""
    problems = found(_CHECKS[type(record)](record))
    if problems:
        raise problems[0]


def problems(record: Record) -> list[InputError]:
    """All that is wrong with a record in itself; empty when it may be kept."""
    return found(_CHECKS[type(record)](record))


def plain(record: R) -> R:
    """The record with numpy's scalars as Python's, and its instants in UTC.

    In UTC also because an instant in an hour that the clocks repeat compares unequal to itself in any other
    zone (PEP 495), so that a change would be seen where there is none.
    """
    replaced: dict[str, Any] = {}
    for name, value in vars(record).items():
        if isinstance(value, datetime):
            if value.tzinfo is not UTC and value.utcoffset() is not None:
                replaced[name] = value.astimezone(UTC)
        elif type(value) in _PLAIN:
            replaced[name] = _PLAIN[type(value)](value)
    return replace(record, **replaced) if replaced else record


def values_of(kind: Kind, record: Record) -> dict[str, Any]:
    """The record's fields other than the id."""
    given = vars(record)
    return {field: given[field] for field in kind.fields}


def columns(kind: Kind) -> list[Any]:
    """The columns of a record in the order of its fields, the id last."""
    return [*(kind.table.c[field] for field in kind.fields), kind.table.c.id]


def record_from(record: type[R], row: Iterable[Any]) -> R:
    """A record from a row of `columns`; the id is the last field of every kind (a test holds it to that)."""
    return record(*row)


def to_json(values: Mapping[str, Any]) -> str:
    """Fields as one JSON object; instants and dates in ISO 8601."""
    return json.dumps(values, default=_encoded, ensure_ascii=False)


def from_json(kind: Kind, text: str) -> dict[str, Any]:
    """Fields from `to_json`. A field that the kind has no longer is left out."""
    values = json.loads(text)
    return {field: _decoded(kind, field, value) for field, value in values.items() if field in kind.fields}


def _encoded(value: object) -> object:
    if isinstance(value, datetime | date):
        return value.isoformat()
    raise TypeError(f"{value!r} has no form in JSON")


def _decoded(kind: Kind, field: str, value: Any) -> Any:
    if value is None:
        return None
    column_type = kind.table.c[field].type
    if isinstance(column_type, UtcInstant):
        return datetime.fromisoformat(value)
    if isinstance(column_type, Words):
        return tuple(value)
    if isinstance(column_type, Date):
        return date.fromisoformat(value)
    return value
