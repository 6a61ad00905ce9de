"""The run sheet on paper: steps with boxes to tick, gauges, deviations, tables to fill in."""

from __future__ import annotations

from collections.abc import Iterator

from engine import __version__
from engine.job.assessment.cautions import SHORT
from engine.job.assessment.methods_said import METHODS, in_short
from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.paper import Table, document, escaped_line, one_line, paragraph
from engine.job.runsheet.readings import reading_table, runs_of, weighed_table
from engine.job.runsheet.runsheet import RunSheet, headline, notices, run_sheet
from engine.job.runsheet.steps import Section
from engine.steam.units import UnitSystem

BOX, DONE = "☐", "☑"

_STYLE = """
table.steps { table-layout: fixed; overflow-wrap: anywhere; }
table.steps th:first-child { width: 9mm; }
table.steps td:first-child { font-size: 14pt; line-height: 1; text-align: center; }
table.steps th:nth-child(3) { width: 27mm; }
table.steps th:nth-child(4) { width: 19mm; }
table.gauges td.n { white-space: normal; }
table.gauges td:first-child, table.gauges td.n { width: 22mm; }
table.readings td { height: 6.2mm; padding-top: 0; padding-bottom: 0; vertical-align: middle; }
table.readings td:last-child { width: 36mm; overflow-wrap: anywhere; }
table.weighed td { height: 8mm; }
table.blanks { overflow-wrap: anywhere; table-layout: fixed; }
table.blanks th:first-child { width: 46mm; }
table.blanks td:first-child { width: 46mm; font-weight: 600; }
table.blanks td { height: 7mm; }
"""


def runsheet_html(case: Case, units: UnitSystem, paper: str) -> str:
    """The run sheet of a case as one HTML page to print on "A4" or "Letter".

    Raises InputError, with every fault at once, where an entry cannot be used.
    """
    sheet = run_sheet(case)
    title = title_of(case)
    body = "\n".join((
        f"<h1>{escaped_line(title)}</h1>",
        paragraph("Run sheet: " + METHODS[case["mode"]].lower() + ". " + ", ".join(in_short(sheet.plan.case)) + "."),
        paragraph(headline(sheet, units)),
        *(f'<div class="note">{paragraph(line)}</div>' for line in notices(sheet, units)),
        paragraph(SHORT, "small"),
        _blanks(case),
        *(_section(section, sheet, units) for section in sheet.sections),
        "<h2>Signed</h2>", signature_table(case).html(),
        '<h2 class="new">What every gauge must show</h2>', gauge_table(sheet, units).html(),
        "<h3>The scale of the thermometer</h3>", mark_table(sheet, units).html(),
        "<h2>When it is otherwise</h2>", deviation_table(sheet, units).html(),
        *_readings(sheet, units),
    ))
    return document(f"Run sheet: {title}", body, paper, foot=f"Program version {__version__}. {_FOOT}", style=_STYLE)


_FOOT = "This sheet gives no permission: permit, site rules and local code decide."


def title_of(case: Case) -> str:
    """The title of a case, or a word for none."""
    return one_line(case["title"]) or "Untitled case"


def _blanks(case: Case) -> str:
    names = ("place", "permit", "tested_by", "witnessed_by", "instrument_list")
    rows = [(FIELDS[name].label, case[name]) for name in names]
    return Table((), [*rows, ("Date", "")], kind="blanks").html()


def _section(section: Section, sheet: RunSheet, units: UnitSystem) -> str:
    table = step_table(section, sheet, units).html()
    stop = paragraph("Stop here until every line above is ticked.", "stop") if section.hold else ""
    return f"<h2>{section.title}</h2>\n{table}{stop}"


def step_table(section: Section, sheet: RunSheet, units: UnitSystem) -> Table:
    """The steps of a section with their ticks."""
    rows = []
    for step in section.steps:
        tick = sheet.ticks.get(step.key)
        said = [step.said.text(units), f"Number missing: {step.missing}" if step.missing else "",
                f"Remark: {tick.remark}" if tick and tick.remark else ""]
        rows.append((DONE if tick else BOX, "\n".join(filter(None, said)), tick.time if tick else "",
                     tick.initials if tick else ""))
    return Table(("", "Step", "Time", "Initials"), rows, kind="steps")


def gauge_table(sheet: RunSheet, units: UnitSystem) -> Table:
    """What every gauge must show."""
    rows = [(g.name, *(said.text(units) for said in (g.before, g.settled, g.low, g.high, g.note)))
            for g in sheet.gauges]
    return Table(("Gauge", "Before steam", "Settled", "From", "To", ""), rows, frozenset((1, 2, 3, 4)), "gauges")


def mark_table(sheet: RunSheet, units: UnitSystem) -> Table:
    """The scale of the deciding thermometer, the driest on top."""
    rows = [(units.text(mark.T, "temperature"), mark.says) for mark in reversed(sheet.marks)]
    return Table(("Reading", "Says"), rows, frozenset((0,)))


def deviation_table(sheet: RunSheet, units: UnitSystem) -> Table:
    """What else may be seen."""
    rows = [(d.name, d.seen.text(units), d.means.text(units), d.do.text(units)) for d in sheet.deviations]
    return Table(("", "What is seen", "What it means", "What to do"), rows)


def signature_table(case: Case) -> Table:
    """Lines to sign on."""
    rows = [("Tested by", case["tested_by"], ""), ("Witnessed by", case["witnessed_by"], ""),
            ("For the site", "", "")]
    return Table(("", "Name", "Date and signature"), rows, kind="blanks")


def _readings(sheet: RunSheet, units: UnitSystem) -> Iterator[str]:
    """One sheet of paper for each run: what was typed, and room for what was not."""
    plan, typed = sheet.plan, runs_of(sheet.case)
    for name in dict.fromkeys([*(str(number) for number in range(1, plan.runs + 1)), *typed]):
        yield f'<h2 class="new">Readings{", run " + escaped_line(name) if name else ""}</h2>'
        yield reading_table(typed.get(name, []), plan, units, plan.sets).html()
        yield weighed_table(plan, units).html()
