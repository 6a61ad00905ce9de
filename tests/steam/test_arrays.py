"""The array contract, over every public function of the floor at once."""

import tracemalloc
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from engine.steam import (
    InputError,
    SteamStatus,
    arrays,
    conductivity,
    if97,
    saturated,
    saturation_pressure,
    saturation_temperature,
    state_ph,
    state_ps,
    vapour,
    viscosity,
)
from engine.steam.arrays import BLOCK, LISTED, as_floats, at_the_door, in_blocks, refuse_outside

# function -> one valid set of arguments, whole numbers so that integer arrays can be tried
CASES = {
    saturation_temperature: (100_000,),
    saturation_pressure: (400,),
    saturated: (100_000,),
    vapour: (100_000, 400),
    state_ph: (100_000, 2_600_000),
    state_ps: (100_000, 7_500),
    viscosity: (1, 400),
    conductivity: (1, 400),
}
FUNCTIONS = pytest.mark.parametrize("function", CASES, ids=lambda function: function.__name__)
WITH_STATUS = (saturated, vapour, state_ph, state_ps)


def outputs(result) -> tuple:
    return tuple(result) if isinstance(result, tuple) else (result,)


@FUNCTIONS
def test_single_numbers_give_python_floats(function):
    for given in (CASES[function], [float(a) for a in CASES[function]], [np.float64(a) for a in CASES[function]],
                  [np.int32(a) for a in CASES[function]], [np.array(float(a)) for a in CASES[function]]):
        result = outputs(function(*given))
        assert [type(v) for v in result[:1]] == [float]
        assert all(type(v) in (float, SteamStatus) for v in result)
        assert result == outputs(function(*CASES[function]))


@FUNCTIONS
@pytest.mark.parametrize("shape", [(1,), (7,), (0,), (3, 4), (2, 0), (2, 3, 2), (BLOCK,), (BLOCK + 1,)], ids=str)
def test_shapes_are_kept(function, shape):
    if function in (viscosity, conductivity) and np.prod(shape) > 100:
        shape = (100,)  # element by element inside
    single = outputs(function(*CASES[function]))
    for value, one in zip(outputs(function(*(np.full(shape, float(a)) for a in CASES[function]))), single, strict=True):
        assert value.shape == shape
        np.testing.assert_allclose(value, float(one), rtol=1e-13)


@FUNCTIONS
def test_lists_tuples_integers_and_single_precision(function):
    single = outputs(function(*CASES[function]))
    for make in (lambda a: [a, a], lambda a: (a, a), lambda a: np.array([a, a]), lambda a: np.array([a, a], np.uint32),
                 lambda a: np.array([a, a], np.float32)):
        result = outputs(function(*map(make, CASES[function])))
        assert all(value.shape == (2,) for value in result)
        assert result[0].dtype == np.float64
        np.testing.assert_allclose(result[0], single[0], rtol=1e-13)


@FUNCTIONS
def test_nested_lists_and_empty_lists(function):
    assert all(value.shape == (1, 2) for value in outputs(function(*([[a, a]] for a in CASES[function]))))
    assert all(value.shape == (0,) for value in outputs(function(*([] for _ in CASES[function]))))


@pytest.mark.parametrize("function", [vapour, state_ph, state_ps, viscosity, conductivity])
def test_inputs_broadcast_together(function):
    a, b = CASES[function]
    single = outputs(function(a, b))
    for first, second in ((np.full((3, 1), a), np.full(4, b)), (a, np.full((3, 4), b)), (np.full((3, 4), a), b)):
        for value, one in zip(outputs(function(first, second)), single, strict=True):
            assert value.shape == (3, 4)
            np.testing.assert_allclose(value, float(one), rtol=1e-13)
    assert outputs(function([], b))[0].shape == (0,)


@pytest.mark.parametrize("function", [vapour, state_ph, state_ps])
def test_a_single_value_with_a_long_array(function):
    """Longer than a block, one input constant: it is spelled out for one block only, the last of which is shorter."""
    a, b = CASES[function]
    first = np.linspace(a, 1.1 * a, 2 * BLOCK + 77)
    for value, full in zip(function(first, b), function(first, np.full(first.shape, b)), strict=True):
        np.testing.assert_array_equal(value, full)
    for value, full in zip(function(a, np.full(first.shape, b)), function(np.full(first.shape, a), b), strict=True):
        np.testing.assert_array_equal(value, full)


