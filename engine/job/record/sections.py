"""The sections of a record: each a heading and tables, every number the engine's, every text escaped."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np

from engine.job.assessment import Assessment
from engine.job.assessment.answer import Answer, percent_points
from engine.job.assessment.tables import state_rows
from engine.job.case import Case, describe
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import ELECTRIC, NOT_STATED, OF_HEATER, OF_SEPARATOR, SEPARATING
from engine.job.case.rows import QUANTITY, TABLE, Row
from engine.job.paper import Table, bullets, paragraph
from engine.job.record.figures import diagrams_svg
from engine.job.record.heated import digits, heated_readings, heated_windows, table_of
from engine.job.result import Result
from engine.job.result.heated import HeatedResult
from engine.job.result.reduction import RunResult
from engine.job.result.said import (
    LABELS,
    chance,
    channel_rows,
    correction_rows,
    decision_reason,
    drift_text,
    figures,
    outlier_rows,
    reason_text,
    rule_text,
    run_rows,
    told,
    unsettled_lines,
    upper_first,
    verdict_word,
)
from engine.job.rig.tables import points
from engine.job.runsheet import RunSheet, ticks_of
from engine.job.runsheet.readings import reading_unit, runs_of
from engine.job.uncertainty import Forecast
from engine.job.uncertainty.forecast_words import budget_rows
from engine.job.uncertainty.instruments import GROUPS
from engine.measurement import Budget, Verdict
from engine.measurement.logbook import Log
from engine.steam.quantities import QUANTITIES
from engine.steam.units import UNITS, UnitSystem, from_si

READING = "reading of the case"  # the name of a run that is the single reading in the case
MOST_PRINTED = 240  # rows of readings that a reader goes through on paper
LISTED, FLAGS = 200, 24  # refusals and flagged readings, likewise


class Facts(NamedTuple):
    """What a record is made from: ``result`` where sets of readings were reduced, ``forecast`` with a heater; the
    other is None. ``heated`` are the sets with a heater, None where its means were entered one by one."""

    case: Case
    a: Assessment
    said: Answer
    result: Result | None
    heated: HeatedResult | None
    forecast: Forecast | None
    logs: tuple[Log, ...]
    sheet: RunSheet | None
    trouble: str
    units: UnitSystem

    @property
    def sure(self) -> Result | Forecast:
        """Whichever of the two brings budget and decision."""
        return self.forecast if self.result is None else self.result


# ---- what was asked, and the answer


def question(f: Facts) -> str:
    """What was asked, of which steam, and the rule agreed beforehand."""
    names = ("place", "permit", "tested_by", "witnessed_by", "note")
    rows = [(FIELDS[name].label, f.case[name]) for name in names if f.case[name]]
    asked = "The quality, mass of vapour over mass of steam and water, of the steam at the tapping."
    return Table((), [("Asked for", asked), ("Method", f.case["mode"]), *rows, ("Limit and rule", rule_text(f.case))],
                 kind="facts").html()


def answered(f: Facts) -> str:
    """The result in words: the figure first, then the decision, then what stands behind and what is missing."""
    if f.result is None:
        return paragraph(f"{f.said.shape} {f.said.headline}", "stop") + bullets(_by_forecast(f))
    said = told(f.result)
    figure = paragraph(f"{said.shape} {said.headline} ({said.word})", "stop")
    behind = () if f.result.x is not None else f.said.reasons
    return figure + bullets((*said.verdicts, *said.reasons, *said.open_points, *behind))


def _by_forecast(f: Facts) -> list[str]:
    """How sure a quality is whose readings were entered one by one, and what was decided on it."""
    found, lines = f.forecast, list(f.said.reasons)
    if found.budget is not None:
        (x, U), (_, alone) = figures(found.budget), figures(found.instruments)
        lines.append(f"Quality {x} ± {U}; by the instruments alone ± {alone} (k = {found.budget.k:.2f}, coverage "
                     f"{100 * found.budget.coverage:.4g} %).")
    elif found.unable and f.a.x is not None:
        lines.append(found.unable)
    if found.verdicts is not None:
        lines += [f"{name} {verdict_word(v)}: {decision_reason(v, f.case)}." for name, v in zip(WAYS, found.verdicts,
                                                                                          strict=True)]
    return lines + ([f"Not a result yet, because not stated: {', '.join(found.missing)}."] if found.missing else [])


WAYS = ("With sampling", "By the instruments alone")


def conformity(f: Facts) -> str:
    """The decision by the rule, with sampling and without."""
    if f.sure.verdicts is None:
        return paragraph(rule_text(f.case) if f.case["x_limit"] is None else
                         "There is no quality with an uncertainty to decide on.")
    rows = [_verdict(name, v) for name, v in zip(WAYS, f.sure.verdicts, strict=True)]
    return paragraph(rule_text(f.case)) + table_of(rows)


def _verdict(name: str, v: Verdict) -> dict[str, str]:
    allowed = (f"{v.accept_from:.5f} and more" if np.isinf(v.accept_to) else f"{v.accept_to:.5f} and less")
    return {"": name, "Decision": verdict_word(v), "Chance that the limit is met": chance(v.probability),
            "Chance that the decision is wrong": chance(v.chance_wrong), "Guard band": points(v.guard),
            "Accepted": allowed}


# ---- rig and instruments

# what a heater does without, beside all of orifice, exhaust pipe and nozzle
_OF_THROTTLE = ("p_exhaust", "T_exhaust", "line_velocity", "line_bore", "exhaust_bore", "recovery",
                "recovery_tolerance", "heat_loss_method", "conductance", "heat_loss", "heat_loss_tolerance", "T_normal",
                "second_flow", "T_second", "p_second", "steady_rate", "steady_scatter", "steady_p_exhaust")

_GROUPS = (("Line, exhaust, site", ("reading", "velocities", "modes")),
           ("Rig", ("orifice", "exhaust", "nozzle", "heat", "thermometer", "warm-up")),
           ("Corrections, limits, what counts as settled", ("corrections", "limits", "steadiness")),
           ("Instruments, sampling, decision", ("instruments", "uncertainty", "decision")))


def entries(f: Facts) -> str:
    """Everything entered, as entered."""
    parts = [paragraph(f.case["instrument_list"])] if f.case["instrument_list"] else []
    for title, groups in _GROUPS:
        rows = [(field.label, describe(value) if field.form == QUANTITY else str(value))
                for field in FIELDS.values() if field.group in groups and field.form != TABLE
                for value in (f.case[field.name],) if value not in (None, "") and not _idle(f.case, field.name)]
        half = (len(rows) + 1) // 2
        pairs = [(*left, *right) for left, right in zip(rows[:half], [*rows[half:], ("", "")][:half], strict=True)]
        parts.append(f"<h3>{title}</h3>" + Table((), pairs, kind="entries").html())
    return "".join(parts)


def _idle(case: Case, name: str) -> bool:
    """Whether an entry belongs to another method, or to an instrument that is not stated at all."""
    mode = case["mode"]
    if (mode != ELECTRIC and name in OF_HEATER) or (mode != SEPARATING and name in OF_SEPARATOR):
        return True
    if mode == ELECTRIC and (name in _OF_THROTTLE or FIELDS[name].group in ("orifice", "exhaust", "nozzle")):
        return True
    return any(name.startswith(f"{stem}_") and name != f"{stem}_kind" and not name.endswith("_correction")
               and case[f"{stem}_kind"] == NOT_STATED for stem in GROUPS)


# ---- readings


def readings(f: Facts) -> str:
    """Run by run what was read, and what of it counts; then what could not be used at all."""
    if f.heated is not None:
        return heated_readings(f.heated, f.case, f.units)
    if f.result is None:
        return paragraph("The readings of this method are entered one by one; they stand with all entries, below.")
    parts = [part for run in f.result.runs for part in _run_readings(run, f)]
    refused = [{"Log": log.name, "Row": str(r.row), "Column": r.column, "Content": r.content, "Why not": r.reason}
               for log in f.logs for r in log.rejected]
    if refused:
        more = sum(sum(log.rejected_counts.values()) for log in f.logs) - min(len(refused), LISTED)
        parts += ["<h3>Not usable</h3>", table_of(refused[:LISTED], ("Row",), "words"),
                  paragraph(f"And {more} more like these." if more > 0 else "")]
    return "".join(parts)


def _run_readings(run: RunResult, f: Facts) -> Iterator[str]:
    every = -(-len(run.run) // MOST_PRINTED) or 1
    said = f"{run.used.sum()} of {len(run.run)} sets count." if len(run.run) > 1 else ""
    if every > 1:
        said += (f" Every {every}. of them is printed, and those with a remark or left out; all stand in "
                 "readings.csv.")
    yield f"<h3>{_title(run)}</h3>" + paragraph(said)
    columns = [(name, *_unit(run, name, f)) for name in run.run.channels]
    timed, remarks = run.run.time is not None, _remarks(run, f)
    headings = ["Row", *(["t, min"] if timed else []),
                *(f"{QUANTITIES[n].symbol}, {unit}{' ' + run.run.basis[n] if n in run.run.basis else ''}"
                  for n, unit, _ in columns), "x", "Remark"]
    rows = []
    for k, number in enumerate(run.run.rows.tolist()):
        if k % every and number not in remarks and number not in run.removed:
            continue
        readings = [digits(from_si(run.run.channels[n][k], unit, kind)) for n, unit, kind in columns]
        rows.append([str(number), *([f"{run.run.time[k] / 60:.5g}"] if timed else []), *readings,
                     digits(run.x[k], ".5f"), "; ".join(filter(None, (_not_used(run, k), remarks.get(number))))])
    yield Table(headings, rows, frozenset(range(len(headings) - 1)), "log").html()
    yield paragraph("; ".join(f"{QUANTITIES[n].symbol} {LABELS[n]}" for n, _, _ in columns) + "; x quality of the set.",
                    "small")


def _remarks(run: RunResult, f: Facts) -> dict[int, str]:
    """What was remarked beside readings, by their row."""
    if run.run.name in {name for name, _ in _typed_names(f.case)}:
        return {number: row["remark"] for number, row in enumerate(f.case["readings"], 1) if row["remark"]}
    return {remark.row: remark.text for log in f.logs if log.name == run.run.name for remark in log.remarks}


def _typed_names(case: Case) -> Iterator[tuple[str, list[Row]]]:
    """The runs typed, by the names that they are reduced under."""
    for name, rows in runs_of(case).items():
        yield (f"run {name}" if name else "typed readings"), rows


def _title(run: RunResult) -> str:
    return paragraph(upper_first(run.run.name or "readings")).removeprefix("<p>").removesuffix("</p>")


def _unit(run: RunResult, name: str, f: Facts) -> tuple[str, str]:
    """The unit in which a channel was written down, by a logger or a hand, else the reader's; and its kind."""
    logged = next((log.mapping.used.get(name) for log in f.logs if log.name == run.run.name), None)
    if logged is not None and logged.unit in UNITS[QUANTITIES[name].kind]:
        return logged.unit, QUANTITIES[name].kind
    if name not in FIELDS:  # a channel that only logs have
        return f.units.unit(QUANTITIES[name].kind), QUANTITIES[name].kind
    typed = {row[name].unit for run_name, rows in _typed_names(f.case) for row in rows
             if row[name] is not None and run.run.name == run_name}
    return typed.pop() if len(typed) == 1 else reading_unit(name, f.units), FIELDS[name].kind


