"""Quality from a reading and back: every status, every refusal, the saturation trap, directions, round trips."""

import numpy as np
import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from engine.calorimeter import (
    SENTENCES,
    Quality,
    Status,
    exhaust_temperature,
    isenthalpic_path,
    least_quality,
    quality,
    reasons,
)
from engine.calorimeter.checks import LIMITS
from engine.steam import P_SAT_MAX, P_TRIPLE, InputError, saturated, saturation_temperature, state_ph, vapour

P1, P2 = 10e5, 101_325.0
T_SAT = saturation_temperature(P2)
READING = {"p_line": P1, "p_exhaust": P2, "T_exhaust": 400.0}
SOUGHT = {"p_line": P1, "x": 0.98, "p_exhaust": P2}
TERMS = {"heat_loss": 3e3, "line_velocity": 25.0, "exhaust_velocity": 60.0, "recovery": 0.7}
FUNCTIONS = [(quality, READING | TERMS | {"least_superheat": 2.0}),
             (exhaust_temperature, SOUGHT | TERMS | {"least_superheat": 2.0})]
both = pytest.mark.parametrize(("function", "inputs"), FUNCTIONS, ids=["quality", "exhaust_temperature"])


# --- the array contract ----------------------------------------------------------------------------------

@both
def test_a_scalar_call_gives_floats_and_a_status(function, inputs):
    *values, status = function(**inputs)
    assert [type(v) for v in values] == [float] * len(values)
    assert status is Status.OK
    assert type(least_quality(P1, P2)) is float


@both
def test_arrays_give_what_scalars_give(function, inputs):
    """Elements with and without velocities, wet and dry, share one call without touching one another."""
    n = 40
    rng = np.random.default_rng(3)
    columns = {k: v * rng.uniform(0.8, 1.2, n) for k, v in inputs.items()}
    columns["recovery"], columns["exhaust_velocity"][::2] = np.linspace(0, 1, n), 0.0
    if "x" in columns:
        columns["x"] = rng.uniform(0.85, 1.0, n)
    else:
        columns["T_exhaust"] = T_SAT + rng.uniform(-5, 40, n)
        columns["T_exhaust"][4] = np.nextafter(saturation_temperature(columns["p_exhaust"][4]), 1e3)
    many = function(**columns)
    assert many.status.dtype == np.int8
    assert {Status.OK, Status.NOT_SUPERHEATED} <= set(many.status)
    for k in range(n):
        one = function(**{name: float(v[k]) for name, v in columns.items()})
        assert one.status == many.status[k]
        np.testing.assert_allclose([v[k] for v in many[:-1]], one[:-1], rtol=1e-12, atol=1e-12)


@both
def test_shapes_broadcast(function, inputs):
    columns = inputs | {"p_line": np.array([[8e5], [9e5], [11e5]]), "p_exhaust": np.array([1e5, 1.1e5])}
    assert {np.shape(v) for v in function(**columns)} == {(3, 2)}
    assert least_quality(columns["p_line"], columns["p_exhaust"]).shape == (3, 2)
    assert {np.shape(v) for v in function(**(inputs | {"heat_loss": [[[0.0]]]}))} == {(1, 1, 1)}


@both
def test_lists_integers_and_empty_arrays_are_taken(function, inputs):
    assert {np.shape(v) for v in function(**(inputs | {"p_line": []}))} == {(0,)}
    assert least_quality(np.empty((0, 3)), P2).shape == (0, 3)
    whole = function(**(inputs | {"p_line": [1_000_000, 1_200_000]}))
    assert list(whole.status) == [Status.OK, Status.OK]


@both
def test_inputs_are_never_modified(function, inputs):
    columns = {k: np.full(3, v) for k, v in inputs.items()}
    columns["p_line"][1], columns["p_exhaust"][2] = np.nan, -1.0
    before = {k: v.copy() for k, v in columns.items()}
    for v in columns.values():
        v.setflags(write=False)
    function(**columns)
    for name, v in columns.items():
        np.testing.assert_array_equal(v, before[name])


