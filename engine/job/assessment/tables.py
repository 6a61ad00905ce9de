"""Tables of a case: its states, its velocities, and what differs between cases; rows for screens and files."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Sequence
from functools import partial

from engine.job.assessment.answer import SHAPES, percent_points, quality_text
from engine.job.assessment.assessed import Assessment
from engine.job.assessment.verdict import Verdict
from engine.job.case import Value, describe
from engine.job.case.fields import FIELDS
from engine.job.case.rows import TEXT, Entry
from engine.steam.units import UnitSystem

ABSENT = "–"  # stands where there is nothing to show
FORMULA = tuple("=+-@\t\n")  # what a spreadsheet takes for the beginning of a formula
_STATE_COLUMNS = (("p", "pressure", "p"), ("T", "temperature", "T"), ("h", "enthalpy", "h"), ("s", "entropy", "s"),
                  ("v", "specific volume", "v"), ("velocity", "velocity", "c"))


def state_rows(a: Assessment, units: UnitSystem) -> list[dict[str, str | float | None]]:
    """One row per state, values in the reader's units; the headers carry the units."""
    rows = []
    for state in a.states:
        row: dict[str, str | float | None] = {"State": state.name}
        for name, kind, symbol in _STATE_COLUMNS:
            si = getattr(state, name)
            absolute = " abs" if kind == "pressure" else ""
            row[f"{symbol}, {units.unit(kind)}{absolute}"] = None if si is None else units.value(si, kind)
            if name == "T":
                row["x"] = state.x
        rows.append(row)
    return rows


def as_csv(rows: Sequence[dict]) -> str:
    """Rows as CSV with a header; full precision, so that a reader can retrace them.

    Text that a spreadsheet would take for a formula is quoted with an apostrophe.

    >>> as_csv([{"State": "Line", "x": 0.5}]).splitlines()
    ['State,x', 'Line,0.5']
    """
    out = io.StringIO()
    writer = csv.DictWriter(out, list(rows[0]) if rows else [], lineterminator="\n")
    writer.writeheader()
    for row in rows:
        writer.writerow({k: _safe(v) for k, v in row.items()})
    return out.getvalue()


def _safe(value):
    if not isinstance(value, str):
        return value
    value = value.replace("\r\n", "\n").replace("\r", "\n")  # a bare return would end the row
    return "'" + value if value.lstrip(" ")[:1] in FORMULA else value


def velocity_rows(a: Assessment, units: UnitSystem) -> list[tuple[str, str]]:
    """What the velocities are and what they do, as label and text."""
    v = a.velocities
    rows = []
    if v.line is not None:
        rows.append(("Line velocity", units.text(v.line, "velocity")))
    if v.sample is not None:
        rows.append(("Sample velocity before the orifice", units.text(v.sample, "velocity")))
    if v.exhaust is not None:
        rows += [("Exhaust velocity", units.text(v.exhaust, "velocity")),
                 ("Kinetic energy at the exhaust", units.text(v.kinetic_energy, "enthalpy", 3)),
                 ("… in superheat", units.text(v.kinetic_superheat, "difference", 2)),
                 ("… in quality", f"{100 * v.kinetic_quality:.3f} %pt")]
    if v.ratio is not None:
        rows.append(("Exhaust velocity over sample velocity", f"{v.ratio:.2f}"))
    rows.append(("Bore ratio that keeps the velocity", f"{v.keeping_bore_ratio:.2f}"))
    if a.x is not None and a.x_without_kinetic is not None and v.exhaust is not None:
        rows += [("Quality with kinetic energy", f"{a.x:.5f}"),
                 ("Quality without", f"{a.x_without_kinetic:.5f} ({percent_points(a.x_without_kinetic - a.x)})")]
    if a.bore_path is not None:
        end = a.bore_path
        speed = units.text(float(end.velocity[-1]), "velocity")
        where = units.text(float(end.p[-1]), "pressure")
        told = f"chokes at {where} abs, {speed}" if end.chokes else f"reaches the exhaust at {speed}"
        rows.append(("In one constant bore the sample", told))
    return rows


def comparison_rows(named: Sequence[tuple[str, Assessment]], units: UnitSystem,
                    words: Callable[[str], str] = str) -> list[dict[str, str]]:
    """What was found for each case, and every entry in which they differ; one column per case.

    ``words`` turns what people wrote themselves into what may be shown where the table goes.
    """
    def row(label: str, text: Callable[[Assessment], str | None]) -> dict[str, str]:
        return {"": label, **{name: text(a) or ABSENT for name, a in named}}

    def entry(name: str, a: Assessment) -> str:
        text = _entry_text(a.case[name])
        return words(text) if FIELDS[name].form == TEXT else text

    rows = [row("Verdict", lambda a: f"{SHAPES[a.verdict]} {a.verdict.value}"),
            row("Quality", _quality), row("Wetness, %", lambda a: None if a.x is None else f"{100 * (1 - a.x):.2f}"),
            row("Exhaust temperature", lambda a: units.text(a.T_exhaust, "temperature")),
            row("Superheat", lambda a: units.text(a.superheat, "difference")),
            row("Margin", lambda a: units.text(a.margin, "difference")),
            row("Least readable quality", lambda a: quality_text(a.x_least) if a.x_least <= 1 else "above dry"),
            row("Exhaust velocity", lambda a: a.velocities.exhaust and units.text(a.velocities.exhaust, "velocity")),
            row("Kinetic energy, %pt", lambda a: a.velocities.exhaust and f"{100 * a.velocities.kinetic_quality:.3f}")]
    for name, field in FIELDS.items():
        entries = [a.case[name] for _, a in named]
        if any(e != entries[0] for e in entries):
            rows.append(row(field.label, partial(entry, name)))
    return rows


def _quality(a: Assessment) -> str:
    if a.x is not None:
        return quality_text(a.x)
    if a.verdict is Verdict.SUPERHEATED:
        return "line superheated"
    if a.x_below is None:
        return "not told"
    return f"below {quality_text(a.x_below)}" if a.x_below < 1 else "not told"


def _entry_text(value: Value) -> str:
    if isinstance(value, tuple):
        return f"{len(value)} row{'' if len(value) == 1 else 's'}"
    return describe(value) if isinstance(value, Entry) else value or ""
