"""What an entry of the case is: its name, label, form, limits, and what to do when they are broken.

An entry is a quantity, a choice, free words, or a table; the columns of a table are entries
themselves, so that one set of rules covers a single value and a thousand cells.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from engine.steam.errors import Fault, InputError
from engine.steam.quantities import QUANTITIES
from engine.steam.units import UNITS

QUANTITY, CHOICE, TEXT, TABLE = "quantity", "choice", "text", "table"


@dataclass(frozen=True)
class Entry:
    """A quantity as entered: value, unit, and for pressures whether "absolute" or "gauge"."""

    value: float
    unit: str
    basis: str = ""


@dataclass(frozen=True)
class Row:
    """One row of a table, as entered: ``row["T_exhaust"]``. Made by ``Field.row``."""

    cells: tuple[tuple[str, Entry | str | None], ...]

    def __getitem__(self, name: str) -> Entry | str | None:
        return dict(self.cells)[name]

    def with_(self, **changes: Entry | str | None) -> Row:
        """A copy with some cells changed."""
        return Row(tuple((name, changes.get(name, value)) for name, value in self.cells))


@dataclass(frozen=True, eq=False)  # a row of the table is itself, and quick to look up by
class Field:
    """One entry: ``low`` and ``high`` are SI and absolute; ``blank`` is what a new case holds (None: nothing).

    A table has ``columns``, which are fields, and at most ``most`` rows.
    """

    name: str
    label: str
    form: str
    group: str
    blank: Entry | str | tuple[Row, ...] | None = None
    kind: str = ""
    low: float = 0.0
    high: float = 0.0
    why: str = ""
    hint: str = ""
    options: tuple[str, ...] = ()
    columns: tuple[Field, ...] = ()
    most: int = 0

    def row(self, **cells: Entry | str | None) -> Row:
        """A row of this table; cells that are not given hold what a new one does."""
        unknown = set(cells) - {column.name for column in self.columns}
        if unknown:
            raise InputError(Fault(f"columns of {self.label.lower()}", ", ".join(sorted(unknown)), "",
                                   "one of: " + ", ".join(column.name for column in self.columns), name=self.name))
        return Row(tuple((column.name, cells.get(column.name, column.blank)) for column in self.columns))

    def cell(self, number: int, column: Field) -> Field:
        """The column as the field of one cell, so that a refusal names the place; rows count from 1."""
        return replace(column, name=f"{self.name}[{number}].{column.name}",
                       label=f"{self.label}, row {number}, {column.label.lower()}")


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


def table(name: str, label: str, group: str, columns: tuple[Field, ...], most: int, hint: str = "") -> Field:
    """A table that a new case holds empty."""
    return Field(name, label, TABLE, group, (), hint=hint, columns=columns, most=most)
