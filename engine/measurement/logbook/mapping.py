"""How the columns of a log are to be read: a record that a person confirms and a case remembers.

A ``Mapping`` holds everything that was recognised or told: which column is which channel, in which
unit, gauge or absolute, which sign is the decimal one, in which order a date is written. What could
not be recognised stays empty and is asked for (``questions``); nothing is read until every
question is answered.
"""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, field, fields, replace
from typing import NamedTuple

from engine.measurement.logbook.text import DELIMITERS, ENCODINGS
from engine.measurement.logbook.time import DATE_ORDERS, STAMPS
from engine.measurement.logbook.words import BASES, CHANNELS, MEASURED, units_of
from engine.steam.errors import Fault, InputError

SCHEMA = 1


@dataclass(frozen=True)
class Column:
    """One column of the file: ``position`` from 0, ``channel`` "" when it is left out."""

    position: int
    name: str
    channel: str = ""
    unit: str = ""
    basis: str = ""

    @property
    def label(self) -> str:
        """How the column is called in a message."""
        return self.name.strip() or self.place

    @property
    def place(self) -> str:
        """The column by its place, which no other column shares."""
        return f"column {self.position + 1}"


class Question(NamedTuple):
    """Something only a person can say: ``item`` and ``channel`` are what ``answer`` takes."""

    item: str
    channel: str
    text: str
    options: tuple[str, ...]


@dataclass(frozen=True)
class Mapping:
    """``header_line`` and ``first_line`` count from 1 as in the file; a header line of 0 means there is none."""

    columns: tuple[Column, ...]
    decimal: str = "."
    thousands: str = ""
    date_order: str = "ymd"
    delimiter: str = ","
    encoding: str = "utf-8"
    header_line: int = 1
    first_line: int = 2
    sheet: str = ""
    questions: tuple[Question, ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self):
        faults = _faults(self)
        if faults:
            raise InputError(*faults)
        object.__setattr__(self, "questions", tuple(_questions(self)))

    @property
    def used(self) -> dict[str, Column]:
        """Channel -> column, of the columns that are read."""
        return {c.channel: c for c in self.columns if c.channel}

    def answer(self, *, unit: dict[str, str] | None = None, basis: str | dict[str, str] | None = None,
               channel: dict[str, str] | None = None, **whole: str) -> Mapping:
        """A mapping with answers put in.

        ``unit`` and ``basis`` go by channel (one ``basis`` for all pressures that lack one may be
        given as a word), ``channel`` by the column's heading or place ("column 2"), "" leaving the column
        out; ``decimal``, ``thousands`` and ``date_order`` hold for the whole file.

        >>> mapping = Mapping((Column(0, "p1", "p_line", "bar"), Column(1, "T2", "T_exhaust", "°C")))
        >>> mapping.questions[0].item
        'basis'
        >>> mapping.answer(basis={"p_line": "gauge"}).questions
        ()
        """
        unit, channel = unit or {}, channel or {}
        places = {c.place for c in self.columns}
        faults = _strangers(channel, places | {c.label for c in self.columns}, "column")
        faults += _strangers(whole, {"decimal", "thousands", "date_order"}, "answer")
        columns = []
        for column in self.columns:
            told = channel.get(column.place, channel.get(column.label, column.channel))
            if told != column.channel:
                column = replace(column, channel=told, unit="", basis="absolute" * (told == "p_barometer"))
            columns.append(column)
        channels = {c.channel for c in columns}
        faults += _strangers(unit, channels, "channel")
        if isinstance(basis, str):
            basis = {c.channel: basis for c in columns if _is_pressure(c) and not c.basis}
        faults += _strangers(basis or {}, channels, "channel")
        if faults:
            raise InputError(*faults)
        if not self.decimal and whole.get("decimal") == ".":
            whole.setdefault("thousands", ",")  # what was not the decimal sign parts thousands
        columns = tuple(replace(c, unit=unit.get(c.channel, c.unit), basis=(basis or {}).get(c.channel, c.basis))
                        for c in columns)
        return replace(self, columns=columns, **whole)

    def to_dict(self) -> dict:
        """Plain data for a JSON file."""
        data = asdict(self)
        del data["questions"]
        return {"schema": SCHEMA, **data}

    def to_json(self) -> str:
        return json.dumps(self.to_dict(), ensure_ascii=False, indent=1)

    @classmethod
    def from_dict(cls, data: object) -> Mapping:
        """The mapping back from plain data; refuses anything else with what is wrong."""
        if not isinstance(data, dict) or not isinstance(data.get("columns"), (list, tuple)):
            raise InputError(Fault("mapping of a log", _brief(data), "", "an object with a list of columns",
                                   name="mapping"))
        if data.get("schema") != SCHEMA:
            raise InputError(Fault("schema of a mapping", data.get("schema"), "", f"{SCHEMA}", name="schema",
                                   hint="it was saved by another version of this program"))
        known = {f.name for f in fields(cls) if f.init} - {"columns"}
        faults = [Fault("entry of a mapping", key, "", "one of: " + ", ".join(sorted(known)), name="mapping")
                  for key in data if key not in known | {"columns", "schema"}]
        columns, column_names = [], {f.name for f in fields(Column)}
        for k, entry in enumerate(data["columns"]):
            if not isinstance(entry, dict) or not {"position", "name"} <= set(entry) <= column_names:
                faults.append(Fault(f"column {k + 1} of a mapping", _brief(entry), "",
                                    "position, name, channel, unit, basis", name="columns"))
            else:
                columns.append(Column(**entry))
        if faults:
            raise InputError(*faults)
        return cls(tuple(columns), **{key: data[key] for key in known if key in data})

    @classmethod
    def from_json(cls, text: str) -> Mapping:
        try:
            return cls.from_dict(json.loads(text))
        except (json.JSONDecodeError, RecursionError, TypeError) as error:
            raise InputError(Fault("mapping of a log", _brief(text), "", "JSON text", str(error),
                                   name="mapping")) from None


