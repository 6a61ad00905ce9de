"""The terms of the energy balance that a case brings: heat loss and velocities, each with its reason."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from engine.calorimeter import fit_two_flows, heat_loss_per_kg, velocity
from engine.job.case import Case, Resolved, describe
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS
from engine.steam import saturated, saturation_temperature, vapour
from engine.steam.errors import Fault, InputError

_SECOND = "Temperature at the second flow"
HOW = {BY_CONDUCTANCE: "by conductance", BY_KG: "per kg of sample", BY_NORMAL: "by a normal reading",
       BY_TWO_FLOWS: "by two flows"}
_NEEDED = {
    BY_CONDUCTANCE: (("sample_flow", "Sample flow"), ("conductance", "Heat loss conductance UA"),
                     ("T_ambient", "Ambient temperature")),
    BY_KG: (("heat_loss", "Heat loss per kg of sample"),),
    BY_NORMAL: (("T_normal", "Normal reading, dry steam"),),
    BY_TWO_FLOWS: (("sample_flow", "Sample flow"), ("second_flow", "Second sample flow"),
                   ("T_second", _SECOND), ("T_ambient", "Ambient temperature")),
}


@dataclass(frozen=True)
class Terms:
    """Heat loss [J/kg] and velocities [m/s] at one exhaust state; 0 where nothing was given."""

    heat_loss: float
    line_velocity: float
    exhaust_velocity: float
    recovery: float

    def arguments(self) -> dict[str, float]:
        """As keyword arguments of ``quality`` and its inverse."""
        return {"heat_loss": self.heat_loss, "line_velocity": self.line_velocity,
                "exhaust_velocity": self.exhaust_velocity, "recovery": self.recovery}


def check_method(case: Case) -> None:
    """InputError where the chosen heat-loss method lacks an entry."""
    method = case["heat_loss_method"]
    faults = [Fault(label, "nothing", "", f"a value, since the heat loss is taken {HOW[method]}",
                    hint="enter it, or choose another way to account for the heat loss", name=name)
              for name, label in _NEEDED.get(method, ()) if case[name] is None]
    if faults:
        raise InputError(*faults)


def terms_at(case: Case, si: Resolved, T_exhaust: float) -> Terms:
    """The terms for an exhaust at ``T_exhaust`` [K]; below saturation they are taken at saturation."""
    p = si["p_exhaust"]
    T = max(T_exhaust, saturation_temperature(p))
    c2 = 0.0
    if si["sample_flow"] and si["exhaust_bore"]:
        steam = vapour(p, T)
        c2 = velocity(si["sample_flow"], si["exhaust_bore"], steam.v)
        refuse_supersonic(case, "exhaust_bore", c2, steam.sound_speed)
    c1 = si["line_velocity"] or 0.0
    recovery = si["recovery"] if si["recovery"] is not None else 1.0
    streams = Terms(0.0, c1, c2, recovery)
    return replace(streams, heat_loss=heat_loss_by(case["heat_loss_method"], case, si, T, streams))


def refuse_supersonic(case: Case, bore: str, velocity: float, sound_speed: float) -> None:
    """InputError where the sample flow would have to be faster than sound in one of its bores."""
    if velocity <= sound_speed:
        return
    entry = case[bore]
    least = describe(replace(entry, value=float(f"{entry.value * (velocity / sound_speed) ** 0.5:.3g}")))
    raise InputError(Fault(FIELDS[bore].label, entry.value, entry.unit,
                           f"about {least} at least for a sample flow of {describe(case['sample_flow'])}",
                           "in a smaller bore the steam would have to be faster than sound",
                           "check the sample flow and the bore, and their units", bore))


def heat_loss_by(method: str, case: Case, si: Resolved, T: float, streams: Terms) -> float:
    """Heat loss [J/kg] by one of the methods for an exhaust at ``T`` [K]; 0 where none is meant.

    ``streams`` brings the velocities, which a normal reading has in it. Raises InputError where the
    entries of the method contradict each other.
    """
    if method == BY_KG:
        return si["heat_loss"]
    if method == BY_CONDUCTANCE:
        return heat_loss_per_kg(si["conductance"], T, si["T_ambient"], si["sample_flow"])
    if method == BY_TWO_FLOWS:
        return heat_loss_per_kg(two_flow_conductance(case, si), T, si["T_ambient"], si["sample_flow"])
    if method == BY_NORMAL:
        # on dry steam the balance must give h_g of the line: what is missing was lost
        kinetic = 0.5 * streams.line_velocity**2 - 0.5 * (1.0 - streams.recovery) * streams.exhaust_velocity**2
        return saturated(si["p_line"]).h_g + kinetic - vapour(si["p_exhaust"], si["T_normal"]).h
    return 0.0


def two_flow_conductance(case: Case, si: Resolved) -> float:
    """Conductance [W/K] from the reading and a second one of the same steam at another sample flow."""
    T = np.array([si["T_exhaust"], si["T_second"]])
    p = np.array([si["p_exhaust"], si["p_exhaust"] if si["p_second"] is None else si["p_second"]])
    wet = [Fault(label, case[name].value, case[name].unit, "a temperature above saturation at its exhaust pressure",
                 "wet exhaust steam does not show what heat it lost", "account for the heat loss in another way", name)
           for name, label, superheated in zip(("T_exhaust", "T_second"), ("Measured temperature", _SECOND),
                                               saturation_temperature(p) < T, strict=True) if not superheated]
    if wet:
        raise InputError(*wet)
    fit = fit_two_flows(np.array([si["sample_flow"], si["second_flow"]]), p, T, T, si["T_ambient"])
    if not fit.conductance >= 0.0:
        entry = case["T_second"]
        raise InputError(Fault(_SECOND, entry.value, entry.unit,
                               "a reading by which more heat per kg is lost at the smaller flow",
                               "by these two the rig would gain heat, so something else changed between them",
                               "read the same steam twice, one right after the other; check which flow is which",
                               "T_second"))
    return fit.conductance
