"""The run sheet: the procedure for the open case, made from its own numbers, and what of it was done."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Row
from engine.job.reach.said import said as reach_said
from engine.job.runsheet.gauges import Deviation, Gauge, Mark, deviations_of, gauges_of, marks_of
from engine.job.runsheet.plan import Plan, plan_of
from engine.job.runsheet.steps import Section, Step, sections_of
from engine.steam.errors import Fault, InputError
from engine.steam.units import UnitSystem


@dataclass(frozen=True)
class Tick:
    """A step done: when and by whom, as written."""

    time: str
    initials: str
    remark: str = ""


@dataclass(frozen=True)
class RunSheet:
    """The procedure for one case.

    case        the open case, with the steps ticked in it
    plan        the numbers behind every sentence
    sections    the steps in the order in which they are done
    gauges      what each must show
    marks       the scale of the deciding thermometer
    deviations  what else may be seen, what it means, what to do
    ticks       by key of the step; also those of steps that this sheet does not have
    """

    case: Case
    plan: Plan
    sections: tuple[Section, ...]
    gauges: tuple[Gauge, ...]
    marks: tuple[Mark, ...]
    deviations: tuple[Deviation, ...]
    ticks: Mapping[str, Tick]

    @property
    def steps(self) -> tuple[Step, ...]:
        return tuple(step for section in self.sections for step in section.steps)

    @property
    def unticked(self) -> tuple[Step, ...]:
        """Steps that nobody ticked yet."""
        return tuple(step for step in self.steps if step.key not in self.ticks)

    @property
    def held(self) -> tuple[Step, ...]:
        """Hold points still open: with any of them nothing else starts."""
        return tuple(step for section in self.sections if section.hold for step in section.steps
                     if step.key not in self.ticks)

    @property
    def strange(self) -> tuple[str, ...]:
        """Keys of ticks for steps that the sheet of this case does not have."""
        known = {step.key for step in self.steps}
        return tuple(key for key in self.ticks if key not in known)

    def step(self, key: str) -> Step:
        """A step by its key. KeyError for one that this sheet does not have."""
        return {step.key: step for step in self.steps}[key]


def run_sheet(case: Case, plan: Plan | None = None) -> RunSheet:
    """The run sheet of a case. Raises InputError, with every fault at once, where an entry cannot be used.

    ``plan`` saves working it out again where only ticks and readings have changed.

    >>> from engine.job.case.demo import DEMO
    >>> from engine.steam.units import SI
    >>> sheet = run_sheet(DEMO)
    >>> sheet.step("warm.wet").said.text(SI)
    'At first the metal condenses the steam: the thermometer stays at 100.2 °C for about 46 s.'
    >>> len(sheet.held), len(sheet.unticked) == len(sheet.steps)
    (9, True)
    """
    plan = plan or plan_of(case)
    return RunSheet(case, plan, sections_of(plan), gauges_of(plan), marks_of(plan), deviations_of(plan), ticks_of(case))


def ticks_of(case: Case) -> dict[str, Tick]:
    """The steps ticked in a case; of a step ticked twice the later row counts."""
    return {row["step"]: Tick(row["time"], row["initials"], row["remark"]) for row in case["ticks"]}


def tick(case: Case, key: str, time: str, initials: str, remark: str = "") -> Case:
    """The case with a step ticked, in place of an earlier tick of it.

    Raises InputError without initials: a tick that nobody answers for says nothing.

    >>> from engine.job.case.demo import DEMO
    >>> ticks_of(tick(DEMO, "hold.permit", "2025-03-04 08:15", "AB"))
    {'hold.permit': Tick(time='2025-03-04 08:15', initials='AB', remark='')}
    """
    if not initials.strip():
        raise InputError(Fault("initials", "nothing", "", "the initials of whoever did it",
                               hint="type them above the steps", name="ticks"))
    row = FIELDS["ticks"].row(step=key, time=time.strip(), initials=initials.strip(), remark=remark.strip())
    others = _without(case, key)
    if len(others) >= FIELDS["ticks"].most:
        raise InputError(Fault("steps ticked", len(others) + 1, "", f"at most {FIELDS['ticks'].most}", name="ticks"))
    return case.with_(ticks=(*others, row))


def untick(case: Case, key: str) -> Case:
    """The case without a tick of this step."""
    return case.with_(ticks=_without(case, key))


def _without(case: Case, key: str) -> tuple[Row, ...]:
    return tuple(row for row in case["ticks"] if row["step"] != key)


def headline(sheet: RunSheet, units: UnitSystem) -> str:
    """What the sheet is for, and whether it can lead to a quality at all."""
    if not sheet.plan.reach:
        return sheet.plan.reach.trouble
    return reach_said(sheet.plan.reach.value, units).headline


def notices(sheet: RunSheet, units: UnitSystem) -> tuple[str, ...]:
    """What has to be known before the first step: what cannot be read, what is not stated."""
    plan, lines = sheet.plan, []
    if not plan.readable:
        lines.append("As planned the wetness expected cannot be read. Change the plan first: this sheet would lead to "
                     "no number.")
    found = plan.forecast.value
    if found is not None and found.budget is not None and not found.missing:
        lines.append(f"A quality by this rig will be sure to ± {100 * found.instruments.U:.2f} %pt by its instruments, "
                     f"± {100 * found.budget.U:.2f} %pt with the sampling.")
    if open_points := [*(found.missing if found is not None else ()), *_undecided(plan)]:
        lines.append("Not stated yet, and no result without it: " + ", ".join(open_points) + ".")
    si = plan.a.si
    if not plan.electric and (plan.sets - 1) * si["read_every"] < si["steady_window"]:
        lines.append(f"Runs of {plan.sets} sets are too short: from the first to the last of them less than "
                     f"{units.text(si['steady_window'], 'time')} pass, so none can be called settled. Plan fewer runs, "
                     "or a longer test.")
    if plan.rig and not plan.electric:
        lines += plan.rig.value.notes
    return tuple(lines)


def _undecided(plan: Plan) -> tuple[str, ...]:
    return ("how the heat loss is accounted for",) if plan.a.heat_loss_undecided else ()
