"""The open database with what belongs to it as a whole: its place, the time, whose units."""

from __future__ import annotations

import json
import os
from dataclasses import asdict
from datetime import UTC, datetime
from pathlib import Path
from typing import Final

from platformdirs import user_data_path

from planner.errors import InputError
from planner.season.model import Driver
from planner.store.store import Store
from planner.wording import METRIC, UnitChoice

STORE_VARIABLE: Final = "PLANNER_STORE"
STORE_FILE: Final = "planner.db"
FROZEN_CLOCK: Final = "clock_frozen_at"
BEGUN_EMPTY: Final = "begun without data on"
LAST_NAME: Final = "name of whoever typed last"
NAME_UNTIL_GIVEN: Final = "coach"
LONGEST_NAME: Final = 60


def default_store_path() -> Path:
    """Where the database lies: PLANNER_STORE, or planner.db in the user's data folder."""
    named = os.environ.get(STORE_VARIABLE, "").strip()
    if named:
        return Path(named).expanduser()
    return user_data_path("planner", appauthor=False) / STORE_FILE


def open_workspace(path: Path) -> Store:
    """The store at a path, made there together with its folder if need be.

    Raises: StoreError when it cannot be made, is another program's file, or is newer than this program.
    """
    return Store.open(path)


def now(store: Store) -> datetime:
    """The present instant in UTC; in the demo season the morning at which its clock stands still."""
    frozen = store.setting(FROZEN_CLOCK)
    if frozen is None:
        return datetime.now(UTC)
    return datetime.fromisoformat(frozen).astimezone(UTC)


def is_demo(store: Store) -> bool:
    """Whether the clock stands still: the sign of the invented season."""
    return store.setting(FROZEN_CLOCK) is not None


def is_empty(store: Store) -> bool:
    """Whether there is nobody to look after yet."""
    return not store.all(Driver)


def has_begun_empty(store: Store) -> bool:
    """Whether somebody chose to begin without the demo season."""
    return store.setting(BEGUN_EMPTY) is not None


def mark_begun_empty(store: Store) -> None:
    """Remember that choice, so that it is not asked again."""
    store.set_setting(BEGUN_EMPTY, datetime.now(UTC).date().isoformat())


def last_name(store: Store) -> str:
    """Who typed here last."""
    return store.setting(LAST_NAME) or NAME_UNTIL_GIVEN


def remember_name(store: Store, text: str) -> str:
    """Keep who types here from now on; returns the name, tidied.

    Raises: InputError when it is empty or too long.
    """
    name = typed_name(text)
    store.set_setting(LAST_NAME, name)
    return name


def typed_name(text: str) -> str:
    """The name of whoever types, tidied.

    Raises: InputError when it is empty or too long.
    """
    name = " ".join(text.split())
    if not 0 < len(name) <= LONGEST_NAME:
        raise InputError("your name", text, f"1 to {LONGEST_NAME} characters")
    return name


def units_of(store: Store, who: str) -> UnitChoice:
    """The units that a person has chosen; metric until then."""
    kept = store.setting(_unit_setting(who))
    return UnitChoice(**json.loads(kept)) if kept else METRIC


def choose_units(store: Store, who: str, choice: UnitChoice) -> None:
    """Keep a person's choice of units."""
    store.set_setting(_unit_setting(who), json.dumps(asdict(choice)))


def _unit_setting(who: str) -> str:
    return f"units of {who}"
