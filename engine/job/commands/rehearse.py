"""The command ``rehearse``: a test by the book on a simulated rig, its truth, its log, or a link to practise with."""

from __future__ import annotations

import argparse
from pathlib import Path

from engine.job.case import Case
from engine.job.commands.console import ANSWERED, OPEN, Console, as_text
from engine.job.rehearsal import Finding, Rehearsal, Statement, advance, begin, state, take_readings
from engine.job.rehearsal import act as do
from engine.job.rehearsal.demo_log import demo_log
from engine.job.rehearsal.link import to_link
from engine.job.rehearsal.readings import Way, reckoned
from engine.job.rehearsal.said import cost, truth
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario, faults_named, surprise
from engine.job.rehearsal.simulation import by_the_sheet
from engine.job.rehearsal.valves import Deed
from engine.job.rehearsal.verdict import Verdict, verdict_of
from engine.job.result import Result
from engine.steam.errors import Fault, InputError
from engine.steam.units import SYSTEMS

WARM = 3600.0  # s, from the first valve to the first set
SETS = 25


def rehearse_arguments(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("case", type=Path, metavar="CASE.json", help="the rig as it should be")
    add("--fault", action="append", default=[], metavar="NAME",
        help=f"a fault to hide, more than once for several: {', '.join(HiddenFault)}")
    add("--surprise", action="store_true", help="hide a fault of the seed's own choice, or none")
    add("--seed", type=int, default=1, metavar="N", help="fixes the truth and all chance (default: 1)")
    add("--quality", type=float, metavar="X", help="the true quality of the line; without it the seed draws one from "
        "the expected range of the case")
    add("--load", choices=[str(load) for load in Load], default=str(Load.STEADY), help="what the line pressure does")
    add("--sets", type=int, default=SETS, metavar="N", help=f"sets of readings taken (default: {SETS})")
    add("--log", type=Path, metavar="OUT.csv", help="write the whole test as a log, from the cold rig on")
    add("--every", type=float, default=10.0, metavar="S", help="seconds from row to row of the log (default: 10)")
    add("--link", action="store_true",
        help="say only the word that opens this scenario in the dashboard, and nothing of what it hides")
    add("--json", type=Path, metavar="OUT", help="write truth and result as JSON, in SI; - instead of the text")
    add("--units", choices=list(SYSTEMS), default="SI", help="units of the text (default: SI)")


def rehearse_command(case: Case, options: argparse.Namespace, console: Console) -> int:
    """Play one test by the book; returns the exit status."""
    scenario = _scenario(case, options)
    if options.link:
        console.say(f"?rehearsal={to_link(begin(scenario))}")
        return ANSWERED
    if not 1 <= options.sets <= 400:
        raise InputError(Fault("--sets", options.sets, "", "1 to 400"))
    r = by_the_book(scenario, options.sets)
    result = reckoned(r, Way())
    x = result.x
    found = Statement(Finding.CANNOT) if x is None or not 0 < x <= 1 else Statement(Finding.QUALITY, x)
    verdict = verdict_of(state(r, found))
    if str(options.json) != "-":
        _say(r, result, verdict, SYSTEMS[options.units], console)
    if options.json:
        console.write(options.json, as_text(_figures(r, result, verdict)))
    if options.log:
        with console.whole_file(options.log) as half:
            demo_log(half, scenario.case, scenario.faults, scenario.seed, float(r.now), x=scenario.x,
                     load=scenario.load, every=options.every)
    for line in result.unable:
        console.warn(line)
    return ANSWERED if x is not None else OPEN


def _scenario(case: Case, options: argparse.Namespace) -> Scenario:
    if options.surprise and options.fault:
        raise InputError(Fault("--surprise", "--fault as well", "", "one of the two"))
    hidden = surprise(case, options.seed).faults if options.surprise else faults_named(options.fault)
    return Scenario(case, hidden, options.seed, options.quality, Load(options.load))


def by_the_book(scenario: Scenario, sets: int = SETS, warm: float = WARM) -> Rehearsal:
    """A rehearsal as it should go: started in order, waited for, so many sets at the interval of the case, shut down.

    >>> from engine.job.case.demo import DEMO
    >>> r = by_the_book(Scenario(DEMO, seed=1))
    >>> len(r.readings), r.valves.stop
    (25, 0.0)
    """
    r = begin(scenario)
    for time, deed in by_the_sheet():
        r = do(advance(r, time - r.now), deed)
    r = take_readings(advance(r, warm - r.now), sets, max(r.rig.point.si["read_every"], 5.0))
    return do(do(r, Deed.CLOSE_STOP), Deed.OPEN_DRAIN)


def _say(r: Rehearsal, result: Result, v: Verdict, units, console: Console) -> None:
    hidden = ", ".join(f for f in HiddenFault if r.scenario.has(f)) or "nothing"
    console.say(f"Hidden: {hidden}; seed {r.scenario.seed}.")
    console.say(truth(v).text(units))
    if result.x is None:
        console.say("By the readings there is no quality.")
    else:
        off = "" if v.finding is not Finding.QUALITY else f", {100 * (result.x - v.x):+.3f} %pt from the truth"
        console.say(f"By {len(r.readings)} sets of readings, nothing being noticed: quality {result.x:.4f}{off}; "
                    f"U of the instruments {100 * v.U:.3f} %pt{', as common practice has it' if v.U_common else ''}.")
    for c in v.costs:
        console.say(cost(c).text(units))


def _figures(r: Rehearsal, result: Result, v: Verdict) -> dict:
    return {"seed": r.scenario.seed, "hidden": [str(f) for f in HiddenFault if r.scenario.has(f)],
            "finding": str(v.finding), "x_true": v.x, "line_superheat": v.line_superheat, "superheat": v.superheat,
            "x": result.x, "U_instruments": None if result.instruments is None else result.instruments.U,
            "costs": {str(c.fault): c.size for c in v.costs}, "unable": list(result.unable)}