def test_long_arrays_agree_with_their_parts():
    """Work goes in blocks; nothing happens at their edges."""
    T = np.linspace(T_SAT - 5, T_SAT + 60, 10_001)
    whole = quality(P1, P2, T)
    part = quality(P1, P2, T[4000:4200])
    for a, b in zip(whole, part, strict=True):
        np.testing.assert_array_equal(a[4000:4200], b)


# --- what is refused -------------------------------------------------------------------------------------

@both
def test_a_missing_value_is_missing_wherever_it_is(function, inputs):
    for name in inputs:
        result = function(**(inputs | {name: [inputs[name], np.nan]}))
        assert list(result.status) == [Status.OK, Status.MISSING], name
        assert all(np.isnan(v[1]) for v in result[:-1])
        assert all(np.isfinite(v[0]) for v in result[:-1] if v is not getattr(result, "x_bound", None))


@both
def test_values_out_of_range_get_a_status(function, inputs):
    outside = {"p_line": [500.0, 17e6, -1.0, np.inf], "p_exhaust": [500.0, P1, 2 * P1, 0.0], "T_exhaust": [273.0, 1e4],
               "x": [-1e-9, 1 + 1e-9, 98.0], "heat_loss": [np.inf, -np.inf, 2e7], "line_velocity": [-1.0, np.inf],
               "exhaust_velocity": [-1.0, np.inf], "recovery": [-0.1, 1.1], "least_superheat": [-1.0, 501.0]}
    for name in inputs:
        result = function(**(inputs | {name: np.array([inputs[name], *outside[name]])}))
        assert result.status[0] == Status.OK
        assert set(result.status[1:]) == {Status.OUT_OF_RANGE}, name
        assert all(np.isnan(v[1:]).all() for v in result[:-1])


def test_the_ends_of_the_ranges_are_inside():
    assert exhaust_temperature(P_SAT_MAX, 1.0, P_TRIPLE).status == Status.OK
    assert exhaust_temperature(P_SAT_MAX, 0.0, P_TRIPLE).status == Status.NOT_SUPERHEATED
    assert quality(P_SAT_MAX, P_TRIPLE, 900.0).status == Status.LINE_SUPERHEATED
    assert quality(P1, np.nextafter(P1, 0), 500.0).status == Status.LINE_SUPERHEATED
    assert least_quality(P_SAT_MAX, P_TRIPLE) < 1
    assert quality(P1, P2, 400.0, recovery=0.0, exhaust_velocity=30.0).status == Status.OK


TEXTS = {
    "p_line": (200e5, "line pressure: got 2e+07 Pa, needs 611.657 Pa to 16.529 MPa absolute\n"
                      "  - the saturation properties used here end there\n"
                      "  - check the unit, and gauge or absolute"),
    "p_exhaust": (P1, "exhaust pressure: got 1000000 Pa, needs 611.657 Pa to 16.529 MPa absolute, and less than the "
                      "line pressure\n  - steam only flows and expands towards a lower pressure\n"
                      "  - check the unit, and that both pressures are meant absolute"),
    "T_exhaust": (121.0, "exhaust temperature: got 121 K, needs 273.15 to 1073.15 K\n"
                         "  - the steam equations hold there\n  - check the unit: °C or °F"),
    "x": (98.0, "quality: got 98, needs 0 to 1\n  - it is the share of vapour in the mass\n"
                "  - give a fraction, not a percentage"),
    "heat_loss": (np.nan, "heat loss per kg of sample: got nan J/kg, needs a loss within ±10 MJ/kg\n"
                          "  - the energy balance needs it\n"
                          "  - give it per kg of sample; negative where heat is gained"),
    "line_velocity": (-3.0, "line velocity: got -3 m/s, needs 0 to 10 000 m/s\n  - the energy balance needs it"),
    "exhaust_velocity": (-3.0, "exhaust velocity: got -3 m/s, needs 0 to 10 000 m/s\n  - the energy balance needs it"),
    "recovery": (70.0, "recovery factor: got 70, needs 0 to 1\n"
                       "  - a probe takes up between none and all of the kinetic energy"),
    "least_superheat": (-5.0, "least superheat: got -5 K, needs 0 to 500 K\n"
                              "  - it is a difference above saturation\n  - give it in kelvin"),
}


