"""A figure with its range: how this program says that it is not sure."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from planner.checks import FloatArray, FloatLike, checked
from planner.errors import InputError


@dataclass(frozen=True)
class Range:
    """The lowest, the best and the highest figure, in one unit; scalars or arrays that broadcast."""

    low: FloatLike
    best: FloatLike
    high: FloatLike

    @classmethod
    def exactly(cls, value: FloatLike) -> Range:
        """Return the range of a figure that is taken as known."""
        return cls(value, value, value)


def checked_range(
    quantity: str, given: Range | FloatLike, field: str | None = None
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Low, best and high as arrays in the quantity's range; a plain number is its own range.

    Parameters:
        quantity: a row of checks.QUANTITIES [word].
        given: a Range, or a number or array taken as exact [unit of the quantity].
        field: name to use in an error, if it differs from the quantity [word].
    Returns:
        Three arrays [unit of the quantity], each with the shape that it was given in.
    Raises:
        InputError: a figure out of range, or low, best and high out of order.
    Valid:
        Any shapes that broadcast; NaN passes as not known.
    Source:
        House convention (judgement).
    """
    as_range = given if isinstance(given, Range) else Range.exactly(given)
    name = field or quantity
    low = checked(quantity, as_range.low, name)
    best = checked(quantity, as_range.best, name)
    high = checked(quantity, as_range.high, name)
    if np.any(low > best) or np.any(best > high):
        raise InputError(name, given, "a low, a best and a high figure in ascending order")
    return low, best, high
