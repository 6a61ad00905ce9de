"""The command ``reduce``: logs, folders of logs, or typed readings, to one result in words, JSON and CSV."""

from __future__ import annotations

import argparse
from collections.abc import Iterable
from dataclasses import replace
from pathlib import Path

from engine.job.assessment.tables import as_csv
from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.job.commands.console import ANSWERED, OPEN, Console
from engine.job.commands.documents import kept_logs
from engine.job.result import Result, reduce
from engine.job.result.data import as_json, run_table, write_rows
from engine.job.result.intake import read
from engine.job.result.runs import Run, run_of_log, runs_typed
from engine.job.result.said import check_lines, correction_rows, rule_text, run_rows, told, unsettled_lines
from engine.job.uncertainty import Check, check
from engine.measurement.logbook import Log
from engine.measurement.logbook.mapping import Mapping
from engine.steam.errors import Fault, InputError
from engine.steam.units import SYSTEMS, UnitSystem

LOG_ENDINGS = (".csv", ".tsv", ".txt", ".dat", ".log", ".asc", ".xlsx", ".xlsm")
_MOST_DRAWS = 20_000_000


def reduce_arguments(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("logs", nargs="*", type=Path, metavar="LOG",
        help=f"log files, each one run of the test; a folder stands for its logs ({', '.join(LOG_ENDINGS)}); "
             "without any, the readings typed into the case")
    add("--case", type=Path, required=True, metavar="CASE.json", help="the case: instruments, corrections, limits")
    add("--window", nargs=2, type=float, metavar=("FROM", "TO"),
        help="minutes from the start of each log to use, instead of the longest settled window")
    add("--reason", default="", metavar="TEXT", help="why this window; without a reason there is no result")
    add("--column", action="append", default=[], metavar="CHANNEL=HEADING", help="which column a channel is in")
    add("--unit", action="append", default=[], metavar="CHANNEL=UNIT", help="unit of a channel")
    add("--basis", action="append", default=[], metavar="[CHANNEL=]BASIS",
        help="gauge or absolute: of one pressure, or of all that do not say")
    add("--decimal", choices=(".", ","), help="the decimal sign, where it cannot be told")
    add("--date-order", choices=("dmy", "mdy", "ymd"), help="the order of a date, where it cannot be told")
    add("--draws", type=int, default=1_000_000, metavar="N", help="Monte Carlo draws beside the budget; 0 for none")
    add("--json", type=Path, metavar="OUT", help="write the whole result as JSON, in SI; - instead of the text")
    add("--csv", type=Path, metavar="OUT", help="write a line per run and one for all as CSV; - instead of the text")
    add("--rows", type=Path, metavar="OUT", help="write every row, corrected and reduced, as CSV")
    add("--units", choices=list(SYSTEMS), default="SI", help="units of the text (default: SI)")
    add("--quiet", action="store_true", help="no text, only files and exit status")


def reduce_command(case: Case, options: argparse.Namespace, console: Console) -> int:
    """Reduce by the options; returns the exit status."""
    if not 0 <= options.draws <= _MOST_DRAWS:
        raise InputError(Fault("--draws", options.draws, "", f"0 to {_MOST_DRAWS}"))
    files = _files(options.logs)
    logs = [read(case, file, lambda mapping: _answered(mapping, options),
                 lambda done, name=file.name: console.progress(f"reading {name}", done)) for file in files]
    logs = _apart(logs, files) or list(kept_logs(options.case))
    runs = [run_of_log(log) for log in logs] or list(runs_typed(case))
    case = _with_window(case, runs, options)
    result = reduce(case, runs, progress=lambda done: console.progress("reducing", done))
    drawn = None
    if options.draws and result.measurement is not None and result.budget is not None:
        drawn = check(result.measurement, result.budget, draws=options.draws,
                      progress=lambda done: console.progress("drawing", done))
    _files_out(result, drawn, options, console)
    if not (options.quiet or "-" in (str(options.json), str(options.csv))):
        _say(result, drawn, SYSTEMS[options.units], console)
    _warn(result, logs, console)
    return ANSWERED if result.final else OPEN


def _files(paths: Iterable[Path]) -> list[Path]:
    """Every log named, and the logs of every folder named, in the order of their names."""
    found = []
    for path in paths:
        if not path.is_dir():
            found.append(path)
            continue
        inside = sorted(p for p in path.iterdir() if p.suffix.lower() in LOG_ENDINGS and not p.name.startswith("."))
        if not inside:
            raise InputError(Fault("folder of logs", str(path), "", "a folder with logs in it",
                                   f"none of its files ends in {', '.join(LOG_ENDINGS)}", "name the files themselves"))
        found += inside
    return found


def _apart(logs: list[Log], files: list[Path]) -> list[Log]:
    """Logs of one name from different folders take the folder into theirs: windows go by name."""
    names = [log.name for log in logs]
    return [log if names.count(log.name) == 1 else replace(log, name=str(file))
            for log, file in zip(logs, files, strict=True)]


def _pairs(given: list[str], option: str) -> dict[str, str]:
    pairs = {}
    for text in given:
        name, sign, value = text.partition("=")
        if not (sign and name.strip() and value.strip()):
            raise InputError(Fault(option, text, "", f"{option} CHANNEL=..., as in {option} T_exhaust=..."))
        pairs[name.strip()] = value.strip()
    return pairs


def _answered(mapping: Mapping, options: argparse.Namespace) -> Mapping:
    """The mapping with what the command line says about the columns."""
    whole = {name: value for name, value in (("decimal", options.decimal), ("date_order", options.date_order)) if value}
    columns = {heading: channel for channel, heading in _pairs(options.column, "--column").items()}
    if columns:  # a column that gives its channel up is left out
        taken = {c.name: "" for c in mapping.columns if c.channel in columns.values() and c.name not in columns}
        mapping = mapping.answer(channel={**taken, **columns})
    bare = [b for b in options.basis if "=" not in b]
    named = _pairs([b for b in options.basis if "=" in b], "--basis")
    mapping = mapping.answer(unit=_pairs(options.unit, "--unit"), basis=named or None, **whole)
    return mapping.answer(basis=bare[-1]) if bare else mapping


def _with_window(case: Case, runs: list[Run], options: argparse.Namespace) -> Case:
    """The case with the window of the command line in place of its own, for every run."""
    if options.window is None:
        return case
    begin, end = options.window
    if not begin < end:
        raise InputError(Fault("--window", f"{begin:g} {end:g}", "min", "a beginning before the end"))
    row = FIELDS["windows"].row
    return case.with_(windows=tuple(row(log=run.name, begin=Entry(begin, "min"), end=Entry(end, "min"),
                                        reason=options.reason) for run in runs))


def _files_out(result: Result, drawn: Check | None, options: argparse.Namespace, console: Console) -> None:
    if options.json:
        console.write(options.json, as_json(result, drawn))
    if options.csv:
        console.write(options.csv, as_csv(run_table(result)))
    if options.rows:
        with console.whole_file(options.rows) as half:
            write_rows(half, result)


def _say(result: Result, drawn: Check | None, units: UnitSystem, console: Console) -> None:
    said = told(result)
    console.say(f"{said.shape} {said.headline} ({said.word})")
    for line in (*said.verdicts, *([rule_text(result.case)] if result.x is not None else []), *said.reasons):
        console.say(line)
    if drawn is not None:
        console.say("Monte Carlo: " + " ".join(check_lines(drawn)))
    for run, row in zip(result.runs, run_rows(result, units), strict=True):
        console.say("; ".join(f"{name.lower()} {text}" for name, text in row.items() if text and name != "Remark"))
        for c in correction_rows(run, units):
            reason = f" ({c['Reason']})" if c["Reason"] else ""
            console.say(f"  {c['Correction']}, {c['']}: {c['Adds to the reading']}, {c['Adds to the quality']}{reason}")


def _warn(result: Result, logs: list[Log], console: Console) -> None:
    """What keeps it from being a result, and what was noticed on the way."""
    for line in told(result).open_points:
        console.warn(line)
    for run in result.runs:
        for caution in run.cautions:
            console.warn(f"{run.run.name}: {caution}")
        if run.quality is None:
            for line in unsettled_lines(run, SYSTEMS["SI"]):
                console.warn(f"{run.run.name}: {line}")
    for line in result.cautions:
        console.warn(line)
    for log in logs:
        for suspicion in log.suspicions:
            console.warn(f"{log.name}: {suspicion}")
        for reason, count in log.rejected_counts.items():
            console.warn(f"{log.name}: {count} refused: {reason}")
