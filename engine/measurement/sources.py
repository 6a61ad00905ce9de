"""From inputs to independent causes: the common ground of the budget and of Monte Carlo.

Quantities that share a cause are correlated because of it. So the causes are listed once each,
with how far each moves every quantity (``spread``); only what is left, a correlation that was
estimated from readings taken together, is given as coefficients between causes.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import NamedTuple

import numpy as np

from engine.measurement.given import MOST, number, series, shown
from engine.measurement.inputs import Component, Input
from engine.steam.errors import Fault, InputError

Model = Callable[..., object]
Correlations = Mapping[tuple[str, str], float]


class Sources(NamedTuple):
    """Independent causes, one a column.

    ``labels`` and ``groups`` name them, ``components`` holds one record of each, ``quantities`` the
    inputs each one reaches. ``spread[i, k]`` is the signed standard uncertainty that cause k gives
    to input i (SI); the last row is what acts on the result itself. ``correlation`` holds the
    coefficients between causes.
    """

    labels: tuple[str, ...]
    groups: tuple[str, ...]
    components: tuple[Component, ...]
    quantities: tuple[tuple[str, ...], ...]
    spread: np.ndarray
    correlation: np.ndarray


def gather(inputs: Sequence[Input], on_result: Sequence[Component] = (),
           correlations: Correlations | None = None) -> Sources:
    """List every cause once, whichever inputs it reaches.

    Raises InputError for inputs of one name, for shared causes described differently in two
    places, and for correlations that name no cause or cannot exist.
    """
    names = [i.name for i in inputs]
    faults = [Fault("input", name, "", "a name used once") for name in sorted({n for n in names if names.count(n) > 1})]
    found: dict[str, list[tuple[int, Component]]] = {}
    for row, (name, components) in enumerate([(i.name, i.components) for i in inputs] + [("", tuple(on_result))]):
        for c in components:
            found.setdefault(label_of(name, c), []).append((row, c))
    for label, uses in found.items():
        if len({(c.distribution, c.dof) for _, c in uses}) > 1:
            faults.append(Fault(f"shared cause '{label}'", "different distributions or degrees of freedom", "",
                                "the same in every input it reaches"))
    if faults:
        raise InputError(*faults)
    spread = np.zeros((len(names) + 1, len(found)))
    for column, uses in enumerate(found.values()):
        for row, c in uses:
            spread[row, column] += c.sign * c.u
    reached = tuple(tuple(dict.fromkeys((names + ["result"])[row] for row, _ in uses)) for uses in found.values())
    first = tuple(uses[0][1] for uses in found.values())
    groups = tuple(c.group or c.source or q[0] for c, q in zip(first, reached, strict=True))
    return Sources(tuple(found), groups, first, reached, spread, _correlation_matrix(found, names, correlations or {}))


def label_of(quantity: str, component: Component) -> str:
    """The name a cause goes by in the budget: its ``source``, else "quantity: name"."""
    return component.source or (f"{quantity}: {component.name}" if quantity else component.name)


def correlations_from_matrix(names: Sequence[str], matrix) -> dict[tuple[str, str], float]:
    """A matrix of coefficients, shape (n, n), as the pairs that the engines take.

    >>> correlations_from_matrix(["V", "I"], [[1, -0.36], [-0.36, 1]])
    {('V', 'I'): -0.36}
    """
    r = series("correlation matrix", matrix)
    n = len(names)
    if r.shape != (n, n) or not (np.array_equal(r, r.T) and np.array_equal(np.diag(r), np.ones(n))):
        raise InputError(Fault("correlation matrix", f"shape {r.shape}", "",
                               f"a symmetric {n} by {n} matrix with ones on its diagonal"))
    return {(names[i], names[j]): float(r[i, j]) for i in range(n) for j in range(i + 1, n) if r[i, j]}


def linked(correlation: np.ndarray) -> np.ndarray:
    """For each cause the first cause it is correlated with, directly or through others."""
    reach = correlation != 0
    for _ in range(len(reach)):
        reach = reach @ reach
    return reach.argmax(axis=1) if len(reach) else np.zeros(0, dtype=int)


def evaluate(model: Model, arguments: Mapping[str, np.ndarray]) -> tuple[np.ndarray, np.ndarray | None]:
    """Call the model once; give its values and, if it says so, a status for each.

    A model takes arrays of one shape by name and returns an array of that shape, or a pair (values,
    status). Where it has no result the value is NaN.
    """
    answer = model(**arguments)
    values, status = answer if isinstance(answer, tuple) else (answer, None)
    values = np.asarray(values, dtype=float)
    shape = np.broadcast_shapes(*(np.shape(a) for a in arguments.values()))
    if values.shape != shape:
        raise InputError(Fault("model result", f"shape {values.shape}", "", f"the shape of its arguments, {shape}"))
    if (np.isfinite(values) & (np.abs(values) > MOST)).any():
        raise InputError(Fault("model result", float(np.nanmax(np.abs(values))), "", f"sizes up to {MOST:g}"))
    return values, None if status is None else np.asarray(status)


def _correlation_matrix(found: Mapping, names: Sequence[str], correlations: Correlations) -> np.ndarray:
    labels = list(found)
    alone = {}  # a quantity with one cause may be named instead of it
    for row, name in enumerate(names):
        its = [label for label, uses in found.items() if row in [r for r, _ in uses]]
        if len(its) == 1:
            alone[name] = its[0]
    r, faults = np.eye(len(labels)), []
    for pair, value in correlations.items():
        places = [labels.index(label) for name in pair if (label := alone.get(name, name)) in found]
        if len(places) != 2 or places[0] == places[1]:
            faults.append(Fault("correlation", " and ".join(map(str, pair)), "", "two different causes of the budget",
                                hint="its causes are: " + ", ".join(labels)))
        elif not -1 <= number(value) <= 1:
            faults.append(Fault(f"correlation of {' and '.join(pair)}", shown(value), "", "a number from -1 to 1"))
        else:
            r[places[0], places[1]] = r[places[1], places[0]] = value
    if not faults and len(labels) and not np.linalg.eigvalsh(r)[0] > -1e-9:
        faults.append(Fault("correlations", "taken together", "", "a positive semi-definite matrix",
                            why="no set of readings can have these coefficients at once",
                            hint="take all of them from the same readings"))
    if faults:
        raise InputError(*faults)
    return r
