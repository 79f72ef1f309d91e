"""What stands on every screen: what this is not, who decides, and the emergency signs one tap away."""

from __future__ import annotations

from typing import Final

import streamlit as st

from planner.physiology.illness import EMERGENCY_ADVICE, EMERGENCY_SIGNS
from planner.ui.text import escaped

WHAT_THIS_IS_NOT: Final = (
    "No diagnosis and no clearance to drive. A reading inside its range proves nothing by itself: "
    "oximeters err, and often read too high. Ranges come from published studies and from the driver's own "
    "readings; rules without a source are this program's judgement."
)
WHO_DECIDES: Final = "The team physician decides, under the rules of the place and of the sport."


def emergency_signs_button() -> None:
    """The signs, behind one button at the head of the page."""
    with st.popover("Emergency signs", type="tertiary"):
        st.html(_signs())


def footer() -> None:
    """The quiet lines under every screen."""
    st.html(
        f'<div class="p-foot"><div>{escaped(WHAT_THIS_IS_NOT)} <b>{escaped(WHO_DECIDES)}</b></div>'
        f"<details><summary>Emergency signs</summary>{_signs()}</details></div>"
    )


def _signs() -> str:
    items = "".join(f"<li>{escaped(words[0].upper() + words[1:])}</li>" for words in EMERGENCY_SIGNS.values())
    return f'<div><b>{escaped(EMERGENCY_ADVICE)}</b><ul class="p-signs">{items}</ul></div>'
