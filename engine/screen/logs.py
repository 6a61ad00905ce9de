"""The logs a reader brought in this session, and what the readings say: read once, reduced once.

A log stays in the session; what its columns are, the window, rows left out and corrections are in
the case. A result is worked out again only when readings or an entry that it rests on have changed.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from io import BytesIO

import streamlit as st

from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.result import Result, reduce
from engine.job.result.intake import Layout, layout_of
from engine.job.result.runs import Run, remembered, run_of_log, runs_typed, told_of
from engine.job.uncertainty import Check, check
from engine.measurement.logbook import Log, read_log
from engine.measurement.logbook.mapping import Mapping
from engine.screen import session
from engine.screen.style import escaped
from engine.steam.errors import InputError

DRAWS = 1_000_000
_LONG, _LONG_SHEET = 1_000_000, 100_000  # bytes of a log that takes time to read; a workbook is packed
_ASIDE = ("identity", "reach", "run sheet")  # groups of entries that no result rests on


@dataclass(frozen=True, eq=False)
class Held:
    """A log as brought: its bytes, what its columns are taken for, and once that is confirmed what was read.

    ``refused`` says why it cannot be read; "" where it can, or has not been tried. ``told`` is what the case
    remembered of its columns when they were taken.
    """

    name: str
    data: bytes
    layout: Layout | None
    mapping: Mapping | None
    confirmed: bool = False
    log: Log | None = None
    refused: str = ""
    told: str = ""

    def file(self) -> BytesIO:
        """The bytes as a file that knows its name."""
        file = BytesIO(self.data)
        file.name = self.name
        return file


def held() -> dict[str, Held]:
    """The logs of this session by name, in the order in which they came; a record just opened brings its own."""
    state = st.session_state
    reopened = state.pop("reopened", None)
    if reopened is not None:
        state["logs"] = {log.name: _of_record(log) for log in reopened}
    return state.setdefault("logs", {})


def _of_record(log: Log) -> Held:
    """A log as a record keeps it: read already, its file elsewhere."""
    note = "this log was kept in a record, as it was read then; to read it otherwise, bring its file"
    return Held(log.name, b"", Layout(log.name, log.mapping, True, (note,), ()), log.mapping, True, log)


def bring(name: str, data: bytes) -> None:
    """Take a log in. What its columns are is proposed; a case that knows the log has confirmed it already."""
    logs = held()
    if name in logs and logs[name].data == data:
        return
    stem, number = name, 2
    while name in logs:
        name, number = f"{stem} ({number})", number + 1
    log = Held(name, data, None, None)
    try:
        layout = layout_of(session.case(), log.file())
        logs[name] = replace(log, layout=layout, mapping=layout.mapping, confirmed=layout.remembered,
                             told=told_of(session.case(), name))
    except InputError as error:
        logs[name] = replace(log, refused=str(error))


def upload(key: str) -> Callable[[], None]:
    """A callback that takes in what an uploader holds, and empties it."""
    def take() -> None:
        for file in st.session_state[key] or ():
            bring(file.name, file.getvalue())
        st.session_state["uploads"] = st.session_state.get("uploads", 0) + 1
    return take


def drop(name: str) -> None:
    """Take a log out of the session, for the time being; what the case says of it stays."""
    st.session_state["dropped"] = held().pop(name, None)


def dropped() -> Held | None:
    """The log taken out last, while it can still be brought back."""
    one = st.session_state.get("dropped")
    return one if one is not None and one.name not in held() else None


def bring_back() -> None:
    """The log taken out last, as it was."""
    one = dropped()
    if one is not None:
        held()[one.name] = one
        st.session_state["dropped"] = None


def as_told(name: str) -> None:
    """The columns of a log as the case remembers them."""
    one = held()[name]
    layout = layout_of(session.case(), one.file())
    held()[name] = replace(one, layout=layout, mapping=layout.mapping, confirmed=layout.remembered, log=None,
                           refused="", told=told_of(session.case(), name))


def _follow(name: str) -> None:
    """Where the case says something else of a log's columns than when they were taken (undo), take that."""
    one, told = held()[name], told_of(session.case(), name)
    if told and told != one.told and one.data and one.layout is not None:
        try:
            as_told(name)
        except InputError as error:
            held()[name] = replace(one, refused=str(error), told=told)


