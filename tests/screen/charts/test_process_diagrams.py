"""The diagrams of a case: pure, in the reader's units, with the right points in the right places."""

import copy
import json
import math
from functools import cache

import numpy as np
import pytest

from engine.job.assessment import assess
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import EXPECTED, NONE
from engine.job.case.rows import Entry
from engine.job.uncertainty import forecast
from engine.screen.charts.background import AXES, background, shown
from engine.screen.charts.process import process_diagrams
from engine.screen.charts.speed import velocity_diagram
from engine.steam import saturated
from engine.steam.units import SI, SYSTEMS, US

BOTH = pytest.mark.parametrize("units", [SI, US], ids=["SI", "US"])
EACH = pytest.mark.parametrize("axes", AXES, ids=lambda axes: axes.key)
CASES = {
    "demo": DEMO,
    "wet exhaust": DEMO.with_(T_exhaust=Entry(99.0, "°C")),
    "line superheated": DEMO.with_(T_exhaust=Entry(180.0, "°C")),
    "never dries": DEMO.with_(question=EXPECTED, wetness=Entry(30.0, "%")),
    "not even dry steam": DEMO.with_(p_line=Entry(0.3, "bar", "gauge"), T_exhaust=Entry(99.0, "°C")),
    "condenser": DEMO.with_(p_exhaust=Entry(0.02, "bar", "absolute"), exhaust_bore=Entry(0.2, "m"),
                            question=EXPECTED),
    "165 bar": DEMO.with_(p_line=Entry(165.0, "bar", "absolute"), leg_height=Entry(0.0, "m"), question=EXPECTED),
    "no flow": DEMO.with_(sample_flow=None, heat_loss_method=NONE),
    "choking": DEMO.with_(line_bore=Entry(5.0, "mm")),
    "great loss": DEMO.with_(heat_loss_method="per kg", heat_loss=Entry(250.0, "kJ/kg"), T_exhaust=Entry(102.0, "°C"),
                             least_superheat=Entry(0.0, "K")),
}
ALL = pytest.mark.parametrize("case", CASES.values(), ids=CASES)


assess = cache(assess)


@cache
def drawn_alone(case, system):
    return {d.key: d for d in process_diagrams(assess(case), SYSTEMS[system])}


def diagram(axes, case=DEMO, units=SI, pinned=()):
    if not pinned:
        return drawn_alone(case, units.name)[axes.key]
    return {d.key: d for d in process_diagrams(assess(case), units, pinned)}[axes.key]


def traces(d):
    return {trace.get("name"): trace for trace in d.figure["data"] if trace.get("name")}


def points(trace):
    """(x, y) pairs without the gaps."""
    return [(x, y) for x, y in zip(trace["x"], trace["y"], strict=True) if x is not None]


def place(axes, units, **state):
    return tuple(map(float, shown(axes, units, state)))


def inside(d, view, x, y):
    low, high = d.figure["layout"]["meta"][view]["xaxis.range"]
    bottom, top = d.figure["layout"]["meta"][view]["yaxis.range"]
    y = math.log10(y) if d.figure["layout"]["yaxis"].get("type") == "log" else y
    return low <= x <= high and bottom <= y <= top


# ---- what is drawn where


@BOTH
@EACH
def test_the_path_runs_from_the_line_through_dry_out_to_the_exhaust(axes, units):
    a = assess(DEMO)
    path = points(traces(diagram(axes, DEMO, units))["constant enthalpy"])
    h, p = a.path.h[0], a.si["p_line"]
    sat = saturated(p)
    line = place(axes, units, p=p, T=sat.T, h=h, s=sat.s_f + a.x * (sat.s_g - sat.s_f))
    assert path[0] == pytest.approx(line, rel=1e-9)
    end = a.states[2]
    assert path[-1] == pytest.approx(place(axes, units, p=end.p, T=end.T, h=end.h, s=end.s), rel=1e-12)
    dry = saturated(float(a.path.p_dry))
    on_saturation = place(axes, units, p=float(a.path.p_dry), T=dry.T, h=dry.h_g, s=dry.s_g)
    assert min(math.dist(on_saturation, point) / math.hypot(*on_saturation) for point in path) < 1e-9


