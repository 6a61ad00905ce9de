"""Sets of readings with a heater: their means, their scatter, what they add to the doubts, and their words."""

import numpy as np
import pytest

from engine.calorimeter import electric_quality
from engine.job.assessment import assess
from engine.job.case import resolve
from engine.job.case.casefile import from_json, from_link, to_json, to_link
from engine.job.case.examples import HEATED
from engine.job.case.rows import Entry
from engine.job.result.heated import reduce_heated
from engine.job.runsheet.readings import with_reading
from engine.job.uncertainty import READINGS, forecast, leg_pressure
from engine.steam.errors import InputError

T = (178.6, 178.9, 178.4, 178.8, 178.7, 178.5)


def with_sets(case=HEATED, run="1", **channels):
    for k, t in enumerate(T):
        cells = {name: Entry(values[k], *unit) for name, (values, *unit) in channels.items()}
        case = with_reading(case, run=run, time=Entry(2.0 * k, "min"), T_heater=Entry(t, "°C"), **cells)
    return case


def test_without_sets_there_is_nothing_to_reduce():
    assert reduce_heated(HEATED) is None


def test_the_quality_is_that_of_the_means_and_of_every_set_that_of_the_engine():
    power = [860.0, 862.0, 858.0, 861.0, 859.0, 860.0]
    found = reduce_heated(with_sets(power=(power, "W")))
    si = resolve(HEATED)
    x = electric_quality(si["p_line"], si["p_line"], np.array(T) + 273.15, np.array(power), si["sample_flow"],
                         power_loss=si["power_loss"]).x
    assert found.runs[0].x == pytest.approx(x, abs=1e-12)
    mean = HEATED.with_(T_heater=Entry(float(np.mean(T)), "°C"), power=Entry(float(np.mean(power)), "W"))
    assert found.assessment.x == pytest.approx(assess(mean).x, abs=1e-12)
    assert found.assessment.x == pytest.approx(float(np.mean(x)), abs=1e-5)


def test_gauge_pressures_and_a_water_leg_are_taken_as_in_the_case():
    case = HEATED.with_(leg_height=Entry(2.0, "m"))
    shown = (resolve(case)["p_line"] + leg_pressure(resolve(case)) - resolve(case).p_barometer) / 1e5
    found = reduce_heated(with_sets(case, p_line=([shown] * 6, "bar", "gauge")))
    alone = reduce_heated(with_sets(case))
    assert found.assessment.si["p_line"] == pytest.approx(resolve(case)["p_line"], rel=1e-9)
    assert found.runs[0].x == pytest.approx(alone.runs[0].x, abs=1e-9)


def test_the_scatter_enters_the_budget_and_nothing_else_does():
    case = with_sets(HEATED.with_(sampling=Entry(0.3, "%pt"), sampling_kind="half width"))
    found = reduce_heated(case)
    planned = forecast(found.assessment.case, found.assessment)
    more = found.forecast.budget.u**2 - planned.budget.u**2
    assert more == pytest.approx(found.runs[0].component.u**2, rel=1e-6)
    assert [term.group for term in found.forecast.terms if term.group == READINGS] == [READINGS]


def test_runs_that_differ_are_taken_by_their_spread():
    case = with_sets(with_sets(power=([860.0] * 6, "W")), run="2", power=([880.0] * 6, "W"))
    found = reduce_heated(case)
    assert len(found.runs) == 2 and found.repeatability.differ
    means = [run.assessment.x for run in found.runs]
    assert found.forecast.budget.value == pytest.approx(float(np.mean(means)), abs=1e-9)


def test_what_was_not_written_down_is_said():
    case = with_reading(with_sets(), run="1", time=Entry(20.0, "min"), power=Entry(860.0, "W"))
    (run,) = reduce_heated(case).runs
    assert run.used.sum() == 6 and np.isnan(run.x[-1])
    assert any("taken from the case: line pressure, sample flow" in line for line in run.cautions)
    assert any("1 of the sets have no temperature" in line for line in run.cautions)


def test_a_single_set_lacks_its_scatter():
    found = reduce_heated(with_reading(HEATED, run="1", T_heater=Entry(178.8, "°C")))
    assert any("only one" in line for line in found.forecast.missing) and found.runs[0].component is None


def test_a_run_that_stays_wet_gives_no_budget():
    found = reduce_heated(with_reading(HEATED, run="1", T_heater=Entry(158.0, "°C")))
    assert found.forecast.budget is None and np.isnan(found.runs[0].x).all()


def test_gauge_and_absolute_in_one_run_are_refused():
    case = with_reading(HEATED, run="1", T_heater=Entry(178.8, "°C"), p_line=Entry(6.0, "bar", "absolute"))
    case = with_reading(case, run="1", T_heater=Entry(178.8, "°C"), p_line=Entry(5.0, "bar", "gauge"))
    with pytest.raises(InputError, match="gauge in row 2, absolute in row 1"):
        reduce_heated(case)


def test_sets_survive_file_and_link():
    case = with_sets()
    assert from_json(to_json(case)) == case and from_link(to_link(case)) == case
