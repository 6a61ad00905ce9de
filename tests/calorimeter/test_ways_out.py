"""What to take along and what to do instead: the printed chart and the ways out."""

import numpy as np
import pytest

from engine.calorimeter import (
    PRICES,
    Readability,
    Status,
    WayKind,
    combined_quality,
    drain_needed,
    electric_quality,
    exhaust_pressure_for,
    least_quality,
    line_pressure_window,
    power_needed,
    quality,
    reach,
    reading_chart,
    ways_out,
)
from engine.calorimeter.ways_out import P_PRACTICAL, SEPARATOR_SHARE
from engine.steam import InputError, saturation_temperature
from engine.steam.units import P_STANDARD, ZERO_CELSIUS, to_si

P1, P2 = 10e5, P_STANDARD
TERMS = {"heat_loss": 3e3, "line_velocity": 25.0, "exhaust_velocity": 60.0, "recovery": 0.7}


# --- the printed chart -----------------------------------------------------------------------------------

def test_a_chart_has_round_temperatures_between_its_ends():
    chart = reading_chart(P1, P2)
    t = chart.T_exhaust - ZERO_CELSIUS
    assert chart.step == 2.0 and chart.unit == "°C"
    np.testing.assert_allclose(t % 2, 0, atol=1e-9)
    np.testing.assert_allclose(np.diff(t), 2.0)
    assert chart.T_least == chart.T_saturation + 5.0 == saturation_temperature(P2) + 5.0
    assert chart.T_least <= chart.T_exhaust[0] < chart.T_least + 2
    assert chart.T_dry - 2 < chart.T_exhaust[-1] <= chart.T_dry
    np.testing.assert_array_equal(chart.x, quality(P1, P2, chart.T_exhaust).x)
    np.testing.assert_array_equal(chart.superheat, chart.T_exhaust - chart.T_saturation)
    np.testing.assert_array_equal(chart.status, np.where(chart.superheat < 10, Status.THIN_MARGIN, Status.OK))
    assert chart.x_least <= chart.x[0] and chart.x[-1] <= 1


@pytest.mark.parametrize("p1", [1.3e5, 2e5, 10e5, 40e5, 100e5])
@pytest.mark.parametrize("unit", ["°C", "°F", "K"])
def test_a_chart_fits_a_page(p1, unit):
    chart = reading_chart(p1, P2, unit=unit, **TERMS)
    assert chart.T_exhaust.size <= 40
    if chart.x_least < 0.99:
        assert chart.T_exhaust.size >= 15
    rows = np.round((chart.T_exhaust - to_si(0.0, unit, "temperature")) / to_si(chart.step, unit, "difference"), 6)
    np.testing.assert_array_equal(rows, np.round(rows))


def test_a_chart_with_a_step_of_ones_own():
    chart = reading_chart(P1, P2, step=0.5)
    assert chart.T_exhaust.size == 91 and chart.step == 0.5
    for step in (0, -1.0, np.nan, np.inf, 1e-6, [1.0, 2.0]):
        with pytest.raises(InputError, match="step of the reading chart: got .* needs more than 0, and at most 1000"):
            reading_chart(P1, P2, step=step)


def test_a_chart_without_rows_where_nothing_can_be_read():
    chart = reading_chart(1.15e5, P2)
    assert chart.T_exhaust.size == chart.x.size == chart.status.size == 0
    assert chart.x_least > 1 and chart.T_dry < chart.T_least


def test_a_chart_of_a_fast_exhaust_starts_where_its_stream_is_dry():
    chart = reading_chart(P1, P2, exhaust_velocity=200.0)
    assert chart.T_least > chart.T_saturation + 8
    assert chart.T_exhaust[0] >= chart.T_least - 1e-6
    assert chart.x[0] >= chart.x_least - 1e-9


