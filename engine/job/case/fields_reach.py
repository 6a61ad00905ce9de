"""The entries that planning a test needs: the wetness expected, and what there is to extend the reach with."""

from __future__ import annotations

from engine.job.case.rows import Entry, quantity

REACH_FIELDS = (
    quantity("wetness_low", "Expected wetness, driest", "reach", 0.0, 1.0, Entry(0.5, "%"),
             why="it is the share of water in the mass", hint="give it in per cent of the mass"),
    quantity("wetness_high", "Expected wetness, wettest", "reach", 0.0, 1.0, Entry(3.0, "%"),
             why="it is the share of water in the mass", hint="give it in per cent of the mass"),
    quantity("U_thermometer", "Thermometer's expanded uncertainty", "reach", 0.0, 20.0,
             why="it is taken off the superheat before that is called readable",
             hint="leave it empty to take that of the thermometer chosen for the case"),
    quantity("U_quality", "Expanded uncertainty expected of the quality", "reach", 0.0, 0.1, Entry(0.1, "%pt"),
             why="a wetness smaller than it cannot be told from none"),
    quantity("p_exhaust_lowest", "Lowest exhaust pressure to be had", "reach", 1e3, 40e5,
             Entry(0.1, "bar", "absolute"), why="a condenser with a pump or an ejector sets it",
             hint="give the barometer's where there is no condenser"),
)