def _brief(value: object) -> str:
    text = repr(value)
    return text if len(text) <= 60 else text[:57] + "..."


def _is_pressure(column: Column) -> bool:
    return bool(column.channel) and CHANNELS[column.channel].kind == "pressure"


def _strangers(given: dict, known: set, what: str) -> list[Fault]:
    allowed = ", ".join(sorted(k for k in known if k)) or "none"
    return [Fault(what, key, "", f"one of: {allowed}", name="mapping") for key in given if key not in known]


def _faults(mapping: Mapping) -> list[Fault]:
    """Everything in a mapping that can never be read."""
    def one_of(item: str, value: object, allowed) -> Fault | None:
        if isinstance(value, str) and value in allowed:
            return None
        return Fault(f"{item} of a log", repr(value), "", "one of: " + ", ".join(map(repr, allowed)), name=item)

    def wrong(column: Column, item: str, value: object, needs: str) -> Fault:
        name = column.label if isinstance(column.name, str) else repr(column.name)
        return Fault(f"{item} of column {name}", repr(value), "", needs, name="columns")

    faults = [one_of("decimal", mapping.decimal, (".", ",", "")),
              one_of("thousands", mapping.thousands, ("", ".", ",")),
              one_of("date_order", mapping.date_order, (*DATE_ORDERS, "")),
              one_of("delimiter", mapping.delimiter, (*DELIMITERS, "")),
              one_of("encoding", mapping.encoding, ("", *ENCODINGS))]
    if mapping.decimal and mapping.decimal == mapping.thousands:
        faults.append(Fault("thousands of a log", repr(mapping.thousands), "", "another sign than the decimal one",
                            name="thousands"))
    for item, least in (("header_line", 0), ("first_line", 1)):
        value = getattr(mapping, item)
        if not isinstance(value, int) or isinstance(value, bool) or not least <= value <= 10_000_000:
            faults.append(Fault(f"{item} of a log", repr(value), "", f"a whole number from {least}", name=item))
    if not isinstance(mapping.sheet, str):
        faults.append(Fault("sheet of a log", repr(mapping.sheet), "", "a sheet's name", name="sheet"))
    for k, column in enumerate(mapping.columns):
        if column.position != k or isinstance(column.position, bool):
            faults.append(wrong(column, "position", column.position, f"{k}: columns are listed from left to right"))
        for item in ("name", "channel", "unit", "basis"):
            if not isinstance(getattr(column, item), str):
                faults.append(wrong(column, item, getattr(column, item), "text"))
    if any(faults):
        return [f for f in faults if f]
    seen: dict[str, Column] = {}
    for column in mapping.columns:
        if not column.channel:
            continue
        if column.channel not in CHANNELS:
            faults.append(wrong(column, "channel", column.channel, "one of: " + ", ".join(CHANNELS)))
            continue
        if column.channel in seen:
            faults.append(wrong(column, "channel", column.channel,
                                f"a channel of its own; {seen[column.channel].label} has this one"))
        seen[column.channel] = column
        units = units_of(column.channel)
        if column.unit not in ("", *units):
            faults.append(wrong(column, "unit", column.unit, "one of: " + (", ".join(units) or "none")))
        bases = BASES if _is_pressure(column) else ()
        if column.basis not in ("", *bases):
            faults.append(wrong(column, "basis", column.basis, "one of: " + (", ".join(bases) or "none")))
    if "date" in seen and (seen.get("time") is None or seen["time"].unit not in ("clock", "")):
        faults.append(wrong(seen["date"], "channel", "date", "a time column in hh:mm:ss beside it"))
    return [f for f in faults if f]


