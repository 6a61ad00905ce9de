"""The entries of the three methods: throttling alone, behind a separator, or electric superheating."""

from __future__ import annotations

from engine.calorimeter import MassBasis
from engine.job.case.rows import Entry, Field, choice, quantity

THROTTLING, SEPARATING, ELECTRIC = "throttling", "separating and throttling", "electric superheating"
BY_MASS, BY_VOLUME = "mass", "volume"
NOT_STATED = "not stated"
_GAUGE_HINT = "check the unit, and whether it was meant gauge or absolute"


def _known(name: str, label: str) -> Field:
    return quantity(name, label, "uncertainty", 0.0, 2.0, kind="fraction",
                    hint="in per cent of it; 30 to 50 % for a loss that is worked out, 10 % for one that was measured"
                    if "loss" in label else "in per cent of it")


MODE_FIELDS = (
    choice("mode", "Method", "modes", (THROTTLING, SEPARATING, ELECTRIC)),
    # separating and throttling
    quantity("p_separator", "Separator pressure", "modes", 1.05e5, 165e5, None,
             why="the separator stands between the line and the orifice", hint="leave it empty where it is the line's"),
    choice("water_by", "Drained water measured by", "modes", (BY_MASS, BY_VOLUME)),
    quantity("water_mass", "Drained water, mass", "modes", 0.0, 1e3, hint="0 when nothing was drained"),
    quantity("water_volume", "Drained water, volume", "modes", 0.0, 1.0, hint="0 when nothing was drained"),
    quantity("T_water", "Temperature of the drained water", "modes", 273.16, 373.15,
             why="its volume says its mass only once it is cooled well below boiling", hint="cool it, then measure"),
    choice("weighed_basis", "Weighed beside it", "modes", (NOT_STATED, *MassBasis)),
    quantity("weighed_mass", "Mass weighed", "modes", 1e-6, 1e4),
    quantity("vessel_loss", "Heat loss of the vessel per kg of the whole sample", "modes", 0.0, 5e5),
    quantity("water_share", "Part of the water the separator drains", "modes", 0.0, 0.999, Entry(90.0, "%"),
             why="no separator drains all of it"),
    # electric superheating
    quantity("p_heater", "Pressure after the heater", "modes", 1e3, 165e5, None,
             hint="leave it empty where it is the line's"),
    quantity("T_heater", "Temperature after the heater", "modes", 273.15, 1073.15,
             why="the steam equations hold there", hint="check the unit: °C or °F"),
    quantity("power", "Electric power", "modes", 1e-3, 1e6),
    quantity("power_loss", "Heat lost by the heater", "modes", 0.0, 1e6),
    # how well each is known
    _known("water_tolerance", "Drained water known to ±"),
    _known("weighed_tolerance", "Mass weighed known to ±"),
    _known("vessel_loss_tolerance", "Heat loss of the vessel known to ±"),
    _known("power_tolerance", "Electric power known to ±"),
    _known("power_loss_tolerance", "Heater loss known to ±"),
)

OF_SEPARATOR = ("p_separator", "water_by", "water_mass", "water_volume", "T_water", "weighed_basis", "weighed_mass",
                "vessel_loss", "water_share", "water_tolerance", "weighed_tolerance", "vessel_loss_tolerance")
OF_HEATER = ("p_heater", "T_heater", "power", "power_loss", "power_tolerance", "power_loss_tolerance")
"""Entries that only one of the methods asks for."""