@both
def test_every_refusal_says_what_is_wrong(function, inputs):
    for name in inputs:
        value, text = TEXTS[name]
        with pytest.raises(InputError) as caught:
            function(**(inputs | {name: value}))
        assert str(caught.value) == text
        assert [f.name for f in caught.value.faults] == [name]


@both
def test_all_bad_inputs_are_refused_at_once(function, inputs):
    with pytest.raises(InputError) as caught:
        function(**(inputs | {name: TEXTS[name][0] for name in inputs if name != "p_exhaust"} | {"p_exhaust": 1e8}))
    assert [f.name for f in caught.value.faults] == list(inputs)
    assert str(caught.value).count(": got ") == len(inputs)


def test_every_limit_has_its_text_here():
    elsewhere = {"h_line",  # test_paths.py
                 "x_low", "x_high", "U_thermometer", "comfortable_superheat"}  # test_reach.py
    assert set(TEXTS) == set(LIMITS) - elsewhere


def test_least_quality_refuses_arrays_too():
    with pytest.raises(InputError, match=r"line pressure at position 1: got nan Pa") as caught:
        least_quality(np.array([1e6, np.nan]), 1e5, superheat=-5.0)
    assert {f.name for f in caught.value.faults} == {"p_line", "least_superheat", "p_exhaust"}


@both
def test_text_and_odd_shapes_are_refused(function, inputs):
    with pytest.raises(InputError, match="got '10' Pa, needs a number or an array of numbers"):
        function(**(inputs | {"p_line": "10"}))
    with pytest.raises(InputError, match="shapes that broadcast together"):
        function(**(inputs | {"p_line": np.ones(2), "p_exhaust": np.ones(3)}))


@both
def test_terms_beyond_all_steam_are_refused(function, inputs):
    """Each input is possible by itself, and together they leave the line (or the exhaust) without a state."""
    many = function(**(inputs | {"heat_loss": [-3e6, 3e6]}))
    assert Status.OUT_OF_RANGE in many.status
    where = int(np.argmax(many.status))
    assert np.isnan(many[0][where])
    with pytest.raises(InputError, match="energy balance: got neither wet nor superheated steam, needs") as caught:
        function(**(inputs | {"heat_loss": [-3e6, 3e6][where]}))
    assert "check the temperature, the heat loss and the velocities" in str(caught.value)


def test_a_line_hotter_than_the_equations_is_refused():
    assert list(quality([P1], P2, 1000.0, heat_loss=5e5).status) == [Status.OUT_OF_RANGE]
    with pytest.raises(InputError, match="needs an enthalpy steam can have"):
        quality(P1, P2, 1000.0, heat_loss=5e5)


# --- each status, and what comes with it -----------------------------------------------------------------

def test_ok_and_thin_margin_give_the_same_quality():
    clear = quality(P1, P2, T_SAT + 6.0, least_superheat=5.0)
    thin = quality(P1, P2, T_SAT + 6.0, least_superheat=7.0)
    assert (clear.status, thin.status) == (Status.OK, Status.THIN_MARGIN)
    assert clear.x == thin.x == 1.0 - thin.wetness
    assert clear.superheat == pytest.approx(6.0, abs=1e-12)
    assert np.isnan(clear.x_bound)


def test_just_the_least_superheat_is_enough():
    T = np.array([T_SAT + 5.0, T_SAT + 5.0 - 1e-9])
    assert list(quality(P1, P2, T, least_superheat=T[0] - T_SAT).status) == [Status.OK, Status.THIN_MARGIN]


