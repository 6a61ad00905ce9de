"""Velocities, kinetic energy and bores: contract, consistency and directions (values: verification_throttle.py)."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.calorimeter import (
    bore_ratio_keeping_velocity,
    kinetic_energy,
    kinetic_quality,
    kinetic_superheat,
    least_exhaust_bore,
    quality,
    velocity,
    velocity_ratio,
)
from engine.steam import InputError, saturated, saturation_temperature, vapour
from engine.steam.quantities import QUANTITIES

CALLS = {
    velocity: {"sample_flow": 0.01, "bore": 0.0157, "v": 1.79},
    velocity_ratio: {"v_line": 0.19, "v_exhaust": 1.79, "line_bore": 0.01, "exhaust_bore": 0.025},
    bore_ratio_keeping_velocity: {"v_line": 0.19, "v_exhaust": 1.79},
    kinetic_energy: {"velocity": 80.0},
    kinetic_superheat: {"velocity": 80.0, "p": 101_325.0, "T": 400.0},
    kinetic_quality: {"velocity": 80.0, "p_line": 1e6},
    least_exhaust_bore: {"sample_flow": 0.01, "v_exhaust": 1.79, "p_line": 1e6, "kinetic_error": 1e-3},
}
ZERO_ALLOWED = {velocity: ("sample_flow",)} | dict.fromkeys((kinetic_energy, kinetic_superheat, kinetic_quality),
                                                               ("velocity",))
each = pytest.mark.parametrize("function", CALLS, ids=lambda f: f.__name__)


@each
def test_scalars_arrays_shapes_and_empty(function):
    call = CALLS[function]
    one = function(**call)
    assert type(one) is float
    first, *rest = call
    arrays = {first: np.full((3, 1), call[first])} | {k: np.full(2, call[k]) for k in rest[:1]}
    for a in arrays.values():
        a.setflags(write=False)
    many = function(**(call | arrays))
    assert many.shape == ((3, 2) if rest else (3, 1))
    np.testing.assert_allclose(many, one, rtol=1e-13)
    assert function(**(call | {first: []})).shape == (0,)


@each
def test_refusals_name_everything_at_once(function):
    call = CALLS[function]
    for bad in (np.nan, np.inf, -1.0):
        with pytest.raises(InputError) as caught:
            function(**dict.fromkeys(call, bad))
        assert [f.quantity for f in caught.value.faults] == [QUANTITIES[n].label for n in call]
    first = next(iter(call))
    allowed = "0 or more" if first in ZERO_ALLOWED.get(function, ()) else "more than 0"
    with pytest.raises(InputError) as caught:
        function(**(call | {first: np.array([call[first], -2.0])}))
    unit = QUANTITIES[first].unit
    assert str(caught.value) == (
        f"{QUANTITIES[first].label} at position 1: got -2 {unit}, needs {allowed}, and finite\n"
        "  - it is the size of something that is there\n  - check the value and its unit")


def test_zero_is_a_velocity_and_no_bore():
    assert velocity(0.0, 0.0157, 1.79) == kinetic_energy(0.0) == 0.0
    assert kinetic_quality(0.0, 1e6) == kinetic_superheat(0.0, 1e5, 400.0) == 0.0
    with pytest.raises(InputError, match="orifice bore: got 0 m, needs more than 0"):
        velocity(0.01, 0.0, 1.79)


def test_states_outside_the_equations_are_refused():
    with pytest.raises(InputError, match="temperature: got 5000 K, needs at most 1073.15 K"):
        kinetic_superheat(80.0, 1e5, 5000.0)
    with pytest.raises(InputError, match="line pressure: got 100 Pa, needs 611.657 Pa"):
        kinetic_quality(80.0, 100.0)
    with pytest.raises(InputError, match="pressure: got 1e.08 Pa") as caught:
        kinetic_superheat(80.0, 1e8, 5000.0)
    assert len(caught.value.faults) == 2


def test_below_saturation_the_superheat_is_counted_at_saturation():
    T = saturation_temperature(1e5)
    assert kinetic_superheat(80.0, 1e5, T - 20.0) == kinetic_superheat(80.0, 1e5, T)


@settings(deadline=None)
@given(st.floats(1e-4, 0.1), st.floats(2e-3, 0.1), st.floats(0.05, 30.0), st.floats(1.2, 40.0))
def test_ratios_follow_from_velocities(flow, d1, v1, growth):
    v2, d2 = v1 * growth, 1.7 * d1
    ratio = velocity(flow, d2, v2) / velocity(flow, d1, v1)
    assert velocity_ratio(v1, v2, d1, d2) == pytest.approx(ratio, rel=1e-12)
    keeping = bore_ratio_keeping_velocity(v1, v2)
    assert velocity_ratio(v1, v2, d1, d1 * keeping) == pytest.approx(1.0, rel=1e-12)
    assert velocity_ratio(v1, v2, d1, d1) == pytest.approx(growth, rel=1e-12)


@settings(deadline=None)
@given(st.floats(1e-4, 0.1), st.floats(0.05, 30.0), st.floats(1.2e5, 165e5), st.floats(1e-5, 0.05))
def test_the_least_bore_has_just_the_allowed_error(flow, v, p, error):
    bore = least_exhaust_bore(flow, v, p, error)
    assert kinetic_quality(velocity(flow, bore, v), p) == pytest.approx(error, rel=1e-12)


def test_the_kinetic_term_is_what_quality_gains_from_it():
    """A probe that reads the stream itself (r = 0): the answer with and without the exhaust velocity."""
    c, p1, T = np.array([0.0, 30.0, 100.0, 200.0]), 10e5, 400.0
    x = quality(p1, 101_325.0, T, exhaust_velocity=c, recovery=0.0).x
    np.testing.assert_allclose(x - x[0], kinetic_quality(c, p1), atol=1e-14)
    with_line = quality(p1, 101_325.0, T, line_velocity=30.0).x
    assert x[0] - with_line == pytest.approx(kinetic_quality(30.0, p1), abs=1e-14)


def test_one_kinetic_energy_in_three_measures():
    c, p, T, p1 = 100.0, 101_325.0, 403.15, 10e5
    assert kinetic_superheat(c, p, T) * vapour(p, T).cp == pytest.approx(kinetic_energy(c), rel=1e-13)
    sat = saturated(p1)
    assert kinetic_quality(c, p1) * (sat.h_g - sat.h_f) == pytest.approx(kinetic_energy(c), rel=1e-13)