@BOTH
@EACH
def test_the_states_are_marked_on_the_path(axes, units):
    drawn = traces(diagram(axes, DEMO, units))
    marks, path = points(drawn["states"]), points(drawn["constant enthalpy"])
    assert drawn["states"]["marker"]["symbol"] == ["circle", "diamond", "square"]
    assert (marks[0], marks[2]) == (path[0], path[-1])
    assert marks[1] in path
    names = [words.split("<br>")[0] for words in drawn["states"]["text"]]
    assert names == ["<b>Line</b>", "<b>Dries out</b>", "<b>Exhaust</b>"]
    assert "x 0.9720" in drawn["states"]["text"][0] and "superheated" in drawn["states"]["text"][2]
    assert f"{9.930 if units is SI else 144.02:.{3 if units is SI else 2}f}" in drawn["states"]["text"][0]


@EACH
def test_the_reading_stands_where_pressure_and_temperature_were_read(axes):
    a = assess(DEMO)
    read = a.read_state
    drawn = points(traces(diagram(axes))["reading"])
    assert drawn == [pytest.approx(place(axes, SI, p=102_100.0, T=394.25, h=read.h, s=read.s))]
    assert points(traces(diagram(axes, CASES["wet exhaust"]))["reading"]) == []


@EACH
def test_reach_and_constant_bore_are_drawn_where_there_are_any(axes):
    a = assess(DEMO)
    drawn = traces(diagram(axes))
    least = a.reach_path
    assert points(drawn["reach limit"])[-1] == pytest.approx(
        place(axes, SI, p=least.p[-1], T=least.T[-1], h=least.h[-1], s=least.s[-1]))
    assert points(drawn["constant bore"])[-1] == pytest.approx(
        place(axes, SI, **{n: getattr(a.bore_path, n)[-1] for n in "pThs"}))
    assert points(traces(diagram(axes, CASES["no flow"]))["constant bore"]) == []


@EACH
def test_pinned_cases_are_further_paths_with_their_letters(axes):
    pinned = [("A", assess(CASES["wet exhaust"])), ("B", assess(CASES["no flow"]))]
    trace = traces(diagram(axes, pinned=pinned))["pinned"]
    whole = [None if x is None else (x, y) for x, y in zip(trace["x"], trace["y"], strict=True)]
    gap = whole.index(None)
    assert whole[0] == points(traces(diagram(axes, CASES["wet exhaust"]))["constant enthalpy"])[0]
    assert whole[gap + 1:-1] == points(traces(diagram(axes, CASES["no flow"]))["constant enthalpy"])
    assert [word for word in trace["text"] if word] == ["A", "A", "B", "B"]
    assert len(trace["text"]) == len(trace["x"])


def test_a_path_that_cannot_be_trusted_is_dashed():
    for name, case in CASES.items():
        dash = traces(diagram(AXES[0], case))["constant enthalpy"]["line"]["dash"]
        assert dash == ("solid" if assess(case).verdict.value in ("reads", "thin") else "dash"), name


@EACH
def test_the_label_carries_the_answer(axes):
    assert diagram(axes).label == f"{axes.title} diagram. Quality in the line 0.9720, wetness 2.80 %."


# ---- windows


@ALL
@BOTH
@EACH
def test_the_window_holds_the_process_and_the_whole_holds_the_window(axes, units, case):
    d = diagram(axes, case, units)
    drawn = traces(d)
    for name in ("constant enthalpy", "reach limit", "constant bore", "reading", "states"):
        for x, y in points(drawn[name]):
            assert inside(d, "process", x, y) and inside(d, "whole", x, y), name


@EACH
def test_the_window_holds_pinned_paths_too(axes):
    d = diagram(axes, pinned=[("A", assess(CASES["165 bar"])), ("B", assess(CASES["condenser"]))])
    assert all(inside(d, "process", x, y) for x, y in points(traces(d)["pinned"]))


@EACH
def test_the_window_stands_still_for_a_small_step(axes):
    before, after = (diagram(axes, DEMO.with_(T_exhaust=Entry(T, "°C"))) for T in (121.1, 121.3))
    assert before.figure["layout"]["meta"] == after.figure["layout"]["meta"]


def test_the_same_window_in_both_systems():
    for axes in AXES:
        (si, us) = (diagram(axes, units=units).figure["layout"]["meta"]["process"] for units in (SI, US))
        for name, kind, log in (("xaxis.range", axes.x_kind, False), ("yaxis.range", axes.y_kind, axes.log_y)):
            values = [10**v for v in si[name]] if log else si[name]
            back = [10**v for v in us[name]] if log else us[name]
            factor = US.value(1.0, kind), US.value(0.0, kind)
            si_values = [v * (1 / SI.value(1.0, kind)) if kind != "temperature" else v + 273.15 for v in values]
            assert back == pytest.approx([factor[1] + v * (factor[0] - factor[1]) for v in si_values], rel=1e-9)


