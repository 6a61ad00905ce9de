"""Readings typed by hand as a grid of text, and back: what a cell says is kept as entered, in the grid's unit."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any, NamedTuple

from engine.job.case import GAUGE, Case, as_entered, barometer, entry_fault, entry_si
from engine.job.case.fields import FIELDS
from engine.job.case.rows import QUANTITY, Entry, Field, Row
from engine.job.uncertainty.instruments import rests_on_barometer
from engine.steam.errors import Fault
from engine.steam.units import UnitSystem

_UNITS = {"time": {"SI": "min", "US": "min"}, "p_barometer": {"SI": "kPa", "US": "inHg"},
          "p_exhaust": {"SI": "bar", "US": "psi"}}
_SHORT = {"run": "Run", "time": "Time", "p_line": "Line pressure", "p_exhaust": "Exhaust pressure",
          "T_exhaust": "Temperature", "p_barometer": "Barometer", "sample_flow": "Sample flow",
          "T_ambient": "Ambient", "remark": "Remark"}
_AMBIGUOUS = re.compile(r"[+-]?[1-9][0-9]{0,2},[0-9]{3}")
_TWO_MEANINGS = ("the comma may be a decimal one, or stand between thousands",
                 "type it with a point, or without the comma")


class GridColumn(NamedTuple):
    """A column as it is typed: unit and basis are "" for words."""

    name: str
    unit: str
    basis: str
    heading: str


class Edits(NamedTuple):
    """What was done to a grid since it was laid out: changed cells by row, rows added, rows taken out."""

    changed: Mapping[int, Mapping[str, Any]]
    added: Sequence[Mapping[str, Any]]
    deleted: Sequence[int]


def grid_columns(case: Case, units: UnitSystem) -> tuple[GridColumn, ...]:
    """The columns for a reader who uses ``units``; pressures as the gauges of the case show them."""
    columns = []
    for field in FIELDS["readings"].columns:
        unit = "" if field.form != QUANTITY else _UNITS.get(field.name, {}).get(units.name) or units.unit(field.kind)
        basis = ""
        if field.kind == "pressure":
            gauge = field.name != "p_barometer" and rests_on_barometer(case, field.name)
            basis = GAUGE if gauge else "absolute"
        told = ", ".join(filter(None, (_SHORT[field.name], f"{unit} {basis}".strip())))
        columns.append(GridColumn(field.name, unit, basis, told))
    return tuple(columns)


def grid(case: Case, columns: Sequence[GridColumn]) -> list[dict[str, str]]:
    """The typed readings as text, a dict per row by column name; entries in other units are converted."""
    p_air = barometer(case)
    return [{c.name: _text(row[c.name], c, p_air) for c in columns} for row in case["readings"]]


def _text(value: Entry | str | None, column: GridColumn, p_air: float) -> str:
    if not isinstance(value, Entry):
        return value or ""
    if (value.unit, value.basis) != (column.unit, column.basis):
        field = _field(column.name)
        value = as_entered(field, entry_si(field, value, p_air), Entry(0.0, column.unit, column.basis), p_air)
    return f"{value.value:.7g}"


def edited(case: Case, columns: Sequence[GridColumn], base: Sequence[Row],
           edits: Edits) -> tuple[tuple[Row, ...], list[Fault]]:
    """The rows after the edits of a grid laid out from ``base``, and what could not be taken.

    A cell that is no number, or out of its limits, is refused by its place and stays empty. Empty rows at the
    end are room that was not used.
    """
    table, by_name, p_air = FIELDS["readings"], {c.name: c for c in columns}, barometer(case)
    kept = [(k, row, edits.changed.get(k, {})) for k, row in enumerate(base) if k not in set(edits.deleted)]
    kept += [(len(base) + k, table.row(), cells) for k, cells in enumerate(edits.added)]
    rows, faults = [], []
    for number, (_, row, cells) in enumerate(kept, 1):
        for name, typed in cells.items():
            if name in by_name:
                value, fault = _value(table.cell(number, _field(name)), by_name[name], typed, p_air)
                row = row.with_(**{name: value})
                faults += [fault] if fault else []
        rows.append(row)
    while rows and rows[-1] == table.row():  # room that was not used
        rows.pop()
    if len(rows) > table.most:
        faults.append(Fault(table.label, len(rows), "rows", f"at most {table.most}", hint="bring more as a log file"))
        rows = rows[:table.most]
    return tuple(rows), faults


def with_room(rows: Sequence[Row], least: int = 10, more: int = 3) -> tuple[Row, ...]:
    """Rows with empty ones after them: at least ``least`` in all, and ``more`` to go on with."""
    field = FIELDS["readings"]
    wanted = min(max(least, len(rows) + more), field.most)
    return (*rows, *(field.row(),) * (wanted - len(rows)))


def _field(name: str) -> Field:
    return next(column for column in FIELDS["readings"].columns if column.name == name)


def _value(field: Field, column: GridColumn, typed: Any,
           p_air: float) -> tuple[Entry | str | None, Fault | None]:
    text = "" if typed is None else str(typed).strip()
    if field.form != QUANTITY:
        return text[:200], None
    if not text:
        return None, None
    number = as_number(text)
    if number is None:
        because = _TWO_MEANINGS if _AMBIGUOUS.fullmatch(text) else ()
        return None, Fault(field.label, text[:40], "", f"a number, in {column.unit} {column.basis}".rstrip(), *because,
                           name=field.name)
    entry = Entry(number, column.unit, column.basis)
    fault = entry_fault(field, entry, p_air)
    return (None, fault) if fault else (entry, None)


def as_number(text: str) -> float | None:
    """A number as people type it, with a decimal point or comma; None for anything else.

    Three figures after a comma could be thousands, and are not taken.

    >>> as_number("9,01"), as_number(" 121.3 "), as_number("0,972"), as_number("9.017")
    (9.01, 121.3, 0.972, 9.017)
    >>> as_number("1,234"), as_number("1.013,5"), as_number("n/a")
    (None, None, None)
    """
    plain = text.strip().replace("−", "-")
    if plain.count(",") == 1 and not _AMBIGUOUS.fullmatch(plain) and "." not in plain:
        plain = plain.replace(",", ".")
    try:
        value = float(plain) if plain.isascii() and "_" not in plain else float("nan")
    except ValueError:
        return None
    return value if value - value == 0 else None