def _questions(mapping: Mapping) -> list[Question]:
    """What is still open, in the order in which a person would be asked."""
    asked = []
    if not set(mapping.used) & set(MEASURED):
        names = ", ".join(c.label for c in mapping.columns[:12]) or "none"
        asked.append(Question("channel", "", f"no column was recognised among: {names}. Which is which?", MEASURED))
    if not mapping.decimal:
        asked.append(Question("decimal", "", "the numbers can be read with a decimal comma and with a decimal point: "
                              "1,013 may be 1.013 or 1013. Which sign is the decimal one?", (",", ".")))
    for column in mapping.columns:
        channel = CHANNELS.get(column.channel)
        if channel is None or channel.kind == "text":
            continue
        if not column.unit:
            asked.append(Question("unit", channel.name, f"In which unit is the {channel.label} ({column.label})?",
                                  units_of(channel.name)))
        if channel.kind == "pressure" and not column.basis:
            asked.append(Question("basis", channel.name, f"Is the {channel.label} ({column.label}) gauge or absolute?",
                                  BASES))
    dated = any(c.channel in ("time", "date") and c.unit in ("stamp", "date") for c in mapping.columns)
    if dated and not mapping.date_order:
        asked.append(Question("date_order", "", "every date can be read in more than one order. In which order are "
                              "day, month and year written?", ("dmy", "mdy", "ymd")))
    return asked


def refuse_open(mapping: Mapping, source: str) -> None:
    """Raise InputError with every open question, because a guess would go unseen."""
    faults = [Fault(f"log {source}, {q.item} {q.channel}".strip(), "nothing told", "",
                    "one of: " + _listed(q.options), q.text, _how(mapping, q), name=q.item)
              for q in mapping.questions]
    if faults:
        raise InputError(*faults)


def _listed(options: tuple[str, ...]) -> str:
    return ", ".join(f'"{option}"' if len(option) == 1 and not option.isalpha() else option for option in options)


def _how(mapping: Mapping, question: Question) -> str:
    option = question.options[0]
    if question.item == "channel":
        told = f"{{{mapping.columns[0].label!r}: {option!r}}}"
    else:
        told = f"{{{question.channel!r}: {option!r}}}" if question.channel else repr(option)
    return f"answer it on the page, or propose_mapping(log).mapping.answer({question.item}={told})"


def is_dated(unit: str) -> bool:
    """Whether a time unit carries the date."""
    return unit in ("stamp", "date", "excel", "unix", "unix ms")


def is_text(unit: str) -> bool:
    """Whether a time column of this unit holds text rather than numbers."""
    return unit in STAMPS