def test_not_superheated_gives_a_bound_and_no_quality():
    result = quality(P1, P2, T_SAT - 0.3)
    assert result.status == Status.NOT_SUPERHEATED
    assert np.isnan(result.x) and np.isnan(result.h_line)
    assert result.x_bound == pytest.approx(least_quality(P1, P2, 0.0), abs=1e-15)
    assert result.superheat == pytest.approx(-0.3, abs=1e-12)
    assert result.line_superheat == 0


def test_a_superheated_line_has_a_superheat_and_no_quality():
    h = vapour(P1, saturation_temperature(P1) + 10.0).h
    T = state_ph(P2, h).T
    result = quality(P1, P2, T)
    assert result.status == Status.LINE_SUPERHEATED
    assert np.isnan(result.x) and np.isnan(result.x_bound)
    assert result.line_superheat == pytest.approx(10.0, abs=1e-5)
    assert result.h_line == pytest.approx(h, rel=1e-9)


def test_statuses_have_sentences_and_counts():
    assert set(SENTENCES) == set(Status)
    assert all(text.endswith(".") and len(text) > 30 for text in SENTENCES.values())
    T = np.array([[400.0, 370.0, 500.0], [np.nan, 100.0, 370.0]])
    rows = reasons(quality(P1, P2, T, least_superheat=5.0).status)
    assert [(kind, count) for kind, _, count, _ in rows] == [
        (Status.OK, 1), (Status.NOT_SUPERHEATED, 2), (Status.LINE_SUPERHEATED, 1), (Status.OUT_OF_RANGE, 1),
        (Status.MISSING, 1)]
    assert list(rows[1][3]) == [1, 5]
    assert rows[1][1] == SENTENCES[Status.NOT_SUPERHEATED]
    assert reasons([]) == []
    assert reasons(Status.OK)[0][0] is Status.OK


# --- the saturation trap ---------------------------------------------------------------------------------

@pytest.mark.parametrize("p2", [2e3, 20e3, P2, 5e5])
def test_the_saturation_trap(p2):
    """Just below saturation an equation of state answers with liquid, 2.2 MJ/kg less; here it gives a bound."""
    T_sat = saturation_temperature(p2)
    below = np.array([T_sat, np.nextafter(T_sat, 0), T_sat - 1e-6, T_sat - 1e-3, T_sat - 0.5])
    result = quality(P1, p2, below)
    assert set(result.status) == {Status.NOT_SUPERHEATED}
    assert np.isnan(result.x).all()
    assert (result.x_bound == result.x_bound[0]).all()
    for T in below:
        assert quality(P1, p2, float(T)).status is Status.NOT_SUPERHEATED
    above = quality(P1, p2, np.array([np.nextafter(T_sat, 1e3), T_sat + 1e-6, T_sat + 1e-3]), least_superheat=0.5)
    assert set(above.status) == {Status.THIN_MARGIN}
    assert above.x == pytest.approx(np.full(3, result.x_bound[0]), abs=2e-6)
    assert (np.diff(above.x) > 0).all()


def test_a_fast_stream_can_be_wet_under_a_superheated_reading():
    """A probe that takes up the whole of 150 m/s reads 5.4 K more than the stream has."""
    T = T_SAT + np.array([3.0, 5.0, 6.0])
    result = quality(P1, P2, T, exhaust_velocity=150.0)
    assert list(result.status) == [Status.NOT_SUPERHEATED, Status.NOT_SUPERHEATED, Status.OK]
    assert result.x_bound[0] < result.x[2]
    still = quality(P1, P2, T)
    assert result.x[2] == pytest.approx(still.x[2], abs=1e-12)  # all taken up: nothing to correct
    bare = quality(P1, P2, T, exhaust_velocity=150.0, recovery=0.0)  # reads the stream itself
    assert list(bare.status) == [Status.OK] * 3
    assert bare.x - still.x == pytest.approx(150.0**2 / 2 / (saturated(P1).h_g - saturated(P1).h_f), abs=1e-12)


