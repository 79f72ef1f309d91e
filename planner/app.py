"""The Streamlit entry: set-up and navigation."""

from __future__ import annotations

from pathlib import Path
from typing import Final

import streamlit as st

from planner.ui.errors import plain_errors

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


def pages_folder() -> Path:
    """Where the pages lie: inside the installed package, or beside it in a checkout."""
    here = Path(__file__).resolve().parent
    packaged = here / "_pages"
    return packaged if packaged.is_dir() else here.parent / "pages"


def main() -> None:
    """Draw the page that was asked for; whatever goes wrong on it is said in one line."""
    st.set_page_config(page_title="Planner", layout="wide", initial_sidebar_state="collapsed")
    folder = pages_folder()
    pages = [
        st.Page(
            folder / f"{stem}.py",
            title=title,
            url_path=stem.replace("_", "-"),
            default=stem == PAGES[0][0],
        )
        for stem, title in PAGES
        if (folder / f"{stem}.py").is_file()
    ]
    page = st.navigation(pages, position="top")
    with plain_errors():
        page.run()


main()