def _not_used(run: RunResult, k: int) -> str:
    """Why a row does not count; "" where it does."""
    if run.used[k]:
        return ""
    number = int(run.run.rows[k])
    if run.window[k] and number in run.removed:
        return f"left out: {run.removed[number]}"
    if not run.run.usable[k]:
        return "time does not run forward"
    return "outside the window" if not run.settling.used[k] else "incomplete"


def windows(f: Facts) -> str:
    """Which stretch of each run counts, and why not the rest."""
    if f.heated is not None:
        return heated_windows(f.heated)
    if f.result is None or [run.run.name for run in f.result.runs] == [READING]:
        return ""
    parts = [table_of(run_rows(f.result, f.units))]
    for run in f.result.runs:
        s, lines = run.settling, []
        if s.by_hand:
            lines.append(f"The window was chosen by hand: {s.reason or 'no reason given'}.")
        if s.whole is not None:
            lines.append("As a whole it is settled." if s.settled else "As a whole it is not settled: " + "; ".join(
                reason_text(r, f.units) for r in s.whole.reasons) + ".")
        lines += unsettled_lines(run, f.units)
        lines += [drift_text(run)] if drift_text(run) else []
        means, flags = channel_rows(run, f.units) if run.means else [], outlier_rows(run, f.units)
        parts += [f"<h3>{_title(run)}</h3>", bullets(lines), table_of(means)]
        if flags:
            apart, every = [row for row in flags if row["Decided"] != "kept"], len(flags)
            shown = [*apart, *(row for row in flags if row not in apart)][:FLAGS]
            parts += [paragraph("Readings that lie apart, and what was decided:"), table_of(shown, kind="words"),
                      paragraph(f"And {every - len(shown)} more that were kept." if every > len(shown) else "")]
        if run.scatter is not None and run.scatter.without is not None:
            parts.append(paragraph(f"The mean of the rows is {run.scatter.mean:.5f}; with the rows that were left out "
                                   f"{run.scatter.without:.5f}."))
    return "".join(parts)


