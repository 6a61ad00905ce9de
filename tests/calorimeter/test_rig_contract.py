"""One contract for every function of the rig: shapes, scalars, empty arrays, untouched inputs, refusals."""

import dataclasses
import inspect

import numpy as np
import pytest

import engine.calorimeter as rig
from engine.steam.errors import InputError
from engine.steam.quantities import QUANTITIES
from tests.calorimeter.usual_calls import CALLS, WITH_STATUS

ALL = CALLS | WITH_STATUS
SPECIAL = {rig.fittings_loss, rig.fit_two_flows, rig.chosen_heat_loss, rig.corrected_temperature,
           rig.body_temperature, rig.reading_error, rig.storage_heat, rig.time_to_within}


def parts(result):
    """The numbers of a result, whatever it is."""
    if dataclasses.is_dataclass(result):
        return [getattr(result, f.name) for f in dataclasses.fields(result) if f.name != "stages"]
    return list(result) if isinstance(result, tuple) else [result]


def numeric(call):
    return {k: v for k, v in call.items() if isinstance(v, float)}


def named(calls):
    return pytest.mark.parametrize("function", calls, ids=lambda f: f.__name__)


def test_every_public_function_of_the_rig_is_under_this_contract():
    modules = {"atmosphere", "thermometer", "friction", "orifice", "exhaust", "sampling", "heatloss", "warmup",
               "separating", "electric", "wet"}
    public = {f for f in vars(rig).values()
              if inspect.isfunction(f) and f.__module__.rsplit(".", 1)[1] in modules}
    assert public == set(ALL) | SPECIAL


@named(ALL)
def test_scalar_in_float_out(function):
    for value in parts(function(**ALL[function])):
        assert isinstance(value, (float, bool, int)) and not isinstance(value, np.generic)
        assert not np.isnan(value) or function in WITH_STATUS  # x_bound has a status beside it


@named(ALL)
def test_arrays_broadcast_and_agree_with_scalars(function):
    call = ALL[function]
    numbers = numeric(call)
    first, *rest = numbers
    arrays = {first: np.full((3, 1), numbers[first])} | {k: np.full(2, numbers[k]) for k in rest[:1]}
    shape = (3, 2) if rest else (3, 1)
    before = {k: v.copy() for k, v in arrays.items()}
    for one, many in zip(parts(function(**call)), parts(function(**(call | arrays))), strict=True):
        assert np.shape(many) == shape
        np.testing.assert_allclose(np.asarray(many, dtype=float), float(one), rtol=1e-12)
    for key, value in before.items():
        np.testing.assert_array_equal(arrays[key], value)


@named(ALL)
def test_empty_arrays_are_allowed(function):
    call = ALL[function]
    first = next(iter(numeric(call)))
    for value in parts(function(**(call | {first: np.array([])}))):
        assert np.shape(value) == (0,)


@named(ALL)
def test_nan_is_refused_and_named(function):
    call = ALL[function]
    for name in numeric(call):
        with pytest.raises(InputError, match="got nan"):
            function(**(call | {name: np.nan}))


@named(ALL)
def test_all_bad_inputs_are_named_at_once(function):
    call = ALL[function]
    names = list(numeric(call))
    with pytest.raises(InputError) as caught:
        function(**(call | dict.fromkeys(names, np.nan)))
    labels = {fault.quantity for fault in caught.value.faults}
    expected = {QUANTITIES[n].label for n in names}
    assert expected <= labels


@named(CALLS)
def test_a_bad_element_is_named_with_its_place(function):
    call = CALLS[function]
    first = next(iter(numeric(call)))
    with pytest.raises(InputError, match="at position 1: got nan"):
        function(**(call | {first: np.array([call[first], np.nan])}))


@named(WITH_STATUS)
def test_a_bad_element_gets_a_status_where_there_is_one(function):
    call = WITH_STATUS[function]
    for name in numeric(call):
        good = call[name]
        result = function(**(call | {name: np.array([good, np.nan, -np.inf])}))
        assert list(result.status) == [rig.Status.OK, rig.Status.MISSING, rig.Status.OUT_OF_RANGE]
        assert np.isfinite(result.x[0]) and np.isnan(result.x[1:]).all()


@named(ALL)
def test_text_is_refused(function):
    call = ALL[function]
    first = next(iter(numeric(call)))
    with pytest.raises(InputError, match="needs a number or an array of numbers"):
        function(**(call | {first: "12"}))


@named(ALL)
def test_shapes_that_do_not_go_together_are_refused(function):
    call = ALL[function]
    names = list(numeric(call))
    if len(names) > 1:
        with pytest.raises(InputError, match="broadcast"):
            function(**(call | {names[0]: np.full(2, call[names[0]]), names[1]: np.full(3, call[names[1]])}))
    else:
        assert names
