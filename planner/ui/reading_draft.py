"""Half-typed readings: kept as long as the window is open, whatever page is looked at in between.

A draft is a number that ends the keys of its widgets; their values stay in the session. A draft that is not
empty is never given up for another driver: it is set aside and offered again.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Final

import streamlit as st

_LATEST: Final = "entry latest draft"
_SHOWN: Final = "entry draft shown"
_ASIDE: Final = "entry drafts set aside"
# A draft that holds one of these is not empty; driver and circumstances are set beforehand.
_TYPED: Final = ("spo2", "pulse", "signs", "headache", "gut", "fatigue", "dizziness", "mass")


@dataclass(frozen=True)
class Draft:
    """One entry form's values in the session."""

    number: int

    def key(self, field: str) -> str:
        """The session's key of a field."""
        return f"entry_{field}_{self.number}"

    def value(self, field: str) -> Any:
        """What the field holds now; None before it was drawn."""
        return st.session_state.get(self.key(field))

    @property
    def preset_driver_id(self) -> int | None:
        """Whom the draft began with."""
        driver_id: int | None = st.session_state.get(self.key("preset"))
        return driver_id

    @property
    def driver_id(self) -> int | None:
        """Whom the draft is about as it stands."""
        key = self.key("driver")
        chosen: int | None = st.session_state.get(key, self.preset_driver_id)
        return chosen

    @property
    def is_empty(self) -> bool:
        """Whether nothing has been typed yet."""
        return all(self.value(field) in (None, "", []) for field in _TYPED)


def shown() -> Draft | None:
    """The draft on the screen; None before the first one."""
    number = st.session_state.get(_SHOWN)
    return None if number is None else Draft(number)


def begin(driver_id: int | None) -> Draft:
    """Show a draft for a driver: the present one if it is theirs, else an empty one."""
    draft = shown()
    if draft is not None and not draft.is_empty:
        if draft.driver_id == driver_id:
            return draft
        st.session_state.setdefault(_ASIDE, []).append(draft.number)
    number = st.session_state.get(_LATEST, 0) + 1
    st.session_state[_LATEST] = st.session_state[_SHOWN] = number
    begun = Draft(number)
    st.session_state[begun.key("preset")] = driver_id
    return begun


def end() -> None:
    """The draft shown was kept: the next visit begins another."""
    st.session_state[_SHOWN] = None


def set_aside() -> list[Draft]:
    """The drafts that gave way to another, oldest first."""
    return [Draft(number) for number in st.session_state.get(_ASIDE, [])]


def take_up(draft: Draft) -> None:
    """Show a draft that was set aside; the present one takes its place unless it is empty."""
    present = shown()
    drop(draft)
    if present is not None and not present.is_empty:
        st.session_state[_ASIDE].append(present.number)
    st.session_state[_SHOWN] = draft.number


def drop(draft: Draft) -> None:
    """Offer a draft no more."""
    st.session_state[_ASIDE].remove(draft.number)
