"""The readings of a run sheet: which columns its table has, what was typed, what is weighed beside it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

from engine.job.case import Case, describe, entry_si
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import BY_VOLUME, ELECTRIC
from engine.job.case.rows import Entry, Row
from engine.job.paper import Table
from engine.job.runsheet.plan import FLOW_ALARM, Plan
from engine.job.uncertainty import leg_pressure
from engine.steam import saturation_temperature
from engine.steam.errors import Fault, InputError
from engine.steam.units import UnitSystem, from_si, to_si

CHANNELS = ("p_line", "p_exhaust", "T_exhaust", "p_barometer", "T_ambient", "sample_flow")
WITH_HEATER = ("p_line", "p_heater", "T_heater", "power", "sample_flow")
SHORT_NAMES = {"p_line": "Line", "p_exhaust": "Exhaust", "T_exhaust": "Thermometer", "p_barometer": "Barometer",
               "T_ambient": "Air", "sample_flow": "Sample", "p_heater": "After the heater", "T_heater": "Thermometer",
               "power": "Power"}
_OWN_UNITS = {"p_barometer": {"SI": "kPa", "US": "inHg"}}


class Column(NamedTuple):
    """A channel as it is written down: unit, and for pressures "gauge" or "absolute"."""

    name: str
    unit: str
    basis: str

    @property
    def heading(self) -> str:
        return f"{SHORT_NAMES[self.name]}, {self.unit}{' ' + self.basis if self.basis else ''}"


def columns_of(plan: Plan, units: UnitSystem) -> tuple[Column, ...]:
    """The columns of the table, pressures as the gauges of the case show them."""
    heater = plan.case["p_heater"]
    bases = {**plan.basis, "p_barometer": "absolute", "p_heater": heater.basis if heater else plan.basis["p_line"]}
    return tuple(Column(name, reading_unit(name, units), bases.get(name, ""))
                 for name in (WITH_HEATER if plan.electric else CHANNELS))


def reading_unit(name: str, units: UnitSystem) -> str:
    """The unit in which a channel is written down."""
    return _OWN_UNITS.get(name, {}).get(units.name) or units.unit(FIELDS[name].kind)


def cell(entry: Entry | None, column: Column) -> str:
    """A reading in the unit of its column; one taken on another basis is told as it was taken."""
    if entry is None:
        return ""
    if entry.basis != column.basis:
        return describe(entry)
    if entry.unit == column.unit:
        return f"{entry.value:.7g}"
    kind = FIELDS[column.name].kind
    return f"{from_si(to_si(entry.value, entry.unit, kind), column.unit, kind):.7g}"


def time_text(entry: Entry | None) -> str:
    """Time from the start, in minutes."""
    return "" if entry is None else f"{to_si(entry.value, entry.unit, 'time') / 60:.4g}"


def table_of(case: Case) -> str:
    """The table of the case that its sets of readings go into: with a heater other gauges are read."""
    return "heater_readings" if case["mode"] == ELECTRIC else "readings"


def runs_of(case: Case) -> dict[str, list[Row]]:
    """The readings typed, by the name of their run."""
    runs: dict[str, list[Row]] = {}
    for row in case[table_of(case)]:
        runs.setdefault(row["run"].strip(), []).append(row)
    return runs


def with_reading(case: Case, **cells: Entry | str | None) -> Case:
    """The case with one more set of readings. InputError when its table is full, or for an unknown column.

    >>> from engine.job.case.demo import DEMO
    >>> len(with_reading(DEMO, run="1", T_exhaust=Entry(121.1, "°C"))["readings"])
    1
    """
    field = FIELDS[table_of(case)]
    if len(case[field.name]) >= field.most:
        raise InputError(Fault(field.label, len(case[field.name]) + 1, "rows", f"at most {field.most} rows",
                               hint="bring more as a log file" if field.name == "readings" else "", name=field.name))
    return case.with_(**{field.name: (*case[field.name], field.row(**cells))})


def readings_outside(row: Row, plan: Plan, p_barometer: float) -> tuple[str, ...]:
    """Keys of the deviations that one set of readings shows, in their order; empty where all is as it should be.

    ``p_barometer`` [Pa] turns what a gauge shows into absolute pressure where the set has no barometer.
    """
    names = ("T_heater", "p_line", "p_heater", "sample_flow") if plan.electric else (
        "T_exhaust", "p_line", "p_exhaust", "sample_flow")
    air = (not plan.electric and _si(row, "p_barometer", 0.0)) or p_barometer
    T, p, p2, flow = (_si(row, name, air) for name in names)
    si, found = plan.a.si, []
    if T is not None:  # by the set's own exhaust pressure, where it has one
        superheat = T - (saturation_temperature(p2) if p2 else plan.a.T_saturation)
        if superheat <= plan.U_thermometer:
            found.append("saturated")
        elif superheat < plan.a.least_readable:
            found.append("thin")
        elif plan.T_dry is not None and plan.T_dry + plan.U_thermometer < T:
            found.append("superheated")
    if not plan.electric and p2 is not None and p2 > si["p_exhaust"] + plan.play("p_exhaust"):
        found.append("back_pressure")
    if flow is not None and plan.flow is not None and flow < (1.0 - FLOW_ALARM) * plan.flow:
        found.append("flow")
    if p is not None and abs(p - leg_pressure(si) - si["p_line"]) > plan.play("p_line"):
        found.append("swings")
    return tuple(found)


def _si(row: Row, name: str, p_barometer: float) -> float | None:
    return None if row[name] is None else entry_si(FIELDS[name], row[name], p_barometer)


def reading_table(rows: Sequence[Row], plan: Plan, units: UnitSystem, length: int = 0) -> Table:
    """Readings typed, and empty lines up to ``length``."""
    columns = columns_of(plan, units)
    cells = [(str(k), time_text(row["time"]), *(cell(row[c.name], c) for c in columns), row["remark"])
             for k, row in enumerate(rows, 1)]
    cells += [(str(k), *[""] * (len(columns) + 2)) for k in range(len(cells) + 1, length + 1)]
    return Table(("", "Time, min", *(c.heading for c in columns), "Remark"), cells, frozenset(range(len(columns) + 2)),
                 "readings")


def weighed_table(plan: Plan, units: UnitSystem) -> Table:
    """What is weighed beside the readings of a run, to fill in."""
    mass = f"Mass, {units.unit('mass')}"
    if not plan.separating:
        return Table(("Weighed", "From", "To", mass), [("Sample, condensed", "", "", "")], kind="weighed")
    volume = plan.case["water_by"] == BY_VOLUME
    by = f"{mass}, or volume and temperature" if volume else mass
    return Table(("Weighed", "From", "To", by), [("Drained water", "", "", ""), ("Condensed steam", "", "", "")],
                 kind="weighed")
