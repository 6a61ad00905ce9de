"""What callers give: numbers and series, turned into floats, or refused in the words of the one error family.

A range test that NaN fails refuses what is no number too: ``number`` gives NaN for it.
"""

from __future__ import annotations

from math import inf, isfinite, nan

import numpy as np

from engine.steam.arrays import as_floats, shortened
from engine.steam.errors import Fault, InputError

MOST = 1e60  # no reading in SI is larger, and the fourth powers of such still are numbers


def number(value: object) -> float:
    """A single real number as a float; NaN for text, truth values, None, arrays and whatever else is none.

    >>> number(2), number("2"), number(True)
    (2.0, nan, nan)
    """
    try:
        array = as_floats(value)
    except (TypeError, ValueError, OverflowError):
        return nan
    return float(array) if array.ndim == 0 else nan


def whole(value: object) -> bool:
    """Whether something is a whole number, and not a truth value."""
    return isinstance(value, int | np.integer) and not isinstance(value, bool)


def shown(value: object) -> object:
    """What was given, for a message."""
    return value if isinstance(value, str | int | float) and len(str(value)) < 80 else shortened(value)


def size_fault(what: str, value: object) -> Fault | None:
    """What is wrong with a half-width or an uncertainty."""
    if 0 <= number(value) <= MOST:
        return None
    limit = "a finite number, zero or more" + (f", up to {MOST:g}" if MOST < number(value) < inf else "")
    return Fault(what, shown(value), "", limit)


def size(what: str, value: object) -> float:
    """A half-width or an uncertainty as a float; InputError for what cannot be one."""
    if found := size_fault(what, value):
        raise InputError(found)
    return number(value)


def series(what: str, values: object) -> np.ndarray:
    """Numbers of any shape, NaN and infinite ones for those that are missing; InputError for anything else."""
    try:
        array = as_floats(values)
    except (TypeError, ValueError, OverflowError):
        raise InputError(Fault(what, shortened(values), "", "a number or an array of numbers")) from None
    far = np.isfinite(array) & (np.abs(array) > MOST)
    if far.any():
        raise InputError(Fault(what, float(array[far].flat[0]), "", f"sizes up to {MOST:g}", hint="check the unit"))
    return array


def finite(what: str, values: object, *, hint: str = "", why: str = "") -> np.ndarray:
    """``series`` in which nothing is missing."""
    array = series(what, values)
    if not np.isfinite(array).all():
        raise InputError(Fault(what, "not a finite number", "", "finite numbers", why, hint))
    return array


def is_span(span: object) -> bool:
    """Two finite numbers, the first below the second."""
    if not isinstance(span, tuple | list | np.ndarray) or len(span) != 2:
        return False
    low, high = map(number, span)
    return low < high and isfinite(high - low)
