"""The case: one frozen record of everything entered, as entered, resolved to SI in one place."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache, lru_cache
from types import MappingProxyType

from engine.calorimeter import leg_density, standard_pressure
from engine.job.case.fields import FIELDS
from engine.job.case.fields_path import BY_ALTITUDE
from engine.job.case.rows import CHOICE, QUANTITY, TABLE, TEXT, Entry, Field, Row
from engine.steam.arrays import shortened
from engine.steam.errors import Fault, InputError
from engine.steam.units import G_STANDARD, P_STANDARD, UNITS, absolute_from_gauge, from_si, to_si

Value = Entry | str | tuple[Row, ...] | None
GAUGE, ABSOLUTE = BASES = "gauge", "absolute"
T_LEG = 293.15  # K, water leg at the temperature of the room unless measured


@dataclass(frozen=True)
class Case:
    """Everything entered, by the names of ``fields.FIELDS``; what is absent there is None.

    Immutable: ``with_`` gives a changed copy. Two cases are equal when everything entered is.
    """

    values: Mapping[str, Value]

    def __post_init__(self):
        unknown = set(self.values) - set(FIELDS)
        if unknown:
            raise InputError(Fault("case", ", ".join(sorted(unknown)), "", "entries that a case has"))
        whole = {name: self.values.get(name, field.blank) for name, field in FIELDS.items()}
        object.__setattr__(self, "values", MappingProxyType(whole))

    def __eq__(self, other):
        return isinstance(other, Case) and dict(self.values) == dict(other.values)

    def __hash__(self):
        return hash(tuple(self.values.items()))

    def __reduce__(self):
        return (Case, (dict(self.values),))

    def __getitem__(self, name: str) -> Value:
        return self.values[name]

    def with_(self, **changes: Value) -> Case:
        """A copy with some entries changed."""
        return Case({**self.values, **changes})


BLANK = Case({})


def barometer(case: Case) -> float:
    """Barometric pressure [Pa]: as read, or of the standard atmosphere at the altitude."""
    if case["barometer_source"] == BY_ALTITUDE:
        return standard_pressure(to_si(case["altitude"].value, case["altitude"].unit, "length"))
    entry = case["p_barometer"]
    return to_si(entry.value, entry.unit, "pressure")


@lru_cache(maxsize=4096)  # of the entries of a case one changes and a hundred stay
def entry_si(field: Field, entry: Entry, p_barometer: float) -> float:
    """One entry in SI and absolute."""
    si = to_si(entry.value, entry.unit, field.kind)
    return absolute_from_gauge(si, p_barometer) if entry.basis == GAUGE else si


def as_entered(field: Field, si: float, like: Entry, p_barometer: float) -> Entry:
    """An SI value in the unit and basis of another entry."""
    shown = si - p_barometer if like.basis == GAUGE else si
    return Entry(from_si(shown, like.unit, field.kind), like.unit, like.basis)


def describe(entry: Entry) -> str:
    """``9 bar gauge``."""
    unit = "" if entry.unit == "1" else f" {entry.unit}"
    return f"{entry.value:.6g}{unit}{' ' + entry.basis if entry.basis else ''}"


@lru_cache(maxsize=4096)
def entry_fault(field: Field, entry: Entry, p_barometer: float) -> Fault | None:
    """What is wrong with one entry, in the words and the unit in which it was entered."""
    si = entry_si(field, entry, p_barometer)
    rounding = 1e-12 * max(1.0, abs(field.low), abs(field.high))  # of the conversion
    if field.low - rounding <= si <= field.high + rounding:
        return None
    low, high = (as_entered(field, limit, entry, p_barometer).value for limit in (field.low, field.high))
    unit = " ".join(part for part in (entry.unit if entry.unit != "1" else "", entry.basis) if part)
    return Fault(field.label, entry.value, unit, f"{low:.5g} to {high:.5g} {unit}".rstrip(), field.why, field.hint,
                 field.name)


@dataclass(frozen=True)
class Resolved:
    """The case in SI and absolute: ``si[name]`` is a float, or None for what was not entered.

    ``p_line`` is at the tapping: a water leg between it and the gauge is taken off.
    """

    si: Mapping[str, float | None]
    p_barometer: float

    def __getitem__(self, name: str) -> float | None:
        return self.si[name]


def form_fault(field: Field, value: Value) -> Fault | None:
    """What keeps an entry from meaning anything: of the wrong kind, or in a unit or on a basis it cannot have."""
    label = field.label.lower()
    if field.form == TABLE:
        fits, limit = _is_table(field, value), f"a table of at most {field.most} rows"
    elif field.form == CHOICE:
        fits, limit = isinstance(value, str) and value in field.options, "one of: " + ", ".join(field.options)
    elif field.form == TEXT:
        fits, limit = isinstance(value, str), "text"
    elif value is None:
        fits, limit = field.blank is None, "a value with its unit"
    elif not isinstance(value, Entry):
        fits, limit = False, "a value with its unit"
    elif not _is_number(value.value):
        return Fault(field.label, _given(value.value), "", "a number", name=field.name)
    elif not (isinstance(value.unit, str) and value.unit in UNITS[field.kind]):
        return Fault(f"unit of {label}", _given(value.unit), "", "one of: " + ", ".join(UNITS[field.kind]),
                     name=field.name)
    else:
        fits = isinstance(value.basis, str) and value.basis in (BASES if field.kind == "pressure" else ("",))
        limit = " or ".join(BASES) if field.kind == "pressure" else "none"
        return None if fits else Fault(f"basis of {label}", _given(value.basis), "", limit, name=field.name)
    return None if fits else Fault(field.label, _given(value), "", limit, name=field.name)


def _is_number(value: object) -> bool:
    return isinstance(value, float) or type(value) is int and abs(value) < 10**300


def _is_table(field: Field, value: object) -> bool:
    names = [column.name for column in field.columns]
    return (isinstance(value, tuple) and len(value) <= field.most
            and all(isinstance(row, Row) and [name for name, _ in row.cells] == names for row in value))


def _given(value: object) -> str:
    if value is None or (isinstance(value, str) and not value):
        return "nothing"
    return value[:120] if isinstance(value, str) else shortened(value)


@cache
def _cells(name: str, number: int) -> tuple[Field, ...]:
    """The fields of one row of a table."""
    field = FIELDS[name]
    return tuple(field.cell(number, column) for column in field.columns)


def slots(case: Case) -> dict[str, tuple[Field, Value]]:
    """Everything entered by its place, down to the cells of the tables, with the field that rules it."""
    found = {name: (field, case[name]) for name, field in FIELDS.items()}
    for name, field in FIELDS.items():
        if field.form == TABLE and _is_table(field, case[name]):
            for number, row in enumerate(case[name], 1):
                found |= {cell.name: (cell, value)
                          for cell, (_, value) in zip(_cells(name, number), row.cells, strict=True)}
    return found


def entry_faults(case: Case) -> list[Fault]:
    """Every entry that cannot be used, each looked at for itself."""
    entered = slots(case)
    faults = {place: fault for place, (field, value) in entered.items() if (fault := form_fault(field, value))}
    atmosphere = ("p_barometer", "altitude")
    for name in atmosphere:
        if name not in faults and (fault := entry_fault(FIELDS[name], case[name], 0.0)):
            faults[name] = fault
    known = not any(name in faults for name in (*atmosphere, "barometer_source"))
    p_barometer = barometer(case) if known else P_STANDARD
    for place, (field, value) in entered.items():
        limited = field.form == QUANTITY and value is not None and place not in atmosphere
        if limited and place not in faults and (fault := entry_fault(field, value, p_barometer)):
            faults[place] = fault
    return [faults[place] for place in entered if place in faults]


def faults_of(case: Case) -> list[Fault]:
    """Every entry that cannot be used; where there is none, entries that do not go together."""
    return entry_faults(case) or _faults_together(case, barometer(case))


def _faults_together(case: Case, p_barometer: float) -> list[Fault]:
    faults, at_tapping = [], ""
    p_line, p_exhaust = (entry_si(FIELDS[n], case[n], p_barometer) for n in ("p_line", "p_exhaust"))
    leg, line = case["leg_height"], FIELDS["p_line"]
    if leg.value:
        p_line, at_tapping = p_line - _leg_pressure(to_si(leg.value, leg.unit, "length")), " at the tapping"
        if not line.low <= p_line <= line.high:
            left, low, high = (describe(as_entered(line, p, case["p_line"], p_barometer))
                               for p in (p_line, line.low, line.high))
            faults.append(Fault(FIELDS["leg_height"].label, leg.value, leg.unit,
                                f"a water leg that leaves {low} to {high} at the tapping", f"this one leaves {left}",
                                FIELDS["leg_height"].hint, "leg_height"))
    if not faults and not p_exhaust < p_line:
        entry = case["p_exhaust"]
        limit = as_entered(FIELDS["p_exhaust"], p_line, entry, p_barometer)
        faults.append(Fault("Exhaust pressure", entry.value, f"{entry.unit} {entry.basis}",
                            f"less than the line pressure{at_tapping}, {describe(limit)}",
                            "steam only flows and expands towards a lower pressure",
                            "check the unit of both, and gauge or absolute", "p_exhaust"))
    low, high = (entry_si(FIELDS[n], case[n], 0.0) for n in ("least_superheat", "comfortable_superheat"))
    if low > high:
        entry = case["comfortable_superheat"]
        faults.append(Fault("Comfortable superheat", entry.value, entry.unit,
                            f"at least the least readable superheat, {describe(case['least_superheat'])}",
                            name="comfortable_superheat"))
    return faults


@cache
def _leg_density() -> float:
    return leg_density(T_LEG)


def _leg_pressure(height: float) -> float:
    """What a water leg adds to a gauge ``height`` [m] below its tapping [Pa]."""
    return _leg_density() * G_STANDARD * height


def resolve(case: Case) -> Resolved:
    """The case in SI, or InputError with every fault at once."""
    if faults := faults_of(case):
        raise InputError(*faults)
    p_barometer = barometer(case)
    si: dict[str, float | None] = {
        name: entry_si(field, case[name], p_barometer) if case[name] is not None else None
        for name, field in FIELDS.items() if field.form == QUANTITY}
    si["p_barometer"] = p_barometer
    if si["leg_height"]:
        si["p_line"] -= _leg_pressure(si["leg_height"])
    return Resolved(MappingProxyType(si), p_barometer)
