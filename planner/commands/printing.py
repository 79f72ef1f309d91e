"""Answers as text: a table for people, JSON for scripts."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from datetime import date, datetime

from planner.commands.command import Answer, Record


def as_json(answer: Answer) -> str:
    """Return the answer's data as JSON; what is not known is null, an instant is ISO 8601."""
    return json.dumps(_plain(answer.data), allow_nan=False, ensure_ascii=False, indent=2)


def as_text(answer: Answer) -> str:
    """Return the answer as a table (rows), or as one line a key (a single record), then its notes."""
    body = _pairs(answer.data) if isinstance(answer.data, Mapping) else _table(answer.data)
    return "\n".join([*body, *answer.notes])


def _plain(value: object) -> object:
    if isinstance(value, Mapping):
        return {str(key): _plain(each) for key, each in value.items()}
    if isinstance(value, str) or value is None or isinstance(value, bool | int):
        return value
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, date | datetime):
        return value.isoformat()
    if isinstance(value, Sequence):
        return [_plain(each) for each in value]
    raise TypeError(f"no JSON for {type(value).__name__}")


def _cell(key: str, value: object) -> str:
    if value is None or (isinstance(value, float) and not math.isfinite(value)):
        return "-"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:.{_decimals(key)}f}"
    if isinstance(value, datetime):
        return value.isoformat(sep=" ", timespec="minutes")
    if isinstance(value, str):
        return value
    if isinstance(value, Sequence):
        parts = [str(each) for each in value]
        # Sentences follow one another as they are, other items are set apart.
        return (" " if all(part.endswith(".") for part in parts) else "; ").join(parts) or "-"
    return str(value)


def _decimals(key: str) -> int:
    """Digits that a person can use, by the unit at the key's end; JSON keeps them all."""
    for ending, decimals in (("_kg_m3", 4), ("_l_per_h", 2), ("_ml", 0), ("_mg", 0), ("_w_m2", 0)):
        if key.endswith(ending):
            return decimals
    return 1


def _pairs(record: Record) -> list[str]:
    width = max((len(key) for key in record), default=0)
    return [f"{key.ljust(width)}  {_cell(key, value)}" for key, value in record.items()]


def _is_numeric(values: Sequence[object]) -> bool:
    known = [value for value in values if value is not None]
    return bool(known) and all(isinstance(value, int | float) for value in known)


def _table(rows: Sequence[Record]) -> list[str]:
    if not rows:
        return []
    keys = list(rows[0])
    cells = [[_cell(key, row[key]) for key in keys] for row in rows]
    widths = [max(len(key), *(len(line[i]) for line in cells)) for i, key in enumerate(keys)]
    to_right = [_is_numeric([row[key] for row in rows]) for key in keys]

    def line(texts: Sequence[str]) -> str:
        parts = [
            text.rjust(width) if right else text.ljust(width)
            for text, width, right in zip(texts, widths, to_right, strict=True)
        ]
        return "  ".join(parts).rstrip()

    return [line(keys), *(line(each) for each in cells)]
