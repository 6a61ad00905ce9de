"""The commands ``runsheet`` and ``record``: documents for a case, written whole or not at all."""

from __future__ import annotations

import argparse
from datetime import datetime
from pathlib import Path

from engine.job.case import Case
from engine.job.case.fields_modes import ELECTRIC
from engine.job.commands.console import ANSWERED, OPEN, Console
from engine.job.paper import PAPERS, usual_paper
from engine.job.record import reasons_against, record_html, record_zip
from engine.job.record.data import reopened
from engine.job.result import Result, reduce
from engine.job.result.intake import read
from engine.job.result.runs import run_of_log, runs_typed
from engine.job.runsheet import headline, notices, run_sheet
from engine.job.runsheet.print import runsheet_html
from engine.measurement.logbook import Log
from engine.steam.units import SYSTEMS, UnitSystem


def runsheet_arguments(parser: argparse.ArgumentParser) -> None:
    _common(parser, "an HTML page to print; - for the standard output")


def runsheet_command(case: Case, options: argparse.Namespace, console: Console) -> int:
    """Write the run sheet of a case. OPEN where it would lead to no quality."""
    units, paper = _shown(options)
    sheet = run_sheet(case)
    console.write(options.out, runsheet_html(case, units, paper))
    if str(options.out) != "-":
        for line in (headline(sheet, units), *notices(sheet, units)):
            console.say(line)
    return ANSWERED if sheet.plan.readable else OPEN


def record_arguments(parser: argparse.ArgumentParser) -> None:
    _common(parser, "an HTML page, or with a name ending in .zip page and data; - for the standard output")
    parser.add_argument("logs", nargs="*", type=Path, metavar="LOG",
                        help="logs of readings; without any the readings typed into the case, or its single reading")
    parser.add_argument("--made", metavar="TEXT", help="date and time that the record bears (default: now)")


def record_command(case: Case, options: argparse.Namespace, console: Console) -> int:
    """Write the record of a test. OPEN, and no record, while something is undecided."""
    units, paper = _shown(options)
    logs = tuple(read(case, file, progress=lambda done, name=file.name: console.progress(f"reading {name}", done))
                 for file in options.logs)
    logs = logs or kept_logs(options.case)
    result = reduced(case, logs)
    if faults := reasons_against(case, result):
        for fault in faults:
            console.warn(str(fault))
        return OPEN
    made = options.made or datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %z")
    if options.out.suffix.lower() == ".zip":
        data = record_zip(case, result, units, paper, made=made, logs=logs)
        with console.whole_file(options.out) as half:
            half.write_bytes(data)
    else:
        console.write(options.out, record_html(case, result, units, paper, made=made, logs=logs))
    return ANSWERED


def is_record(path: Path) -> bool:
    """Whether a file is named like a record."""
    return path.suffix.lower() in (".html", ".htm")


def kept_logs(path: Path) -> tuple[Log, ...]:
    """The logs in a record; none where the case comes from its own file. InputError where they cannot be used."""
    return reopened(path.read_bytes()).logs if is_record(path) else ()


def reduced(case: Case, logs: tuple[Log, ...] = ()) -> Result | None:
    """What the logs say, or the readings typed into the case; None where there is its single reading only, and
    with a heater, whose means are entered one by one."""
    if case["mode"] == ELECTRIC:
        return None
    runs = tuple(map(run_of_log, logs)) or runs_typed(case)
    return reduce(case, runs) if runs else None


def _common(parser: argparse.ArgumentParser, what: str) -> None:
    parser.add_argument("case", type=Path, metavar="CASE.json", help="a case file as saved by the dashboard")
    parser.add_argument("--out", type=Path, required=True, metavar="FILE", help=what)
    parser.add_argument("--paper", choices=PAPERS, help="size of the paper (default: that of the units)")
    parser.add_argument("--units", choices=list(SYSTEMS), default="SI", help="units of the text (default: SI)")


def _shown(options: argparse.Namespace) -> tuple[UnitSystem, str]:
    units = SYSTEMS[options.units]
    return units, options.paper or usual_paper(units)
