"""Invented cases, so that a first visit shows something that makes sense. No plant stands behind them."""

from __future__ import annotations

from engine.job.case import Case
from engine.job.fields_path import BY_CONDUCTANCE
from engine.job.rows import Entry

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
})

DEMO = FACTORY_MAIN
