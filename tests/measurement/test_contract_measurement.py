"""Every function of the measurement floor, called with anything: answered or refused, never anything else."""

import io
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import engine.measurement as m
from tests.contract import (
    NONSENSE,
    Record,
    arrays,
    call,
    calls,
    check_numbers,
    keep,
    near,
    numbers,
    parts,
    profile,
    public_functions,
)

INF = math.inf


def choices(*usual):
    """A choice that is mostly one of those there are."""
    return st.sampled_from(usual) | st.sampled_from(usual) | NONSENSE


LIMITS = Record(st.sampled_from((m.Limits(lower=0.97), m.Limits(upper=0.98), m.Limits(0.9, 0.99))))
RULES = Record(st.sampled_from([m.Rule(kind) for kind in m.RULES]))
DOF = st.just(INF) | near(8.0) | numbers(8.0) | NONSENSE
ARRAYS = {  # of these every element is answered as if alone
    m.conformance_probability: {"value": 0.975, "u": 0.003, "limits": LIMITS, "dof": DOF},
    m.thompson_tau: {"n": 10.0, "risk": st.just(0.05) | numbers(0.05) | NONSENSE},
    m.grubbs_critical: {"n": 10.0, "risk": st.just(0.05) | numbers(0.05) | NONSENSE, "side": choices("both", "high")},
    m.pt100_resistance: {"T": 400.0, "R0": st.just(100.0) | numbers(100.0) | NONSENSE},
    m.pt100_tolerance: {"T": 400.0, "grade": choices("AA", "A", "B"), "film": st.booleans()},
    m.thermocouple_tolerance: {"T": 400.0, "grade": choices("T1", "K2")},
}
SPAN = st.sampled_from(((0, 16e5), [0.0, 6e5], (5, 1), (0, math.nan), (0, INF), (0,), None, "01", (None, 3.0),
                        ("0", "1")))
COMPONENTS = {
    m.expanded: {"U": 0.06, "k": 2.0, "dof": DOF}, m.normal: {"u": 0.03, "dof": DOF},
    m.rectangular: {"half_width": 0.35, "dof": DOF}, m.triangular: {"half_width": 0.35, "dof": DOF},
    m.type_a: {"s": 0.2, "n": 20.0, "n_eff": st.none() | near(8.0) | NONSENSE},
    m.certificate: {"U": 0.06, "k": 2.0}, m.resolution: {"step": 0.1}, m.cold_junction: {"half_width": 0.3},
    m.scale_reading: {"division": 0.5, "told_apart": 0.5}, m.stability: {"percent": 0.2, "span": SPAN},
    m.gauge_temperature: {"span": SPAN, "T_ambient": 300.0},
}
NAMED = {m.expanded, m.normal, m.rectangular, m.triangular, m.type_a}
SCALARS = {
    m.coverage_factor: {"coverage": 0.95, "dof": 10.0},
    m.decimals_of: {"u": 0.0029, "digits": choices(1, 2, 3)},
    m.numerical_tolerance: {"u": 0.0029, "digits": choices(1, 2, 3)},
    m.decide: {"value": 0.975, "u": 0.003, "limits": LIMITS, "rule": RULES, "U": st.none() | near(0.006) | NONSENSE,
               "dof": DOF},
}
OWN = {m.absolute, m.compare, m.correlations_from_matrix, m.decide_both, m.effective_number, m.fit_mapping,
       m.flag_outliers, m.judge_window, m.monte_carlo, m.propose_mapping, m.read_log, m.result_correlation,
       m.settled_windows, m.trend, m.uncertainty_budget, m.write_log}


def test_every_public_function_is_under_the_contract():
    assert public_functions(m) == set(ARRAYS) | set(COMPONENTS) | set(SCALARS) | OWN


@pytest.mark.parametrize("function", ARRAYS, ids=lambda f: f.__name__)
@profile(40)
@given(data=st.data())
def test_whatever_goes_in_is_answered_or_refused(function, data):
    keep(function, ARRAYS[function], data.draw(calls(ARRAYS[function])))


@pytest.mark.parametrize("function", COMPONENTS, ids=lambda f: f.__name__)
@profile(40)
@given(data=st.data())
def test_a_cause_of_doubt_is_a_finite_uncertainty_or_refused(function, data):
    found = call(function, data.draw(calls(COMPONENTS[function])), *(("cause",) if function in NAMED else ())).result
    if found is not None:
        assert type(found.u) is type(found.dof) is float
        assert 0 <= found.u < INF and found.dof > 0


@pytest.mark.parametrize("function", SCALARS, ids=lambda f: f.__name__)
@profile(60)
@given(data=st.data())
def test_single_numbers_are_answered_or_refused(function, data):
    result = call(function, data.draw(calls(SCALARS[function]))).result
    if result is not None:
        check_numbers(result, ())


# ---- what is made of records


@profile(60)
@given(value=numbers(1.0) | NONSENSE, u=numbers(0.1) | NONSENSE, dof=DOF, sign=choices(1, -1),
       distribution=choices("normal", "rectangular", "triangular", "t"))
