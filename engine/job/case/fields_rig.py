"""The entries of the rig: orifice, exhaust pipe, nozzle, body, thermometer, warm-up.

Nearly all may stay empty: what an empty entry keeps from being computed is said where it is missed.
"""

from __future__ import annotations

from engine.calorimeter import OUTER_FILMS, STEEL_ROUGHNESS
from engine.job.case.rows import Entry, choice, quantity

WEIGHED, COMPUTED = "weighed", "computed from the orifice"
OPEN_AIR, VESSEL = "open air", "vessel or condenser"
DRY, WET, BARE = "dry", "wet", "bare"
ELECTRIC_PROBE, MERCURY, ORGANIC = "electric", "mercury in glass", "organic liquid in glass"

_FLOW = "a calorimeter draws some kilograms to some hundred kilograms an hour"
_COUNT = "a whole number, 0 or more"
_METAL = "the wall between them is metal"

ORIFICE_FIELDS = (
    quantity("bore", "Orifice bore", "orifice", 0.2e-3, 0.05,
             why="a smaller one clogs, a larger one is no calorimeter's",
             hint="check the unit: mm or inches"),
    quantity("discharge", "Discharge coefficient", "orifice", 0.3, 1.1,
             why="an orifice passes a part of the ideal flow",
             hint="0.60 sharp edge, 0.85 square edge in a plate as thick as the bore, 0.97 rounded inlet; "
                  "better from a weighed flow"),
    choice("flow_source", "Sample flow was", "orifice", (WEIGHED, COMPUTED)),
    quantity("wanted_flow", "Wanted sample flow", "orifice", 1e-5, 1.0, why=_FLOW,
             hint="more flow buries the heat loss, and raises velocity and back pressure"),
)

EXHAUST_FIELDS = (
    quantity("exhaust_length", "Exhaust pipe, length after the thermometer", "exhaust", 0.0, 100.0,
             why="no calorimeter exhausts through more", hint="check the unit"),
    quantity("elbows", "90° elbows in it", "exhaust", 0.0, 50.0, Entry(0.0, "1"), why=_COUNT),
    quantity("tees", "Tees turned in it", "exhaust", 0.0, 50.0, Entry(0.0, "1"), why=_COUNT),
    quantity("loss_coefficient", "Other losses, coefficient K", "exhaust", 0.0, 1000.0, Entry(0.0, "1"),
             hint="silencer, hose coupling, change of bore; 0 for none. The open end is not one of them"),
    quantity("roughness", "Wall roughness", "exhaust", 0.0, 5e-3, Entry(STEEL_ROUGHNESS * 1e6, "µm"),
             why="a rougher wall is no pipe's", hint="46 µm new steel, 1.5 µm drawn tube, 150 µm and more rusted"),
    choice("exhaust_to", "Exhaust goes to", "exhaust", (OPEN_AIR, VESSEL)),
    quantity("p_discharge", "Pressure there", "exhaust", 1e3, 40e5, Entry(0.2, "bar", "absolute"),
             why="a calorimeter exhausts near the atmosphere, or to a condenser",
             hint="check the unit, and whether it was meant gauge or absolute"),
    quantity("kinetic_error", "Allowed kinetic error", "exhaust", 1e-6, 0.05, Entry(0.05, "%pt"),
             why="it sets the least exhaust bore", hint="give it in percentage points of quality"),
)

NOZZLE_FIELDS = (
    quantity("line_flow", "Line flow", "nozzle", 1e-3, 3000.0, why="no steam main carries more",
             hint="the flow of wet steam past the tapping; check the unit"),
    quantity("pipe_bore", "Line bore", "nozzle", 5e-3, 3.0, why="no steam main is wider", hint="check the unit"),
    quantity("ports", "Ports of the nozzle", "nozzle", 1.0, 200.0, why="a nozzle has at least one"),
    quantity("port_bore", "Bore of one port", "nozzle", 0.2e-3, 0.2, why="smaller ones clog",
             hint="check the unit: mm or inches"),
    quantity("drop_diameter", "Drop size", "nozzle", 1e-8, 5e-3, why="larger drops break up in the stream",
             hint="1 to 10 µm in fast steam after a long run, 50 µm and more behind valves and bends"),
    quantity("wall_film", "Part of the water running on the wall", "nozzle", 0.0, 0.99,
             why="a nozzle in the stream does not sample it", hint="0 where the line was mixed well just ahead"),
    quantity("drip_flow", "Water drained ahead of the nozzle", "nozzle", 0.0, 100.0,
             why="it is a small part of the line flow",
             hint="weigh it over a time; leave empty where nothing is drained"),
)

