"""What a hidden fault costs where nobody notices it: the same rig reduced with the fault and without, no noise."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from engine.calorimeter import Status
from engine.job.case import GAUGE
from engine.job.rehearsal.faults import rig_of
from engine.job.rehearsal.model import Rig
from engine.job.rehearsal.readings import basis_of, channels_of
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario
from engine.job.rehearsal.simulation import by_the_sheet, simulate
from engine.job.result.corrections import Shown, balance_without, corrected, reduced
from engine.steam import saturated, saturation_temperature

SETTLED = np.arange(6600.0, 10200.0 + 1.0, 60.0)  # s from the start: an hour of readings on a warm rig


@dataclass(frozen=True)
class Cost:
    """What one fault does to the answer of someone who does not notice it.

    size        what the quality is wrong by, a part of 1; None where there is no quality
    x           the quality that is read; above 1 for a line taken for wet; the bound where the exhaust is wet;
                None where the readings contradict each other
    superheat   what is left at the exhaust [K], and ``sound`` what there is without the fault
    """

    fault: HiddenFault
    size: float | None
    x: float | None
    superheat: float
    sound: float


def cost_of(scenario: Scenario, fault: HiddenFault) -> Cost:
    """The cost of one of the faults in the rig of a scenario, all else as it should be.

    >>> from engine.job.case.demo import DEMO
    >>> cost = cost_of(Scenario(DEMO, {"wet lagging"}, seed=1), HiddenFault.WET_LAGGING)
    >>> round(100 * cost.size, 1)  # %pt
    -0.3
    """
    bare = replace(scenario, faults=frozenset(), load=Load.STEADY, ideal=True)
    with_it = replace(bare, faults=frozenset({fault}))
    sound, hidden = rig_of(bare), rig_of(with_it)
    base, found = _unnoticed(sound, None), _unnoticed(hidden, fault)
    if fault is HiddenFault.SUPERHEATED_LINE:
        size = found.x - 1.0
    elif found.x is None or found.wet or base.wet:
        size = None
    else:
        size = found.x - hidden.x - (base.x - sound.x)
    return Cost(fault, size, found.x, found.superheat, base.superheat)


def costs(scenario: Scenario) -> tuple[Cost, ...]:
    """The costs of all its faults, in their own order."""
    return tuple(cost_of(scenario, fault) for fault in HiddenFault if scenario.has(fault))


@dataclass(frozen=True)
class _Unnoticed:
    x: float | None
    superheat: float
    wet: bool


def _unnoticed(rig: Rig, fault: HiddenFault | None) -> _Unnoticed:
    """The means of an hour reduced as the sheet has it; the exhaust pressure as planned where a hose is hidden."""
    course = simulate(rig, by_the_sheet(), SETTLED[-1])
    channels = channels_of(course, SETTLED, rig.sheet.p_barometer)
    case, si, basis = rig.point.case, rig.point.line, basis_of(rig)
    p_exhaust = float(channels["p_exhaust"].mean())
    if fault is HiddenFault.BACK_PRESSURE:
        p_exhaust = rig.sheet.p_exhaust - (rig.sheet.p_barometer if basis["p_exhaust"] == GAUGE else 0.0)
    shown = Shown(float(channels["p_line"].mean()), p_exhaust, float(channels["T_exhaust"].mean()),
                  rig.sheet.p_barometer, rig.sheet.sample_flow, rig.T_ambient, basis)
    true = corrected(case, si, shown, set())
    balance = balance_without(case, si, set())
    x, status = reduced(balance, si, true)
    k = course.at(SETTLED[-1])
    superheat = float(course.T_due[k] - saturation_temperature(float(course.p_exhaust[k])))
    if status[0] == Status.NOT_SUPERHEATED:
        return _Unnoticed(_bound(true), superheat, True)
    return _Unnoticed(None if np.isnan(x[0]) else float(x[0]), superheat, False)


def _bound(true) -> float:
    """The quality below which the steam is, where the exhaust is wet."""
    line, exhaust = saturated(float(true.p_line)), saturated(float(true.p_exhaust))
    return (exhaust.h_g - line.h_f) / (line.h_g - line.h_f)