def test_the_reach_of_a_fast_stream_is_where_it_is_dry():
    for speed in (0.0, 50.0, 150.0, 300.0):
        for recovery in (0.0, 0.7, 1.0):
            x = least_quality(P1, P2, 5.0, exhaust_velocity=speed, recovery=recovery)
            seen = exhaust_temperature(P1, x + 1e-9, P2, exhaust_velocity=speed, recovery=recovery)
            assert seen.status == Status.OK
            assert seen.superheat >= 5.0
            missed = exhaust_temperature(P1, x - 1e-6, P2, exhaust_velocity=speed, recovery=recovery)
            assert missed.superheat < 5.0


# --- dry lines -------------------------------------------------------------------------------------------

def test_a_dry_line_comes_back_as_exactly_dry():
    """The rounding of a quality of 1 is neither superheat nor a quality above 1."""
    p1 = np.geomspace(1.3e5, P_SAT_MAX, 500)
    for p2 in (P_TRIPLE, 20e3, P2):
        seen = exhaust_temperature(p1, 1.0, p2)
        on = seen.status == Status.OK
        back = quality(p1[on], p2, seen.T_exhaust[on])
        assert set(back.status) == {Status.OK}
        assert (back.x <= 1.0).all()
        assert back.x == pytest.approx(np.ones(on.sum()), abs=1e-11)
        assert isenthalpic_path(p1[on][::50], back.x[::50], p2, points=5).h.shape == (on[on][::50].size, 5)


def test_dry_steam_of_very_high_pressure_is_not_superheated_at_the_exhaust():
    seen = exhaust_temperature(160e5, 1.0, P2)
    assert seen.status == Status.NOT_SUPERHEATED
    assert seen.T_exhaust == T_SAT and seen.superheat == 0
    assert 0.9 < seen.x_exhaust < 1
    assert seen.h_exhaust == pytest.approx(saturated(160e5).h_g, rel=1e-14)


# --- there and back --------------------------------------------------------------------------------------

LOG_P1, SHARE = st.floats(np.log(1.2e5), np.log(165e5)), st.floats(0.0, 1.0)


@settings(max_examples=150, deadline=None)
@given(LOG_P1, SHARE, st.floats(0.85, 1.0), st.floats(-2e4, 5e4), st.floats(0, 60), st.floats(0, 300), SHARE)
@example(np.log(10e5), 0.5, 1.0, 0.0, 0.0, 0.0, 1.0)
def test_quality_to_reading_and_back(log_p1, share, x, heat_loss, line_velocity, exhaust_velocity, recovery):
    """Over lines from 1.2 to 165 bar and exhausts from 1 kPa to 0.99 of the line.

    The search for T leaves 5e-7 K, which is 1 J/kg or 1e-6 of a latent heat of 0.9 MJ/kg at most."""
    p1 = float(np.exp(log_p1))
    p2 = float(np.exp(np.log(1e3) + share * (np.log(0.99 * p1) - np.log(1e3))))
    terms = {"heat_loss": heat_loss, "line_velocity": line_velocity, "exhaust_velocity": exhaust_velocity,
             "recovery": recovery}
    seen = exhaust_temperature([p1], x, p2, **terms)
    assume(seen.status[0] <= Status.NOT_SUPERHEATED)
    back = quality([p1], p2, seen.T_exhaust, **terms)
    if seen.status[0] == Status.NOT_SUPERHEATED:
        assert back.status[0] == Status.NOT_SUPERHEATED
        assert x <= back.x_bound[0] + 1e-12
    elif seen.superheat[0] > 1e-5:
        assert back.status[0] == Status.OK
        assert back.x[0] == pytest.approx(x, abs=1e-6)
        assert back.h_line[0] == pytest.approx(saturated(p1).h_f + x * (saturated(p1).h_g - saturated(p1).h_f), abs=5.0)