def test_an_input_is_whole_or_refused(value, u, dof, sign, distribution):
    part = call(m.Component, {"name": "cause", "u": u, "distribution": distribution, "dof": dof, "sign": sign}).result
    found = call(m.Input, {"name": "a", "value": value, "components": () if part is None else (part,)}).result
    if found is not None:
        assert math.isfinite(found.value) and math.isfinite(found.u)


@profile(60)
@given(data=st.data())
def test_settings_are_whole_or_refused(data):
    odd = st.none() | numbers(0.1) | NONSENSE
    call(m.SteadyLimits, {name: data.draw(odd) for name in ("change", "slope", "scatter", "risk", "negligible")})
    call(m.Rule, {"kind": data.draw(choices(*m.RULES)), "risk": data.draw(odd)})
    limits = call(m.Limits, {"lower": data.draw(odd), "upper": data.draw(odd)}).result
    assert limits is None or limits.lower < limits.upper


@profile(60)
@given(kind=choices(*m.KINDS), grade=choices("A", "AA", "1", "0.1", "T1", "2A", "nan", "-1"), span=SPAN,
       reading=near(400.0) | near(9e5) | arrays(400.0) | arrays(9e5) | NONSENSE)
def test_an_instrument_says_how_wrong_it_may_be_or_why_not(kind, grade, span, reading):
    it = call(m.Instrument, {"kind": kind, "grade": grade, "span": span,
                             "extra": (m.normal("certificate", 0.1),) if str(kind) == "certificate" else ()}).result
    if it is not None:
        limit = call(it.tolerance, {"reading": reading}).result
        if limit is not None:
            check_numbers(limit, np.shape(reading))
            assert (np.asarray(limit) >= 0).all()
            if np.ndim(reading) == 0:
                assert all(0 <= c.u < INF for c in it.components(float(reading)))
                assert all(isinstance(words, str) for words in it.cautions(float(reading)))


def some_inputs(draw):
    """Two inputs with a shared cause and causes of their own, of any size."""
    size = numbers(0.1).map(lambda u: float(abs(u)) if abs(u) < 1e60 else 0.1)
    value = numbers(2.0).map(lambda v: float(v) if abs(v) < 1e60 else 2.0)
    kinds = st.sampled_from(("normal", "rectangular", "t"))
    return [m.Input(name, draw(value), (
        m.Component("own", draw(size), draw(kinds), draw(st.sampled_from((INF, 3.0, 30.0)))),
        m.normal("gauge", draw(size), source="gauge"))) for name in ("a", "b")]


MODELS = st.sampled_from((lambda a, b: a + b, lambda a, b: a * 2.0, lambda a, b: np.where(a > 2, a, np.nan),
                          lambda a, b: (a - b, np.zeros(np.shape(a))), lambda a, b: np.full(np.shape(a), np.nan),
                          lambda a, b: 1.0))


@profile(60)
@given(data=st.data(), model=MODELS, coverage=st.just(0.95) | numbers(0.95) | NONSENSE, r=numbers(0.3) | NONSENSE)
def test_a_budget_is_finite_and_adds_up_or_is_refused(data, model, coverage, r):
    inputs = some_inputs(data.draw)
    correlations = data.draw(st.sampled_from(({}, {("a: own", "b: own"): r}, {("a", "c"): 0.1})))
    budget = call(m.uncertainty_budget, {"inputs": inputs, "coverage": coverage, "correlations": correlations,
                                         "on_result": (m.normal("sampling", 0.005, group="sampling"),)}, model).result
    if budget is not None:
        assert all(math.isfinite(v) for v in (budget.value, budget.u, budget.k, budget.U)) and budget.dof > 0
        assert budget.u == 0 or sum(row.share for row in budget.rows) == pytest.approx(1)
        for other in (budget.without("sampling"), budget.improved("gauge", 0.5)):
            assert math.isfinite(other.U)
        assert -1 - 1e-9 <= m.result_correlation(budget, budget) <= 1 + 1e-9
        found = call(m.decide_both, {"budget": budget, "limits": m.Limits(lower=0.97), "rule": m.Rule()}).result
        assert all(0 <= v.probability <= 1 for v in found or ())
        call(budget.improved, {"group": data.draw(st.sampled_from(("gauge", "other"))),
                               "factor": data.draw(numbers(0.5) | NONSENSE)})


@profile(25)
@given(data=st.data(), model=MODELS, coverage=st.just(0.95) | numbers(0.95) | NONSENSE,
       draws=st.just(2000) | NONSENSE | st.sampled_from((0, -1, 10**12, 2000.5)), seed=st.just(1) | NONSENSE)
def test_draws_are_summed_up_finitely_or_refused(data, model, coverage, draws, seed):
    inputs = some_inputs(data.draw)
    found = call(m.monte_carlo, {"inputs": inputs, "coverage": coverage, "draws": draws, "seed": seed}, model).result
    if found is not None:
        numbers_in = [found.value, found.u, *found.symmetric, *found.shortest, found.skewness, found.kurtosis]
        assert all(type(v) is float and math.isfinite(v) for v in numbers_in)
        budget = call(m.uncertainty_budget, {"inputs": inputs}, model).result
        if budget is not None:
            same = call(m.compare, {"budget": budget, "drawn": found, "digits": data.draw(choices(1, 2))}).result
            assert same is None or same.agree or same.reasons


