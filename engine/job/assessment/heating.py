"""With a heater: the sample is dried and superheated at constant pressure by a measured power."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter import (
    Path,
    Status,
    electric_quality,
    heater_reading,
    least_electric_quality,
    power_needed,
    wet_steam,
)
from engine.job.case import Case, Resolved
from engine.job.case.fields_path import EXPECTED
from engine.steam import saturated, state_ph

POINTS = 24  # along the heating path


@dataclass(frozen=True)
class Heating:
    """What the heater does to the sample, SI.

    ``p`` after the heater, ``per_kg`` the heat that stays in a kilogram of sample; ``power_least`` is what the
    least readable superheat takes, None where the quality cannot be told; ``chosen`` is false where no power
    was entered and the one shown is what the comfortable superheat takes.
    """

    p: float
    power: float
    power_loss: float
    per_kg: float
    power_least: float | None
    chosen: bool


@dataclass(frozen=True)
class Heated:
    """The sample after the heater and what it says of the line; None where it cannot be told."""

    T: float
    superheat: float
    x_after: float
    x: float | None
    x_bound: float | None
    x_without_loss: float | None
    h_line: float
    line_superheat: float
    status: Status


def heat(case: Case, si: Resolved) -> tuple[Heated, Heating, float]:
    """The sample after the heater, the heater, and the least readable quality at its power."""
    p, flow, loss, least = si["p_line"], si["sample_flow"], si["power_loss"] or 0.0, si["least_superheat"]
    p3 = p if si["p_heater"] is None else min(si["p_heater"], p)
    power = si["power"] or _for_comfort(si, p3, loss)
    found = _expected(si, p3, power, loss) if case["question"] == EXPECTED else _read(si, p3, power, loss)
    told = found.x if found.x is not None else found.x_bound
    power_least = None if told is None else power_needed(p, min(told, 1.0), p3, flow, least, power_loss=loss)
    heating = Heating(p3, power, loss, (power - loss) / flow, power_least, si["power"] is not None)
    return found, heating, least_electric_quality(p, p3, power, flow, least, power_loss=loss)


def _for_comfort(si: Resolved, p3: float, loss: float) -> float:
    # a hundredth of a kelvin more, so that no rounding makes the margin thin
    needed = power_needed(si["p_line"], 1.0 - si["wetness"], p3, si["sample_flow"],
                          si["comfortable_superheat"] + 0.01, power_loss=loss)
    return max(needed, loss + 1e-3)


def _expected(si: Resolved, p3: float, power: float, loss: float) -> Heated:
    x = 1.0 - si["wetness"]
    seen = heater_reading(si["p_line"], x, p3, power, si["sample_flow"], power_loss=loss)
    return Heated(seen.T_heater, seen.superheat, seen.x_heater, x, None, None, wet_steam(si["p_line"], x).h, 0.0,
                  seen.status)


def _read(si: Resolved, p3: float, power: float, loss: float) -> Heated:
    def reduced(lost):
        return electric_quality(si["p_line"], p3, si["T_heater"], power, si["sample_flow"], power_loss=lost)

    found, bare = reduced(loss), reduced(np.zeros(1))
    x, bound, without = (None if np.isnan(v) else float(v) for v in (found.x, found.x_bound, bare.x[0]))
    line = saturated(si["p_line"])
    h = found.h_line if bound is None else line.h_f + bound * (line.h_g - line.h_f)
    return Heated(si["T_heater"], found.superheat, 1.0, x, bound, without, h, found.line_superheat, found.status)


def heating_path(p: float, h: float, heating: Heating) -> Path:
    """From the line to the heater's pressure at constant enthalpy, then heated at that pressure."""
    h_after, dry = h + heating.per_kg, saturated(heating.p).h_g
    crosses = h < dry < h_after
    column = np.linspace(h, h_after, POINTS - 1)
    column = np.sort(np.append(column, dry if crosses else 0.5 * (column[0] + column[1])))
    enthalpies, pressures = np.append(h, column), np.append(p, np.full(POINTS, heating.p))
    states = state_ph(pressures, enthalpies)
    return Path(pressures, states.T, states.x, enthalpies, states.s, states.v, np.zeros(POINTS + 1), states.status,
                heating.p if crosses else np.nan, np.nan, 0.0)