def test_what_a_chart_refuses():
    with pytest.raises(InputError) as caught:
        reading_chart(np.nan, -1.0, comfortable_superheat=np.nan)
    assert {f.name for f in caught.value.faults} == {"p_line", "p_exhaust", "comfortable_superheat"}
    with pytest.raises(InputError, match="reading chart: got arrays, needs single values"):
        reading_chart([P1, P1], P2)
    with pytest.raises(InputError, match="unit of a temperature: got 'bar', needs one of"):
        reading_chart(P1, P2, unit="bar")


# --- ways out --------------------------------------------------------------------------------------------

FLOW = 30 / 3600


def ways(p_line, p_exhaust, x, **others):
    found = ways_out(p_line, p_exhaust, x, sample_flow=FLOW, **others)
    return {way.kind: way for way in found}, [way.kind for way in found]


def test_nothing_to_do_where_it_can_be_read():
    assert ways_out(P1, P2, 0.97, sample_flow=FLOW) == ()
    assert ways_out(P1, P2, least_quality(P1, P2), sample_flow=FLOW) == ()


def test_every_change_makes_it_readable():
    """Applied to the case as it is, without rounding undoing it."""
    for p1, p2, x in ((10e5, P2, 0.94), (1.51e5, P2, 0.97), (100e5, P2, 0.95), (8e5, P2, 0.93), (5e5, 3e5, 0.985)):
        found, _ = ways(p1, p2, x)
        assert found[WayKind.EXHAUST].feasible and found[WayKind.HEATER].feasible
        changed = reach(p1, found[WayKind.EXHAUST].changes["p_exhaust"], x, 1.0)
        assert changed.verdict == Readability.THIN and changed.margin_low >= 5.0 - 1e-6
        if found[WayKind.LINE].feasible:
            changed = reach(found[WayKind.LINE].changes["p_line"], p2, x, 1.0)
            assert changed.verdict == Readability.THIN
        if found[WayKind.SEPARATOR].feasible:
            arrives = found[WayKind.SEPARATOR].numbers
            assert combined_quality(p1, least_quality(p1, p2), drain_fraction=arrives["drain_fraction"]) == (
                pytest.approx(x, abs=1e-12))
            assert arrives["water_share"] <= found[WayKind.SEPARATOR].changes["water_share"]
        changes = found[WayKind.HEATER].changes
        T = saturation_temperature(p2) + 5.0
        assert electric_quality(p1, changes["p_heater"], T, changes["power"], FLOW).x <= x


def test_the_ranking_by_effort():
    found, order = ways(10e5, P2, 0.94)
    assert order == [WayKind.EXHAUST, WayKind.LINE, WayKind.SEPARATOR, WayKind.HEATER, WayKind.OTHER]
    assert order == list(WayKind)
    assert all(way.feasible and not way.why_not for way in found.values())


def test_what_cannot_be_done_comes_last_and_says_why():
    found, order = ways(10e5, P2, 0.88)
    assert order == [WayKind.SEPARATOR, WayKind.HEATER, WayKind.OTHER, WayKind.EXHAUST, WayKind.LINE]
    exhaust, line = found[WayKind.EXHAUST], found[WayKind.LINE]
    assert exhaust.why_not == "It is lower than can be had at the exhaust." and exhaust.changes == {}
    assert 1e3 < exhaust.numbers["p_exhaust"] < P_PRACTICAL
    assert line.why_not == "With this exhaust it cannot be read at any line pressure." and line.changes == {}
    assert line.numbers["x_least"] == pytest.approx(0.9329, abs=1e-4)


def test_lines_so_wet_that_no_exhaust_will_do():
    found, order = ways(10e5, P2, 0.5)
    assert order[:2] == [WayKind.HEATER, WayKind.OTHER]
    assert found[WayKind.EXHAUST].why_not == "Not even the triple pressure of water would be low enough."
    assert found[WayKind.EXHAUST].numbers == {}
    separator = found[WayKind.SEPARATOR]
    assert separator.why_not == "It is more of the water than the separator takes."
    assert separator.numbers["water_share"] > SEPARATOR_SHARE
    better, _ = ways(10e5, P2, 0.5, water_share=0.99)
    assert better[WayKind.SEPARATOR].feasible and better[WayKind.SEPARATOR].changes == {"water_share": 0.99}