@profile(40)
@given(r=numbers(0.3) | NONSENSE, names=st.sampled_from((["V", "I"], ["V"], [])))
def test_a_matrix_of_correlations_is_read_or_refused(r, names):
    found = call(m.correlations_from_matrix, {"names": names, "matrix": [[1.0, r], [r, 1.0]]}).result
    assert not found or all(math.isfinite(v) for v in found.values())


# ---- series

SERIES = NONSENSE | arrays(400.0) | st.lists(near(400.0), min_size=3, max_size=12) | st.lists(
    numbers(400.0), max_size=9)


@profile(80)
@given(series=SERIES)
def test_a_series_is_worth_from_one_to_all_of_its_readings_or_refused(series):
    worth = call(m.effective_number, {"series": series}).result
    if worth is not None:
        assert all(1 <= n <= worth.n for n in (worth.by_first, worth.by_sum, worth.n_eff))
        assert -1 <= worth.r1 <= 1


@profile(80)
@given(readings=SERIES, risk=st.just(0.05) | numbers(0.05) | NONSENSE, side=choices("both", "high", "low"))
def test_outliers_are_flagged_or_the_run_is_refused(readings, risk, side):
    found = call(m.flag_outliers, {"readings": readings, "risk": risk, "side": side}).result
    if found is not None:
        assert all(np.isfinite(value).all() for _, value in parts(found))
        assert found.by_tau.size == found.used.size == np.size(readings)


def times(n):
    return st.just(np.arange(float(n)) * 60.0) | arrays(60.0) | NONSENSE


@profile(80)
@given(data=st.data())
def test_a_trend_is_fitted_or_refused(data):
    values = data.draw(SERIES)
    fit = call(m.trend, {"time": data.draw(times(np.size(values))), "values": values}).result
    if fit is not None:
        assert all(type(v) is float and not math.isnan(v) for v in fit)


@profile(80)
@given(data=st.data())
def test_windows_are_judged_or_refused(data):
    values = data.draw(SERIES)
    time, least = data.draw(times(np.size(values))), data.draw(choices(3, 5))
    limits = {"T": m.SteadyLimits(change=0.5, slope=0.001, scatter=0.3)}
    shared = {"time": time, "channels": {"T": values}, "limits": limits, "least": least}
    one = call(m.judge_window, shared).result
    if one is not None:
        assert one.settled == (not one.reasons)
        assert all(not math.isnan(reason.value) for reason in one.reasons)
    found = call(m.settled_windows, shared | {"length": data.draw(near(120.0) | numbers(120.0) | NONSENSE),
                                              "step": data.draw(st.none() | choices(1, 2))}).result
    if found is not None:
        assert sum(b - a for a, b in (i.windows for i in found.settled + found.unsettled)) == found.first.size
        for interval in found.unsettled:
            assert found.why(interval.windows)


# ---- logs

LOG = b"time [s],p1 [bar g],T2 [degC]\n0,9.01,121.3\n5,9.02,121.4\n"


@profile(60)
@given(data=st.data())
def test_a_log_is_read_or_refused(data):
    noise = st.binary(max_size=60) | st.text(max_size=30).map(str.encode) | st.just(LOG)
    no_path = NONSENSE.filter(lambda v: not isinstance(v, str))
    given = data.draw(noise | st.tuples(st.just(LOG), noise).map(b"".join) | no_path)
    proposal = call(m.propose_mapping, {"path_or_bytes": given, "delimiter": data.draw(choices("", ";")),
                                        "encoding": data.draw(choices("", "utf-8")),
                                        "header_line": data.draw(choices(None, 0, 1, 99))}).result
    if proposal is not None:
        call(m.read_log, {"path_or_bytes": given, "mapping": proposal.mapping})
        call(m.fit_mapping, {"mapping": proposal.mapping, "path_or_bytes": LOG})
    log = call(m.read_log, {"path_or_bytes": given}).result
    if log is not None:
        assert all(v.shape == log.rows.shape and not np.isinf(v).any() for v in log.channels.values())
        call(m.absolute, {"log": log, "p_barometer": data.draw(st.none() | near(1e5) | arrays(1e5) | NONSENSE)})


@profile(60)
@given(data=st.data())
def test_a_log_is_written_or_refused(data):
    channels = {"p_line": data.draw(arrays(1e6) | NONSENSE), "T_exhaust": data.draw(SERIES)}
    target = io.BytesIO()
    call(m.write_log, {"channels": channels, "time": data.draw(st.none() | SERIES | st.just([0.0, 1.0, 2.0])),
                       "start": data.draw(choices("", "07:08", "2024-05-16T07:08:00", "soon")),
                       "basis": data.draw(st.sampled_from(({}, {"p_line": "gauge"}, {"p_line": 3}))),
                       "units": data.draw(st.sampled_from(({}, {"pressure": "kPa"}, {"pressure": "hop"},
                                                           {"colour": "K"})))}, target)
    target.getvalue().decode()
