"""Tolerance classes against the printed values of their standards."""

import numpy as np
import pytest

from engine.measurement import Instrument, gauge_temperature, pt100_resistance, pt100_tolerance, thermocouple_tolerance
from engine.measurement.tolerances import gauge_tolerance, zoned_gauge_tolerance


@pytest.mark.parametrize(("t", "ohm"), [  # IEC 60751, table 1; from memory
    (-100, 60.2558), (0, 100.0), (50, 119.3971), (100, 138.5055), (150, 157.3251), (300, 212.0515),
])
def test_pt100_resistance(t, ohm):
    assert pt100_resistance(t + 273.15) == pytest.approx(ohm, abs=5e-5)


@pytest.mark.parametrize(("grade", "t", "kelvin"), [
    ("A", 100, 0.35), ("A", 200, 0.55), ("B", 100, 0.8), ("B", 200, 1.3),  # IEC 60751, printed in public extracts
    ("AA", 0, 0.1), ("AA", 100, 0.27), ("A", -100, 0.35), ("C", 100, 1.6),  # from its formulas; C from memory
])
def test_pt100_tolerance(grade, t, kelvin):
    assert pt100_tolerance(t + 273.15, grade) == pytest.approx(kelvin, abs=1e-9)


@pytest.mark.parametrize(("grade", "t", "kelvin"), [  # IEC 60584-1, tables of tolerances; from memory
    ("T1", 100, 0.5), ("T1", 150, 0.6), ("T2", 100, 1.0), ("T2", 200, 1.5), ("K1", 375, 1.5), ("K1", 1000, 4.0),
    ("K2", 100, 2.5), ("K2", 1000, 7.5), ("J1", 500, 2.0), ("J2", 600, 4.5), ("N1", 500, 2.0), ("N2", 333, 2.5),
])
def test_thermocouple_tolerance(grade, t, kelvin):
    assert thermocouple_tolerance(t + 273.15, grade) == pytest.approx(kelvin, abs=1e-9)


@pytest.mark.parametrize("grade", ["0.1", "0.25", "0.6", "1", "1.6", "2.5", "4"])  # EN 837-1, accuracy classes
def test_dial_gauge_class_is_percent_of_span(grade):
    assert gauge_tolerance(5e5, grade, (0, 10e5)) == pytest.approx(float(grade) / 100 * 10e5, abs=1e-6)


def test_dial_gauge_away_from_20_degrees():
    """EN 837-1: ± 0.4 % of span for each 10 K (from memory): 24 K warmer is 0.96 % of span."""
    term = gauge_temperature((0, 10e5), 317.15)
    assert term.u * np.sqrt(3) == pytest.approx(0.0096 * 10e5, abs=1e-6)
    assert gauge_temperature((0, 10e5), 293.15).u == 0


@pytest.mark.parametrize(("grade", "low", "middle", "high"), [  # ASME B40.100; from memory
    ("4A", 0.1, 0.1, 0.1), ("3A", 0.25, 0.25, 0.25), ("2A", 0.5, 0.5, 0.5), ("1A", 1, 1, 1),
    ("A", 2, 1, 2), ("B", 3, 2, 3), ("C", 4, 3, 4), ("D", 5, 4, 5),
])
def test_zoned_gauge(grade, low, middle, high):
    got = zoned_gauge_tolerance(np.array([10e3, 50e3, 90e3]), grade, (0, 100e3))
    assert got == pytest.approx([low * 1e3, middle * 1e3, high * 1e3], abs=1e-9)


def test_class_limit_is_rectangular():
    """JCGM 100, 4.3.7: u = a/√3."""
    got = Instrument("IEC 60751", "A").standard_uncertainty(403.15)
    assert got.u == pytest.approx(0.41 / np.sqrt(3), abs=1e-12)
