"""Everything that makes something of a case, given any case: an answer without a bare NaN, or a refusal in words."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.job.assessment import assess
from engine.job.case import faults_of, resolve
from engine.job.case.casefile import from_json, from_link, to_json, to_link
from engine.job.reach import assess_reach
from engine.job.reach.said import said
from engine.job.record import record_html, record_zip
from engine.job.result import reduce
from engine.job.result.runs import Run, runs_typed
from engine.job.rig import assess_rig
from engine.job.rig.tables import effect_rows
from engine.job.runsheet import run_sheet
from engine.job.runsheet.print import runsheet_html
from engine.job.uncertainty import forecast, forecast_or_why
from engine.job.uncertainty.answer_with import answer_with
from engine.steam.units import SI, US
from tests.contract import arrays, call, parts, profile
from tests.job.any_case import cases

UNITS = st.sampled_from((SI, US))
MADE = "2025-03-04 14:20"


def typed(case):
    return reduce(case, runs_typed(case))


def recorded(case, units):
    return record_html(case, typed(case), units, "A4", made=MADE)


# what is made of a case, and how many of the long run's examples it is given
OF_A_CASE = {resolve: 1.0, assess: 1.0, assess_reach: 0.3, assess_rig: 0.3, forecast: 0.3, typed: 0.3, run_sheet: 0.3}
WITH_UNITS = {lambda case, units: answer_with(forecast_or_why(case, assess(case)), units).headline: 0.3,
              lambda case, units: said(assess_reach(case), units): 0.2,
              lambda case, units: effect_rows(assess_rig(case), units): 0.2,
              lambda case, units: runsheet_html(case, units, "A4"): 0.2,
              recorded: 0.2,
              lambda case, units: record_zip(case, typed(case), units, "Letter", made=MADE): 0.1}


def with_share(shares):
    return [pytest.param(function, share, id=getattr(function, "__name__", "")) for function, share in shares.items()]


def numbers_in(result):
    """Every number of a result but those of arrays, which have a status beside them, and those of a case in it."""
    for name, value in parts(result):
        if isinstance(value, float) and ".values." not in f".{name}":
            yield name, value


@pytest.mark.parametrize(("function", "share"), with_share(OF_A_CASE))
def test_a_case_is_answered_or_refused(function, share):
    @profile(15, share)
    @given(case=cases())
    def holds(case):
        result = call(function, {"case": case}).result
        if result is None:
            return
        if function is not assess_rig:  # which answers in parts, each resting on entries of its own
            assert not faults_of(case), "answered, though an entry cannot be used"
        for name, value in numbers_in(result):
            assert not math.isnan(value) or name.split(".")[-1] in ("p_dry", "p_choke"), f"{function.__name__}: {name}"
    holds()


@pytest.mark.parametrize(("function", "share"), with_share(WITH_UNITS))
def test_what_is_said_of_a_case_never_shows_a_bare_number_that_is_none(function, share):
    @profile(4, share)
    @given(case=cases(), units=UNITS)
    def holds(case, units):
        result = call(function, {"case": case, "units": units}).result
        if isinstance(result, str) and not any("nan" in str(v).lower() for v in case.values.values()):
            assert ">nan" not in result and " nan " not in result and ">inf<" not in result
    holds()


@profile(15)
@given(case=cases())
def test_a_usable_case_comes_back_and_another_is_refused(case):
    if call(resolve, {"case": case}).result is not None:
        assert from_json(to_json(case)) == from_link(to_link(case)) == case


@profile(25, 0.5)
@given(data=st.data())
def test_readings_of_any_kind_are_reduced_or_refused(data):
    """Logs come from elsewhere: channels with anything in them, without a time, running backwards."""
    n = data.draw(st.integers(0, 8))
    def column(value):
        found = data.draw(arrays(value)).ravel()
        return np.resize(found, n) if found.size else np.full(n, math.nan)
    channels = {"p_line": column(9e5), "T_exhaust": column(394.3), "p_exhaust": column(1.02e5)}
    kept = data.draw(st.sets(st.sampled_from(list(channels)), min_size=1))
    time = data.draw(st.none() | st.just(np.arange(float(n)) * 60))
    run = Run("log", np.arange(n) + 2, time, {name: channels[name] for name in sorted(kept)},
              {"p_line": data.draw(st.sampled_from(("gauge", "absolute"))), "p_exhaust": "absolute"},
              np.full(n, True))
    result = call(reduce, {"case": data.draw(cases()), "runs": (run,)}).result
    if result is not None and result.budget is not None:
        assert math.isfinite(result.x) and math.isfinite(result.budget.U)
