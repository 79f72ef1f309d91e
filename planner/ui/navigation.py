"""Which pages there are, where their scripts lie, and how one page leads to another."""

from __future__ import annotations

from pathlib import Path
from typing import Final, NoReturn

import streamlit as st

# File stem and title, in the order of the menu; a page is offered when its file is there.
PAGES: Final = (
    ("this_morning", "This morning"),
    ("season", "Season"),
    ("arrival", "Arrival"),
    ("driver", "Driver"),
    ("readings", "Readings"),
    ("fluids", "Fluids"),
    ("places", "Places"),
    ("handover", "Hand-over"),
    ("team", "Team"),
)
FIRST_PAGE: Final = PAGES[0][0]

_DRIVER: Final = "driver handed to the next page"


def pages_folder() -> Path:
    """Where the pages lie: inside the installed package, or beside it in a checkout."""
    package = Path(__file__).resolve().parents[1]
    packaged = package / "_pages"
    return packaged if packaged.is_dir() else package.parent / "pages"


def go_to(stem: str, driver_id: int | None = None) -> NoReturn:
    """Leave for another page; a driver handed on is the one that it begins with."""
    if driver_id is not None:
        st.session_state[_DRIVER] = driver_id
    st.switch_page(pages_folder() / f"{stem}.py")


def draw_menu() -> None:
    """Draw a link to every page."""
    for stem, title in PAGES:
        if (pages_folder() / f"{stem}.py").is_file():
            st.page_link(pages_folder() / f"{stem}.py", label=title)


def lead_to(stem: str) -> None:
    """Draw a link to another page."""
    st.page_link(pages_folder() / f"{stem}.py", label=f"Go to {dict(PAGES)[stem]}")


def driver_handed_on() -> int | None:
    """The driver that the page before handed on, once."""
    driver_id: int | None = st.session_state.pop(_DRIVER, None)
    return driver_id
