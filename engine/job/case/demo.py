"""Invented cases, so that a first visit shows something that makes sense. No plant stands behind them."""

from __future__ import annotations

from engine.job.case.case import Case
from engine.job.case.fields_instruments import HALF_WIDTH, LIMIT, SHOWS_GAUGE
from engine.job.case.fields_path import BY_CONDUCTANCE
from engine.job.case.fields_rig import DRY, ELECTRIC_PROBE
from engine.job.case.rows import Entry

FACTORY_MAIN = Case({
    "title": "Factory main at 10 bar",
    "note": "An invented example.",
    "p_line": Entry(9.0, "bar", "gauge"),
    "p_barometer": Entry(100.8, "kPa", "absolute"),
    "leg_height": Entry(0.8, "m"),
    "p_exhaust": Entry(1.021, "bar", "absolute"),
    "T_exhaust": Entry(121.1, "°C"),
    "wetness": Entry(2.8, "%"),
    "line_velocity": Entry(22.5, "m/s"),
    "sample_flow": Entry(31.7, "kg/h"),
    "line_bore": Entry(15.7, "mm"),
    "exhaust_bore": Entry(26.6, "mm"),
    "recovery": Entry(0.7, "1"),
    "heat_loss_method": BY_CONDUCTANCE,
    "conductance": Entry(0.18, "W/K"),
    "T_ambient": Entry(24.0, "°C"),
    "x_limit": Entry(0.970, "1"),
    # how sure each reading is
    "line_gauge_kind": "EN 837-1",
    "line_gauge_grade": "1",
    "line_gauge_high": Entry(16.0, "bar"),
    "line_gauge_resolution": Entry(0.1, "bar"),
    "exhaust_gauge_kind": LIMIT,
    "exhaust_gauge_U": Entry(0.5, "kPa"),
    "exhaust_gauge_shows": SHOWS_GAUGE,
    "thermometer_kind": "IEC 60751",
    "thermometer_grade": "A",
    "thermometer_resolution": Entry(0.1, "K"),
    "barometer_kind": LIMIT,
    "barometer_U": Entry(0.2, "kPa"),
    "flow_meter_kind": LIMIT,
    "flow_meter_U": Entry(5.0, "%"),
    "heat_loss_tolerance": Entry(40.0, "%"),
    "sampling_kind": HALF_WIDTH,
    "sampling": Entry(0.5, "%pt"),
    # the rig: orifice, exhaust pipe, nozzle, body, thermometer
    "bore": Entry(3.0, "mm"),
    "discharge": Entry(0.85, "1"),
    "exhaust_length": Entry(1.5, "m"),
    "elbows": Entry(2.0, "1"),
    "loss_coefficient": Entry(2.8, "1"),
    "line_flow": Entry(8.0, "t/h"),
    "pipe_bore": Entry(154.0, "mm"),
    "ports": Entry(6.0, "1"),
    "port_bore": Entry(4.0, "mm"),
    "drop_diameter": Entry(10.0, "µm"),
    "body_length": Entry(400.0, "mm"),
    "body_outer_diameter": Entry(33.7, "mm"),
    "body_inner_diameter": Entry(27.2, "mm"),
    "lagging_state": DRY,
    "lagging": Entry(25.0, "mm"),
    "sampling_length": Entry(0.1, "m"),
    "sampling_outer_diameter": Entry(21.3, "mm"),
    "sampling_lagging": DRY,
    "thermometer": ELECTRIC_PROBE,
    "immersion": Entry(60.0, "mm"),
    "probe_outer_diameter": Entry(6.0, "mm"),
    "probe_inner_diameter": Entry(4.0, "mm"),
    "T_head": Entry(60.0, "°C"),
    "body_mass": Entry(3.0, "kg"),
})

DEMO = FACTORY_MAIN
