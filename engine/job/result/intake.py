"""A log brought to a case: its columns as the case remembers them, or as they seem to be, then its rows."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import NamedTuple

from engine.job.case import Case
from engine.job.result.runs import recalled
from engine.measurement.logbook import Log, fit_mapping, propose_mapping, read_log
from engine.measurement.logbook.mapping import Column, Mapping
from engine.measurement.logbook.suspicion import Suspicion
from engine.measurement.logbook.text import source_of
from engine.steam.errors import InputError


class Layout(NamedTuple):
    """What the columns of a log are taken for: ``remembered`` when the case knew, else proposed, with what was
    noticed in ``notes``; ``preview`` are (line, cells) of the first rows."""

    name: str
    mapping: Mapping
    remembered: bool
    notes: tuple[str, ...]
    preview: tuple[tuple[int, list[str]], ...]


def layout_of(case: Case, file) -> Layout:
    """What the columns of a log are: as in the case where that fits the file, else as they seem to be.

    ``file`` is a path, bytes, or a file opened in binary mode. InputError for what is no table.
    """
    source = source_of(file)
    found = propose_mapping(file)
    try:
        known = recalled(case, source.name)
        if known is not None:
            return Layout(source.name, fit_mapping(known, source), True, (), found.preview)
    except InputError:
        pass  # remembered for another layout, or broken: what the file itself shows goes before it
    return Layout(source.name, found.mapping, False, found.notes, found.preview)


def assigned(mapping: Mapping, channel: str, position: int | None, unit: str = "", basis: str = "") -> Mapping:
    """The mapping with a channel in the column at ``position`` (None: in no column), and what is known of it.

    A column that had another channel gives it up.
    """
    columns = []
    for column in mapping.columns:
        if column.position == position:
            column = Column(column.position, column.name, channel, unit, basis)
        elif column.channel == channel:
            column = Column(column.position, column.name)
        columns.append(column)
    return replace(mapping, columns=tuple(columns))


def mended(mapping: Mapping, suspicion: Suspicion) -> Mapping | None:
    """The mapping with the unit or basis by which nothing would look wrong; None where no answer would end it."""
    column = mapping.used.get(suspicion.channel)
    if column is None or not suspicion.mend:
        return None
    item, value = suspicion.mend
    column = replace(column, **{item: value})
    return assigned(mapping, column.channel, column.position, column.unit, column.basis)


def read(case: Case, file, answers: Callable[[Mapping], Mapping] | None = None,
         progress: Callable[[float], object] | None = None) -> Log:
    """Read a log by the case; ``answers`` may change the mapping before. InputError while a question is open."""
    layout = layout_of(case, file)
    return read_log(file, answers(layout.mapping) if answers else layout.mapping, progress=progress)
