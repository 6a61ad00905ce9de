"""The array contract, in one place: broadcast at the door, work in blocks, give back the shape."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from engine.steam.errors import Fault, InputError
from engine.steam.quantities import QUANTITIES

BLOCK = 4096  # elements: enough to hide the cost of a NumPy call, few enough to stay in cache


def at_the_door(**named) -> tuple[list[np.ndarray], bool]:
    """Turn named arguments into float64 arrays of one shape; say whether all were scalars.

    Inputs are never modified. Raises InputError for what is not a real number (text, None,
    complex) and for shapes that do not go together; NaN passes, the range checks catch it.
    """
    arrays, faults = [], []
    for name, value in named.items():
        try:
            array = np.asarray(value)
            if array.dtype.kind not in "fiu" and array.size:
                raise TypeError
            arrays.append(array.astype(float, copy=False))
        except (TypeError, ValueError):
            faults.append(fault(name, repr(value), "a number or an array of numbers"))
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
    """Faults for the first few elements that are not inside (NaN never is)."""
    if inside.all():
        return []
    return [fault(name, float(values[tuple(place)]), limit, why=why, hint=hint,
                  index=tuple(int(i) for i in place) or None)
            for place in np.argwhere(~inside)[:5]]
