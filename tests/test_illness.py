"""Altitude illness: the published rules row by row, and words that leave the decision to the physician."""

from __future__ import annotations

import pytest
from published_rows import Row, cases

from planner.errors import InputError
from planner.monitoring.model import Reading
from planner.physiology.illness import (
    EMERGENCY_ADVICE,
    EMERGENCY_SIGNS,
    ascent_cautions,
    lake_louise,
    planned_ascent_risk,
)

SEVERITIES = ("none", "mild", "moderate", "severe")
RISKS = ("low", "moderate", "high")


@cases("lake_louise")
def test_lake_louise_2018(row: Row) -> None:
    items = (int(row[name]) for name in ("headache", "gut", "fatigue", "dizziness"))
    score = lake_louise(*items, hours_since_ascent=row["hours_since_ascent"])
    value = getattr(score, row.given["quantity"])
    row.check(SEVERITIES.index(value) if isinstance(value, str) else float(value))


@cases("planned_ascent")
def test_planned_ascent_2024(row: Row) -> None:
    beds = [float(word) for word in row.given["bed_elevations_m"].split()]
    risk = planned_ascent_risk(row.given["history"], beds)
    row.check(RISKS.index(risk.risk))
    assert risk.risk == "low" or risk.reasons


def test_time_not_known_counts_as_long_enough() -> None:
    assert lake_louise(1, 1, 1, 0).is_ams


@pytest.mark.parametrize("item", [-1, 4, 1.5])
def test_items_outside_the_scale_are_refused(item: float) -> None:
    with pytest.raises(InputError, match=r"gut: .* whole number from 0 to 3"):
        lake_louise(1, item, 0, 0)


def test_a_start_from_higher_up_is_said() -> None:
    risk = planned_ascent_risk("none or mild", [2900.0], start_elevation_m=1500.0)
    assert risk.risk == "moderate"
    assert any("1200 m" in why for why in risk.reasons)
    coming_down = planned_ascent_risk("none or mild", [2900.0, 2900.0], start_elevation_m=3200.0)
    assert coming_down.risk == "low"


def test_unknown_history_is_refused() -> None:
    with pytest.raises(InputError, match="history"):
        planned_ascent_risk("some", [2300.0])


@pytest.mark.parametrize(
    ("beds", "nights"),
    [
        # published: at most 500 m more a night above 3000 m (Luks et al. 2024)
        ([2300.0, 2300.0], []),
        ([2000.0, 3000.0, 3500.0], []),
        ([2000.0, 3000.0, 3501.0], [2]),
        ([0.0, 3600.0], [1]),
        ([4000.0, 2000.0, 3400.0], [0]),
        # published: a rest day every 3 to 4 days there
        ([3000.0, 3300.0, 3600.0, 3900.0], []),
        ([3000.0, 3300.0, 3600.0, 3900.0, 4200.0], [4]),
        ([3000.0, 3300.0, 3600.0, 3900.0, 3900.0, 4200.0], []),
    ],
)
def test_rate_of_ascent(beds: list[float], nights: list[int]) -> None:
    cautions = ascent_cautions(beds)
    assert [c.night for c in cautions] == nights
    assert all("3000 m" in c.sentence for c in cautions)


def test_emergency_signs_can_be_stated_on_a_reading() -> None:
    """published: the signs of lung and brain oedema (Luks et al. 2024)."""
    for words in ("breathless at rest", "blue lips", "confusion", "unsteady walk", "cough"):
        assert any(words in sign for sign in EMERGENCY_SIGNS.values())
    assert all(code.isidentifier() for code in EMERGENCY_SIGNS)
    assert Reading.__dataclass_fields__["emergency_signs"].default == ()


def test_advice_defers_and_clears_nobody() -> None:
    assert "physician" in EMERGENCY_ADVICE
    assert "emergency services" in EMERGENCY_ADVICE
    said = [EMERGENCY_ADVICE, *planned_ascent_risk("lung or brain oedema", [4000.0, 5000.0]).reasons]
    said += [c.sentence for c in ascent_cautions([4000.0, 5000.0])]
    said.append(lake_louise(3, 3, 3, 3).why)
    for sentence in said:
        assert not any(word in sentence.lower() for word in ("cleared", "safe", "fit to", "mg", "diagnos"))
