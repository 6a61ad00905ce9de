"""The array contract, in one place: broadcast at the door, work in blocks, give back the shape."""

from __future__ import annotations

import reprlib
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from engine.steam.errors import Fault, InputError
from engine.steam.quantities import QUANTITIES

BLOCK = 8192  # elements: enough to hide the cost of the NumPy calls, few enough to stay in cache
LISTED = 5  # faults spelled out for one input; of the others only the number is given
NUMBERS = "a number or an array of numbers"


def as_floats(value) -> np.ndarray:
    """A float64 array, 0-d for a single number; TypeError or ValueError for what is not real numbers.

    Text, None, complex numbers and truth values are refused: each would convert to something. What
    a masked array hides becomes NaN.
    """
    array = np.asarray(value)
    if array.dtype.kind not in "fiu" and array.size:
        raise TypeError
    floats = array.astype(float, copy=False)
    return np.where(np.ma.getmaskarray(value), np.nan, floats) if np.ma.is_masked(value) else floats


def shortened(value) -> str:
    """What was given, for a message: a list of a million entries need not be read out."""
    return reprlib.repr(value)


def at_the_door(**named) -> tuple[list[np.ndarray], bool]:
    """Turn named arguments into float64 arrays of one shape; say whether all were scalars.

    Inputs are never modified. Raises InputError for what is not a real number (text, None,
    complex) and for shapes that do not go together; NaN passes, the range checks catch it.
    """
    arrays, faults = [], []
    for name, value in named.items():
        try:
            arrays.append(as_floats(value))
        except (TypeError, ValueError):
            faults.append(fault(name, shortened(value), NUMBERS))
    if faults:
        raise InputError(*faults)
    try:
        whole = np.broadcast_arrays(*arrays)
    except ValueError:
        shapes = ", ".join(f"{n} {a.shape}" for n, a in zip(named, arrays, strict=True))
        raise InputError(Fault("array shapes", shapes, "", "shapes that broadcast together",
                               hint="give arrays of one length, or single values")) from None
    return list(whole), all(a.ndim == 0 for a in arrays)


def give_back(array: np.ndarray, scalar: bool):
    """An array keeps its shape; a scalar call gets a Python float."""
    return float(array) if scalar else array


def in_blocks(kernel: Callable[..., tuple], outputs: int, *arrays: np.ndarray) -> list[np.ndarray]:
    """Evaluate ``kernel`` over equally shaped arrays, a cache-sized block at a time.

    A single value broadcast to the whole shape is never spelled out beyond one block, so memory
    stays at the inputs, the outputs and a few blocks.
    """
    shape, size = arrays[0].shape, arrays[0].size
    if size <= BLOCK:
        return [np.reshape(r, shape) for r in kernel(*(np.ascontiguousarray(a).ravel() for a in arrays))]
    constant = [not any(a.strides) for a in arrays]
    flat = [np.full(BLOCK, a[(0,) * a.ndim]) if c else np.ascontiguousarray(a).ravel()
            for a, c in zip(arrays, constant, strict=True)]
    results = [np.empty(size) for _ in range(outputs)]
    for start in range(0, size, BLOCK):
        part, head = slice(start, start + BLOCK), slice(min(BLOCK, size - start))
        values = kernel(*(a[head] if c else a[part] for a, c in zip(flat, constant, strict=True)))
        for result, value in zip(results, values, strict=True):
            result[part] = value
    return [r.reshape(shape) for r in results]


def fault(name: str, value, limit: str, *, why: str = "", hint: str = "", index=None) -> Fault:
    """A fault in the engine's own units, worded from the quantity table."""
    quantity = QUANTITIES[name]
    return Fault(quantity.label, value, quantity.unit, limit, why, hint, name, index)


def refuse_outside(name: str, values: np.ndarray, inside: np.ndarray, limit: str, *, why="", hint="") -> list[Fault]:
    """Faults for the first few elements that are not inside (NaN never is), the last with the number of others."""
    if inside.all():
        return []
    places = np.argwhere(~inside)
    faults = [fault(name, float(values[tuple(place)]), limit, why=why, hint=hint,
                    index=tuple(int(i) for i in place) or None)
              for place in places[:LISTED]]
    if (others := len(places) - LISTED) > 0:
        faults[-1] = replace(faults[-1], hint="; ".join(filter(None, (hint, f"{others} more elements like this one"))))
    return faults
