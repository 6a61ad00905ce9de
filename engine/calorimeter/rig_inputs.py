"""What the rig's functions admit: one table of limits, checked for all inputs of a call at once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from engine.steam import P_SAT_MAX, P_TRIPLE
from engine.steam.arrays import at_the_door, refuse_outside
from engine.steam.errors import Fault, InputError
from engine.steam.quantities import QUANTITIES

INF = float("inf")
LEAST, MOST = 1e-15, 1e15  # SI: no size of a rig lies beyond, and what is computed from sizes within stays a number


@dataclass(frozen=True)
class Limits:
    """An interval in engine units. An open end at 0 begins with ``LEAST``, infinite ends reach to ``MOST``."""

    low: float = -INF
    high: float = INF
    low_open: bool = False
    high_open: bool = False
    hint: str = ""

    def hold(self, values: np.ndarray) -> np.ndarray:
        """True where inside; NaN never is."""
        above = values > self.low if self.low_open else values >= self.low
        below = values < self.high if self.high_open else values <= self.high
        return above & below & (np.abs(values) <= MOST) & ~self.tiny(values)

    def tiny(self, values: np.ndarray) -> np.ndarray:
        """True for what is above 0 by less than a size can be, where 0 itself is refused."""
        return (values > 0) & (values < LEAST) if self.low_open and self.low == 0 else np.zeros(np.shape(values), bool)

    def text(self, unit: str) -> str:
        """Worded to follow "needs"."""
        tail = "" if unit == "1" else f" {unit}"
        low = "" if self.low == -INF else f"{'more than' if self.low_open else 'at least'} {self.low:g}{tail}"
        high = "" if self.high == INF else f"{'less than' if self.high_open else 'at most'} {self.high:g}{tail}"
        return " and ".join(part for part in (low, high) if part) or "a finite number"


_POSITIVE = Limits(0.0, low_open=True)
_NOT_NEGATIVE = Limits(0.0)
_FRACTION = Limits(0.0, 1.0)
_PART = Limits(0.0, 1.0, high_open=True, hint="a part of one, not a percentage")

_BY_KIND: dict[str, Limits] = {
    "temperature": Limits(200.0, 1073.15, hint="temperatures inside are in kelvin"),
    "pressure": Limits(0.0, 1e8, low_open=True, hint="pressures inside are absolute and in pascal"),
    "difference": Limits(),
    "fraction": _FRACTION,
    "enthalpy": Limits(),
    "rate": Limits(),
    "power": Limits(),
}

_LINE_PRESSURE = Limits(P_TRIPLE, P_SAT_MAX, hint="absolute pressure in pascal, not gauge")

_BY_NAME: dict[str, Limits] = {
    "p": _LINE_PRESSURE,
    "p_line": _LINE_PRESSURE,
    "p_exhaust": _LINE_PRESSURE,
    "p_separator": _LINE_PRESSURE,
    "p_heater": _LINE_PRESSURE,
    "p_drain": _LINE_PRESSURE,
    "p_throat": _LINE_PRESSURE,
    "p_discharge": _LINE_PRESSURE,
    "altitude": Limits(-2000.0, 11_000.0, hint="the standard's lowest layer; altitude in metres"),
    "p_sea_level": Limits(80e3, 110e3, hint="reports in hPa run from 870 to 1085; give pascal"),
    "leg_height": Limits(-300.0, 300.0, hint="metres, positive when the gauge is below the tapping"),
    "T_leg": Limits(273.16, 623.15, hint="the leg is filled with liquid water; give its temperature in kelvin"),
    "T_water": Limits(273.16, 373.15, hint="measure the volume of water cooled well below boiling"),
    "exposed": Limits(0.0, hint="scale degrees between the immersion mark and the end of the column"),
    "stem_coefficient": Limits(0.0, 2e-3, hint="about 1.6e-4 per kelvin for mercury in glass"),
    "emissivity": Limits(0.0, 1.0),
    "immersion": _NOT_NEGATIVE,
    "inner_diameter": Limits(0.0, hint="0 for a solid rod"),
    "length": _NOT_NEGATIVE,
    "roughness": _NOT_NEGATIVE,
    "relative_roughness": Limits(0.0, 0.1, hint="wall roughness over bore; 0 for a smooth pipe"),
    "loss_coefficient": _NOT_NEGATIVE,
    "lagging": Limits(0.0, hint="0 for a bare body"),
    "conductance": _NOT_NEGATIVE,
    "time": _NOT_NEGATIVE,
    "duration": _NOT_NEGATIVE,
    "velocity": _NOT_NEGATIVE,
    "wetness": _PART,
    "wetness_read": _PART,
    "wall_film": _PART,
    "drain_fraction": _PART,
    "water_share": _PART,
    "x_throttled": Limits(0.0, 2.0, high_open=True, hint="a fraction, not a percentage"),
    "stokes": _NOT_NEGATIVE,
    "discharge": Limits(0.0, 1.5, low_open=True, hint="0.60 for a sharp edge, up to 0.97 for a rounded inlet"),
    "recovery": Limits(0.0, 1.0),
    "water_mass": Limits(0.0, hint="0 when nothing was drained"),
    "water_volume": _NOT_NEGATIVE,
    "superheat": Limits(0.0, 500.0, hint="a difference above saturation, in kelvin"),
    "least_superheat": Limits(0.0, 500.0, hint="a difference above saturation, in kelvin"),
    "power": _POSITIVE,
    "power_loss": _NOT_NEGATIVE,
    "mach": _NOT_NEGATIVE,
}


def limits_of(name: str) -> Limits:
    """The limits of a quantity: its own, else those of its kind, else "more than 0"."""
    return _BY_NAME.get(name) or _BY_KIND.get(QUANTITIES[name].kind, _POSITIVE)


def faults_of(name: str, values: np.ndarray) -> list[Fault]:
    """Faults for the elements of ``values`` outside the limits of quantity ``name``."""
    limits = limits_of(name)
    text = limits.text(QUANTITIES[name].unit)
    if (limits.tiny(values) | (np.isfinite(values) & (np.abs(values) > MOST))).any():
        text += f", of a size from {LEAST:g} to {MOST:g}"
    return refuse_outside(name, values, limits.hold(values), text, hint=limits.hint)


def admit(**named) -> tuple[list[np.ndarray], bool]:
    """Arrays of one shape and whether all were scalars; InputError names every bad input at once.

    Keyword names are names of the quantity table, values numbers or arrays that broadcast.

    >>> admit(film=0.0, immersion=-0.01)
    Traceback (most recent call last):
    engine.steam.errors.InputError: film coefficient: got 0 W/(m² K), needs more than 0 W/(m² K)
    immersion length: got -0.01 m, needs at least 0 m
    """
    arrays, scalar = at_the_door(**named)
    faults = [f for name, values in zip(named, arrays, strict=True) for f in faults_of(name, values)]
    if faults:
        raise InputError(*faults)
    return arrays, scalar


def require(name: str, values: np.ndarray, inside: np.ndarray, limit: str, *, why: str = "", hint: str = "") -> None:
    """InputError for the elements of ``values`` that are not ``inside``: a limit set by the other inputs."""
    faults = refuse_outside(name, values, inside, limit, why=why, hint=hint)
    if faults:
        raise InputError(*faults)


def require_error(size: np.ndarray) -> None:
    """InputError where the size of an error [K] is none, or so small that nothing can be compared with it."""
    require("temperature_error", size, size >= 1e-12, "1e-12 K or more",
            hint="give the size of the error, without sign")


def gather(*checks: Callable[[], object]) -> None:
    """Run all the checks and raise one InputError for all they find, each quantity named once."""
    faults: list[Fault] = []
    for check in checks:
        try:
            check()
        except InputError as error:
            told = {fault.name for fault in faults}
            faults += [fault for fault in error.faults if fault.name not in told]
    if faults:
        raise InputError(*faults)


def choose(what: str, value, options):
    """``value`` as a member of the enumeration ``options``; a missing or unknown choice is refused."""
    try:
        return options(value)
    except ValueError:
        names = ", ".join(f"'{o.value}'" for o in options)
        raise InputError(Fault(what, "nothing" if value is None else repr(value), "", f"one of {names}",
                               "it changes the result and cannot be guessed", name=what)) from None
