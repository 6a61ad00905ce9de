"""The pictures of the Readings page: what is drawn is what the result holds."""

import numpy as np
import pytest

from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.job.result import reduce
from engine.job.result.decisions import with_removed, with_window
from engine.job.result.runs import Run, runs_typed
from engine.job.uncertainty import check
from engine.screen.charts import readings
from engine.screen.charts.decision import decision_diagram, draws_diagram
from engine.screen.charts.readings import MOST, decimated, run_diagram
from engine.steam.units import SI, US


def a_run(n=400, spike=None):
    rng = np.random.default_rng(2)
    time = np.arange(n) * 10.0
    T = 394.25 - 20 * np.exp(-time / 240.0) + 0.05 * rng.standard_normal(n)
    if spike is not None:
        T[spike] += 3.0
    channels = {"p_line": 9e5 + 300 * rng.standard_normal(n), "T_exhaust": T}
    return Run("run1.csv", np.arange(2, n + 2), time, channels, {"p_line": "gauge"}, np.ones(n, bool))


def drawn(case=DEMO, run=None, units=SI, **how):
    result = reduce(case, [run or a_run()])
    return run_diagram(result.runs[0], result, units, **how), result


def trace(diagram, name):
    return next(t for t in diagram.figure["data"] if t["name"] == name)


def test_each_channel_has_its_panel_and_the_quality_the_last():
    diagram, result = drawn()
    layout = diagram.figure["layout"]
    assert {"yaxis", "yaxis2", "yaxis3"} <= set(layout) and "yaxis4" not in layout  # the exhaust was not recorded
    assert layout["yaxis3"]["title"]["text"] == "x" and layout["xaxis"]["anchor"] == "y3"
    domains = [layout[f"yaxis{k}"]["domain"] for k in ("", "2", "3")]
    assert domains[0][1] == 1.0 and all(a[0] > b[1] for a, b in zip(domains, domains[1:], strict=False))
    line = trace(diagram, "line pressure")
    assert np.mean(line["y"]) == pytest.approx((9e5 + 100_800 - 7831) / 1e5, abs=0.001)
    assert trace(diagram, "quality of the means")["y"] == [result.runs[0].quality] * 2
    assert max(trace(diagram, "± U by the instruments")["y"]) == pytest.approx(result.x + result.instruments.U)


def test_settled_stretches_are_shaded_and_the_window_is_framed():
    diagram, result = drawn()
    shaded, frame = diagram.figure["layout"]["shapes"]
    assert shaded["fillcolor"].startswith("var:green") and shaded["x0"] == result.runs[0].settling.found[0].begin / 60
    assert frame["line"]["dash"] == "solid" and frame["x1"] == pytest.approx(399 / 6)
    by_hand, _ = drawn(with_window(DEMO, "run1.csv", 1200.0, 1800.0, "agreed"))
    frame = by_hand.figure["layout"]["shapes"][-1]
    assert (frame["x0"], frame["x1"], frame["line"]["dash"]) == (20.0, 30.0, "dash")
    assert "by hand" in by_hand.figure["layout"]["annotations"][0]["text"]


def test_the_window_alone_is_shown_on_request():
    whole, near = (drawn(window=w)[0].figure["layout"] for w in (False, True))
    assert whole["xaxis"]["range"][0] < 0 < near["xaxis"]["range"][0]
    assert np.ptp(near["yaxis"]["range"]) < 0.2 * np.ptp(whole["yaxis"]["range"])


def test_the_temperature_is_seen_against_saturation():
    diagram, _ = drawn()
    floor = trace(diagram, "saturation at the exhaust")["y"]
    assert np.mean(floor) == pytest.approx(100.2, abs=0.1)
    assert diagram.figure["layout"]["yaxis"]["range"][0] < 100


def test_readings_that_lie_apart_are_marked_and_what_was_left_out_otherwise():
    diagram, _ = drawn(run=a_run(spike=300))
    marks = next(t for t in diagram.figure["data"] if t["name"] == "apart" and t["yaxis"] == "y")
    assert 50.0 in marks["x"] and set(marks["marker"]["symbol"]) == {"x-thin-open"}
    diagram, _ = drawn(with_removed(DEMO, "run1.csv", 302, "slug"), a_run(spike=300))
    marks = next(t for t in diagram.figure["data"] if t["name"] == "apart" and t["yaxis"] == "y")
    assert marks["marker"]["symbol"][marks["x"].index(50.0)] == "circle-open"
    assert any("left out, slug" in text for text in marks["text"])


def test_of_too_many_that_lie_apart_the_farthest_are_marked(monkeypatch):
    monkeypatch.setattr(readings, "MARKED", 1)
    run = a_run(spike=300)
    run.channels["T_exhaust"][320] += 1.0  # apart as well, but less
    diagram, _ = drawn(run=run)
    marks = next(t for t in diagram.figure["data"] if t["name"] == "apart" and t["yaxis"] == "y")
    assert marks["x"] == [50.0]


def test_units_of_the_axes():
    diagram, _ = drawn(units=US)
    assert diagram.figure["layout"]["yaxis2"]["title"]["text"] == "p₁, psi abs"


def test_a_long_log_is_drawn_in_few_points_that_keep_its_spikes():
    x = np.arange(1_000_000.0)
    y = np.sin(x / 1e4)
    y[777_777] = 9.0
    y[400_000:420_000] = np.nan
    px, py = decimated(x, y)
    assert px.size <= MOST and np.nanmax(py) == 9.0 and np.isnan(py).any()
    assert (np.diff(px) >= 0).all()
    assert decimated(x[:100], y[:100])[0].size == 100


def test_a_run_without_a_clock_or_a_quality_is_drawn_all_the_same():
    rows = tuple(FIELDS["readings"].row(T_exhaust=Entry(T, "°C")) for T in (100.0, 100.1, 100.2))
    case = DEMO.with_(readings=rows)
    result = reduce(case, runs_typed(case))
    diagram = run_diagram(result.runs[0], result, SI)
    assert diagram.figure["layout"]["xaxis"]["title"]["text"] == "row"
    assert "yaxis2" not in diagram.figure["layout"]  # no row has a quality


def test_the_decision_shows_both_intervals_against_the_limit():
    result = reduce(DEMO, [a_run()])
    diagram = decision_diagram(result)
    interval, accepts, words = diagram.figure["data"]
    assert interval["x"] == [result.x] * 2 and interval["error_x"]["array"] == [result.budget.U, result.instruments.U]
    assert accepts["x"] == [v.accept_from for v in result.verdicts] and accepts["marker"]["symbol"] == "triangle-right"
    assert words["text"][0] == "◇ undecided  with sampling"
    assert diagram.figure["layout"]["shapes"][0]["x0"] == 0.970 and "undecided" in diagram.label
    most = reduce(DEMO.with_(limit_side="at most"), [a_run()])
    assert decision_diagram(most).figure["data"][1]["x"] == [v.accept_to for v in most.verdicts]
    assert decision_diagram(reduce(DEMO.with_(x_limit=None), [a_run()])) is None


def test_the_draws_stand_beside_the_budget():
    result = reduce(DEMO, [a_run()])
    both = draws_diagram(check(result.measurement, result.budget, draws=20_000), result)
    assert len(both.figure["data"]) == 4
    for curve in both.figure["data"]:
        area = np.trapezoid(curve["y"], curve["x"])
        assert area > 0 and max(curve["y"]) < 1.3
    alone = reduce(DEMO.with_(sampling_kind="not stated"), [a_run()])
    assert len(draws_diagram(check(alone.measurement, alone.budget, draws=20_000), alone).figure["data"]) == 2
