"""The one place where an error becomes a line on the screen."""

from __future__ import annotations

import logging
import traceback
from collections.abc import Iterator
from contextlib import contextmanager

import streamlit as st

from planner.errors import InputError, PlannerError, RefusedLineError
from planner.ui.text import literal

_log = logging.getLogger("planner")


@contextmanager
def plain_errors() -> Iterator[None]:
    """Show what goes wrong inside as one plain line; Streamlit's own signals pass, they are no Exception."""
    try:
        yield
    except PlannerError as error:
        show_error(error)
    except Exception as error:
        where = traceback.extract_tb(error.__traceback__)[-1]
        _log.error("%s: %s (%s, line %s)", type(error).__name__, error, where.filename, where.lineno)
        st.error(
            "This part of the screen met a fault in the program. What was stored before is untouched; "
            f"load the page again, and report it as “{type(error).__name__}” if it stays."
        )


def show_error(error: PlannerError) -> None:
    """Show an error of ours; its text is one line that says what to do."""
    st.error(literal(in_screen_words(error)))


def in_screen_words(error: PlannerError) -> str:
    """An error's line as a screen says it: a field left empty is called that, a number is written plainly."""
    if not isinstance(error, InputError) or isinstance(error, RefusedLineError):
        return str(error)
    if error.value is None or error.value == "":
        return f"{error.field}: nothing given yet, expected {error.expected}"
    if isinstance(error.value, float):
        return f"{error.field}: {error.value:g} cannot be used, expected {error.expected}"
    return str(error)
