"""Calls of a public function with anything, and the contract that each of them has to keep.

Numbers that are out of range, infinite or missing, text where a number belongs, arrays that do not go together:
whatever goes in, a function either answers in full or refuses with InputError, and leaves what it was given alone.
"""

from __future__ import annotations

import copy
import math
import os
from collections.abc import Callable, Iterator, Mapping
from enum import Enum
from typing import NamedTuple

import numpy as np
from hypothesis import HealthCheck, settings
from hypothesis import strategies as st

from engine.steam.errors import InputError

EXAMPLES = int(os.environ.get("CONTRACT_EXAMPLES", "0"))  # of each function; see DEVELOPERS.md


def profile(usual: int, share: float = 1.0):
    """How many examples: few and always the same ones, or as many new ones as CONTRACT_EXAMPLES says.

    ``share`` is the part of them for a function whose single call takes long.
    """
    many = max(int(EXAMPLES * share), 1)
    return settings(max_examples=many if EXAMPLES else usual, derandomize=not EXAMPLES, database=None, deadline=None,
                    suppress_health_check=list(HealthCheck))


# ---- what goes in

EXTREMES = (0.0, -0.0, math.nan, math.inf, -math.inf, 5e-324, 1e-300, -1e-9, 1e-12, 1e16, 1e154, 1e300, -1e300,
            1.7976931348623157e308, 0, 1, -1, 10**18, -(10**400), 10**400)
WILD = st.sampled_from(EXTREMES) | st.floats()
NONSENSE = st.sampled_from((
    None, "", "12", "hot", "1,5", b"1", 1j, True, [], [1.0, [2.0, 3.0]], {}, {"value": 1}, object, print, (None,),
    ["a"], np.array(["1"]), np.array([None, 1.0]), np.array([1 + 2j]), np.datetime64("2025-01-01"), range(3),
    np.array([True, False]), np.ma.masked_array([1.0, 2.0], [False, True]), np.float32(3.0), np.int64(-3)))
SHAPES = st.sampled_from(((), (), (3,), (3,), (2, 1), (2, 3), (1,), (0,), (2, 0), (4,)))


def near(value: float) -> st.SearchStrategy[float]:
    """Numbers about a usual one: mostly so close that the call is answered."""
    about = st.floats(0.9, 1.1) | st.floats(0.999, 1.001) | st.floats(0.0, 4.0)
    return about.map(lambda factor: value * factor) if value else st.just(0.0) | st.floats(0.0, 0.1)


def numbers(value: float) -> st.SearchStrategy[float]:
    return near(value) | near(value) | near(value) | WILD


@st.composite
def arrays(draw, value: float) -> np.ndarray:
    shape = draw(SHAPES)
    element = draw(st.sampled_from((near(value), near(value), numbers(value))))
    size = math.prod(shape)
    values = draw(st.lists(element, min_size=size, max_size=size))
    fits = [v if isinstance(v, float) or abs(v) < 1e300 else (1e300 if v > 0 else -1e300) for v in values]
    return np.array(fits, dtype=float).reshape(shape)


class Record(NamedTuple):
    """An argument that is a record of ours: drawn, and never replaced by anything else."""

    drawn: st.SearchStrategy


@st.composite
def calls(draw, usual: Mapping[str, object]) -> dict[str, object]:
    """Arguments of one call. A float in ``usual`` is a number to vary; a strategy is drawn from; the rest stays."""
    kind = draw(st.sampled_from(("near", "one wild", "wild", "arrays", "arrays", "nonsense")))
    odd = draw(st.sampled_from(sorted(usual)))
    given = {}
    for name, value in usual.items():
        if isinstance(value, Record):
            given[name] = draw(value.drawn)
        elif kind == "nonsense" and name == odd:
            given[name] = draw(NONSENSE)
        elif isinstance(value, st.SearchStrategy):
            given[name] = draw(value)
        elif not isinstance(value, float):
            given[name] = value
        elif kind == "wild" or (kind == "one wild" and name == odd):
            given[name] = draw(WILD)
        elif kind == "arrays":
            given[name] = draw(near(value) | arrays(value))
        else:
            given[name] = draw(near(value))
    return given


# ---- what comes out

ANSWERED = 1  # the highest status that is an answer, of every kind of status


class Answer(NamedTuple):
    """What a call came to: a result, or None where it was refused."""

    result: object


def parts(result: object) -> Iterator[tuple[str, object]]:
    """The named values of a result, down into the records in it."""
    if hasattr(result, "_fields"):
        named = zip(result._fields, result, strict=True)
    elif hasattr(result, "__dataclass_fields__"):
        named = ((name, getattr(result, name)) for name in result.__dataclass_fields__)
    elif isinstance(result, Mapping):
        named = ((str(name), value) for name, value in result.items())
    elif isinstance(result, tuple | list):
        named = ((str(place), value) for place, value in enumerate(result))
    else:
        named = (("", result),)
        yield from named
        return
    for name, value in named:
        for inner, leaf in parts(value):
            yield f"{name}.{inner}".rstrip("."), leaf


