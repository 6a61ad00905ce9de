"""The sets of a heater in a record: as they were written down, each with its quality; how they scatter and drift."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

import numpy as np

from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.paper import Table, bullets, escaped_line, paragraph
from engine.job.result.heated import HeatedResult, HeatedRun
from engine.job.result.said import upper_first
from engine.job.rig.tables import points
from engine.job.runsheet.readings import reading_unit
from engine.steam.quantities import QUANTITIES
from engine.steam.units import UnitSystem, from_si


def table_of(rows: Sequence[Mapping[str, object]], numbers: Sequence[str] = (), kind: str = "") -> str:
    """Rows with named cells as a table; nothing for no rows."""
    if not rows:
        return ""
    headings = list(rows[0])
    right = frozenset(k for k, name in enumerate(headings) if name in numbers)
    return Table(headings, [[str(row[name]) for name in headings] for row in rows], right, kind).html()


def digits(value: float, form: str = ".6g") -> str:
    """A reading; nothing where there is none."""
    return f"{value:{form}}" if np.isfinite(value) else ""


def heated_readings(found: HeatedResult, case: Case, units: UnitSystem) -> str:
    """Run by run what was written down, and the quality of every set."""
    return "".join(part for run in found.runs for part in _sets(run, case, units))


def _sets(run: HeatedRun, case: Case, units: UnitSystem) -> Iterator[str]:
    rows, read = case["heater_readings"], run.run
    columns = [(name, _unit(case, name, units), FIELDS[name].kind) for name in read.channels]
    headings = ["Row", *(["t, min"] if read.time is not None else []),
                *(f"{QUANTITIES[n].symbol}, {unit}{' ' + read.basis[n] if n in read.basis else ''}"
                  for n, unit, _ in columns), "x", "Remark"]
    cells = []
    for k, row in enumerate(read.rows.tolist()):
        readings = [digits(from_si(read.channels[n][k], unit, kind)) for n, unit, kind in columns]
        said = filter(None, ("" if run.used[k] else "incomplete", rows[row - 1]["remark"]))
        cells.append([str(row), *([f"{read.time[k] / 60:.5g}"] if read.time is not None else []), *readings,
                      digits(run.x[k], ".5f"), "; ".join(said)])
    yield f"<h3>{escaped_line(upper_first(read.name))}</h3>"
    yield paragraph(f"{run.used.sum()} of {len(read)} sets count.")
    yield Table(headings, cells, frozenset(range(len(headings) - 1)), "log").html()
    yield paragraph("; ".join(f"{QUANTITIES[n].symbol} {FIELDS[n].label.lower()}" for n, _, _ in columns)
                    + "; x quality of the set.", "small")


def _unit(case: Case, name: str, units: UnitSystem) -> str:
    """The unit in which a channel was written down, where it was one."""
    typed = {row[name].unit for row in case["heater_readings"] if row[name] is not None}
    return typed.pop() if len(typed) == 1 else reading_unit(name, units)


def heated_windows(found: HeatedResult) -> str:
    """How the sets scatter and drift, and whether the runs agree."""
    rows, lines = [], []
    for run in found.runs:
        x, drift, name = run.assessment.x, run.drift, upper_first(run.run.name)
        rows.append({"Run": name, "Quality of the means": "" if x is None else f"{x:.5f}",
                     "Sets": str(int(run.used.sum())), "Scatter of the sets": points(run.s),
                     "Drift over the run": "" if drift is None else f"{100 * drift.slope * drift.duration:+z.3f} %pt"})
        lines += [f"{name}: {line}." for line in run.cautions]
    if found.repeatability is not None:
        lines.append("The runs differ by more than their own scatter explains; their spread stands in the budget."
                     if found.repeatability.differ else "The runs agree within their own scatter.")
    return (paragraph("With a heater no window is looked for: every complete set counts.")
            + table_of(rows, ("Quality of the means", "Sets")) + bullets(lines))
