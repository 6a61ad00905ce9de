"""Invented cases with everything stated, for the tests of this floor: readings, instruments, limits."""

from engine.job.case import Case
from engine.job.case.demo import FACTORY_MAIN
from engine.job.case.fields import FIELDS
from engine.job.case.fields_instruments import HALF_WIDTH, LIMIT, SHOWS_GAUGE
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG
from engine.job.case.fields_rig import MERCURY
from engine.job.case.rows import Entry
from engine.job.result import reduce
from engine.job.result.runs import runs_typed

_STATED = {
    "exhaust_gauge_kind": LIMIT, "exhaust_gauge_U": Entry(0.5, "kPa"), "exhaust_gauge_shows": SHOWS_GAUGE,
    "barometer_kind": LIMIT, "barometer_U": Entry(0.2, "kPa"),
    "flow_meter_kind": LIMIT, "flow_meter_U": Entry(5.0, "%"),
    "heat_loss_tolerance": Entry(40.0, "%"), "sampling_kind": HALF_WIDTH,
}

FACTORY = FACTORY_MAIN

BOILER = Case({
    "title": "Boiler outlet, 40 bar", **_STATED,
    "p_line": Entry(40.0, "bar", "gauge"), "p_barometer": Entry(101.3, "kPa", "absolute"),
    "p_exhaust": Entry(104.8, "kPa", "absolute"), "T_exhaust": Entry(154.7, "°C"),
    "line_velocity": Entry(24.8, "m/s"), "sample_flow": Entry(55.9, "kg/h"), "exhaust_bore": Entry(26.6, "mm"),
    "recovery": Entry(0.7, "1"), "heat_loss_method": BY_CONDUCTANCE, "conductance": Entry(0.25, "W/K"),
    "T_ambient": Entry(32.0, "°C"), "x_limit": Entry(0.995, "1"), "sampling": Entry(0.2, "%pt"),
    "line_gauge_kind": "transmitter", "line_gauge_grade": "0.1", "line_gauge_high": Entry(60.0, "bar"),
    "thermometer_kind": "IEC 60751", "thermometer_grade": "AA",
})

GEOTHERMAL = Case({
    "title": "Geothermal separator outlet", **_STATED,
    "p_line": Entry(5.0, "bar", "gauge"), "p_barometer": Entry(99.0, "kPa", "absolute"),
    "p_exhaust": Entry(99.5, "kPa", "absolute"), "T_exhaust": Entry(135.8, "°C"),
    "sample_flow": Entry(19.0, "kg/h"), "heat_loss_method": BY_CONDUCTANCE, "conductance": Entry(0.20, "W/K"),
    "T_ambient": Entry(18.0, "°C"), "x_limit": Entry(0.998, "1"), "sampling": Entry(0.0, "%pt"),
    "line_gauge_kind": "EN 837-1", "line_gauge_grade": "1", "line_gauge_high": Entry(10.0, "bar"),
    "thermometer_kind": "IEC 60751", "thermometer_grade": "A", "heat_loss_tolerance": Entry(25.0, "%"),
})

HIGH_SITE = Case({
    "title": "Plant at 2600 m", **_STATED,
    "p_line": Entry(7.0, "bar", "gauge"), "p_barometer": Entry(73.75, "kPa", "absolute"),
    "p_exhaust": Entry(74.8, "kPa", "absolute"), "T_exhaust": Entry(106.5, "°C"),
    "heat_loss_method": BY_KG, "heat_loss": Entry(2.9, "kJ/kg"), "T_ambient": Entry(15.0, "°C"),
    "x_limit": Entry(0.963, "1"), "sampling": Entry(0.4, "%pt"),
    "line_gauge_kind": "EN 837-1", "line_gauge_grade": "1.6", "line_gauge_high": Entry(16.0, "bar"),
    "line_gauge_resolution": Entry(0.2, "bar"), "heat_loss_tolerance": Entry(50.0, "%"),
    "thermometer_kind": "IEC 60584-1", "thermometer_grade": "T1",
})

# every correction there is
FULL = FACTORY.with_(
    line_gauge_correction=Entry(-0.05, "bar"), exhaust_gauge_correction=Entry(0.2, "kPa"),
    barometer_correction=Entry(0.3, "kPa"), thermometer_correction=Entry(-0.2, "K"), thermometer=MERCURY,
    exposed=Entry(40.0, "K"), T_stem=Entry(40.0, "°C"))


def sets(temperatures, run="", **cells):
    """Typed readings, one a temperature."""
    common = {"run": run, "p_line": Entry(9.0, "bar", "gauge"), "p_exhaust": Entry(1.3, "kPa", "gauge"), **cells}
    return tuple(FIELDS["readings"].row(T_exhaust=Entry(T, "°C"), **common) for T in temperatures)


def typed(case, *tables):
    case = case.with_(readings=sum(tables, ()))
    return reduce(case, runs_typed(case))


TEN = (121.0, 121.3, 121.1, 120.9, 121.2, 121.1, 121.0, 121.2, 121.1, 121.1)
