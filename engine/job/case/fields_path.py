"""The entries behind the answer: pressures, temperature, velocities, heat loss, limits."""

from __future__ import annotations

from engine.job.case.rows import Entry, choice, quantity, text

READING, EXPECTED = "reading", "expected"
UNDECIDED, NONE, BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS = (
    "not decided", "none", "conductance", "per kg", "normal reading", "two flows")
BY_READING, BY_ALTITUDE = "reading", "altitude"
_GAUGE_HINT = "check the unit, and whether it was meant gauge or absolute"

PATH_FIELDS = (
    text("title", "Title", "identity"),
    text("note", "Note", "identity"),
    choice("question", "Question", "identity", (READING, EXPECTED)),
    quantity("p_line", "Line pressure", "reading", 1.05e5, 165e5, Entry(10.0, "bar", "absolute"),
             why="below it nothing flows to an exhaust near the atmosphere; above it saturation leaves the "
                 "equations used here", hint=_GAUGE_HINT),
    quantity("p_exhaust", "Exhaust pressure", "reading", 1e3, 40e5, Entry(1.01325, "bar", "absolute"),
             why="a calorimeter exhausts near the atmosphere, or to a condenser", hint=_GAUGE_HINT),
    quantity("T_exhaust", "Measured temperature", "reading", 273.15, 773.15, Entry(125.0, "°C"),
             why="the exhaust of wet line steam is never outside it", hint="check the unit: °C or °F"),
    quantity("wetness", "Expected wetness", "reading", 0.0, 1.0, Entry(2.0, "%"),
             why="it is the share of water in the mass", hint="give it in per cent of the mass"),
    choice("barometer_source", "Barometer", "reading", (BY_READING, BY_ALTITUDE)),
    quantity("p_barometer", "Barometric pressure", "reading", 45e3, 110e3, Entry(101.325, "kPa", "absolute"),
             why="the atmosphere is never outside it where people work",
             hint="give the pressure at the site, not reduced to sea level"),
    quantity("altitude", "Altitude", "reading", -450.0, 6000.0, Entry(0.0, "m")),
    quantity("leg_height", "Gauge below tapping", "reading", -100.0, 100.0, Entry(0.0, "m"),
             hint="negative where the gauge stands above the tapping"),
    quantity("line_velocity", "Line velocity", "velocities", 0.0, 200.0),
    quantity("sample_flow", "Sample flow", "velocities", 1e-5, 1.0),
    quantity("line_bore", "Sample bore before the orifice", "velocities", 1e-3, 0.2),
    quantity("exhaust_bore", "Exhaust bore", "velocities", 1e-3, 0.5),
    quantity("recovery", "Recovery factor", "velocities", 0.0, 1.0, Entry(0.7, "1"),
             why="a probe takes up between none and all of the kinetic energy"),
    choice("heat_loss_method", "Heat loss", "corrections",
           (UNDECIDED, NONE, BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS)),
    quantity("conductance", "Heat loss conductance UA", "corrections", 0.0, 100.0, Entry(0.2, "W/K")),
    quantity("T_ambient", "Ambient temperature", "corrections", 223.15, 343.15, Entry(20.0, "°C")),
    quantity("heat_loss", "Heat loss per kg of sample", "corrections", -1e5, 5e5, Entry(0.0, "kJ/kg")),
    quantity("T_normal", "Normal reading, dry steam", "corrections", 273.15, 773.15),
    quantity("least_superheat", "Least readable superheat", "limits", 0.0, 100.0, Entry(5.0, "K")),
    quantity("comfortable_superheat", "Comfortable superheat", "limits", 0.0, 100.0, Entry(10.0, "K")),
    quantity("x_limit", "Quality limit", "limits", 0.0, 1.0),
)
