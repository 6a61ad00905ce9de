"""Instruments: terms by name, limits of use, shared instruments, and every refusal."""

from math import sqrt

import numpy as np
import pytest

from engine.measurement import (
    KINDS,
    Input,
    Instrument,
    certificate,
    cold_junction,
    gauge_temperature,
    pt100_resistance,
    pt100_tolerance,
    resolution,
    scale_reading,
    stability,
    thermocouple_tolerance,
    uncertainty_budget,
)
from engine.measurement.tolerances import IEC_60751, gauge_tolerance, transmitter_tolerance, zoned_gauge_tolerance
from engine.steam import InputError

SPAN = (0.0, 16e5)
GAUGE = Instrument("EN 837-1", "1.6", SPAN, (resolution(0.1e5), gauge_temperature(SPAN, 303.15)))


def test_terms_add_in_squares():
    got = GAUGE.standard_uncertainty(9e5)
    assert set(got.terms) == {"class 1.6", "resolution", "gauge temperature"}
    assert got.u == pytest.approx(sqrt(sum(u * u for u in got.terms.values())))
    assert isinstance(got.u, float) and all(isinstance(u, float) for u in got.terms.values())


def test_components_say_the_same_as_the_terms():
    parts = GAUGE.components(9e5, group="line gauge")
    assert {c.name: c.u for c in parts} == pytest.approx(GAUGE.standard_uncertainty(9e5).terms)
    assert {c.group for c in parts} == {"line gauge"}


def test_arrays_keep_their_shape_and_are_not_modified():
    T = np.array([[300.0, 373.15], [400.0, 473.15]])
    kept = T.copy()
    got = Instrument("IEC 60751", "A", extra=(resolution(0.1),)).standard_uncertainty(T)
    assert got.u.shape == got.terms["resolution"].shape == T.shape
    assert got.u[1, 1] == Instrument("IEC 60751", "A", extra=(resolution(0.1),)).standard_uncertainty(473.15).u
    assert np.array_equal(T, kept)
    assert Instrument("IEC 60751", "A").standard_uncertainty(np.zeros(0)).u.shape == (0,)


def test_a_better_class_is_never_worse():
    T = np.linspace(273.15, 423.15, 50)
    widths = [pt100_tolerance(T, grade) for grade in ("AA", "A", "B", "C")]
    assert all((a < b).all() for a, b in zip(widths[:-1], widths[1:], strict=True))


def test_resistance_rises_and_joins_at_zero_celsius():
    T = np.linspace(73.15, 1123.15, 2000)
    assert (np.diff(pt100_resistance(T)) > 0).all()
    assert pt100_resistance(273.15 - 1e-6) == pytest.approx(pt100_resistance(273.15 + 1e-6), abs=1e-5)
    assert pt100_resistance(373.15, R0=1000.0) == pytest.approx(10 * pt100_resistance(373.15))


def test_tolerances_hold_at_their_very_limits_and_not_beyond():
    for grade, row in IEC_60751.items():
        for film, (low, high) in ((False, row.wire), (True, row.film)):
            for t in (low, high):
                assert pt100_tolerance(t + 273.15, grade, film=film) == pytest.approx(row.fixed + row.slope * abs(t))
            for t in (low - 0.01, high + 0.01):
                with pytest.raises(InputError, match=f"class {grade}, {'film' if film else 'wire-wound'} holds from"):
                    pt100_tolerance(t + 273.15, grade, film=film)


def test_zone_borders_take_the_wider_limit():
    got = zoned_gauge_tolerance(np.array([0.25, 0.2501, 0.7499, 0.75]) * 16e5, "A", SPAN)
    assert got == pytest.approx([32e3, 16e3, 16e3, 32e3])


def test_compound_gauge_counts_its_whole_span():
    assert gauge_tolerance(0.0, "1", (-1e5, 3e5)) == pytest.approx(4e3)


def test_scale_and_display():
    assert resolution(0.1).u == pytest.approx(0.05 / sqrt(3))
    assert scale_reading(0.5, told_apart=0.2).u == pytest.approx(0.05 / sqrt(3))
    assert stability(0.1, SPAN).u == pytest.approx(1.6e3 / sqrt(3))
    assert cold_junction(0.5).u == pytest.approx(0.5 / sqrt(3))
    assert certificate(0.06).u == pytest.approx(0.03)


