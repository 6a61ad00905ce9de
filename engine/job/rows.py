"""What a row of the case table is: an entry's name, label, kind, limits, and what to do when they are broken."""

from __future__ import annotations

from dataclasses import dataclass

from engine.steam.quantities import QUANTITIES
from engine.steam.units import UNITS

QUANTITY, CHOICE, TEXT = "quantity", "choice", "text"


@dataclass(frozen=True)
class Entry:
    """A quantity as entered: value, unit, and for pressures whether "absolute" or "gauge"."""

    value: float
    unit: str
    basis: str = ""


@dataclass(frozen=True)
class Field:
    """One row: ``low`` and ``high`` are SI and absolute; ``blank`` is what a new case holds (None: nothing)."""

    name: str
    label: str
    form: str
    group: str
    blank: Entry | str | None = None
    kind: str = ""
    low: float = 0.0
    high: float = 0.0
    why: str = ""
    hint: str = ""
    options: tuple[str, ...] = ()


def quantity(name: str, label: str, group: str, low: float, high: float, blank: Entry | None = None, *,
             kind: str = "", why: str = "", hint: str = "") -> Field:
    """A row for a measured or assumed quantity; its kind of unit comes from the quantity table unless told."""
    kind = kind or QUANTITIES[name].kind
    assert blank is None or blank.unit in UNITS[kind], name
    return Field(name, label, QUANTITY, group, blank, kind, low, high, why, hint)


def choice(name: str, label: str, group: str, options: tuple[str, ...], hint: str = "") -> Field:
    """A row for a choice; the first option is what a new case holds."""
    return Field(name, label, CHOICE, group, options[0], options=options, hint=hint)


def text(name: str, label: str, group: str) -> Field:
    """A row for free words."""
    return Field(name, label, TEXT, group, "")
