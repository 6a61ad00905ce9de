"""The command line, without a terminal: each command takes its arguments and says what it found.

Exit status: 0 the question has its answer; 1 it has none yet, for the reasons given on the error
stream; 2 the command, the case or a log cannot be used, with the fault in words. Commands are rows
of ``COMMANDS``; another module adds its own there.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import NamedTuple, TextIO

from engine import __version__
from engine.job.assessment import assess
from engine.job.assessment.verdict import Verdict
from engine.job.case import Case
from engine.job.case.casefile import from_json, from_record
from engine.job.commands.console import ANSWERED, UNUSABLE, Console, as_text
from engine.job.commands.console import OPEN as NO_ANSWER
from engine.job.commands.documents import (
    is_record,
    record_arguments,
    record_command,
    runsheet_arguments,
    runsheet_command,
)
from engine.job.commands.reduce import reduce_arguments, reduce_command
from engine.job.commands.rehearse import rehearse_arguments, rehearse_command
from engine.job.uncertainty import forecast_or_why
from engine.job.uncertainty.answer_with import answer_with
from engine.job.uncertainty.forecast_words import forecast_advice
from engine.steam.errors import Fault, InputError
from engine.steam.units import SYSTEMS


class Command(NamedTuple):
    """``arguments`` are added to the parser of the command; ``run`` gives the exit status."""

    name: str
    help: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace, Console], int]


def _quality_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", type=Path, metavar="CASE.json", help="a case file as saved by the dashboard")
    parser.add_argument("--json", type=Path, metavar="OUT",
                        help="write the figures as JSON, in SI; - instead of the text")
    parser.add_argument("--units", choices=list(SYSTEMS), default="SI", help="units of the text (default: SI)")


def _quality(options: argparse.Namespace, console: Console) -> int:
    """What one reading, or an expected wetness, says: the answer of the Path page, and its uncertainty."""
    case = read_case(options.case)
    a, units = assess(case), SYSTEMS[options.units]
    expected = forecast_or_why(case, a)
    said = answer_with(expected, units)
    if str(options.json) != "-":
        for line in (f"{said.shape} {said.headline}", *said.reasons, *said.remedies, *forecast_advice(expected),
                     *said.assumed):
            console.say(line)
    if options.json:
        figures = {"verdict": a.verdict.value, "x": a.x, "x_below": a.x_below, "superheat": a.superheat,
                   "margin": a.margin, "x_least": a.x_least, "T_exhaust": a.T_exhaust,
                   "line_superheat": a.line_superheat,
                   "U": None if expected.budget is None else expected.budget.U,
                   "U_instruments": None if expected.instruments is None else expected.instruments.U,
                   "k": None if expected.budget is None else expected.budget.k, "missing": expected.missing}
        console.write(options.json, as_text(figures))
    return ANSWERED if a.verdict in (Verdict.READS, Verdict.THIN) else NO_ANSWER


def read_case(path: Path) -> Case:
    """A case from its file or from a record; InputError also where there is no such file."""
    try:
        return from_record(path.read_bytes()) if is_record(path) else from_json(path.read_bytes())
    except OSError as error:
        raise InputError(Fault("case file", str(path), "", "a file that can be read", error.strerror or str(error),
                               "check the path")) from error


COMMANDS = (
    Command("reduce", "reduce logs of readings, or the readings typed into the case, to one quality",
            reduce_arguments, lambda options, console: reduce_command(read_case(options.case), options, console)),
    Command("runsheet", "write the run sheet of a case, to print", runsheet_arguments,
            lambda options, console: runsheet_command(read_case(options.case), options, console)),
    Command("record", "write the record of a test, to sign and to keep", record_arguments,
            lambda options, console: record_command(read_case(options.case), options, console)),
    Command("quality", "what one reading, or an expected wetness, says (also: assess)", _quality_arguments, _quality),
    Command("rehearse", "play a test on a simulated rig with hidden faults; write its log, or a link to practise with",
            rehearse_arguments, lambda options, console: rehearse_command(read_case(options.case), options, console)),
)
_ALIASES = {"quality": ["assess"]}

_EPILOG = """exit status:
  0  the question has its answer
  1  it has none yet; the reasons are on the error stream
  2  the command, the case or a log cannot be used; the fault is on the error stream

examples:
  python -m engine quality case.json
  python -m engine reduce run1.csv run2.csv --case case.json --json result.json
  python -m engine reduce logs/ --case case.json --csv runs.csv --rows rows.csv
  python -m engine reduce run1.csv --case case.json --window 20 50 --reason "load steady, by the control room"
  python -m engine rehearse case.json --fault "wet lagging" --seed 7 --log practice.csv
  python -m engine runsheet case.json --out run-sheet.html --paper A4
  python -m engine record case.json --out record.zip run1.csv run2.csv

A record stands for its case, and for the logs in it, so that it can be retraced:
  python -m engine record record.html --out again.html

A result says that a number could be measured. It is never permission to open a valve."""


def parser() -> argparse.ArgumentParser:
    """The whole command line."""
    whole = argparse.ArgumentParser(prog="python -m engine", epilog=_EPILOG, allow_abbrev=False,
                                    description="Quality of wet line steam by a throttling calorimeter.",
                                    formatter_class=argparse.RawDescriptionHelpFormatter)
    whole.add_argument("--version", action="version", version=__version__)
    parts = whole.add_subparsers(dest="command", required=True, metavar="COMMAND")
    for command in COMMANDS:
        part = parts.add_parser(command.name, help=command.help, description=f"{command.help[0].upper()}"
                                f"{command.help[1:]}.", aliases=_ALIASES.get(command.name, []), allow_abbrev=False,
                                epilog="exit status and examples: python -m engine --help")
        command.arguments(part)
        part.set_defaults(run=command.run)
    return whole


def _parsed(arguments: Sequence[str]) -> argparse.Namespace:
    """The options; logs may stand before, between and after them."""
    whole = parser()
    options, more = whole.parse_known_args(arguments)
    unknown = [word for word in more if word.startswith("-")] if hasattr(options, "logs") else more
    if unknown:
        whole.error(f"unrecognized arguments: {' '.join(unknown)}")
    if more:
        options.logs = [*options.logs, *map(Path, more)]
    return options


def main(arguments: Sequence[str], out: TextIO | None = None, err: TextIO | None = None) -> int:
    """Run one command; ``out`` and ``err`` are the terminal's streams unless given. Returns the exit status."""
    console = Console(sys.stdout if out is None else out, sys.stderr if err is None else err)
    try:
        options = _parsed(arguments)
    except SystemExit as stopped:  # argparse has said why
        return int(stopped.code or 0)
    try:
        return options.run(options, console)
    except InputError as error:
        console.warn(str(error))
        return UNUSABLE
    except BrokenPipeError:  # the reader of a pipe has seen enough
        return ANSWERED
