"""The one guard for numbers."""

from __future__ import annotations

import numpy as np
import pytest

from planner.checks import QUANTITIES, checked, like
from planner.errors import InputError


def test_a_number_becomes_a_float_array_without_dimensions() -> None:
    array = checked("elevation_m", 2240)
    assert array.dtype == np.float64
    assert array.shape == ()
    assert array == 2240.0


def test_an_array_keeps_its_shape_and_values() -> None:
    given = np.array([[0.0, 100.0], [8000.0, np.nan]])
    np.testing.assert_array_equal(checked("elevation_m", given), given)


def test_lists_and_integers_are_numbers_too() -> None:
    np.testing.assert_array_equal(checked("elevation_m", [0, 1600]), [0.0, 1600.0])


def test_nan_passes_as_not_known() -> None:
    assert np.isnan(checked("ph", float("nan")))


@pytest.mark.parametrize("quantity", QUANTITIES.values(), ids=lambda q: q.name)
def test_the_ends_of_every_range_are_accepted_and_what_lies_beyond_is_refused(quantity) -> None:
    span = quantity.high - quantity.low
    checked(quantity.name, np.array([quantity.low, quantity.high]))
    for beyond in (quantity.low - 1e-6 * span, quantity.high + 1e-6 * span):
        with pytest.raises(InputError) as refused:
            checked(quantity.name, beyond)
        message = str(refused.value)
        assert quantity.name in message
        unit = "" if quantity.unit == "1" else f" {quantity.unit}"
        assert f"{quantity.low:g} to {quantity.high:g}{unit} ({quantity.meaning})" in message
        assert "\n" not in message


def test_the_message_names_field_value_range_unit_and_meaning() -> None:
    with pytest.raises(
        InputError,
        match=r"^bed: 99999\.0 cannot be used, expected -430 to 9000 m \(height of the ground",
    ):
        checked("elevation_m", 99999, "bed")


def test_of_an_array_the_first_value_out_of_range_is_named() -> None:
    with pytest.raises(InputError, match=r"humidity_pct: 101\.0 "):
        checked("humidity_pct", np.array([[50.0, 101.0], [-3.0, 20.0]]))


@pytest.mark.parametrize("infinite", [float("inf"), float("-inf")])
def test_infinity_is_out_of_every_range(infinite: float) -> None:
    with pytest.raises(InputError, match=r"days: -?inf "):
        checked("days", infinite)


@pytest.mark.parametrize(
    "word", ["abc", "", "1000", b"12", None, [1.0, None], [1.0, "x"], [[1.0], [1.0, 2.0]], {"a": 1}, 1 + 2j]
)
def test_what_is_no_number_is_refused_with_the_unit_wanted(word) -> None:
    with pytest.raises(InputError, match=r"elevation_m: .* expected a number in m$"):
        checked("elevation_m", word)


def test_a_pure_number_has_no_unit_in_the_message() -> None:
    with pytest.raises(InputError, match=r"^ph: 'sour' cannot be used, expected a number$"):
        checked("ph", "sour")


def test_like_gives_a_float_only_when_every_input_was_a_scalar() -> None:
    assert type(like(np.asarray(3.0), 1.0, 2)) is float
    array = np.array([3.0])
    assert like(array, 1.0, np.array([2.0])) is array
    assert type(like(np.asarray(3.0), np.float64(1.0))) is float


def test_the_key_of_a_quantity_is_its_name_and_its_range_is_one() -> None:
    for key, quantity in QUANTITIES.items():
        assert key == quantity.name
        assert quantity.low < quantity.high
        assert quantity.unit
        assert quantity.meaning


def test_a_long_text_is_cut_in_the_message() -> None:
    error = InputError("note", "y" * 500, "less")
    assert str(error) == f"note: '{'y' * 80}…' cannot be used, expected less"
    assert error.value == "y" * 500
