"""The one error family: faults as data, messages made from them, all bad inputs at once."""

import copy
import pickle

import numpy as np
import pytest

from engine.steam import Fault, InputError, state_ph, state_ps, vapour
from engine.steam.quantities import QUANTITIES
from engine.steam.status import SENTENCES, SteamStatus
from engine.steam.units import UNITS

FULL = Fault("exhaust temperature", 372.35, "K", "more than 372.76 K", why="a reason", hint="what to do",
             name="T_exhaust", index=(2, 7))


def test_a_fault_says_which_got_allowed_why_and_what_to_do():
    assert str(FULL).splitlines() == ["exhaust temperature at position 2, 7: got 372.35 K, needs more than 372.76 K",
                                      "  - a reason", "  - what to do"]


def test_a_fault_leaves_out_what_it_has_not():
    assert str(Fault("quality", 1.2, "", "0 to 1")) == "quality: got 1.2, needs 0 to 1"
    assert str(Fault("quality", 97.0, "1", "0 to 1")) == "quality: got 97, needs 0 to 1"
    assert str(Fault("unit", "furlong", "", "one of: m")) == "unit: got furlong, needs one of: m"
    assert str(Fault("pressure", float("nan"), "Pa", "a number")) == "pressure: got nan Pa, needs a number"
    assert str(Fault("pressure", 1.0, "Pa", "more", index=(0,))).startswith("pressure at position 0: got 1 Pa")


def test_a_fault_is_data_and_stays_as_it_is():
    with pytest.raises(AttributeError):
        FULL.value = 400.0
    assert Fault("a", 1, "", "b") == Fault("a", 1, "", "b")


def test_an_input_error_is_a_value_error_with_all_its_faults():
    other = Fault("pressure", -1.0, "Pa", "more than 0 Pa")
    error = InputError(FULL, other)
    assert isinstance(error, ValueError)
    assert error.faults == (FULL, other)
    assert str(error) == f"{FULL}\n{other}"


@pytest.mark.parametrize("again", [lambda e: pickle.loads(pickle.dumps(e)), copy.copy, copy.deepcopy],
                         ids=["pickle", "copy", "deepcopy"])
def test_an_input_error_survives_the_way_to_another_process(again):
    error = InputError(FULL, Fault("pressure", "high", "Pa", "a number"))
    twin = again(error)
    assert type(twin) is InputError
    assert twin.faults == error.faults and str(twin) == str(error)


def test_a_raised_error_survives_it_too():
    with pytest.raises(InputError) as caught:
        vapour(-1.0, 5000.0)
    assert pickle.loads(pickle.dumps(caught.value)).faults == caught.value.faults != ()


@pytest.mark.parametrize(("function", "arguments", "names"), [
    (vapour, (-1.0, 5000.0), ["p", "T"]),
    (vapour, (np.nan, np.nan), ["p", "T"]),
    (vapour, (1e5, 300.0), ["T"]),
    (state_ph, (-1.0, np.nan), ["p", "h"]),
    (state_ph, (-1.0, 2.6e6), ["p"]),  # of h nothing can be said without a pressure
    (state_ps, (np.inf, np.inf), ["p", "s"]),
    (state_ps, (1e5, -1.0), ["s"]),
], ids=str)
def test_all_bad_inputs_at_once(function, arguments, names):
    with pytest.raises(InputError) as caught:
        function(*arguments)
    assert [fault.name for fault in caught.value.faults] == names
    assert all(fault.limit and fault.quantity == QUANTITIES[fault.name].label for fault in caught.value.faults)


def test_every_status_has_its_sentence():
    assert set(SENTENCES) == set(SteamStatus)
    assert all(sentence.endswith(".") for sentence in SENTENCES.values())


@pytest.mark.parametrize("quantity", QUANTITIES.values(), ids=lambda quantity: quantity.name)
def test_every_quantity_has_a_unit_of_its_kind(quantity):
    assert next(iter(UNITS[quantity.kind])) == quantity.unit
    assert quantity.symbol and quantity.label == quantity.label.strip() != ""
