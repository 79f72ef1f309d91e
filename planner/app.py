"""The Streamlit entry: set-up and navigation."""

from __future__ import annotations

import streamlit as st

from planner.ui.errors import plain_errors
from planner.ui.navigation import FIRST_PAGE, PAGES, pages_folder
from planner.ui.page import end_whatever_happened


def main() -> None:
    """Draw the page that was asked for; whatever goes wrong on it is said in one line."""
    st.set_page_config(page_title="Planner", layout="wide", initial_sidebar_state="collapsed")
    folder = pages_folder()
    pages = [
        st.Page(
            folder / f"{stem}.py",
            title=title,
            url_path=stem.replace("_", "-"),
            default=stem == FIRST_PAGE,
        )
        for stem, title in PAGES
        if (folder / f"{stem}.py").is_file()
    ]
    page = st.navigation(pages, position="top")
    with plain_errors():
        page.run()
    end_whatever_happened()


main()