def test_certificate_lives_by_its_terms():
    got = Instrument("certificate", extra=(certificate(0.06), resolution(0.01))).standard_uncertainty(400.0)
    assert set(got.terms) == {"certificate", "resolution"}
    with pytest.raises(InputError, match="its certificate among the terms"):
        Instrument("certificate")


def test_transmitter():
    got = Instrument("transmitter", "0.1", SPAN, (stability(0.1, SPAN),)).standard_uncertainty(9e5)
    assert got.terms["0.1 % of span"] == pytest.approx(1.6e3 / sqrt(3))
    assert got.u == pytest.approx(sqrt(2) * 1.6e3 / sqrt(3))


def test_one_instrument_for_two_quantities_cancels_in_their_difference_but_for_the_reading():
    gauge = Instrument("transmitter", "0.1", SPAN, (resolution(100.0),))
    inputs = [Input(n, p, gauge.components(p, group="gauge", shared="gauge")) for n, p in (("a", 9e5), ("b", 2e5))]
    budget = uncertainty_budget(lambda a, b: a - b, inputs)
    assert budget.u == pytest.approx(sqrt(2) * 50 / sqrt(3), rel=1e-6)
    assert budget.groups == ("gauge",)
    inputs = [Input(n, p, gauge.components(p, shared="gauge", read_once=True)) for n, p in (("a", 9e5), ("b", 2e5))]
    assert uncertainty_budget(lambda a, b: a - b, inputs).u == pytest.approx(0, abs=1e-6)


def test_cautions():
    assert GAUGE.cautions(9e5) == ()
    assert "below 75 %" in GAUGE.cautions(13e5)[0]
    assert "a smaller scale is better" in GAUGE.cautions(2e5)[0]
    assert Instrument("IEC 60751", "A").cautions(400.0) == ()


def test_every_kind_and_grade_can_be_made():
    for kind, grades in KINDS.items():
        for grade in grades or ("0.5",):
            extra = (certificate(1.0),) if kind == "certificate" else ()
            made = Instrument(kind, grade, SPAN, extra)
            assert made.standard_uncertainty(350.0).u > 0


@pytest.mark.parametrize(("arguments", "message"), [
    (("Pt100",), "kind of instrument: got Pt100, needs one of: IEC 60751"),
    (("IEC 60751", "D"), "class by IEC 60751: got D, needs one of: AA, A, B, C"),
    (("EN 837-1", "1.6"), "span of the EN 837-1 instrument: got None, needs two finite numbers"),
    (("EN 837-1", "1.6", (16e5, 0)), "needs two finite numbers, low then high"),
    (("transmitter", "good", SPAN), "accuracy of the transmitter: got good % of span, needs a number above 0"),
    (("EN 837-1", "1", SPAN, (resolution(1.0), resolution(2.0))), "needs names used once"),
])
def test_refused_instruments(arguments, message):
    with pytest.raises(InputError, match=message):
        Instrument(*arguments)


def test_several_faults_at_once():
    with pytest.raises(InputError) as caught:
        Instrument("EN 837-1", "2", None)
    assert len(caught.value.faults) == 2


@pytest.mark.parametrize("reading", [17e5, -1.0, np.nan])
def test_readings_beyond_the_scale_are_refused(reading):
    with pytest.raises(InputError, match="pressure.*needs 0 to 1.6e[+]06 Pa, the scale"):
        GAUGE.standard_uncertainty(reading)


def test_refused_readings_and_figures():
    with pytest.raises(InputError, match="temperatures are in kelvin here"):
        thermocouple_tolerance(120.0, "T1")
    with pytest.raises(InputError, match="temperature.*needs 173.15 to 723.15 K"):
        pt100_tolerance(np.nan, "A")
    with pytest.raises(InputError, match="class of platinum thermometer: got Z"):
        pt100_tolerance(373.15, "Z")
    with pytest.raises(InputError, match="accuracy of the transmitter"):
        transmitter_tolerance(1e5, 0, SPAN)
    with pytest.raises(InputError, match="span: got None"):
        gauge_tolerance(1e5, "1", None)
    with pytest.raises(InputError, match="ambient temperature: got 24 K, needs 173.15 K to 473.15 K"):
        gauge_temperature(SPAN, 24.0)
    with pytest.raises(InputError, match="reading: got not a finite number"):
        Instrument("certificate", extra=(certificate(1.0),)).standard_uncertainty(np.nan)
