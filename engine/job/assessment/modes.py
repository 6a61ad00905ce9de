"""What the chosen method needs: entries that are missing, or that do not go together, are refused in words."""

from __future__ import annotations

from collections.abc import Iterator

from engine.calorimeter import MassBasis
from engine.job.case import Case, Resolved, as_entered, describe
from engine.job.case.fields import FIELDS
from engine.job.case.fields_modes import BY_VOLUME, ELECTRIC, NOT_STATED, SEPARATING, THROTTLING
from engine.job.case.fields_path import EXPECTED
from engine.steam.errors import Fault, InputError


def check_mode(case: Case, si: Resolved) -> None:
    """InputError for every entry that the chosen method lacks or cannot use, all at once."""
    if case["mode"] == THROTTLING:
        return
    faults = [Fault(FIELDS[name].label, "nothing", "", f"a value, since the method is {case['mode']}",
                    hint="enter it, or choose another method", name=name)
              for name in _needed(case) if case[name] is None]
    if case["mode"] == SEPARATING:
        faults += [*_basis(case), *_between(case, si, "p_separator", above_exhaust=True)]
    else:
        faults += [*_between(case, si, "p_heater"), *_power(case, si)]
    if faults:
        raise InputError(*faults)


def _needed(case: Case) -> Iterator[str]:
    reading = case["question"] != EXPECTED
    if case["mode"] == ELECTRIC:
        yield "sample_flow"
        if reading:
            yield from ("T_heater", "power")
    elif reading:
        yield from ("water_volume", "T_water") if case["water_by"] == BY_VOLUME else ("water_mass",)
        yield "weighed_mass"


def _basis(case: Case) -> Iterator[Fault]:
    if case["question"] != EXPECTED and case["weighed_basis"] == NOT_STATED:
        yield Fault(FIELDS["weighed_basis"].label, NOT_STATED, "", " or ".join(f"“{basis}”" for basis in MassBasis),
                    "books differ in it, and it moves the quality by several tenths of a %pt",
                    "ask who weighed it", "weighed_basis")


def _between(case: Case, si: Resolved, name: str, *, above_exhaust: bool = False) -> Iterator[Fault]:
    p, entry = si[name], case[name]
    if p is None:
        return

    def fault(words: str, limit: float) -> Fault:
        told = describe(as_entered(FIELDS[name], limit, entry, si.p_barometer))
        return Fault(FIELDS[name].label, entry.value, f"{entry.unit} {entry.basis}", f"{words}, {told}",
                     "steam only flows and expands towards a lower pressure",
                     "check the unit of both, and gauge or absolute", name)

    if not p <= si["p_line"] * (1 + 1e-9):
        yield fault("at most the line pressure", si["p_line"])
    if above_exhaust and not p > si["p_exhaust"]:
        yield fault("more than the exhaust pressure", si["p_exhaust"])


def _power(case: Case, si: Resolved) -> Iterator[Fault]:
    if si["power"] is not None and not (si["power_loss"] or 0.0) < si["power"]:
        entry = case["power_loss"]
        yield Fault(FIELDS["power_loss"].label, entry.value, entry.unit,
                    f"less than the power, {describe(case['power'])}", name="power_loss")
