"""Fields that pages share. What they hold stays in the session when another page is looked at."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

import streamlit as st

from planner.checks import QUANTITIES
from planner.ui.text import literal

SPO2_ICON: Final = ":material/spo2:"
PULSE_ICON: Final = ":material/ecg_heart:"
MOST_BUTTONS: Final = 12  # more of them would fill a phone's screen: judgement


def choose_driver(
    names: Mapping[int, str], preset: int | None, key: str, *, required: bool = False
) -> int | None:
    """Choose one of the drivers by id: buttons under the thumb for a team, a list to search for many.

    Parameters: `names` by id in the order to show; `preset` is the one chosen at first, if it is among them;
    `key` keeps the choice in the session.
    """
    first = preset if preset in names else None
    if len(names) <= MOST_BUTTONS:
        return st.pills(
            "Driver",
            list(names),
            default=first,
            required=required,
            format_func=lambda each: literal(names[each]),
            key=key,
            persist_state="session",
        )
    return st.selectbox(
        "Driver",
        list(names),
        index=None if first is None else list(names).index(first),
        format_func=names.__getitem__,
        placeholder="type a few letters of the name",
        key=key,
        persist_state="session",
    )


def number_field(
    label: str, key: str, value: str = "", placeholder: str = "", icon: str | None = None
) -> str:
    """A number as text, sent with every stroke.

    A number field sends its value only when it is left, and a link of the menu that is pressed just then
    goes nowhere. The kind of text field meant for telephone numbers brings up a phone's keys of figures.
    """
    typed = st.text_input(
        label,
        value,
        type="phone",
        live="0ms",
        autocomplete="off",
        placeholder=placeholder,
        icon=icon,
        key=key,
        persist_state="session",
    )
    return typed or ""


def text_field(label: str, key: str, value: str = "", placeholder: str = "", help: str | None = None) -> str:
    """A line of text, sent at every pause."""
    typed = st.text_input(
        label, value, live=True, placeholder=placeholder, help=help, key=key, persist_state="session"
    )
    return typed or ""


@dataclass(frozen=True)
class Kept:
    """Names the fields of one record after it, so that what they hold stays in the session."""

    record: str

    def by(self, field: str) -> dict[str, Any]:
        """What a widget needs to be kept."""
        return {"key": f"{self.record} {field}", "persist_state": "session"}

    def text(self, label: str, value: str = "", placeholder: str = "") -> str:
        """A line of text."""
        return text_field(label, f"{self.record} {label}", value, placeholder)


def wanted(quantity: str) -> str:
    """What can be typed for a row of `checks.QUANTITIES`: "40 to 100 %"."""
    known = QUANTITIES[quantity]
    return f"{known.low:g} to {known.high:g} {known.unit}"
