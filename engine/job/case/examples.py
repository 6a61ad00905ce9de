"""Further invented cases, to plan with and to compare with. No plant stands behind any of them."""

from __future__ import annotations

from engine.calorimeter import MassBasis
from engine.job.case.case import Case
from engine.job.case.demo import DEMO
from engine.job.case.fields_instruments import HALF_WIDTH, LIMIT, SHOWS_GAUGE
from engine.job.case.fields_modes import ELECTRIC, SEPARATING
from engine.job.case.fields_path import BY_ALTITUDE, BY_CONDUCTANCE, BY_KG, EXPECTED, NONE
from engine.job.case.rows import Entry

_NOTE = "An invented example."
# how sure the rest is, where the instruments are described
_STATED = {
    "exhaust_gauge_kind": LIMIT, "exhaust_gauge_U": Entry(0.5, "kPa"), "exhaust_gauge_shows": SHOWS_GAUGE,
    "barometer_kind": LIMIT, "barometer_U": Entry(0.2, "kPa"), "flow_meter_kind": LIMIT,
    "flow_meter_U": Entry(5.0, "%"), "heat_loss_tolerance": Entry(40.0, "%"), "sampling_kind": HALF_WIDTH,
}

BOILER_OUTLET = Case({
    "title": "Boiler outlet at 40 bar", "note": f"{_NOTE} A guarantee of 0.5 % wetness at most, to be tested.",
    "question": EXPECTED,
    "p_line": Entry(40.0, "bar", "gauge"), "p_barometer": Entry(101.3, "kPa", "absolute"),
    "p_exhaust": Entry(1.048, "bar", "absolute"), "T_exhaust": Entry(154.7, "°C"),
    "wetness": Entry(0.75, "%"), "wetness_low": Entry(0.3, "%"), "wetness_high": Entry(2.0, "%"),
    "line_velocity": Entry(24.8, "m/s"), "sample_flow": Entry(55.9, "kg/h"), "line_bore": Entry(15.7, "mm"),
    "exhaust_bore": Entry(26.6, "mm"), "recovery": Entry(0.7, "1"),
    "heat_loss_method": BY_CONDUCTANCE, "conductance": Entry(0.20, "W/K"), "T_ambient": Entry(32.0, "°C"),
    "x_limit": Entry(0.995, "1"), "U_thermometer": Entry(0.4, "K"),
    "line_gauge_kind": "transmitter", "line_gauge_grade": "0.1", "line_gauge_high": Entry(60.0, "bar"),
    "thermometer_kind": "IEC 60751", "thermometer_grade": "AA", "sampling": Entry(0.2, "%pt"), **_STATED,
})

HEATING_STEAM = Case({
    "title": "Heating steam at 0.5 bar", "note": f"{_NOTE} A low-pressure main, wetter than a throttle alone can read.",
    "question": EXPECTED,
    "p_line": Entry(0.5, "bar", "gauge"), "p_exhaust": Entry(1.02, "bar", "absolute"), "T_exhaust": Entry(100.0, "°C"),
    "wetness": Entry(3.0, "%"), "wetness_low": Entry(1.0, "%"), "wetness_high": Entry(3.0, "%"),
    "sample_flow": Entry(19.0, "kg/h"), "line_bore": Entry(20.9, "mm"), "exhaust_bore": Entry(40.9, "mm"),
    "heat_loss_method": BY_CONDUCTANCE, "conductance": Entry(0.18, "W/K"), "T_ambient": Entry(20.0, "°C"),
    "U_thermometer": Entry(0.5, "K"),
})

HEATING_STEAM_DRY = HEATING_STEAM.with_(
    title="Heating steam at 0.5 bar, nearly dry", note=f"{_NOTE} The same main behind a good separator.",
    wetness=Entry(0.1, "%"), wetness_low=Entry(0.05, "%"), wetness_high=Entry(0.2, "%"), T_exhaust=Entry(106.1, "°C"))

