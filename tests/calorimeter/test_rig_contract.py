"""One contract for every function of the rig: shapes, scalars, empty arrays, untouched inputs, refusals."""

import dataclasses
import inspect

import numpy as np
import pytest

import engine.calorimeter as rig
from engine.steam.errors import InputError
from engine.steam.quantities import QUANTITIES

# function -> a complete set of numeric arguments in the middle of their ranges
CALLS = {
    rig.geopotential_altitude: {"altitude": 2600.0},
    rig.standard_pressure: {"altitude": 2600.0},
    rig.altitude_of_pressure: {"p_barometer": 80e3},
    rig.station_pressure: {"p_sea_level": 101e3, "altitude": 800.0},
    rig.leg_density: {"T_leg": 300.0},
    rig.water_leg: {"leg_height": 1.0, "T_leg": 300.0},
    rig.tapping_pressure: {"p_reading": 1e6, "leg_height": 1.0, "T_leg": 300.0},
    rig.stem_error: {"T_reading": 420.0, "T_stem": 310.0, "exposed": 80.0},
    rig.immersion_error: {"T_exhaust": 400.0, "T_head": 330.0, "immersion": 0.05, "outer_diameter": 0.006,
                          "inner_diameter": 0.004, "film": 100.0},
    rig.immersion_for: {"temperature_error": 0.1, "T_exhaust": 400.0, "T_head": 330.0, "outer_diameter": 0.006,
                        "inner_diameter": 0.004, "film": 100.0},
    rig.radiation_error: {"T_exhaust": 400.0, "T_wall": 390.0, "film": 100.0},
    rig.moving_stream_error: {"velocity": 50.0, "cp": 2010.0, "recovery": 0.7},
    rig.lag_error: {"time": 60.0, "time_constant": 30.0, "step": 5.0},
    rig.settling_time: {"step": 100.0, "temperature_error": 0.1, "time_constant": 60.0},
    rig.probe_time_constant: {"outer_diameter": 0.003, "film": 150.0},
    rig.cross_flow_film: {"mass_flux": 11.0, "outer_diameter": 0.006, "viscosity": 1.3e-5, "conductivity": 0.028,
                          "prandtl": 0.97},
    rig.steam_viscosity: {"density": 0.55, "T": 403.15},
    rig.friction_factor: {"reynolds": 3e4, "relative_roughness": 2e-3},
    rig.exhaust_velocity: {"sample_flow": 0.01, "exhaust_bore": 0.025, "p_exhaust": 1e5, "T_exhaust": 400.0},
    rig.exhaust_pipe: {"sample_flow": 0.01, "exhaust_bore": 0.025, "length": 2.0, "p_discharge": 1e5,
                       "T_exhaust": 400.0},
    rig.napier_mass_flux: {"p_line": 1e6, "p_exhaust": 1e5},
    rig.grashof_mass_flux: {"p_line": 1e6},
    rig.rateau_mass_flux: {"p_line": 1e6},
    rig.high_pressure_factor: {"p_line": 12e6},
    rig.flux_at: {"p_line": 1e6, "x": 0.98, "p_throat": 6e5},
    rig.orifice_mass_flux: {"p_line": 1e6, "x": 0.98, "p_exhaust": 1e5},
    rig.weighed_flow: {"mass": 5.0, "duration": 600.0},
    rig.orifice_flow: {"p_line": 1e6, "x": 0.98, "p_exhaust": 1e5, "bore": 0.003, "discharge": 0.85},
    rig.bore_for_flow: {"sample_flow": 0.008, "p_line": 1e6, "x": 0.98, "p_exhaust": 1e5, "discharge": 0.85},
    rig.discharge_from_flow: {"sample_flow": 0.008, "p_line": 1e6, "x": 0.98, "p_exhaust": 1e5, "bore": 0.003},
    rig.pipe_area: {"pipe_bore": 0.15},
    rig.pipe_velocity: {"line_flow": 2.0, "pipe_bore": 0.15, "p_line": 1e6, "x": 0.98},
    rig.isokinetic_port_area: {"sample_flow": 0.008, "line_flow": 2.0, "pipe_bore": 0.15},
    rig.isokinetic_sample_flow: {"port_area": 60e-6, "line_flow": 2.0, "pipe_bore": 0.15},
    rig.stokes_number: {"drop_diameter": 1e-5, "velocity": 25.0, "port_bore": 0.004, "p_line": 1e6},
    rig.aspiration_efficiency: {"velocity_ratio": 1.5, "stokes": 2.0},
    rig.wetness_sampled: {"wetness": 0.02, "aspiration": 1.3},
    rig.wetness_in_line: {"wetness_read": 0.02, "aspiration": 1.3},
    rig.sample_bias: {"wetness": 0.02, "p_line": 1e6, "line_flow": 2.0, "pipe_bore": 0.15, "sample_flow": 0.008,
                      "port_area": 60e-6, "port_bore": 0.004, "drop_diameter": 1e-5},
    rig.pipe_conductance: {"length": 0.5, "outer_diameter": 0.0337, "inner_diameter": 0.0272},
    rig.heat_loss_per_kg: {"conductance": 0.2, "T_mean": 420.0, "T_ambient": 295.0, "sample_flow": 0.008},
    rig.conductance_of: {"heat_loss": 4000.0, "T_mean": 420.0, "T_ambient": 295.0, "sample_flow": 0.008},
    rig.ideal_normal: {"p_line": 1e6, "p_exhaust": 1e5},
    rig.normal_reading: {"p_line": 1e6, "p_exhaust": 1e5, "T_normal": 420.0},
    rig.wetness_by_normal_reading: {"p_line": 1e6, "p_exhaust": 1e5, "T_exhaust": 400.0, "T_normal": 420.0},
    rig.body_heat_capacity: {"mass": 3.0},
    rig.warm_up: {"heat_capacity": 1470.0, "area": 0.04, "sample_flow": 0.007, "p_exhaust": 1e5, "T_exhaust": 420.0,
                  "T_start": 293.0, "T_ambient": 293.0},
    rig.steam_used: {"sample_flow": 0.008, "time": 2400.0, "duration": 3600.0},
    rig.drained_mass: {"water_volume": 1e-3, "T_water": 343.15},
    rig.flash_fraction: {"p_separator": 1e6, "p_drain": 1e5},
    rig.separated_reading: {"p_line": 8e5, "x": 0.9, "p_exhaust": 1e5, "drain_fraction": 0.08},
    rig.drain_needed: {"p_line": 8e5, "x": 0.88, "p_exhaust": 1e5},
    rig.arriving_quality: {"x_throttled": 0.967, "drain_fraction": 0.09},
    rig.combined_quality: {"p_line": 8e5, "x_throttled": 0.967, "drain_fraction": 0.09},
    rig.drained_fraction: {"p_line": 8e5, "x": 0.88, "water_share": 0.75},
    rig.least_electric_quality: {"p_line": 6e5, "p_heater": 6e5, "power": 850.0, "sample_flow": 0.0033},
    rig.power_needed: {"p_line": 6e5, "x": 0.9, "p_heater": 6e5, "sample_flow": 0.0033},
    rig.heater_reading: {"p_line": 6e5, "x": 0.9, "p_heater": 6e5, "power": 900.0, "sample_flow": 0.0033},
    rig.wet_steam: {"p_line": 1e6, "x": 0.98},
}
# These answer bad elements of arrays with a status and raise only for scalars
WITH_STATUS = {
    rig.electric_quality: {"p_line": 6e5, "p_heater": 6e5, "T_heater": 452.0, "power": 850.0, "sample_flow": 0.0033},
    rig.separated_quality: {"p_line": 8e5, "p_exhaust": 1e5, "T_exhaust": 385.0, "water_mass": 0.3,
                            "weighed_mass": 3.0, "basis": "total collected"},
}
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
