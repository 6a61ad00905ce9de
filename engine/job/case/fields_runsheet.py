"""The entries of the run sheet and of the record: how it is read, where and by whom, and which steps were done."""

from __future__ import annotations

from engine.job.case.rows import Entry, choice, quantity, table, text

GAS_NONE, GAS_NOTED = "none noted", "toxic or suffocating gas possible"

TICKS = table("ticks", "Steps ticked", "run sheet", (
    text("step", "Step", "run sheet"),
    text("time", "Time", "run sheet"),
    text("initials", "Initials", "run sheet"),
    text("remark", "Remark", "run sheet"),
), 200)

RUNSHEET_FIELDS = (
    text("place", "Plant and tapping", "run sheet"),
    text("permit", "Site permit, number", "run sheet"),
    text("tested_by", "Tested by", "run sheet"),
    text("witnessed_by", "Witnessed by", "run sheet"),
    text("instrument_list", "Instruments: numbers and certificates", "run sheet"),
    text("deviations", "Deviations and remarks", "run sheet"),
    choice("gas_hazard", "Gas hazard", "run sheet", (GAS_NONE, GAS_NOTED),
           hint="geothermal and biogas steam can carry hydrogen sulphide and carbon dioxide"),
    quantity("runs_planned", "Runs", "run sheet", 1.0, 20.0, Entry(2.0, "1"), kind="number",
             why="one run cannot show whether it repeats", hint="two or three are common practice"),
    quantity("read_every", "A set of readings every", "run sheet", 1.0, 3600.0, Entry(1.0, "min"), kind="time",
             hint="by hand every 1 to 2 min is common practice"),
    TICKS,
)