def test_a_line_at_which_no_steam_can_be_read():
    found, order = ways(1.15e5, P2, 0.999, U_quality=1e-4)
    assert found[WayKind.SEPARATOR].why_not == "With this exhaust not even dry steam could be read."
    assert order[-1] == WayKind.SEPARATOR and order[-2] == WayKind.OTHER
    assert found[WayKind.LINE].changes["p_line"] == pytest.approx(found[WayKind.LINE].numbers["p_low"], rel=0.01)


def test_the_nearer_end_of_the_window():
    above, _ = ways(100e5, P2, 0.95)
    window = line_pressure_window(0.95, P2)
    numbers, change = above[WayKind.LINE].numbers, above[WayKind.LINE].changes["p_line"]
    assert (numbers["p_low"], numbers["p_high"], numbers["p_best"]) == (window.p_low, window.p_high, window.p_best)
    assert 0.998 * window.p_high < change < window.p_high
    below, _ = ways(5e5, P2, 0.95)
    assert window.p_low < below[WayKind.LINE].changes["p_line"] < 1.002 * window.p_low


def test_numbers_are_those_of_the_other_methods():
    found, _ = ways(P1, P2, 0.93, superheat=7.0, heat_loss=4e3)
    drain = drain_needed(P1, 0.93, P2, 7.0, heat_loss=4e3)
    assert found[WayKind.SEPARATOR].numbers == {"drain_fraction": drain.drain_fraction,
                                                "water_share": drain.water_share, "x_throttled": drain.x_throttled}
    heater = found[WayKind.HEATER]
    assert heater.numbers["power"] == power_needed(P1, 0.93, P2, FLOW, 7.0, power_loss=4e3 * FLOW)
    assert heater.changes["power_loss"] == 4e3 * FLOW
    assert found[WayKind.EXHAUST].numbers["p_exhaust"] == exhaust_pressure_for(P1, 0.93, 7.0, heat_loss=4e3).p_exhaust


def test_another_method_first_where_wetness_is_within_its_uncertainty():
    only = ways_out(P1, P2, 0.9995, sample_flow=FLOW)
    assert [way.kind for way in only] == [WayKind.OTHER]
    assert only[0].numbers == {"wetness": pytest.approx(0.0005), "U_quality": 1e-3}
    assert ways_out(P1, P2, 0.9995, sample_flow=FLOW, U_quality=1e-4) == ()
    _, order = ways(1.15e5, P2, 0.9995)
    assert order[0] == WayKind.OTHER and len(order) == 5


def test_the_lowest_exhaust_pressure_is_the_users():
    strict, order = ways(10e5, P2, 0.94, p_exhaust_lowest=60e3)
    assert not strict[WayKind.EXHAUST].feasible and order[-1] == WayKind.EXHAUST
    assert ways(10e5, P2, 0.94, p_exhaust_lowest=50e3)[0][WayKind.EXHAUST].feasible


def test_every_way_has_a_price_in_words():
    assert set(PRICES) == set(WayKind)
    found, _ = ways(10e5, P2, 0.94)
    for kind, way in found.items():
        assert way.price == PRICES[kind] and way.price.endswith(".") and len(way.price) < 130
    text = " ".join(PRICES.values()).lower()
    assert not [word for word in ("safe", "go ahead", "permit") if word in text]


def test_what_ways_out_refuses():
    with pytest.raises(InputError) as caught:
        ways_out(np.nan, -1.0, 97.0, superheat=-1.0, sample_flow=0.0, U_quality=-1.0, p_exhaust_lowest=0.0,
                 water_share=1.5)
    assert {f.name for f in caught.value.faults} == {
        "p_line", "p_exhaust", "x", "least_superheat", "sample_flow", "U_quality", "p_exhaust_lowest", "water_share"}
    with pytest.raises(InputError, match="ways out: got arrays, needs single values"):
        ways_out([P1, P1], P2, 0.9, sample_flow=FLOW)
