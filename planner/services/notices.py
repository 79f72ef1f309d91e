"""What was done about an outcome: told the physician, a note."""

from __future__ import annotations

from datetime import datetime
from typing import Final, Literal

from planner.errors import InputError
from planner.monitoring.model import Notice
from planner.store.store import Store

LONGEST_NOTE: Final = 500


def keep_notice(
    store: Store,
    driver_id: int,
    kind: Literal["told the physician", "note"],
    text: str,
    *,
    by: str,
    at: datetime,
) -> Notice:
    """Keep what was done; a note needs words, having told the physician speaks for itself.

    Raises: InputError for an empty note or one that is too long.
    """
    words = " ".join(text.split())
    if (kind == "note" and not words) or len(words) > LONGEST_NOTE:
        raise InputError("note", text, f"1 to {LONGEST_NOTE} characters")
    return store.add(Notice(driver_id, at, kind, words, entered_by=by), by=by, why=kind)
