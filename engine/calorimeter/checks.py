"""The door of the throttling functions: one table of limits, a status per element, one refusal."""

from __future__ import annotations

from collections.abc import Callable
from enum import IntEnum
from functools import reduce
from typing import NamedTuple

import numpy as np

from engine.calorimeter.status import Status
from engine.steam import P_SAT_MAX, P_TRIPLE, T_MAX
from engine.steam.arrays import at_the_door, in_blocks, refuse_outside
from engine.steam.errors import Fault, InputError
from engine.steam.saturation import p_in_range

T_LEAST = 273.15  # K: colder readings are no steam readings

Named = dict[str, np.ndarray]


class Limit(NamedTuple):
    """``inside`` sees all the inputs, so that one may be compared with another; NaN must fail it."""

    inside: Callable[[Named], np.ndarray]
    allowed: str
    why: str = ""
    hint: str = ""
    harmless: float = 0.0  # stands in for an unusable value while the rest of an array is evaluated


def _between(name: str, low: float, high: float) -> Callable[[Named], np.ndarray]:
    return lambda a: (a[name] >= low) & (a[name] <= high)


_PRESSURES = f"{P_TRIPLE:g} Pa to {P_SAT_MAX / 1e6:.5g} MPa absolute"
_SPEED = "the energy balance needs it"

LIMITS: dict[str, Limit] = {
    "p_line": Limit(lambda a: p_in_range(a["p_line"]), _PRESSURES, "the saturation properties used here end there",
                    "check the unit, and gauge or absolute", 1e6),
    "p_exhaust": Limit(lambda a: p_in_range(a["p_exhaust"]) & (a["p_exhaust"] < a["p_line"]),
                       f"{_PRESSURES}, and less than the line pressure",
                       "steam only flows and expands towards a lower pressure",
                       "check the unit, and that both pressures are meant absolute", 1e5),
    "T_exhaust": Limit(_between("T_exhaust", T_LEAST, T_MAX), f"{T_LEAST} to {T_MAX} K",
                       "the steam equations hold there", "check the unit: °C or °F", 400.0),
    "x": Limit(_between("x", 0.0, 1.0), "0 to 1", "it is the share of vapour in the mass",
               "give a fraction, not a percentage", 1.0),
    "h_line": Limit(_between("h_line", 0.0, 4.2e6), "0 to 4200 kJ/kg", "wet and superheated steam lie there",
                    "check the unit", 2.7e6),
    "heat_loss": Limit(_between("heat_loss", -1e7, 1e7), "a loss within ±10 MJ/kg", _SPEED,
                       "give it per kg of sample; negative where heat is gained"),
    "line_velocity": Limit(_between("line_velocity", 0.0, 1e4), "0 to 10 000 m/s", _SPEED),
    "exhaust_velocity": Limit(_between("exhaust_velocity", 0.0, 1e4), "0 to 10 000 m/s", _SPEED),
    "recovery": Limit(_between("recovery", 0.0, 1.0), "0 to 1",
                      "a probe takes up between none and all of the kinetic energy"),
    "x_low": Limit(lambda a: (a["x_low"] >= 0.0) & (a["x_low"] <= a["x_high"]), "0 to the highest quality expected",
                   "it is the wet end of the range", "give fractions, the lower one first", 1.0),
    "x_high": Limit(_between("x_high", 0.0, 1.0), "0 to 1", "it is the share of vapour in the mass",
                    "give a fraction, not a percentage", 1.0),
    "U_thermometer": Limit(_between("U_thermometer", 0.0, 100.0), "0 to 100 K",
                           "it takes that much from the margin", "give the expanded uncertainty in kelvin"),
    "comfortable_superheat": Limit(lambda a: (a["comfortable_superheat"] >= a["least_superheat"])
                                   & (a["comfortable_superheat"] <= 500.0), "the least superheat to 500 K",
                                   "a margin between the two is thin", "give it in kelvin", 500.0),
    "least_superheat": Limit(_between("least_superheat", 0.0, 500.0), "0 to 500 K",
                             "it is a difference above saturation", "give it in kelvin"),
}


def refuse(inputs: Named) -> None:
    """Raise InputError for every element outside its limits, all inputs at once."""
    faults = []
    for name, values in inputs.items():
        limit = LIMITS[name]
        faults += refuse_outside(name, values, limit.inside(inputs), limit.allowed, why=limit.why, hint=limit.hint)
    if faults:
        raise InputError(*faults)


def door(**inputs) -> tuple[Named, bool]:
    """Named arrays of one shape, and whether the call was scalar."""
    arrays, scalar = at_the_door(**inputs)
    return dict(zip(inputs, arrays, strict=True)), scalar


def with_status(kernel: Callable[..., tuple], outputs: int, verdict: type[IntEnum] = Status, /, **inputs):
    """Run ``kernel(a, usable, missing)`` over the inputs in blocks; its last output is the status.

    Unusable elements reach the kernel with harmless values. Arrays come back with an int8 status
    beside them; a scalar call gives floats and a Status (or another ``verdict``, whose OUT_OF_RANGE and
    MISSING are those of Status), or raises InputError.
    """
    named, scalar = door(**inputs)
    alike = {name for name, v in named.items() if not any(v.strides)}  # one value for all elements: looked at once

    def block(*values):
        a = dict(zip(named, values, strict=True))
        looked_at = {name: v[:1] if name in alike else v for name, v in a.items()}
        usable = reduce(np.logical_and, (LIMITS[name].inside(looked_at) for name in a))
        missing = reduce(np.logical_or, map(np.isnan, looked_at.values()))
        usable, missing = (np.broadcast_to(mask, values[0].shape) for mask in (usable, missing))
        if not usable.all():
            a = {name: np.where(usable, v, LIMITS[name].harmless) for name, v in a.items()}
        return kernel(a, usable, missing)

    *values, status = in_blocks(block, outputs, *named.values())
    if not scalar:
        return values, status.astype(np.int8)
    if int(status) >= Status.OUT_OF_RANGE:
        refuse(named)
        raise InputError(Fault("energy balance", "neither wet nor superheated steam", "", "an enthalpy steam can have",
                               "each input is possible, but not all of them together",
                               "check the temperature, the heat loss and the velocities", "h"))
    return [float(v) for v in values], verdict(int(status))
