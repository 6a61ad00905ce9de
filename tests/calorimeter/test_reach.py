"""The reach: contracts, verdicts, pressures and maps (values: verification_reach.py)."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.calorimeter import (
    READABILITY,
    Readability,
    Status,
    exhaust_pressure_for,
    exhaust_temperature,
    least_quality,
    line_pressure_window,
    reach,
    reach_map,
)
from engine.calorimeter.reach import ReachMap
from engine.steam import P_SAT_MAX, P_TRIPLE, InputError
from engine.steam.units import P_STANDARD

P1, P2 = 10e5, P_STANDARD
TERMS = {"heat_loss": 3e3, "line_velocity": 25.0, "exhaust_velocity": 60.0, "recovery": 0.7}
CALLS = {
    exhaust_pressure_for: {"p_line": P1, "x": 0.95, "superheat": 5.0} | TERMS,
    line_pressure_window: {"x": 0.96, "p_exhaust": P2, "superheat": 5.0} | TERMS,
    reach: {"p_line": P1, "p_exhaust": P2, "x_low": 0.96, "x_high": 0.99, "U_thermometer": 0.4,
            "least_superheat": 5.0, "comfortable_superheat": 10.0} | TERMS,
}
each = pytest.mark.parametrize("function", CALLS, ids=lambda f: f.__name__)
RNG = np.random.default_rng(8)
LINES = np.exp(RNG.uniform(np.log(1.2e5), np.log(165e5), 400))
WETNESS = RNG.uniform(0.0, 0.15, 400)
EXHAUSTS = np.exp(RNG.uniform(np.log(1e3), np.log(1.2e5), 400))
LOG_P1, SHARE = st.floats(np.log(1.2e5), np.log(165e5)), st.floats(0.0, 1.0)


# --- the array contract ----------------------------------------------------------------------------------

@each
def test_scalars_give_floats_and_arrays_the_same(function):
    call = CALLS[function]
    *one, status = function(**call)
    assert {type(v) for v in one} == {float}
    assert status in (Status.OK, Readability.THIN) and not isinstance(status, np.integer)
    first, second, *_ = call
    arrays = {first: np.full((3, 1), call[first]), second: np.full(2, call[second])}
    for a in arrays.values():
        a.setflags(write=False)
    *many, states = function(**(call | arrays))
    assert states.dtype == np.int8 and states.shape == (3, 2) and (states == status).all()
    for a, b in zip(many, one, strict=True):
        np.testing.assert_allclose(a, np.full((3, 2), b), rtol=1e-9)
    assert {np.shape(v) for v in function(**(call | {first: []}))} == {(0,)}


@each
def test_missing_and_impossible_inputs_get_a_status(function):
    call = CALLS[function]
    for name, good in call.items():
        *values, status = function(**(call | {name: np.array([good, np.nan, -np.inf])}))
        assert list(status[1:]) == [5, 4], name
        assert np.isfinite([v[0] for v in values]).all()
        assert np.isnan([v[1:] for v in values]).all()


@each
def test_scalar_calls_refuse_everything_at_once(function):
    call = CALLS[function]
    with pytest.raises(InputError) as caught:
        function(**dict.fromkeys(call, np.nan))
    names = {"superheat": "least_superheat"}
    assert {f.name for f in caught.value.faults} == {names.get(n, n) for n in call}


def test_what_the_reach_refuses():
    for name, value, text in (
            ("x_low", 0.995, "wet end of the range: got 0.995, needs 0 to the highest quality expected\n"
                             "  - it is the wet end of the range\n  - give fractions, the lower one first"),
            ("x_high", 99.0, "dry end of the range: got 99, needs 0 to 1\n"
                             "  - it is the share of vapour in the mass\n  - give a fraction, not a percentage"),
            ("U_thermometer", -1.0, "expanded uncertainty of the thermometer: got -1 K, needs 0 to 100 K\n"
                                    "  - it takes that much from the margin\n"
                                    "  - give the expanded uncertainty in kelvin"),
            ("comfortable_superheat", 4.0, "comfortable superheat: got 4 K, needs the least superheat to 500 K\n"
                                           "  - a margin between the two is thin\n  - give it in kelvin")):
        with pytest.raises(InputError) as caught:
            reach(**(CALLS[reach] | {name: value}))
        assert str(caught.value) == text


# --- how much of a range ---------------------------------------------------------------------------------

@pytest.mark.parametrize(("x_low", "x_high", "verdict"), [
    (0.97, 0.99, Readability.WHOLE), (0.958, 0.99, Readability.THIN), (0.94, 0.99, Readability.PART),
    (0.90, 0.95, Readability.NONE), (0.90, 0.90, Readability.NONE), (1.0, 1.0, Readability.WHOLE)])
def test_each_verdict(x_low, x_high, verdict):
    found = reach(P1, P2, x_low, x_high)
    assert found.verdict is verdict
    assert found.x_least == least_quality(P1, P2, 5.0)
    assert found.x_comfortable == least_quality(P1, P2, 10.0)
    if verdict == Readability.NONE:
        assert np.isnan(found.x_from)
    else:
        assert found.x_from == max(x_low, found.x_least)
    assert found.margin_low == found.superheat_low and found.margin_high == found.superheat_high


def test_the_verdict_changes_just_at_the_limits():
    least, comfortable = least_quality(P1, P2, 5.0), least_quality(P1, P2, 10.0)
    hair = 1e-13  # scalars and arrays may part by one rounding
    ends = np.array([comfortable + hair, comfortable - hair, least + hair, least - hair])
    assert list(reach(P1, P2, ends, 1.0).verdict) == [Readability.WHOLE, Readability.THIN, Readability.THIN,
                                                      Readability.PART]
    dry = np.array([least + hair, least - hair])
    assert list(reach(P1, P2, 0.9, dry).verdict) == [Readability.PART, Readability.NONE]


def test_the_thermometer_takes_its_uncertainty_from_the_margin():
    sure, unsure = reach(P1, P2, 0.957, 0.99), reach(P1, P2, 0.957, 0.99, U_thermometer=3.0)
    assert (sure.verdict, unsure.verdict) == (Readability.THIN, Readability.PART)
    assert unsure.superheat_low == sure.superheat_low
    assert unsure.margin_low == pytest.approx(sure.margin_low - 3.0, abs=1e-12)
    assert unsure.margin_high == pytest.approx(unsure.superheat_high - 3.0, abs=1e-12)
    assert unsure.x_least == least_quality(P1, P2, 8.0)
    at_limit = reach(P1, P2, unsure.x_least, 1.0, U_thermometer=3.0)
    assert at_limit.margin_low == pytest.approx(5.0, abs=1e-6)


def test_a_wet_exhaust_has_no_superheat():
    found = reach(P1, P2, 0.90, 0.94, U_thermometer=0.4)
    assert found.verdict is Readability.NONE
    assert found.superheat_low == found.superheat_high == 0
    assert found.margin_low == -0.4


def test_where_not_even_dry_steam_reads():
    """A heating main just above the air's pressure."""
    found = reach(1.15e5, P2, 0.95, 1.0)
    assert found.verdict is Readability.NONE and found.x_least > 1
    assert 0 < found.superheat_high < 5


