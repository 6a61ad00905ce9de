"""The record of a test: one page that opens offline, can be checked line by line, reopened and recomputed."""

from __future__ import annotations

import hashlib
import io
import zipfile
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from engine import __version__
from engine.job.assessment import assess
from engine.job.assessment.answer import answer
from engine.job.assessment.cautions import SHORT
from engine.job.case import Case, describe, resolve
from engine.job.case.casefile import to_json
from engine.job.case.fields_modes import ELECTRIC, NOT_STATED, SEPARATING, THROTTLING
from engine.job.case.fields_path import EXPECTED, UNDECIDED
from engine.job.paper import bullets, check_paper, document, escaped_line, one_line, paragraph
from engine.job.record import sections as sections
from engine.job.record.data import blocks, fits, readings_csv
from engine.job.record.sections import READING, WAYS, Facts
from engine.job.result import Result, reduce
from engine.job.result.corrections import shown_of
from engine.job.result.heated import reduce_heated
from engine.job.result.runs import Run
from engine.job.result.said import decision_reason, told, verdict_word
from engine.job.runsheet import RunSheet, run_sheet
from engine.job.runsheet.print import signature_table, title_of
from engine.job.uncertainty import forecast
from engine.job.uncertainty.answer_with import answer_with
from engine.measurement.logbook import Log
from engine.steam.errors import Fault, InputError
from engine.steam.units import UnitSystem

FORMULATION = "IAPWS-IF97 (R7-97, 2012), regions 1, 2 and 4"

_STYLE = """
table.facts td:first-child, table.blanks td:first-child, table.blanks th:first-child { width: 46mm; font-weight: 600; }
table.facts, table.blanks, table.entries { overflow-wrap: anywhere; }
table.blanks { table-layout: fixed; }
table.blanks td { height: 9mm; }
table.entries { table-layout: fixed; }
table.entries td:nth-child(odd) { width: 31%; color: #333; }
table.entries td { padding-top: 0.3mm; padding-bottom: 0.3mm; font-size: 8.5pt; }
table.log td, table.log th { padding: 0.2mm 1mm; font-size: 8pt; }
table.log td:last-child { width: 42mm; overflow-wrap: anywhere; }
.signed { break-inside: avoid; }
.diagrams { display: grid; grid-template-columns: 1fr 1fr; gap: 2mm 4mm; }
figure { margin: 0; break-inside: avoid; }
figcaption { font-size: 9pt; font-weight: 600; }
.stop { font-size: 13pt; }
@media screen and (max-width: 700px) { .diagrams { grid-template-columns: 1fr; } }
"""


def record_html(case: Case, result: Result | None, units: UnitSystem, paper: str, *, made: str,
                logs: Sequence[Log] = ()) -> str:
    """The record of a test as one HTML page for "A4" or "Letter".

    ``result`` is what the readings say by this case; None makes the record from the single reading in
    the case. ``made`` is date and time in words; ``logs`` are those that the readings came from, kept in
    the record so that it can be recomputed. The same arguments give the same bytes. Raises InputError,
    with every reason at once, where there is nothing to record yet.
    """
    check_paper(paper)
    facts = facts_of(case, result, units, logs)
    return _page(facts, paper, made, _rows(facts))