@FUNCTIONS
def test_strided_reversed_and_transposed_arrays(function):
    rng = np.random.default_rng(0)
    whole = [a * (1 + 0.01 * rng.random((6, 8))) for a in CASES[function]]
    for view in (lambda a: a[:, ::2], lambda a: a[::-1], lambda a: a.T, lambda a: a[1::2, ::-3], np.asfortranarray):
        straight = outputs(function(*(np.ascontiguousarray(view(a)) for a in whole)))
        for value, expected in zip(outputs(function(*map(view, whole))), straight, strict=True):
            np.testing.assert_array_equal(value, expected)


@FUNCTIONS
def test_inputs_are_neither_modified_nor_handed_back(function):
    size = 3 * BLOCK if function in WITH_STATUS else 300
    given = [np.full(size, float(a)) for a in CASES[function]]
    if function in WITH_STATUS:
        given[0][5] = np.nan
    before = [a.copy() for a in given]
    for a in given:
        a.setflags(write=False)
    for value in outputs(function(*given)):
        assert not any(np.shares_memory(value, a) for a in given)
        value[...] = 0  # and the results belong to the caller
    for a, b in zip(given, before, strict=True):
        np.testing.assert_array_equal(a, b)


@FUNCTIONS
def test_a_single_value_equals_its_element(function):
    """To rounding, as few points are raised by pow() and many by products.

    A searched temperature is good to 5e-7 K, and an element gets the steps that its slowest neighbour needs.
    """
    rel = 1e-9 if function in (state_ph, state_ps) else 1e-12
    rng = np.random.default_rng(1)
    given = [a * (1 + 0.2 * rng.random(200)) for a in CASES[function]]
    many = outputs(function(*given))
    for k in range(0, 200, 10):
        for value, one in zip(many, outputs(function(*(float(a[k]) for a in given))), strict=True):
            assert float(value[k]) == pytest.approx(float(one), rel=rel)


@pytest.mark.parametrize("function", WITH_STATUS)
def test_no_number_without_a_status_and_no_nan_without_a_reason(function):
    good = CASES[function]
    columns = [np.full(6, float(a)) for a in good]
    columns[0][1:4] = np.nan, np.inf, -1.0
    columns[-1][4] = np.nan
    *values, status = function(*columns)
    expected = [function(*good).status, SteamStatus.MISSING, SteamStatus.OUT_OF_RANGE, SteamStatus.OUT_OF_RANGE,
                SteamStatus.MISSING, function(*good).status]
    assert status.tolist() == expected and status.dtype == np.int8
    for value in values:
        assert np.isnan(value).tolist() == [s > SteamStatus.SUPERHEATED for s in expected]


@pytest.mark.parametrize("function", [saturation_temperature, saturation_pressure, viscosity, conductivity])
def test_functions_without_a_status_refuse_the_whole_array(function):
    columns = [np.full(6, float(a)) for a in CASES[function]]
    columns[0][3] = np.nan
    with pytest.raises(InputError, match="at position 3: got nan"):
        function(*columns)


@FUNCTIONS
@pytest.mark.parametrize("bad", ["1e5", None, 1j, True, [1.0, None], ["a"], object(), [[1.0], [1.0, 2.0]]], ids=repr)
def test_what_is_not_a_real_number_is_refused(function, bad):
    with pytest.raises(InputError, match="needs a number or an array of numbers"):
        function(*(bad for _ in CASES[function]))


@pytest.mark.parametrize("function", [vapour, state_ph, state_ps])
def test_shapes_that_do_not_go_together_are_refused(function):
    with pytest.raises(InputError, match=r"array shapes: got p \(2,\), . \(3,\), needs shapes that broadcast"):
        function([1e5, 1e5], [400.0] * 3)