HEAT_FIELDS = (
    quantity("body_length", "Body length", "heat", 0.01, 20.0, why="from orifice to thermometer",
             hint="check the unit: mm or inches"),
    quantity("body_outer_diameter", "Body outer diameter", "heat", 2e-3, 1.0, why=_METAL),
    quantity("body_inner_diameter", "Body inner diameter", "heat", 1e-3, 1.0, why=_METAL),
    choice("lagging_state", "Lagging of the body", "heat", (DRY, WET, BARE)),
    quantity("lagging", "Lagging thickness", "heat", 0.0, 0.5, why="thicker lagging is not found on a rig"),
    choice("outer_air", "Air around it", "heat", tuple(OUTER_FILMS)),
    quantity("sampling_length", "Sampling line, length to the orifice", "heat", 0.0, 50.0,
             why="as short as it can be", hint="check the unit"),
    quantity("sampling_outer_diameter", "Sampling line, outer diameter", "heat", 2e-3, 0.3, why=_METAL),
    choice("sampling_lagging", "Lagging of the sampling line", "heat", (DRY, WET, BARE)),
    quantity("second_flow", "Second sample flow", "heat", 1e-5, 1.0, why=_FLOW,
             hint="read the same steam again through another orifice; half or double the flow is good"),
    quantity("T_second", "Temperature at the second flow", "heat", 273.15, 773.15,
             why="the exhaust of wet line steam is never outside it", hint="check the unit: °C or °F"),
    quantity("p_second", "Exhaust pressure at the second flow", "heat", 1e3, 40e5,
             why="a calorimeter exhausts near the atmosphere, or to a condenser",
             hint="leave it empty where it was that of the first"),
)

THERMOMETER_FIELDS = (
    choice("thermometer", "Thermometer", "thermometer", (ELECTRIC_PROBE, MERCURY, ORGANIC)),
    quantity("immersion", "Immersion in the flow", "thermometer", 0.0, 1.0, why="longer than any body is wide",
             hint="15 diameters and more is common practice"),
    quantity("probe_outer_diameter", "Thermometer, outer diameter", "thermometer", 0.2e-3, 0.05,
             why="thinner is a bare wire, thicker blocks the exhaust", hint="of the probe or its pocket"),
    quantity("probe_inner_diameter", "Thermometer, inner diameter", "thermometer", 0.0, 0.05, Entry(0.0, "mm"),
             hint="of the tube it is made of; 0 for a solid rod"),
    quantity("T_head", "Temperature of its head", "thermometer", 223.15, 673.15,
             why="it lies between the room and the steam", hint="where probe or pocket leave the body"),
    quantity("T_wall", "Temperature of the wall it sees", "thermometer", 223.15, 773.15,
             why="it lies between the room and the steam",
             hint="leave it empty to have it from the body's own heat loss"),
    quantity("exposed", "Exposed column, in degrees of its scale", "thermometer", 0.0, 500.0,
             why="a scale is no longer", hint="from the immersion mark to the end of the column"),
    quantity("T_stem", "Mean temperature of the exposed stem", "thermometer", 223.15, 673.15,
             why="it lies between the room and the steam"),
)

WARMUP_FIELDS = (
    quantity("body_mass", "Mass of the body", "warm-up", 0.05, 500.0, why="metal from orifice to thermometer",
             hint="with valve and flanges that warm up with it"),
    quantity("T_start", "Temperature it starts from", "warm-up", 223.15, 573.15,
             hint="leave it empty for that of the surroundings"),
    quantity("warmup_error", "Error of the warm-up allowed", "warm-up", 1e-3, 10.0, Entry(0.1, "K"),
             why="less cannot be seen, more is no warm-up"),
    quantity("duration", "Duration of the test", "warm-up", 1.0, 7 * 86400.0, Entry(60.0, "min"),
             why="from the first reading to the last"),
)

RIG_FIELDS = (*ORIFICE_FIELDS, *EXHAUST_FIELDS, *NOZZLE_FIELDS, *HEAT_FIELDS, *THERMOMETER_FIELDS, *WARMUP_FIELDS)