@settings(max_examples=100, deadline=None)
@given(LOG_P1, SHARE, st.floats(0.1, 60.0), st.floats(0, 3e4), st.floats(0, 60), st.floats(0, 200), SHARE)
def test_the_reach_shows_just_its_superheat(log_p1, share, superheat, heat_loss, line_velocity, speed, recovery):
    p1 = float(np.exp(log_p1))
    p2 = float(np.exp(np.log(1e3) + share * (np.log(0.9 * p1) - np.log(1e3))))
    terms = {"heat_loss": heat_loss, "line_velocity": line_velocity, "exhaust_velocity": speed, "recovery": recovery}
    x = least_quality(p1, p2, superheat, **terms)
    assume(0 <= x <= 1)
    seen = exhaust_temperature(p1, x, p2, **terms)
    if 0.5 * recovery * speed**2 < 1.5e3 * superheat:  # slow enough to be dry itself at this reading
        assert seen.superheat == pytest.approx(superheat, abs=1e-4)
    else:
        assert seen.superheat >= superheat - 1e-4 or seen.status == Status.NOT_SUPERHEATED


# --- directions ------------------------------------------------------------------------------------------

UP = {"T_exhaust": np.linspace(380.0, 420.0, 60), "heat_loss": np.linspace(-5e3, 2e4, 60),
      "exhaust_velocity": np.linspace(0.0, 100.0, 60)}
DOWN = {"p_exhaust": np.linspace(80e3, 120e3, 60), "line_velocity": np.linspace(0.0, 100.0, 60),
        "recovery": np.linspace(0.0, 1.0, 60)}


def test_what_makes_the_line_look_drier():
    """A hotter reading, a loss or a velocity allowed for; the contrary for pressure, c1 and recovery."""
    base = READING | TERMS
    for name, values in (UP | DOWN).items():
        change = np.diff(quality(**(base | {name: values})).x)
        assert ((change > 0) if name in UP else (change < 0)).all(), name


def test_what_makes_the_reading_hotter():
    base = SOUGHT | TERMS
    for name, values, sign in (("x", np.linspace(0.97, 1.0, 60), 1), ("heat_loss", UP["heat_loss"], -1),
                               ("line_velocity", DOWN["line_velocity"], 1), ("recovery", DOWN["recovery"], 1)):
        seen = exhaust_temperature(**(base | {name: values}))
        assert set(seen.status) == {Status.OK}
        assert (np.sign(np.diff(seen.T_exhaust)) == sign).all(), name
    lower = exhaust_temperature(P1, 0.98, np.linspace(50e3, 2e5, 60))
    assert (np.diff(lower.T_exhaust) > 0).all() and (np.diff(lower.superheat) < 0).all()


def test_what_makes_the_reach_worse():
    base = {"p_line": P1, "p_exhaust": P2, "superheat": 5.0} | TERMS
    for name, values, sign in (("p_exhaust", np.linspace(1e3, 3e5, 60), 1), ("superheat", np.linspace(1, 30, 60), 1),
                               ("heat_loss", UP["heat_loss"], 1), ("line_velocity", DOWN["line_velocity"], -1)):
        assert (np.sign(np.diff(least_quality(**(base | {name: values})))) == sign).all(), name
    p1 = np.geomspace(1.2e5, 120e5, 300)
    x = least_quality(p1, P2)
    best = p1[x.argmin()]
    assert 39e5 < best < 43e5
    assert (np.diff(x[p1 <= best]) < 0).all() and (np.diff(x[p1 >= best]) > 0).all()


def test_heat_loss_left_out_makes_the_line_look_wetter():
    """The size of it: 1 kJ/kg is 0.05 %pt at 10 bar."""
    x = quality(P1, P2, 400.0, heat_loss=np.array([0.0, 1e3])).x
    assert (x[1] - x[0]) * 100 == pytest.approx(0.0496, abs=5e-5)


def test_results_are_records_that_cannot_be_changed():
    result = quality(**READING)
    assert isinstance(result, Quality)
    with pytest.raises(AttributeError):
        result.x = 1.0
