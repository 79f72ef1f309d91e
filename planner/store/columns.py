"""Column types that SQLite lacks: UTC instants and tuples of words."""

from __future__ import annotations

import json
from datetime import UTC, datetime, timedelta
from functools import lru_cache

from sqlalchemy import BigInteger, Text
from sqlalchemy.engine import Dialect
from sqlalchemy.types import TypeDecorator

from planner.errors import InputError

EPOCH = datetime(1970, 1, 1, tzinfo=UTC)
MICROSECOND = timedelta(microseconds=1)


def microseconds(instant: datetime) -> int:
    """Microseconds since 1970 in UTC. Raises: InputError for an instant without a zone: when was it?"""
    if instant.tzinfo is None or instant.utcoffset() is None:
        raise InputError("instant", instant.isoformat(), "a date and time with its zone")
    return (instant - EPOCH) // MICROSECOND


class UtcInstant(TypeDecorator[datetime]):
    """Zone-aware datetimes in and out, kept as whole microseconds since 1970 in UTC.

    An integer sorts and compares as the instants do, is exact, and cannot lose its zone on the way.
    """

    impl = BigInteger
    cache_ok = True

    def process_bind_param(self, value: datetime | None, dialect: Dialect) -> int | None:
        return None if value is None else microseconds(value)

    def process_result_value(self, value: int | None, dialect: Dialect) -> datetime | None:
        return None if value is None else EPOCH + timedelta(microseconds=value)


@lru_cache(maxsize=4096)
def written(words: tuple[str, ...]) -> str:
    """Words as a JSON list; most readings share the same few."""
    return json.dumps(list(words), ensure_ascii=False)


@lru_cache(maxsize=4096)
def words(text: str) -> tuple[str, ...]:
    """The words of a JSON list."""
    return tuple(json.loads(text))


class Words(TypeDecorator[tuple[str, ...]]):
    """A tuple of words, kept as a JSON list."""

    impl = Text
    cache_ok = True

    def process_bind_param(self, value: tuple[str, ...] | None, dialect: Dialect) -> str | None:
        return None if value is None else written(value)

    def process_result_value(self, value: str | None, dialect: Dialect) -> tuple[str, ...] | None:
        return None if value is None else words(value)