def change_mapping(name: str, mapping: Mapping) -> None:
    """Another idea of what the columns are: to be confirmed before anything is read."""
    held()[name] = replace(held()[name], mapping=mapping, confirmed=False, log=None, refused="")


def confirm(name: str) -> None:
    """Take the columns as they are now, and remember them in the case; logs of the same layout follow."""
    log = held()[name]
    st.session_state["intake open"] = False  # what it was opened for is done
    session.change(remembered(session.case(), name, log.mapping))
    held()[name] = replace(log, confirmed=True, log=None, refused="", told=told_of(session.case(), name))
    for other, one in held().items():
        if not one.confirmed and one.layout is not None and not one.layout.remembered and not one.refused:
            layout = layout_of(session.case(), one.file())
            if layout.remembered:
                held()[other] = replace(one, layout=layout, mapping=layout.mapping, confirmed=True)


def correct(name: str, mapping: Mapping) -> None:
    """Read a log anew with other columns, and remember them: taken back by undo."""
    change_mapping(name, mapping)
    confirm(name)


def read_in(name: str) -> Held:
    """Read a log that is confirmed and not read yet, with a progress bar where it is long."""
    _follow(name)
    one = held()[name]
    if not one.confirmed or one.log is not None or one.refused or one.mapping.questions:
        return one
    long = len(one.data) > (_LONG_SHEET if _is_sheet(one) else _LONG)
    bar = st.progress(0.0, f"Reading {escaped(name)}") if long else None
    try:
        log = read_log(one.file(), one.mapping, progress=_now_and_then(bar.progress) if bar else None)
        held()[name] = replace(one, log=replace(log, name=name))
    except InputError as error:
        held()[name] = replace(one, confirmed=False, refused=str(error))
    if bar:
        bar.empty()
    return held()[name]


def _is_sheet(one: Held) -> bool:
    return bool(one.mapping and one.mapping.sheet)


def read_all() -> None:
    """The same for every log of the session."""
    for name in list(held()):
        read_in(name)


def runs(case: Case) -> tuple[Run, ...]:
    """The runs of the logs that were read, then the runs typed. Raises InputError for typed runs that mix."""
    logged = tuple(_run(one.log) for one in held().values() if one.log is not None)
    return (*logged, *runs_typed(case))


def _run(log: Log) -> Run:
    """A log as a run; one log always gives the same run, so that results can be kept by it."""
    kept = st.session_state.setdefault("runs of logs", {})
    if kept.get(log.name, (None,))[0] is not log:
        kept[log.name] = (log, run_of_log(log))
    return kept[log.name][1]


def result() -> Result:
    """What all readings of the session say by the open case. Raises InputError."""
    case = session.case()
    basis = case.with_(**{name: f.blank for name, f in FIELDS.items() if f.group in _ASIDE})
    logged = tuple(_run(one.log) for one in held().values() if one.log is not None)
    kept = st.session_state.get("reduced")
    if kept is None or kept[0] != basis or len(kept[1]) != len(logged) or any(
            a is not b for a, b in zip(kept[1], logged, strict=True)):
        rows = sum(map(len, logged))
        bar = st.progress(0.0, "Reducing") if rows > 100_000 else None
        found = reduce(case, runs(case), known=kept[2] if kept else None,
                       progress=_now_and_then(bar.progress) if bar else None)
        if bar:
            bar.empty()
        kept = st.session_state["reduced"] = (basis, logged, found)
        st.session_state["checked"] = None
    return replace(kept[2], case=case)


def checked(found: Result) -> Check | None:
    """Monte Carlo beside the budget of a result, once per result; None where there is no budget. Raises InputError."""
    if found.measurement is None or found.budget is None:
        return None
    kept = st.session_state.get("checked")
    if kept is None or kept[0] is not found.budget:
        # each step of the bar is also where a reader who has changed something meanwhile can break in
        bar = st.progress(0.0, "Drawing a million times")
        drawn = check(found.measurement, found.budget, draws=DRAWS, progress=_now_and_then(bar.progress))
        bar.empty()
        kept = st.session_state["checked"] = (found.budget, drawn)
    return kept[1]


def _now_and_then(progress: Callable[[float], object]) -> Callable[[float], None]:
    """Progress in steps of a twentieth: the browser need not hear of each block."""
    shown = 0.0

    def step(done: float) -> None:
        nonlocal shown
        if done >= shown + 0.05:
            shown = done
            progress(min(done, 1.0))
    return step
