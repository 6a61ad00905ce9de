"""The terms of the energy balance that a case brings: heat loss and velocities, each with its reason."""

from __future__ import annotations

from dataclasses import dataclass

from engine.calorimeter import heat_loss_per_kg, velocity
from engine.job.case import Case, Resolved
from engine.job.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL
from engine.steam import saturated, saturation_temperature, vapour
from engine.steam.errors import Fault, InputError

_NEEDED = {
    BY_CONDUCTANCE: (("sample_flow", "Sample flow"), ("conductance", "Heat loss conductance UA"),
                     ("T_ambient", "Ambient temperature")),
    BY_KG: (("heat_loss", "Heat loss per kg of sample"),),
    BY_NORMAL: (("T_normal", "Normal reading, dry steam"),),
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
    faults = [Fault(label, "nothing", "", f"a value, since the heat loss is taken by {case['heat_loss_method']}",
                    hint="enter it, or choose another way to account for the heat loss", name=name)
              for name, label in _NEEDED.get(case["heat_loss_method"], ()) if case[name] is None]
    if faults:
        raise InputError(*faults)


def terms_at(case: Case, si: Resolved, T_exhaust: float) -> Terms:
    """The terms for an exhaust at ``T_exhaust`` [K]; below saturation they are taken at saturation."""
    p = si["p_exhaust"]
    T = max(T_exhaust, saturation_temperature(p))
    c2 = 0.0
    if si["sample_flow"] and si["exhaust_bore"]:
        c2 = velocity(si["sample_flow"], si["exhaust_bore"], vapour(p, T).v)
    c1 = si["line_velocity"] or 0.0
    recovery = si["recovery"] if si["recovery"] is not None else 1.0
    return Terms(_heat_loss(case, si, T, c1, c2, recovery), c1, c2, recovery)


def _heat_loss(case: Case, si: Resolved, T: float, c1: float, c2: float, recovery: float) -> float:
    method = case["heat_loss_method"]
    if method == BY_KG:
        return si["heat_loss"]
    if method == BY_CONDUCTANCE:
        return heat_loss_per_kg(si["conductance"], T, si["T_ambient"], si["sample_flow"])
    if method == BY_NORMAL:
        # on dry steam the balance must give h_g of the line: what is missing was lost
        return (saturated(si["p_line"]).h_g + 0.5 * c1 * c1 - 0.5 * (1.0 - recovery) * c2 * c2
                - vapour(si["p_exhaust"], si["T_normal"]).h)
    return 0.0
