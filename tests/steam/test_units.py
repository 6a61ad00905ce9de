"""Units: published factors, three conversions kept apart, round trips, aliases and refusals."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.steam import InputError
from engine.steam.units import (
    ALIASES,
    SYSTEMS,
    UNITS,
    absolute_from_gauge,
    from_si,
    gauge_from_absolute,
    to_si,
    uncertainty_from_si,
    uncertainty_to_si,
)

EVERY_UNIT = [(unit, kind) for kind, units in UNITS.items() for unit in units]

# NIST SP 811 (2008) appendix B, factors to SI as printed; bold ones (exact there) carry "exact".
# From memory; the products of exact definitions among them were computed and agree.
SP_811 = [
    ("psi", "pressure", "6.894757e3"), ("bar", "pressure", "1e5", "exact"), ("mbar", "pressure", "1e2", "exact"),
    ("inHg", "pressure", "3.386389e3"), ("mmHg", "pressure", "1.333224e2"),
    ("kgf/cm²", "pressure", "9.80665e4", "exact"),
    ("mmH2O", "pressure", "9.80665", "exact"), ("inH2O", "pressure", "2.490889e2"),
    ("Btu/lb", "enthalpy", "2.326e3", "exact"), ("Btu/(lb °F)", "entropy", "4.1868e3", "exact"),
    ("ft³/lb", "specific volume", "6.242796e-2"), ("ft/s", "velocity", "3.048e-1", "exact"),
    ("in", "length", "2.54e-2", "exact"), ("ft", "length", "3.048e-1", "exact"), ("in²", "area", "6.4516e-4", "exact"),
    ("lb", "mass", "4.5359237e-1", "exact"), ("lb/h", "mass flow", "1.259979e-4"), ("Btu/h", "power", "2.930711e-1"),
    ("Btu in/(h ft² °F)", "conductivity", "1.442279e-1"), ("Btu/(h ft² °F)", "film coefficient", "5.678263"),
    ("lb/ft³", "density", "1.601846e1"), ("in³", "volume", "1.638706e-5"), ("ft³", "volume", "2.831685e-2"),
    ("L", "volume", "1e-3", "exact"), ("lb/(ft h)", "viscosity", "4.133789e-4"),
    ("Btu/°F", "heat capacity", "1.899101e3"),
    ("h", "time", "3.6e3", "exact"), ("min", "time", "6e1", "exact"),
]


@pytest.mark.parametrize("row", SP_811, ids=lambda row: row[0])
def test_published_conversion_factors(row):
    unit, kind, printed, *exact = row
    digits, _, exponent = printed.partition("e")
    half = 0.5 * 10.0 ** (int(exponent or 0) - len(digits.partition(".")[2]))
    factor = to_si(1.0, unit, kind)
    assert abs(factor - float(printed)) <= (1e-15 * factor if exact else half)


@pytest.mark.parametrize(("value", "unit", "kelvin"), [
    (0.0, "°C", 273.15), (100.0, "°C", 373.15), (32.0, "°F", 273.15), (212.0, "°F", 373.15), (-40.0, "°F", 233.15),
    (-459.67, "°F", 0.0), (0.01, "°C", 273.16), (300.0, "K", 300.0)])
def test_fixed_points_of_the_temperature_scales(value, unit, kelvin):
    """SP 811 B.8: t/°C = T/K - 273.15, t/°F = 1.8 T/K - 459.67."""
    assert to_si(value, unit, "temperature") == pytest.approx(kelvin, abs=1e-12)
    assert from_si(kelvin, unit, "temperature") == pytest.approx(value, abs=1e-12)


def test_a_temperature_a_difference_and_an_uncertainty_are_three_conversions():
    assert to_si(9.0, "°F", "temperature") == pytest.approx(260.372222, abs=1e-6)
    assert to_si(9.0, "°F", "difference") == pytest.approx(5.0, abs=1e-15)
    assert uncertainty_to_si(9.0, "°F", "temperature") == pytest.approx(5.0, abs=1e-15)
    assert to_si(5.0, "°C", "difference") == uncertainty_to_si(5.0, "°C", "temperature") == 5.0
    assert from_si(5.0, "°F", "difference") == uncertainty_from_si(5.0, "°F", "temperature") == pytest.approx(9.0)


@given(a=st.floats(-200, 900), b=st.floats(-200, 900))
def test_a_difference_is_what_lies_between_two_temperatures(a, b):
    for unit in UNITS["temperature"]:
        apart = to_si(a, unit, "temperature") - to_si(b, unit, "temperature")
        assert apart == pytest.approx(to_si(a - b, unit, "difference"), abs=1e-9)


@given(u=st.floats(0, 1e6))
def test_an_uncertainty_knows_no_offset(u):
    for unit, kind in EVERY_UNIT:
        assert uncertainty_to_si(0.0, unit, kind) == 0.0
        step = to_si(1.0, unit, kind) - to_si(0.0, unit, kind)
        assert uncertainty_to_si(u, unit, kind) == pytest.approx(u * step, rel=1e-11)
        assert uncertainty_from_si(uncertainty_to_si(u, unit, kind), unit, kind) == pytest.approx(u, rel=1e-14)


@given(value=st.just(0.0) | st.floats(1e-9, 1e9) | st.floats(-1e9, -1e-9))
def test_there_and_back(value):
    """To rounding: of the number, and of the offset where there is one (273.15 K is known to 6e-14)."""
    for unit, kind in EVERY_UNIT:
        rounding = 5e-16 * abs(from_si(0.0, unit, kind)) + 5e-16 * abs(to_si(0.0, unit, kind))
        for one, other in ((to_si, from_si), (from_si, to_si)):
            assert abs(other(one(value, unit, kind), unit, kind) - value) <= 1e-15 * abs(value) + rounding


@given(gauge=st.floats(-1e5, 2e7), barometer=st.floats(5e4, 1.1e5))
def test_gauge_and_absolute(gauge, barometer):
    absolute = absolute_from_gauge(gauge, barometer)
    assert absolute == gauge + barometer
    assert gauge_from_absolute(absolute, barometer) == pytest.approx(gauge, abs=4e-9)


def test_nine_bar_on_the_gauge():
    """9.0 bar gauge under 100.8 kPa are 10.008 bar absolute."""
    p = absolute_from_gauge(to_si(9.0, "bar", "pressure"), to_si(100.8, "kPa", "pressure"))
    assert from_si(p, "bar", "pressure") == pytest.approx(10.008, abs=1e-12)


def test_gauge_and_absolute_over_arrays():
    np.testing.assert_array_equal(absolute_from_gauge([1, 2], 100_000), [100_001.0, 100_002.0])
    np.testing.assert_array_equal(gauge_from_absolute([[3e5]], [1e5, 2e5]), [[2e5, 1e5]])
    with pytest.raises(InputError, match=r"^barometric pressure: got None Pa, needs a number"):
        absolute_from_gauge(1e5, None)


@pytest.mark.parametrize("alias", ALIASES)
def test_an_alias_means_its_unit(alias):
    kinds = [kind for kind, units in UNITS.items() if ALIASES[alias] in units]
    assert kinds
    for kind in kinds:
        assert to_si(7.0, alias, kind) == to_si(7.0, ALIASES[alias], kind)
        assert alias not in UNITS[kind]


@pytest.mark.parametrize("convert", [to_si, from_si, uncertainty_to_si, uncertainty_from_si])
@pytest.mark.parametrize("unit", ["furlong", "", "BAR", None, 3, ["bar"], "°C"])
def test_an_unknown_unit_is_refused_with_the_known_ones(convert, unit):
    with pytest.raises(InputError, match=r"^unit of a pressure: got .*, needs one of: Pa, kPa, mbar, bar, MPa, psi"):
        convert(1.0, unit, "pressure")


@pytest.mark.parametrize("convert", [to_si, from_si, uncertainty_to_si, uncertainty_from_si])
def test_an_unknown_kind_is_refused_with_the_known_ones(convert):
    with pytest.raises(InputError, match=r"^kind of quantity: got 'colour', needs one of: pressure, temperature, diff"):
        convert(1.0, "bar", "colour")


@pytest.mark.parametrize("convert", [to_si, from_si, uncertainty_to_si, uncertainty_from_si])
@pytest.mark.parametrize("value", ["5", None, True, 1j, [1.0, "a"], [[1.0], [1.0, 2.0]]], ids=repr)
def test_what_is_no_number_is_refused(convert, value):
    with pytest.raises(InputError, match=r"^pressure: got .* bar, needs a number or an array of numbers$"):
        convert(value, "bar", "pressure")


@pytest.mark.parametrize("unit", ["Pa", "mbar", "bar"])
def test_shapes_and_kinds_of_numbers(unit):
    size = to_si(1.0, unit, "pressure")
    for one in (120, 120.0, np.int8(120), np.float32(120), np.array(120)):
        result = to_si(one, unit, "pressure")
        assert type(result) is float and result == 120 * size
    for many in ([120, 1], (120, 1), np.array([120, 1], np.int8), np.array([120, 1], np.uint64)):
        result = to_si(many, unit, "pressure")
        assert result.dtype == np.float64
        np.testing.assert_array_equal(result, [120 * size, size])
    assert to_si([], unit, "pressure").shape == (0,) and to_si(np.empty((2, 0)), unit, "pressure").shape == (2, 0)


@pytest.mark.parametrize("convert", [to_si, from_si, uncertainty_to_si, uncertainty_from_si])
def test_the_given_array_is_neither_changed_nor_handed_back(convert):
    given = np.array([1.0, np.nan, 3.0])
    result = convert(given, "Pa", "pressure")
    np.testing.assert_array_equal(result, given)
    assert not np.shares_memory(result, given)


@pytest.mark.parametrize("system", SYSTEMS.values(), ids=SYSTEMS)
def test_a_unit_system_shows_every_kind(system):
    assert set(system.shown) == set(UNITS)
    for kind in UNITS:
        assert system.unit(kind) in UNITS[kind] and system.decimals(kind) >= 0
        assert system.value(1.0, kind) == from_si(1.0, system.unit(kind), kind)


def test_values_in_words():
    si, us = SYSTEMS["SI"], SYSTEMS["US"]
    assert si.text(900_800.0, "pressure") == "9.008 bar" and us.text(900_800.0, "pressure") == "130.65 psi"
    assert si.text(373.15, "temperature") == "100.0 °C" and us.text(373.15, "temperature") == "212.0 °F"
    assert si.text(5.0, "difference") == "5.0 K" and us.text(5.0, "difference") == "9.0 °F"
    assert si.text(0.9712, "fraction") == "0.9712" and si.text(900_800.0, "pressure", decimals=1) == "9.0 bar"
    assert si.text(float("nan"), "pressure") == si.text(None, "pressure") == si.text(np.inf, "pressure") == "none"
