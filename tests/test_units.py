"""Conversion at the edges, against the definitions of the units."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.constants import HPA_PER_MMHG
from planner.units import TO_HOUSE, from_house, to_house

PAIRS = [(kind, unit) for kind, units in TO_HOUSE.items() for unit in units]


@pytest.mark.parametrize(
    ("kind", "value", "unit", "expected", "tolerance"),
    [
        # Published: the international foot is 0.3048 m by definition (1959 agreement).
        ("elevation", 1.0, "ft", 0.3048, 0.0),
        ("elevation", 8000.0, "ft", 2438.4, 1e-9),
        # Published: the fixed points of the Fahrenheit scale.
        ("temperature", 32.0, "F", 0.0, 1e-12),
        ("temperature", 212.0, "F", 100.0, 1e-12),
        ("temperature", 98.6, "F", 37.0, 1e-12),
        ("temperature", -40.0, "F", -40.0, 1e-12),
        # Published: the international pound is 0.45359237 kg by definition (1959 agreement).
        ("mass", 1.0, "lb", 0.45359237, 0.0),
        ("mass", 150.0, "lb", 68.0388555, 1e-9),
        # Published: the US gallon is 231 cubic inches, a fluid ounce its 128th part.
        ("volume", 1.0, "fl oz", 231.0 * 2.54**3 / 128.0, 1e-9),
        ("volume", 128.0, "fl oz", 3785.411784, 1e-7),
        # Published: the conventional millimetre of mercury, 13595.1 kg/m3 x 9.80665 m/s2 x 1 mm.
        ("pressure", 1.0, "mmHg", 13595.1 * 9.80665 * 1e-3 / 100.0, 1e-9),
        ("pressure", 760.0, "mmHg", 1013.25, 1e-3),
        ("pressure", 101.325, "kPa", 1013.25, 1e-9),
    ],
)
def test_to_the_house_unit(kind: str, value: float, unit: str, expected: float, tolerance: float) -> None:
    assert to_house(kind, value, unit) == pytest.approx(expected, rel=0.0, abs=tolerance)


@pytest.mark.parametrize(("kind", "unit"), PAIRS)
@settings(max_examples=25, deadline=None)
@given(value=st.floats(-1e4, 1e4))
def test_there_and_back(kind: str, unit: str, value: float) -> None:
    assert from_house(kind, to_house(kind, value, unit), unit) == pytest.approx(value, rel=1e-12, abs=1e-9)


@pytest.mark.parametrize("kind", TO_HOUSE)
def test_the_house_unit_is_the_first_and_changes_nothing(kind: str) -> None:
    unit = next(iter(TO_HOUSE[kind]))
    assert to_house(kind, 12.5, unit) == from_house(kind, 12.5, unit) == 12.5


def test_water_vapour_of_the_windpipe_in_both_units() -> None:
    # Published: 47 mmHg, 6.28 kPa. Half a unit of the 47 is 0.067 kPa.
    vapour_kpa = 47.0 * HPA_PER_MMHG / 10.0
    assert vapour_kpa == pytest.approx(6.28, abs=0.067)
