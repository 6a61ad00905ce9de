"""Every function of the steam floor, called with anything: answered or refused, never anything else."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

import engine.steam as steam
from tests.contract import calls, keep, profile, public_functions

USUAL = {
    steam.saturated: {"p": 1e6},
    steam.saturation_pressure: {"T": 450.0},
    steam.saturation_temperature: {"p": 1e6},
    steam.state_ph: {"p": 1e6, "h": 2.7e6},
    steam.state_ps: {"p": 1e6, "s": 6500.0},
    steam.vapour: {"p": 1e5, "T": 400.0},
    steam.viscosity: {"density": 0.6, "T": 400.0},
    steam.conductivity: {"density": 0.6, "T": 400.0},
}
FIXED = {steam.dome}  # takes nothing


def test_every_public_function_is_under_the_contract():
    assert public_functions(steam) == set(USUAL) | FIXED


@pytest.mark.parametrize("function", USUAL, ids=lambda f: f.__name__)
@profile(60)
@given(data=st.data())
def test_whatever_goes_in_is_answered_or_refused(function, data):
    keep(function, USUAL[function], data.draw(calls(USUAL[function])))