HIGH_SITE = Case({
    "title": "Plant at 2600 m", "note": f"{_NOTE} The barometer decides here.",
    "barometer_source": BY_ALTITUDE, "altitude": Entry(2600.0, "m"),
    "p_line": Entry(7.0, "bar", "gauge"), "p_exhaust": Entry(74.8, "kPa", "absolute"), "T_exhaust": Entry(106.5, "°C"),
    "wetness": Entry(3.5, "%"), "wetness_low": Entry(2.0, "%"), "wetness_high": Entry(4.0, "%"),
    "sample_flow": Entry(24.0, "kg/h"), "line_bore": Entry(15.7, "mm"), "exhaust_bore": Entry(26.6, "mm"),
    "heat_loss_method": BY_KG, "heat_loss": Entry(2.9, "kJ/kg"), "T_ambient": Entry(15.0, "°C"),
    "x_limit": Entry(0.963, "1"), "U_thermometer": Entry(0.6, "K"),
    "line_gauge_kind": "EN 837-1", "line_gauge_grade": "1.6", "line_gauge_high": Entry(16.0, "bar"),
    "thermometer_kind": "IEC 60584-1", "thermometer_grade": "T1", "sampling": Entry(0.4, "%pt"), **_STATED,
})

REDUCING_VALVE = Case({
    "title": "Behind a reducing valve", "note": f"{_NOTE} The line turns out to be superheated.",
    "p_line": Entry(10.0, "bar", "absolute"), "p_exhaust": Entry(1.01325, "bar", "absolute"),
    "T_exhaust": Entry(163.6, "°C"), "wetness": Entry(0.5, "%"), "heat_loss_method": NONE,
})

WET_LINE = Case({
    "title": "Wet line at 8 bar", "note": f"{_NOTE} Far wetter than a throttle alone can read.",
    "question": EXPECTED,
    "p_line": Entry(8.0, "bar", "absolute"), "p_exhaust": Entry(1.01325, "bar", "absolute"),
    "T_exhaust": Entry(112.3, "°C"),
    "wetness": Entry(12.0, "%"), "wetness_low": Entry(10.0, "%"), "wetness_high": Entry(14.0, "%"),
    "sample_flow": Entry(25.0, "kg/h"), "line_bore": Entry(15.7, "mm"), "exhaust_bore": Entry(26.6, "mm"),
    "heat_loss_method": BY_CONDUCTANCE, "conductance": Entry(0.18, "W/K"), "T_ambient": Entry(20.0, "°C"),
    "U_thermometer": Entry(0.5, "K"),
})

WET_LINE_READ = Case({
    "title": "Wet line at 8 bar, behind a separator",
    "note": f"{_NOTE} Drained water and condensed steam were weighed.",
    "mode": SEPARATING, "weighed_basis": MassBasis.THROTTLED,
    "p_line": Entry(8.0, "bar", "absolute"), "p_exhaust": Entry(1.01325, "bar", "absolute"),
    "T_exhaust": Entry(112.3, "°C"),
    "water_mass": Entry(0.9, "kg"), "weighed_mass": Entry(9.1, "kg"), "vessel_loss": Entry(0.0, "kJ/kg"),
    "wetness": Entry(12.0, "%"), "wetness_low": Entry(10.0, "%"), "wetness_high": Entry(14.0, "%"),
    "heat_loss_method": NONE, "U_thermometer": Entry(0.5, "K"),
})

HEATED = Case({
    "title": "Wet steam at 6 bar, by electric superheating",
    "note": f"{_NOTE} No throttle: the power dries the sample.",
    "mode": ELECTRIC,
    "p_line": Entry(6.0, "bar", "absolute"), "T_heater": Entry(178.8, "°C"), "sample_flow": Entry(12.0, "kg/h"),
    "power": Entry(860.0, "W"), "power_loss": Entry(7.4, "W"),
    "wetness": Entry(10.0, "%"), "wetness_low": Entry(8.0, "%"), "wetness_high": Entry(10.5, "%"),
    "U_thermometer": Entry(0.5, "K"),
})

EXAMPLES: dict[str, Case] = {str(case["title"]): case for case in (
    DEMO, BOILER_OUTLET, HEATING_STEAM, HEATING_STEAM_DRY, HIGH_SITE, REDUCING_VALVE, WET_LINE, WET_LINE_READ, HEATED)}