# ---- purity, and what goes to the browser


@ALL
@BOTH
def test_figures_are_pure_and_plain(case, units):
    a = assess(case)
    pinned = [("A", assess(DEMO))]
    before = copy.deepcopy(a.path)
    one, two = process_diagrams(a, units, pinned), process_diagrams(a, units, pinned)
    assert json.dumps([d.figure for d in one], allow_nan=False) == json.dumps([d.figure for d in two])
    assert all(np.array_equal(getattr(a.path, n), getattr(before, n)) for n in "pThs")
    for d in one:
        for trace in d.figure["data"]:
            assert len(trace["x"]) == len(trace["y"])
            assert [x is None for x in trace["x"]] == [y is None for y in trace["y"]]
        assert d.moving == tuple(range(len(d.figure["data"]) - 7, len(d.figure["data"])))


@BOTH
@EACH
def test_the_background_is_built_once_and_never_changed(axes, units):
    behind = background(axes.key, units.name)
    text = json.dumps(behind, allow_nan=False)
    first, second = diagram(axes, DEMO, units), diagram(axes, CASES["165 bar"], units)
    for k, trace in enumerate(behind):
        assert first.figure["data"][k] is second.figure["data"][k] is trace
    first.painted("dark")
    assert json.dumps(background(axes.key, units.name), allow_nan=False) == text


@BOTH
@EACH
def test_the_dome_and_a_quality_line(axes, units):
    drawn = traces(diagram(axes, DEMO, units))
    for p in (1e5, 10e5, 100e5):
        sat = saturated(p)
        curve = np.array(points(drawn["saturation"]))
        for side in ("f", "g"):
            at = place(axes, units, p=p, T=sat.T, h=getattr(sat, f"h_{side}"), s=getattr(sat, f"s_{side}"))
            nearest = curve[np.argsort(np.hypot(*((curve - at) / np.ptp(curve, axis=0)).T))[:2]]
            assert np.hypot(*((nearest[0] - at) / np.ptp(curve, axis=0))) < 0.02
    assert drawn["quality"]["x"].count(None) == 13  # 14 lines


# ---- velocity


@BOTH
def test_the_velocity_diagram_has_both_bores_and_the_constant_one(units):
    a = assess(DEMO)
    d = velocity_diagram(a, units)
    sample, exhaust, bore = d.figure["data"]
    speed = units.value(1.0, "velocity")
    assert sample["y"][0] == pytest.approx(a.velocities.sample * speed)
    assert exhaust["y"][-1] == pytest.approx(a.velocities.exhaust * speed)
    assert bore["y"] == pytest.approx((a.bore_path.velocity * speed).tolist())
    assert exhaust["x"][0] == pytest.approx(units.value(a.si["p_line"], "pressure"))
    assert sample["name"] == ("sample bore 15.7 mm" if units is SI else "sample bore 0.618 in")
    assert json.dumps(d.figure, allow_nan=False) == json.dumps(velocity_diagram(a, units).figure)


def test_without_flow_or_bores_there_is_no_velocity_diagram():
    assert velocity_diagram(assess(CASES["no flow"]), SI) is None
    assert velocity_diagram(assess(DEMO.with_(line_bore=None, exhaust_bore=None)), SI) is None


def test_one_bore_alone_is_drawn():
    only = velocity_diagram(assess(DEMO.with_(line_bore=None)), SI).figure["data"]
    assert [len(trace["x"]) > 0 for trace in only] == [False, True, False]


@BOTH
@EACH
def test_the_band_is_as_wide_as_the_uncertainty(axes, units):
    found = forecast(DEMO)
    drawn = traces({d.key: d for d in process_diagrams(assess(DEMO), units, expected=found)}[axes.key])
    band, path = points(drawn["uncertainty"]), points(drawn["constant enthalpy"])
    assert not drawn_alone(DEMO, units.name)[axes.key].figure["data"][-7]["x"]  # none where none is asked for
    x, y = shown(axes, units, {n: np.array([getattr(path_, n)[0] for path_ in found.band]) for n in "pThs"})
    half = len(band) // 2
    assert band[0] == pytest.approx((x[0], y[0])) and band[-1] == pytest.approx((x[1], y[1]))
    wetter, drier = found.band
    assert (drier.x[0] - wetter.x[0]) / 2 == pytest.approx(found.budget.U, rel=1e-9)
    assert band[half - 1] != path[-1] != band[half]