def corrections(f: Facts) -> str:
    """One by one what was added to the readings, and to the quality."""
    if f.result is None:
        added = [] if None in (f.a.x, f.a.x_as_read) else [
            f"Without corrections the quality would be {f.a.x_as_read:.5f}: they add "
            f"{percent_points(f.a.x - f.a.x_as_read)}."]
        return bullets((*added, *f.said.assumed))
    parts = []
    for run in f.result.runs:
        if run.corrections:
            parts += [f"<h3>{_title(run)}</h3>", table_of(correction_rows(run, f.units))]
    return "".join(parts) or paragraph("No correction was applied.")


# ---- states, budget, deviations

_DECIMALS = {"p": 4, "T": 2, "x": 4, "h": 2, "s": 4, "v": 5, "c": 1}


def states(f: Facts) -> str:
    """The states of the sample, and the three diagrams."""
    rows = [{"": str(k), **{name: _state(name, value) for name, value in row.items()}}
            for k, row in enumerate(state_rows(f.a, f.units), 1)]
    run = ""
    if f.result is not None and len(f.result.runs) > 1:
        first = next((r for r in f.result.runs if r.assessment is f.a), None)
        run = f"By the means of {first.run.name}." if first else ""
    drawn = "".join(f"<figure><figcaption>{title}</figcaption>{svg}</figure>" for title, svg in
                    diagrams_svg(f.a, f.units))
    return (paragraph(run) + table_of(rows, list(rows[0])[2:]) + f'<div class="diagrams">{drawn}</div>'
            + paragraph("Thin line: saturation. Thick line: the path of the sample. Broken line: the wettest steam "
                        "still readable. Numbers: the states above.", "small"))


