"""Rows on their way into a chart."""

from __future__ import annotations

from collections.abc import Sequence

import pandas as pd


def frame(rows: Sequence[Sequence[object]], *columns: str) -> pd.DataFrame:
    """Return rows as a frame; the column `at` holds UTC without a zone, as the charts read it."""
    made = pd.DataFrame(list(rows), columns=list(columns))
    made["at"] = pd.to_datetime(made["at"], utc=True).dt.tz_localize(None)
    return made
