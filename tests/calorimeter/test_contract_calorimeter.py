"""Every function of the calorimeter floor, called with anything: answered or refused, never anything else."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import engine.calorimeter as rig
from tests.calorimeter.usual_calls import CALLS, WITH_STATUS
from tests.contract import NONSENSE, arrays, call, calls, check_numbers, keep, near, parts, profile, public_functions

TERMS = {"heat_loss": 3e3, "line_velocity": 25.0, "exhaust_velocity": 60.0, "recovery": 0.7}
LINE = {"p_line": 1e6, "p_exhaust": 101_325.0}
MARGINS = {"least_superheat": 5.0, "comfortable_superheat": 10.0}


def choices(*usual):
    """A choice that is mostly one of those there are."""
    return st.sampled_from(usual) | st.sampled_from(usual) | NONSENSE


OPTIONS = {  # what may be given besides
    rig.stem_error: {"liquid": choices("mercury", "organic", None), "stem_coefficient": st.none() | near(1.6e-4)},
    rig.immersion_error: {"conductivity": 16.0}, rig.immersion_for: {"conductivity": 16.0},
    rig.radiation_error: {"emissivity": 0.85},
    rig.lag_error: {"rate": 0.01},
    rig.probe_time_constant: {"density": 7900.0, "cp": 480.0},
    rig.exhaust_pipe: {"roughness": 4.6e-5, "loss_coefficient": 2.0},
    rig.orifice_flow: {"weighed": 0.008},
    rig.wetness_sampled: {"wall_film": 0.2}, rig.wetness_in_line: {"wall_film": 0.2},
    rig.sample_bias: {"wall_film": 0.2},
    rig.pipe_conductance: {"film": 100.0, "lagging": 0.025, "conductivity": 0.055, "outer_film": 10.0},
    rig.body_heat_capacity: {"cp": 490.0},
    rig.separated_reading: {"p_separator": 7.9e5, "vessel_loss": 500.0} | TERMS,
    rig.drain_needed: {"superheat": 5.0, "p_separator": 7.9e5, "vessel_loss": 500.0} | TERMS,
    rig.combined_quality: {"p_separator": 7.9e5, "vessel_loss": 500.0},
    rig.drained_fraction: {"p_separator": 7.9e5, "vessel_loss": 500.0},
    rig.separated_quality: {"p_separator": 7.9e5, "vessel_loss": 500.0} | TERMS,
    rig.electric_quality: {"power_loss": 20.0, "least_superheat": 2.0},
    rig.heater_reading: {"power_loss": 20.0, "least_superheat": 2.0},
    rig.least_electric_quality: {"superheat": 5.0, "power_loss": 20.0},
    rig.power_needed: {"superheat": 5.0, "power_loss": 20.0},
}
USUAL = {function: usual | OPTIONS.get(function, {}) for function, usual in (CALLS | WITH_STATUS).items()} | {
    rig.quality: LINE | {"T_exhaust": 400.0, "least_superheat": 2.0} | TERMS,
    rig.exhaust_temperature: LINE | {"x": 0.98, "least_superheat": 2.0} | TERMS,
    rig.least_quality: LINE | {"superheat": 5.0} | TERMS,
    rig.exhaust_pressure_for: {"p_line": 1e6, "x": 0.97, "superheat": 5.0} | TERMS,
    rig.line_pressure_window: {"p_exhaust": 101_325.0, "x": 0.97, "superheat": 5.0} | TERMS,
    rig.reach: LINE | MARGINS | {"x_low": 0.96, "x_high": 0.99, "U_thermometer": 0.5} | TERMS,
    rig.critical_flow: {"p_line": 1e6, "x": 0.98},
    rig.critical_mass_flux: {"p_line": 1e6, "x": 0.98},
    rig.velocity: {"sample_flow": 0.008, "bore": 0.025, "v": 1.7},
    rig.kinetic_energy: {"velocity": 60.0},
    rig.kinetic_quality: {"velocity": 60.0, "p_line": 1e6},
    rig.kinetic_superheat: {"velocity": 60.0, "p": 1e5, "T": 400.0},
    rig.velocity_ratio: {"v_line": 0.2, "v_exhaust": 1.8, "line_bore": 0.02, "exhaust_bore": 0.05},
    rig.bore_ratio_keeping_velocity: {"v_line": 0.2, "v_exhaust": 1.8},
    rig.least_exhaust_bore: {"sample_flow": 0.008, "v_exhaust": 1.8, "p_line": 1e6, "kinetic_error": 1e-3},
}
SINGLE = {  # for single values
    rig.ways_out: LINE | TERMS | {"x": 0.94, "superheat": 5.0, "sample_flow": 0.008, "U_quality": 1e-3,
                                  "p_exhaust_lowest": 1e4, "water_share": 0.9},
    rig.reading_chart: LINE | TERMS | MARGINS | {"unit": choices("°C", "°F", "K"),
                                                 "step": st.none() | near(2.0) | NONSENSE},
}
PATHS = {
    rig.isenthalpic_path: LINE | {"x": 0.98, "points": choices(33, 2, 3)},
    rig.isenthalpic_path_at: LINE | {"h_line": 2.73e6, "points": choices(33, 2, 3)},
    rig.constant_bore_path: LINE | {"x": 0.98, "line_velocity": 20.0, "points": choices(33, 5)},
}
RUNS = {rig.body_temperature: "time", rig.reading_error: "time", rig.storage_heat: "time",
        rig.time_to_within: "temperature_error"}
OWN = {rig.reach_map, rig.fit_two_flows, rig.chosen_heat_loss, rig.corrected_temperature, rig.fittings_loss,
       rig.reasons}
# NaN by what they mean, beside an answer: a bound where there is a value, a margin where nothing is asked of it
APART = {rig.quality: {"x_bound"}, rig.electric_quality: {"x_bound"}, rig.separated_quality: {"x_bound"}}


def test_every_public_function_is_under_the_contract():
    assert public_functions(rig) == set(USUAL) | set(SINGLE) | set(PATHS) | set(RUNS) | OWN


named = pytest.mark.parametrize("function", USUAL, ids=lambda f: f.__name__)


@named
@profile(12)
@given(data=st.data())
def test_whatever_goes_in_is_answered_or_refused(function, data):
    keep(function, USUAL[function], data.draw(calls(USUAL[function])), frozenset(APART.get(function, ())))


@pytest.mark.parametrize("function", SINGLE, ids=lambda f: f.__name__)
@profile(25)
@given(data=st.data())
def test_what_takes_single_values_is_answered_or_refused(function, data):
    result = call(function, data.draw(calls(SINGLE[function]))).result
    for name, value in parts(result):
        assert value is None or isinstance(value, str) or not np.isnan(value).any(), name


@pytest.mark.parametrize("function", PATHS, ids=lambda f: f.__name__)
@profile(25)
@given(data=st.data())
def test_a_path_is_whole_or_refused(function, data):
    given = data.draw(calls(PATHS[function]))
    path = call(function, given).result
    if path is not None:
        assert path.p.shape[-1] == given["points"]
        for name in ("p", "T", "x", "h", "s", "v", "velocity", "status"):
            values = getattr(path, name)
            assert values.shape == path.p.shape and np.isfinite(values).all(), name
        assert np.array_equal(np.isnan(path.p_dry), ~np.asarray(path.dries_out))
        assert (path.status <= 1).all()


@pytest.mark.parametrize("function", RUNS, ids=lambda f: f.__name__)
@profile(25)
@given(data=st.data())
def test_a_warm_up_is_followed_at_any_time(function, data):
    run = rig.warm_up(1470.0, 0.04, 25 / 3600, 101_325.0, 423.15, 293.15, 293.15)
    usual = {RUNS[function]: 60.0}
    keep(lambda **given: function(run, *given.values()), usual, data.draw(calls(usual)))


@profile(25)
@given(data=st.data())
def test_a_map_is_whole_or_refused(data):
    usual = LINE | TERMS | {"superheat": 5.0}
    found = call(rig.reach_map, data.draw(calls(usual))).result
    if found is not None:
        shape = (found.p_exhaust.size, found.p_line.size)
        assert found.wetness.shape == found.status.shape == shape
        assert ((found.wetness >= 0) & (found.wetness <= 1)).all()
        assert (found.wetness[found.status > 0] == 0).all()


@profile(40)
@given(data=st.data())
def test_two_flows_are_fitted_or_refused(data):
    n = data.draw(st.integers(0, 4))
    usual = {"sample_flow": 0.008, "p_exhaust": 101_325.0, "T_exhaust": 395.0, "T_mean": 420.0, "T_ambient": 295.0}
    given = data.draw(calls(usual))
    if data.draw(st.booleans()):
        given |= {"sample_flow": np.linspace(0.005, 0.011, n), "T_exhaust": data.draw(arrays(395.0))}
    fit = call(rig.fit_two_flows, given).result
    if fit is not None:
        assert all(np.isfinite(value).all() for _, value in parts(fit))


@profile(40)
@given(method=choices(*rig.LossMethod), heat_loss=st.none() | near(3e3) | arrays(3e3) | NONSENSE)
def test_a_chosen_heat_loss_is_a_number_or_refused(method, heat_loss):
    q = call(rig.chosen_heat_loss, {"method": method, "heat_loss": heat_loss}).result
    if q is not None:
        check_numbers(q, np.shape(heat_loss) if heat_loss is not None else ())


@profile(40)
@given(reading=near(398.0) | arrays(398.0) | NONSENSE, slope=st.floats(-3, 3), size=st.floats(-50, 50))
def test_a_corrected_temperature_is_a_number_or_refused(reading, slope, size):
    T = call(rig.corrected_temperature, {}, reading, lambda T: size + slope * (T - 400.0)).result
    if T is not None:
        check_numbers(T, np.shape(reading))


@profile(40)
@given(fittings=st.dictionaries(st.sampled_from(list(rig.FITTINGS)) | st.text(max_size=5),
                                st.integers(-1, 3) | NONSENSE, max_size=3) | NONSENSE,
       reynolds=near(3e4) | arrays(3e4) | NONSENSE, bore=near(0.0266) | NONSENSE)
def test_fittings_are_counted_or_refused(fittings, reynolds, bore):
    K = call(rig.fittings_loss, {"fittings": fittings, "reynolds": reynolds, "bore": bore}).result
    if K is not None:
        check_numbers(K, np.broadcast_shapes(np.shape(reynolds), np.shape(bore)))


@profile(40)
@given(status=st.lists(st.integers(-1, 7), max_size=5) | st.sampled_from(rig.Status) | NONSENSE)
def test_reasons_are_given_for_every_status(status):
    rows = call(rig.reasons, {"status": status}).result
    if rows is not None:
        assert sum(count for _, _, count, _ in rows) == np.size(status)