def test_superheats_are_those_of_the_inverse():
    found = reach(P1, P2, 0.96, 0.99, **TERMS)
    for x, superheat in ((0.96, found.superheat_low), (0.99, found.superheat_high)):
        assert superheat == exhaust_temperature(P1, x, P2, **TERMS).superheat


def test_more_loss_and_more_back_pressure_read_less():
    losses = reach(P1, P2, 0.955, 0.99, heat_loss=np.linspace(0, 120e3, 50))
    for values in (losses.superheat_low, losses.superheat_high):
        assert (np.diff(values) <= 0).all()
    assert (np.diff(losses.x_least) > 0).all() and (np.diff(losses.verdict) >= 0).all()
    assert {Readability.THIN, Readability.PART, Readability.NONE} <= set(losses.verdict)
    pressures = reach(P1, np.linspace(20e3, 3e5, 50), 0.955, 0.99)
    assert (np.diff(pressures.margin_low) <= 0).all() and (np.diff(pressures.verdict) >= 0).all()


def test_readability_has_sentences():
    assert set(READABILITY) == set(Readability)
    assert all(text.endswith(".") and len(text) > 30 for text in READABILITY.values())
    assert (Readability.OUT_OF_RANGE, Readability.MISSING) == (Status.OUT_OF_RANGE, Status.MISSING)


def test_readability_promises_no_safety():
    text = " ".join(READABILITY.values()).lower()
    assert not [word for word in ("safe", "open", "proceed", "permit") if word in text]


# --- the exhaust pressure --------------------------------------------------------------------------------

def test_the_exhaust_pressure_is_the_highest():
    found = exhaust_pressure_for(LINES, 1 - WETNESS)
    read = found.status == Status.OK
    assert 100 < read.sum() < 400
    p, x, p1 = found.p_exhaust[read], 1 - WETNESS[read], LINES[read]
    np.testing.assert_allclose(least_quality(p1, p), x, atol=1e-10)
    assert (least_quality(p1, p * 0.999) < x).all()
    assert (least_quality(p1, p * 1.001) > x).all()
    dead = ~read
    assert set(found.status[dead]) <= {Status.NOT_SUPERHEATED} and np.isnan(found.p_exhaust[dead]).all()
    assert (least_quality(LINES[dead], P_TRIPLE) > 1 - WETNESS[dead]).all()


