"""Charts whose structure is worked out once, with the data sent beside it.

To build and validate a chart of twenty layers takes a tenth of a second; the structure of ours depends on a
few numbers only, so it is kept as text. The page hands the result to Streamlit as a specification.
"""

from __future__ import annotations

import json
from typing import Any

import altair as alt
import pandas as pd


def named(dataset: str) -> alt.Chart:
    """Begin a chart on a dataset that `with_data` will supply under this name."""
    return alt.Chart(alt.NamedData(name=dataset))


def as_text(chart: Any) -> str:
    """Return a finished chart as text, to be kept by its maker's cache."""
    return json.dumps(chart.to_dict())


def with_data(structure: str, **datasets: pd.DataFrame) -> dict[str, Any]:
    """Return a specification with its data as frames, which travel as columns and not as text."""
    spec: dict[str, Any] = json.loads(structure)
    spec["datasets"] = datasets
    return spec