def record_zip(case: Case, result: Result | None, units: UnitSystem, paper: str, *, made: str,
               logs: Sequence[Log] = ()) -> bytes:
    """The record with its data: record.html, case.json, and readings.csv where there are readings.

    The same arguments give the same bytes. Raises InputError as ``record_html`` does.
    """
    check_paper(paper)
    facts = facts_of(case, result, units, logs)
    rows = _rows(facts)
    files = {"record.html": _page(facts, paper, made, rows).encode(), "case.json": to_json(case).encode(),
             **({} if rows is None else {"readings.csv": rows})}
    packed = io.BytesIO()
    with zipfile.ZipFile(packed, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, data in files.items():
            entry = zipfile.ZipInfo(name)  # dated 1980, so that nothing but its contents decides its bytes
            entry.compress_type, entry.external_attr = zipfile.ZIP_DEFLATED, 0o644 << 16
            archive.writestr(entry, data)
    return packed.getvalue()


_PARTS = (("What was asked", sections.question), ("What was found", sections.answered),
          ("Decision", sections.conformity), ("Readings as taken", sections.readings),
          ("Settled windows", sections.windows), ("Corrections, one by one", sections.corrections),
          ("States and diagrams", sections.states), ("Uncertainty", sections.budget),
          ("Deviations from the run sheet", sections.deviations), ("Noticed, and taken for granted", sections.cautions),
          ("Rig, instruments and everything entered", sections.entries))


def _page(facts: Facts, paper: str, made: str, rows: bytes | None) -> str:
    title, made = title_of(facts.case), one_line(made)
    body = [f"<h1>{escaped_line(title)}</h1>",
            paragraph(f"Record of a steam quality test by calorimeter. Made {made}."), paragraph(SHORT, "small")]
    for heading, section in _PARTS:
        html = section(facts)
        body += [f"<h2>{heading}</h2>", html] if html else []
    body += ["<h2>How it was computed</h2>", bullets(_computed(facts, rows)),
             f'<div class="signed"><h2>Signed</h2>{signature_table(facts.case).html()}</div>']
    foot = f"Made {made}. Program version {__version__}. {FORMULATION}."
    return document(f"Record: {title}", "\n".join(body), paper, foot=foot, style=_STYLE,
                    data=blocks(facts.case, facts.logs))


def _rows(facts: Facts) -> bytes | None:
    return None if facts.result is None else readings_csv(facts.result)


def reasons_against(case: Case, result: Result | None) -> tuple[Fault, ...]:
    """Why there is nothing to record yet: what nobody has decided, or read."""
    faults = []
    if case["mode"] == ELECTRIC:
        if case["power_loss"] is None:
            faults.append(Fault("heat lost by the heater", NOT_STATED, "", "a value, 0 where it is knowingly nothing",
                                "left out, it makes the steam look drier than it is", name="power_loss"))
    elif case["heat_loss_method"] == UNDECIDED:
        faults.append(Fault("heat loss", UNDECIDED, "", "one of the ways to account for it, “none” among them",
                            "it always makes the steam look wetter than it is", "choose it on the Path page",
                            "heat_loss_method"))
    if case["sampling_kind"] == NOT_STATED or case["sampling"] is None:
        faults.append(Fault("sampling representativeness", NOT_STATED, "",
                            "a judgement of someone who knows the tapping",
                            "it is a part of the uncertainty, often the largest",
                            "state it with the instruments, 0 where it is knowingly nothing", "sampling"))
    read = case["heater_readings"] if case["mode"] == ELECTRIC else result is not None
    if not read and case["question"] == EXPECTED:
        faults.append(Fault("question", "what must be seen", "", "a reading, or readings",
                            "an expectation is no test", "choose “I have a reading” on the Path page", "question"))
    if result is not None and not result.runs:
        faults.append(Fault("readings", "none", "", "one at least", name="readings"))
    return tuple(faults)


def facts_of(case: Case, result: Result | None, units: UnitSystem, logs: Sequence[Log] = (), *,
             sheet: RunSheet | None = None) -> Facts:
    """All that a record tells. InputError, with every reason at once, where there is nothing to record yet.

    ``sheet`` saves making the run sheet again.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.steam.units import SI
    >>> [name for name, text in summary(facts_of(DEMO, None, SI))][:4]
    ['Made from', 'With sampling', 'By the instruments alone', 'Heat loss']
    """
    if faults := reasons_against(case, result):
        raise InputError(*faults)
    heated = None
    if case["mode"] == ELECTRIC:  # sets written down, else means entered one by one
        result, heated = None, reduce_heated(case)
    elif result is None:
        result = reduce(case, (reading_as_run(case),))
    first = next((run.assessment for run in (*result.read, *result.runs) if run.assessment), None) if result else None
    a = first or (heated.assessment if heated else assess(case))
    try:
        sheet, trouble = sheet or run_sheet(case), ""
    except InputError as error:
        sheet, trouble = None, str(error)
    reduced = set() if result is None else {run.run.name for run in result.runs}
    kept = tuple(log for log in logs if log.name in reduced)
    expected = None if result is not None else heated.forecast if heated else forecast(case, a)
    said = answer(a, units)
    if heated is not None:  # with the scatter of the sets in it
        said = replace(said, headline=answer_with(expected, units).headline)
    return Facts(case, a, said, result, heated, expected, kept, sheet, trouble, units)


def headline(facts: Facts) -> tuple[str, str, str]:
    """Shape, sentence and kind of the answer: a result, an exploration, or none."""
    if facts.result is not None:
        said = told(facts.result)
        return said.shape, said.headline, said.word
    if facts.a.x is None:
        return facts.said.shape, facts.said.headline, "no result"
    open_points = facts.forecast.missing or facts.forecast.unable
    return facts.said.shape, facts.said.headline, "exploration" if open_points else "result"


def decided(facts: Facts) -> tuple[tuple[str, str], ...]:
    """The decision with sampling and by the instruments alone: name and words; none of the two without a limit."""
    return tuple((name, f"{verdict_word(v)}: {decision_reason(v, facts.case)}")
                 for name, v in zip(WAYS, facts.sure.verdicts or (), strict=False))


def summary(facts: Facts) -> tuple[tuple[str, str], ...]:
    """What a record will say, in a few lines: name and text."""
    case, runs, sheet = facts.case, () if facts.result is None else facts.result.runs, facts.sheet
    made_from = "the single reading in the case"
    if facts.result is not None and [run.run.name for run in runs] != [READING]:
        made_from = "; ".join(f"{run.run.name}: {run.used.sum()} of {len(run.run)} sets" for run in runs)
    if facts.heated is not None:
        made_from = "; ".join(f"{run.run.name}: {run.used.sum()} of {len(run.run)} sets" for run in facts.heated.runs)
    ticked = ("no run sheet can be made for this case" if sheet is None else
              f"{len(sheet.steps) - len(sheet.unticked)} of {len(sheet.steps)} steps ticked")
    lost = sum(sum(log.rejected_counts.values()) for log in facts.logs)
    return (("Made from", made_from), *decided(facts), _loss(case),
            ("Sampling representativeness", f"± {describe(case['sampling'])}, {case['sampling_kind']}"),
            ("Run sheet", ticked), *([("Refused in the logs", f"{lost} cells or rows")] if lost else []),
            *([("Not stated", ", ".join(facts.sure.missing))] if facts.sure.missing else []),
            ("Properties", FORMULATION), ("Program version", __version__))


def _loss(case: Case) -> tuple[str, str]:
    if case["mode"] == ELECTRIC:
        return "Heat lost by the heater", describe(case["power_loss"])
    return "Heat loss", case["heat_loss_method"]


def reading_as_run(case: Case) -> Run:
    """The single reading of a case as a run of one set. InputError where an entry cannot be used."""
    si = resolve(case)
    (p_line, line_basis), (p_exhaust, exhaust_basis) = shown_of(case, "p_line"), shown_of(case, "p_exhaust")
    read = {"p_line": p_line, "p_exhaust": p_exhaust, "T_exhaust": si["T_exhaust"], "p_barometer": si.p_barometer,
            "sample_flow": si["sample_flow"], "T_ambient": si["T_ambient"]}
    channels = {name: np.array([value]) for name, value in read.items() if value is not None}
    basis = {"p_line": line_basis, "p_exhaust": exhaust_basis, "p_barometer": "absolute"}
    return Run(READING, np.array([1]), None, channels, basis, np.array([True]))


_BALANCES = {
    THROTTLING: "h_line + c₁²/2 = h(p₂, T₂) + (1 − r) c₂²/2 + q",
    SEPARATING: "h + c₁²/2 = h(p₂, T₂) + (1 − r) c₂²/2 + q behind the separator, the drained water put back by mass",
    ELECTRIC: "h_line = h(p₃, T₃) − (P − P_lost)/ṁ",
}


def _computed(facts: Facts, rows: bytes | None) -> list[str]:
    lines = [f"Properties of water and steam: {FORMULATION}. Program version {__version__}.",
             f"Energy balance: {_BALANCES[facts.case['mode']]}; quality x = (h_line − h_f)/(h_g − h_f) at the line "
             "pressure.",
             *(["Uncertainty by JCGM 100 (GUM), decision by JCGM 106."] if facts.sure.budget is not None else []),
             "This page holds the case file. To have the same digits again, open the page itself in the dashboard, "
             "under Case, or give it to the command line: python -m engine record THIS.html --out AGAIN.html"]
    if facts.logs:
        lines.append("The logs as read are in this page too." if fits(facts.logs) else
                     "The logs are too long for this page: keep them with it, and bring them again to recompute.")
    if rows is not None:
        lines.append(f"SHA-256 of readings.csv: {hashlib.sha256(rows).hexdigest()}")
    return lines