@settings(max_examples=80, deadline=None)
@given(LOG_P1, st.floats(0.8, 1.0), st.floats(0.0, 20.0), st.floats(0, 3e4), st.floats(0, 150), SHARE)
def test_the_exhaust_pressure_with_all_terms(log_p1, x, superheat, loss, speed, recovery):
    p1 = float(np.exp(log_p1))
    terms = {"heat_loss": loss, "exhaust_velocity": speed, "recovery": recovery}
    found = exhaust_pressure_for([p1], x, superheat, **terms)
    if found.status[0] == Status.NOT_SUPERHEATED:
        assert least_quality(p1, P_TRIPLE, superheat, **terms) > x
    elif found.p_exhaust[0] < p1:
        assert least_quality(p1, found.p_exhaust[0], superheat, **terms) == pytest.approx(x, abs=1e-9)


def test_the_line_pressure_itself_where_any_exhaust_will_do():
    """A sample that is heated on its way."""
    found = exhaust_pressure_for(P1, 0.98, heat_loss=-3e5)
    assert found.status is Status.OK and found.p_exhaust == P1


def test_no_exhaust_pressure_is_low_enough():
    assert list(exhaust_pressure_for([P1, P_TRIPLE], [0.5, 1.0]).status) == [Status.NOT_SUPERHEATED] * 2
    one = exhaust_pressure_for(P1, 0.5)
    assert one.status is Status.NOT_SUPERHEATED and np.isnan(one.p_exhaust)


def test_directions_of_the_exhaust_pressure():
    assert (np.diff(exhaust_pressure_for(P1, np.linspace(0.90, 1.0, 50)).p_exhaust) > 0).all()
    for name, values in (("superheat", np.linspace(0, 30, 50)), ("heat_loss", np.linspace(0, 3e4, 50))):
        assert (np.diff(exhaust_pressure_for(P1, 0.97, **{name: values}).p_exhaust) < 0).all()


# --- the line pressure -----------------------------------------------------------------------------------

def test_the_window_is_where_the_steam_can_be_read():
    x = 1 - WETNESS
    found = line_pressure_window(x, EXHAUSTS)
    read = found.status == Status.OK
    assert 100 < read.sum() < 400
    low, high, p2 = found.p_low[read], found.p_high[read], EXHAUSTS[read]
    assert (low < found.p_best[read]).all() and (found.p_best[read] < high).all()
    for edge, outside in ((low, 0.999), (high, 1.001)):
        inner = edge < P_SAT_MAX
        np.testing.assert_allclose(least_quality(edge[inner], p2[inner]), x[read][inner], atol=1e-9)
        beyond = np.clip(edge * outside, p2 * 1.0001, P_SAT_MAX)[inner]
        assert (least_quality(beyond, p2[inner]) >= x[read][inner] - 1e-12).all()
    share = RNG.uniform(0.001, 0.999, read.sum())
    assert (least_quality(low * (high / low) ** share, p2) <= x[read] + 1e-12).all()
    assert np.isnan(found.p_low[~read]).all() and np.isnan(found.p_high[~read]).all()
    assert np.isfinite(found.p_best).all() and np.isfinite(found.x_least).all()


def test_the_best_line_pressure_is_the_best():
    p2 = np.geomspace(P_TRIPLE, 20e5, 25)
    found = line_pressure_window(1.0, p2)
    p1 = np.geomspace(P_TRIPLE * 1.01, P_SAT_MAX, 1500)
    x = np.where(p1 > p2[:, None], least_quality(P_SAT_MAX, p2)[:, None] * 0 + np.inf, np.inf)
    for k, p in enumerate(p2):
        x[k, p1 > p] = least_quality(p1[p1 > p], p)
    assert (found.x_least <= x.min(axis=1) + 1e-12).all()
    np.testing.assert_allclose(found.x_least, x.min(axis=1), atol=2e-6)
    np.testing.assert_allclose(found.x_least, least_quality(found.p_best, p2), rtol=1e-12)


def test_a_lower_exhaust_widens_the_window():
    found = line_pressure_window(0.96, np.linspace(20e3, 2e5, 40))
    read = found.status == Status.OK
    assert (np.diff(found.p_low[read]) > 0).all() and (np.diff(found.p_high[read]) < 0).all()
    assert (np.diff(found.x_least) > 0).all()
    drier = line_pressure_window(np.linspace(0.94, 1.0, 40), P2)
    assert (np.diff(drier.p_low) < 0).all() and (np.diff(drier.p_high) > 0).all()
    assert np.ptp(drier.p_best) < 1.0  # the best pressure does not depend on the quality asked for