def test_eight_threads_get_what_one_gets():
    """The work space of the kernels belongs to a thread; calls of several sizes run into one another here."""
    rng = np.random.default_rng(2)
    jobs = [(rng.uniform(1e4, 1e6, n), rng.uniform(500, 900, n)) for n in rng.integers(1, 2 * BLOCK, 24)]
    alone = [(vapour(p, T), state_ph(p, 2.6e6 + 1e3 * T), saturated(p)) for p, T in jobs]
    with ThreadPoolExecutor(8) as pool:
        together = list(pool.map(lambda job: (vapour(*job), state_ph(job[0], 2.6e6 + 1e3 * job[1]),
                                              saturated(job[0])), jobs))
    for expected, got in zip(alone, together, strict=True):
        for a, b in zip(expected, got, strict=True):
            for left, right in zip(a, b, strict=True):
                np.testing.assert_array_equal(left, right)


def test_results_do_not_lie_in_the_work_space():
    """A later call must not change what an earlier one gave back."""
    first = if97.vapour_hsv(np.full(100, 1e5), np.full(100, 400.0))
    kept = [a.copy() for a in first]
    if97.vapour_hsv(np.full(100, 5e5), np.full(100, 700.0))
    for a, b in zip(first, kept, strict=True):
        np.testing.assert_array_equal(a, b)


def test_memory_stays_at_inputs_outputs_and_a_few_blocks():
    size = 50 * BLOCK
    p, T = np.full(size, 1e5), np.linspace(400.0, 500.0, size)
    vapour(p, T)  # the work space is there
    tracemalloc.start()
    result = vapour(p, T)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    given_back = sum(v.nbytes for v in result)
    # the status is worked out in a float64 row before it becomes one byte an element
    assert peak < given_back + 8 * size + 40 * BLOCK * 8


# --- the parts -------------------------------------------------------------------------------------


def test_as_floats_keeps_float64_arrays_as_they_are():
    a = np.arange(3.0)
    assert as_floats(a) is a
    assert as_floats(np.arange(3, dtype=np.int8)).dtype == np.float64
    assert as_floats([]).shape == (0,) and as_floats(7).shape == ()


def test_what_a_mask_hides_is_missing():
    hidden = np.ma.masked_array([1e5, 2e5], mask=[True, False])
    assert saturated(hidden).status.tolist() == [SteamStatus.MISSING, SteamStatus.WET]
    assert as_floats(np.ma.masked_array([1, 2])).tolist() == [1.0, 2.0]


def test_at_the_door_names_every_argument_that_is_no_number():
    with pytest.raises(InputError) as caught:
        at_the_door(p="high", T=None, h=1.0)
    assert [fault.name for fault in caught.value.faults] == ["p", "T"]
    assert str(caught.value).splitlines() == ["pressure: got 'high' Pa, needs a number or an array of numbers",
                                              "temperature: got None K, needs a number or an array of numbers"]


def test_a_long_list_is_not_read_out():
    with pytest.raises(InputError) as caught:
        at_the_door(p=[1.0] * 100_000 + [None])
    assert len(str(caught.value)) < 200


def test_in_blocks_calls_the_kernel_on_each_element_once(monkeypatch):
    monkeypatch.setattr(arrays, "BLOCK", 4)
    seen = []

    def kernel(a, b):
        seen.append(a.size)
        return a + b, a - b

    a, b = np.arange(10.0).reshape(2, 5), np.broadcast_to(1.0, (2, 5))
    total, difference = in_blocks(kernel, 2, a, b)
    assert seen == [4, 4, 2]
    np.testing.assert_array_equal(total, a + 1)
    np.testing.assert_array_equal(difference, a - 1)


def test_refuse_outside_spells_out_a_few_and_counts_the_rest():
    p = np.array([[1e5, np.nan], [-1.0, 2e5]])
    two = refuse_outside("p", p, p > 0, "more than 0", why="a reason", hint="a hint")
    assert [(f.index, f.hint) for f in two] == [((0, 1), "a hint"), ((1, 0), "a hint")]
    many = refuse_outside("p", np.zeros(1000), np.zeros(1000, bool), "more than 0", hint="a hint")
    assert len(many) == LISTED
    assert many[-1].hint == "a hint; 995 more elements like this one" and many[0].hint == "a hint"
    assert refuse_outside("p", np.empty(0), np.empty(0, bool), "anything") == []
    assert refuse_outside("p", np.array(1.0), np.array(True), "anything") == []
