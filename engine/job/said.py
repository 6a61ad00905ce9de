"""Sentences with numbers in them: the words are ours, the numbers the engine's, the units the reader's."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

from engine.job.assessment.methods_said import power
from engine.job.rig.effects import Fact, told
from engine.job.rig.tables import points
from engine.steam.units import UnitSystem, from_si

_BAROMETER = {"SI": "kPa", "US": "inHg"}

# kinds of numbers that no unit system has a place for
_SPECIAL: dict[str, Callable[[float, UnitSystem], str]] = {
    "points": lambda value, units: points(value),
    "signed points": lambda value, units: points(value, signed=True),
    "percent": lambda value, units: f"{100 * value:.3g} %",
    "wetness": lambda value, units: f"{100 * value:.2f} %",
    "count": lambda value, units: f"{value:.0f}",
    "electric power": lambda value, units: power(value),
    "barometer": lambda value, units: f"{from_si(value, _BAROMETER[units.name], 'pressure'):.2f} "
                                      f"{_BAROMETER[units.name]}",
    "height": lambda value, units: _height(value, units),
    "dimension": lambda value, units: units.text(value, "length", {"SI": 0, "US": 2}[units.name]),
    "bore": lambda value, units: units.text(value, "length", {"SI": 2, "US": 4}[units.name]),
    "seconds": lambda value, units: f"{value:.0f} s",
    "interval": lambda value, units: f"{value / 60:.3g} min",
    "heat": lambda value, units: f"{value / 1e3:.1f} kW" if units.name == "SI" else
                                 f"{round(from_si(value, 'Btu/h', 'power'), -2):.0f} Btu/h",
}


class Said(NamedTuple):
    """A sentence with places for ``facts``: (SI value, kind of unit, decimals where others than usual).

    >>> from engine.steam.units import SI, US
    >>> wait = Said("Wait {0}, until {1}.", ((1800.0, "time", 0), (394.25, "temperature")))
    >>> wait.text(SI), wait.text(US)
    ('Wait 30 min, until 121.1 °C.', 'Wait 30 min, until 250.0 °F.')
    """

    sentence: str
    facts: tuple[Fact, ...] = ()

    def text(self, units: UnitSystem) -> str:
        """The sentence for a reader who uses ``units``."""
        return self.sentence.format(*(figure(fact, units) for fact in self.facts))


def figure(fact: Fact, units: UnitSystem) -> str:
    """One number with its unit."""
    value, kind, *_ = fact
    return _SPECIAL[kind](value, units) if kind in _SPECIAL else told(fact, units)


def _height(value: float, units: UnitSystem) -> str:
    unit = {"SI": "m", "US": "ft"}[units.name]
    return f"{from_si(value, unit, 'length'):.3g} {unit}"