def _state(name: str, value: str | float | None) -> str:
    if value is None:
        return "superheated" if name == "x" else "–"
    return value if isinstance(value, str) else f"{value:.{_DECIMALS[name.split(',')[0]]}f}"


def budget(f: Facts) -> str:
    """The uncertainty line by line, its sum with sampling and without."""
    found = f.sure
    if found.budget is None:
        return paragraph("There is no budget: without a quality there is nothing to be uncertain of."
                         if f.a.x is None or f.forecast is None else found.unable)
    sums = [_sum(name, b) for name, b in zip(WAYS, (found.budget, found.instruments), strict=True)]
    missing = f"Not stated, and not in it: {', '.join(found.missing)}." if found.missing else ""
    return table_of(budget_rows(found, f.units)) + table_of(sums) + paragraph(missing)


def _sum(name: str, b: Budget) -> dict[str, str]:
    freedom = "over 1000" if b.dof > 1000 else f"{b.dof:.0f}"
    return {"": name, "Quality": f"{b.value:.5f}", "Standard uncertainty": points(b.u), "Degrees of freedom": freedom,
            "Coverage factor": f"{b.k:.2f}", "Coverage": f"{100 * b.coverage:.4g} %",
            "Expanded uncertainty": points(b.U)}


def deviations(f: Facts) -> str:
    """What of the run sheet was not done, and what was remarked."""
    parts = [paragraph(f.case["deviations"])]
    ticks = ticks_of(f.case)
    if f.sheet is None:
        parts.append(paragraph(f"No run sheet can be made for this case: {f.trouble}"))
    elif not ticks:
        parts.append(paragraph("No step of a run sheet was ticked for this test."))
    else:
        parts += _done(f.sheet, f.units)
    return "".join(parts)


def _done(sheet: RunSheet, units: UnitSystem) -> list[str]:
    """Steps that were not ticked, and what was remarked beside those that were."""
    left = {s.title: [step for step in s.steps if step.key not in sheet.ticks] for s in sheet.sections}
    undone = [line for s in sheet.sections for line in (
        [f"{s.title}: none of its {len(s.steps)} steps"] if len(left[s.title]) == len(s.steps) > 1 else
        [f"{s.title}: {step.said.text(units)}" for step in left[s.title]])]
    known = {step.key: step for step in sheet.steps}
    remarks = [f"{known[key].said.text(units)} {tick.time} {tick.initials}: {tick.remark}"
               for key, tick in sheet.ticks.items() if key in known and tick.remark]
    count = f"{len(sheet.steps) - len(sheet.unticked)} of {len(sheet.steps)} steps of the run sheet were ticked."
    parts = [paragraph(count + (" Not ticked:" if undone else "")), bullets(undone)]
    parts += [paragraph("Remarked beside a tick:"), bullets(remarks)] if remarks else []
    if sheet.strange:
        parts.append(paragraph(f"Ticked, but not in the run sheet of this case: {', '.join(sheet.strange)}."))
    return parts


def cautions(f: Facts) -> str:
    """What was noticed, and what the figures take for granted."""
    noticed = list(f.sure.cautions)
    if f.result is not None:
        noticed += [f"{run.run.name}: {line}" for run in f.result.runs for line in run.cautions]
    noticed += [f"{log.name}: {doubt}" for log in f.logs for doubt in log.suspicions]
    return bullets([*map(upper_first, noticed), *f.said.assumed])