def test_a_window_without_an_end_reaches_to_the_end_of_the_range():
    found = line_pressure_window(1.0, P_TRIPLE)
    assert found.p_high == P_SAT_MAX
    heated = line_pressure_window(0.99, P2, heat_loss=-3e5)
    assert heated.p_low == P2


def test_no_line_pressure_will_do():
    found = line_pressure_window(0.90, P2)
    assert found.status is Status.NOT_SUPERHEATED
    assert np.isnan(found.p_low) and np.isnan(found.p_high)
    assert found.x_least == pytest.approx(0.9329, abs=1e-4)


def test_a_window_closes_at_the_best_pressure():
    x = line_pressure_window(0.95, P2).x_least
    for gap in (1e-12, 1e-9, 1e-6):
        found = line_pressure_window(x + gap, P2)
        assert found.status is Status.OK
        assert found.p_low <= found.p_best <= found.p_high
        assert found.p_high / found.p_low - 1 < 50 * np.sqrt(gap)
    assert line_pressure_window(x - 1e-9, P2).status is Status.NOT_SUPERHEATED


# --- the map ---------------------------------------------------------------------------------------------

def test_a_map_is_the_reach_at_every_place():
    lines, exhausts = np.geomspace(0.5e5, 165e5, 30), np.geomspace(5e3, 3e5, 20)
    chart = reach_map(lines, exhausts, 5.0, **TERMS)
    assert isinstance(chart, ReachMap)
    assert chart.wetness.shape == chart.status.shape == (20, 30) and chart.status.dtype == np.int8
    assert np.isfinite(chart.wetness).all()
    for i, p2 in enumerate(exhausts):
        for k, p1 in enumerate(lines):
            if p2 >= p1:
                assert chart.status[i, k] == Status.OUT_OF_RANGE and chart.wetness[i, k] == 0
                continue
            x = least_quality(p1, p2, 5.0, **TERMS)
            assert chart.status[i, k] == (Status.NOT_SUPERHEATED if x > 1 else Status.OK)
            assert chart.wetness[i, k] == pytest.approx(max(1 - x, 0.0), abs=1e-13)
    assert {Status.OK, Status.NOT_SUPERHEATED, Status.OUT_OF_RANGE} == set(chart.status.ravel())


def test_sections_are_the_same_call():
    lines, exhausts = np.geomspace(2e5, 100e5, 40), np.linspace(20e3, 2e5, 30)
    whole = reach_map(lines, exhausts)
    np.testing.assert_allclose(reach_map(lines, exhausts[7]).wetness, whole.wetness[7:8], atol=1e-14)
    np.testing.assert_allclose(reach_map(lines[11], exhausts).wetness, whole.wetness[:, 11:12], atol=1e-14)
    assert reach_map(P1, P2).wetness == pytest.approx(np.array([[1 - least_quality(P1, P2)]]))
    assert reach_map([], exhausts).wetness.shape == (30, 0)


def test_the_map_is_not_monotonic_in_the_line_pressure():
    lines = np.linspace(2e5, 160e5, 400)
    wetness = reach_map(lines, P2).wetness[0]
    best = lines[wetness.argmax()]
    assert best == pytest.approx(line_pressure_window(0.95, P2).p_best, rel=0.02)
    rising, falling = wetness[lines < best], wetness[(lines > best) & (wetness > 0)]
    assert (np.diff(rising) > 0).all() and (np.diff(falling) < 0).all()
    assert wetness[-1] == 0
    columns = reach_map(np.array([10e5, 40e5]), np.linspace(5e3, 2e5, 50)).wetness
    assert (np.diff(columns, axis=0) < 0).all()


def test_terms_may_vary_over_the_map():
    lines, exhausts = np.array([5e5, 10e5]), np.array([50e3, 1e5, 1.5e5])
    losses = np.array([0.0, 5e3])  # one for each line pressure
    chart = reach_map(lines, exhausts, heat_loss=losses)
    np.testing.assert_allclose(chart.wetness[:, 1:], reach_map(lines[1:], exhausts, heat_loss=5e3).wetness, atol=1e-14)
    assert reach_map(P1, P2, heat_loss=-1e7).wetness == 1.0  # heated so much that even water would read


def test_what_a_map_refuses():
    with pytest.raises(InputError) as caught:
        reach_map([1e5, np.nan], [-1.0], superheat=-1.0)
    assert {f.name for f in caught.value.faults} == {"p_line", "p_exhaust", "least_superheat"}
    with pytest.raises(InputError, match="axis of line pressures: got 2 dimensions, needs one dimension"):
        reach_map(np.ones((2, 2)), [1e4])


def test_a_map_leaves_its_axes_alone():
    lines, exhausts = np.array([5e5, 10e5]), np.array([1e5])
    lines.setflags(write=False)
    chart = reach_map(lines, exhausts)
    chart.p_exhaust[0] = 0.0
    assert exhausts[0] == 1e5