def same(a: object, b: object) -> bool:
    if isinstance(a, np.ma.MaskedArray):
        return isinstance(b, np.ma.MaskedArray) and repr(a) == repr(b)
    if isinstance(a, np.ndarray):
        return isinstance(b, np.ndarray) and a.dtype == b.dtype and a.shape == b.shape and a.tobytes() == b.tobytes()
    return repr(a) == repr(b)


def call(function: Callable, given: Mapping[str, object], *positional: object) -> Answer:
    """Call and see to what holds for every call: one family of errors, whole faults, inputs as they were."""
    before = {name: copy.deepcopy(value) for name, value in given.items()}
    try:
        answer = Answer(function(*positional, **given))
    except InputError as error:
        assert error.faults and str(error)
        for fault in error.faults:
            assert fault.quantity and fault.limit, fault
            assert str(fault).startswith(fault.quantity) and ": got " in str(fault) and ", needs " in str(fault)
        answer = Answer(None)
    for name, value in before.items():
        assert same(value, given[name]), f"{name} was changed"
    return answer


def explained(result: object, name: str) -> object:
    """Where a NaN is said to be one: by a status that gives no answer."""
    return False if (status := status_of(result)) is None else ~(np.asarray(status) <= ANSWERED)


def status_of(result: object) -> object:
    return getattr(result, "status", getattr(result, "verdict", None))


def check_numbers(result: object, shape: tuple[int, ...], apart: frozenset[str] = frozenset()) -> None:
    """Python numbers for a scalar call, arrays of one shape otherwise, and no NaN that nothing explains.

    ``apart``: values that are NaN by what they mean wherever there is an answer, as a bound beside a value.
    """
    for name, value in parts(result):
        if value is None or isinstance(value, str | Enum | bool):
            continue
        if shape == ():
            assert type(value) in (int, float), f"{name} is a {type(value).__name__}: {value!r}"
        else:
            assert type(value) is np.ndarray and value.shape == shape, f"{name}: {np.shape(value)}, not {shape}"
        if name not in apart:
            bad = np.isnan(np.asarray(value, dtype=float)) & ~np.asarray(explained(result, name), dtype=bool)
            assert not bad.any(), f"{name} is NaN without a reason: {result}"


def shape_of(given: Mapping[str, object]) -> tuple[int, ...] | None:
    """What the arguments broadcast to; None where they do not go together, or are no numbers."""
    try:
        return np.broadcast_shapes(*(np.shape(value) for value in given.values()))
    except ValueError:
        return None


def check_elements(function: Callable, given: Mapping[str, object], varied: Mapping[str, object],
                   result: object) -> None:
    """An array call says of each element what a scalar call says of it alone."""
    shape = shape_of(varied)
    columns = dict(zip(varied, np.broadcast_arrays(*varied.values()), strict=True))
    refused = []
    for place in np.ndindex(shape):
        alone = call(function, {**given, **{name: float(column[place]) for name, column in columns.items()}}).result
        refused.append(alone is None)
        if result is None:
            continue
        if alone is None:
            assert (status := status_of(result)) is not None and status[place] > ANSWERED, f"{place} is refused alone"
            continue
        for (name, many), (_, one) in zip(parts(result), parts(alone), strict=True):
            if one is None or isinstance(one, str):
                assert many is None or many == one, name
            else:
                np.testing.assert_allclose(float(many[place]), float(one), rtol=1e-9, atol=1e-12, err_msg=name)
    assert result is not None or any(refused) or not refused, "refused, though each element is taken alone"


def keep(function: Callable, usual: Mapping[str, object], given: Mapping[str, object],
         apart: frozenset[str] = frozenset(), *, single: bool = False) -> None:
    """Everything that the contract asks of one call. ``single``: the function takes single values only."""
    result = call(function, given).result
    varied = {name: given[name] for name, value in usual.items() if isinstance(value, float)}
    shape = shape_of(varied)
    if shape is None:
        assert result is None, "shapes that do not go together are taken"
    if result is not None:
        check_numbers(result, () if single else shape, apart)
    if shape and not single and all(type(v) is float or type(v) is np.ndarray and v.dtype == float
                                    for v in varied.values()):
        check_elements(function, given, varied, result)


def public_functions(module) -> set[Callable]:
    """What a floor offers to be called, classes aside."""
    offered = (getattr(module, name) for name in module.__all__)
    return {thing for thing in offered if callable(thing) and not isinstance(thing, type)}
