"""The Path page: from three readings to the quality, along the process on T–s, h–s and P–h."""

from __future__ import annotations

import streamlit as st

from engine.job.assessment import Assessment
from engine.job.assessment.cautions import CAUTIONS, SHORT
from engine.job.assessment.tables import as_csv, comparison_rows, state_rows, velocity_rows
from engine.job.case.fields_modes import ELECTRIC, SEPARATING, THROTTLING
from engine.job.case.fields_path import (
    BY_ALTITUDE,
    BY_CONDUCTANCE,
    BY_KG,
    BY_NORMAL,
    BY_TWO_FLOWS,
    EXPECTED,
    NONE,
    READING,
    UNDECIDED,
)
from engine.job.uncertainty.answer_with import answer_with
from engine.screen import entries, live, methods, session, style
from engine.screen.charts.process import process_diagrams
from engine.screen.charts.speed import velocity_diagram
from engine.screen.rigs import sure_of
from engine.screen.shell import assessed
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError

QUESTIONS = {READING: "I have a reading", EXPECTED: "I expect this wetness"}
WAYS = {THROTTLING: "constant enthalpy: ● line, ◆ dries out, ■ exhaust",
        SEPARATING: "constant enthalpy: ● line, ▼ drained water, ○ throttled steam, ◆ dries out, ■ exhaust",
        ELECTRIC: "heating: ● line, ◆ dries out, ■ after the heater"}
LEGEND = (("blue", "dashed", "one constant bore; ✚ exhaust as read"),
          ("text", "dashed", "reach limit: the wettest steam still readable"), ("green", "solid", "pinned cases"))
BAND = ("vermilion", "band", "expanded uncertainty of the quality")
LOSSES = {UNDECIDED: "Not decided yet", NONE: "Knowingly none", BY_CONDUCTANCE: "By conductance UA",
          BY_KG: "Known per kg of sample", BY_NORMAL: "By a normal reading on dry steam", BY_TWO_FLOWS: "By two flows"}
ENTRIES_OF_LOSS = {BY_CONDUCTANCE: ("conductance", "T_ambient"), BY_KG: ("heat_loss",), BY_NORMAL: ("T_normal",),
                   BY_TWO_FLOWS: ("second_flow", "T_second", "T_ambient")}


def page() -> None:
    """Answer first, then what was entered, then the pictures and tables."""
    answer_place = st.container(key="answer", border=True)
    _inputs()
    a = _assessment(answer_place)
    if a is None:
        _assumed()
        return
    units = session.units()
    others = _pinned()
    expected = sure_of(a.case)
    live.show(process_diagrams(a, units, others, expected), key="process", height=420)
    style.legend((("vermilion", "solid", WAYS[session.case()["mode"]]), *([BAND] if expected.band else []), *LEGEND))
    st.caption(SHORT)
    _assumed()
    if not a.heating:
        _velocities(a)
    _states(a)
    _comparison(a, others)
    with st.expander("Cautions"):
        st.markdown("\n".join(f"- {line}" for line in CAUTIONS))


def _inputs() -> None:
    with st.container(horizontal=True, gap="large"):
        entries.choice("question", QUESTIONS, horizontal=True)
        methods.choose()
    for column, name in zip(st.columns(3, gap="large"), methods.main_entries(), strict=True):
        with column:
            entries.slider(name)
    methods.entries_of_method()


def _assumed() -> None:
    box = st.expander("What the answer takes for granted: barometer, water leg, heat loss, velocities, limits",
                      key="assumed", on_change="rerun")
    if not box.open:  # fifteen entries that nobody sees would be a fifth of every step of a slider
        return
    case = session.case()
    with box:
        site, loss, speed, limits = st.columns(4, gap="medium")
    with site:
        entries.choice("barometer_source", {BY_ALTITUDE: "From the altitude", "reading": "As read"})
        entries.number("altitude" if case["barometer_source"] == BY_ALTITUDE else "p_barometer")
        entries.number("leg_height")
    if case["mode"] != ELECTRIC:  # a heater has its own loss, and needs no fast stream
        with loss:
            entries.choice("heat_loss_method", LOSSES)
            for name in ENTRIES_OF_LOSS.get(case["heat_loss_method"], ()):
                entries.number(name)
        with speed:
            for name in ("sample_flow", "line_velocity", "line_bore", "exhaust_bore", "recovery"):
                entries.number(name)
    with limits:
        for name in ("least_superheat", "comfortable_superheat", "x_limit"):
            entries.number(name)


def _assessment(place) -> Assessment | None:
    """The open case assessed; where an entry cannot be used, the refusal and the last case that could be."""
    try:
        a = st.session_state["last good"] = assessed(session.case())
    except InputError as error:
        with place:
            st.error(escaped_lines(str(error)))
            st.caption("Nothing is lost: correct the entry, or undo. The diagrams show the last usable case.")
        return st.session_state.get("last good")
    with place:
        _say(a)
    return a


def _say(a: Assessment) -> None:
    said = answer_with(sure_of(a.case), session.units())
    st.markdown(f"### {said.shape} {said.headline}")
    st.markdown(" ".join((*said.reasons, *said.remedies)))
    st.caption(" ".join(said.assumed))


def _pinned() -> list[tuple[str, Assessment]]:
    return [(name, assessed(case)) for name, case in session.pinned()]


def _velocities(a: Assessment) -> None:
    units = session.units()
    st.subheader("Velocities", anchor=False)
    left, right = st.columns([3, 2], gap="large")
    diagram = velocity_diagram(a, units)
    with left:
        if diagram is None:
            st.caption("Give the sample flow and a bore to see the velocities along the path.")
        else:
            live.show((diagram,), key="velocities", height=320, columns=1)
    with right:
        st.table([{"Quantity": label, "Value": value} for label, value in velocity_rows(a, units)])


def _states(a: Assessment) -> None:
    units = session.units()
    rows = state_rows(a, units)
    st.subheader("States", anchor=False)
    st.table([{name: _cell(name, value) for name, value in row.items()} for row in rows])
    st.download_button("Save the states as CSV", as_csv(rows), "states.csv", "text/csv", key="states csv",
                       on_click="ignore")


_DECIMALS = {"p": 4, "T": 2, "x": 4, "h": 2, "s": 4, "v": 5, "c": 1}


def _cell(name: str, value: str | float | None) -> str:
    """A cell for reading; the file has every digit."""
    if value is None:
        return "superheated" if name == "x" else "–"
    return value if isinstance(value, str) else f"{value:.{_DECIMALS[name.split(',')[0]]}f}"


def _comparison(a: Assessment, others: list[tuple[str, Assessment]]) -> None:
    if not others:
        return
    st.subheader("Side by side", anchor=False)
    st.table(comparison_rows([("open", a), *others], session.units(), escaped))
    for name, _ in others:
        with st.container(horizontal=True):
            st.button(f"Open {name}", key=f"open pinned {name}", on_click=session.open_pinned, args=(name,))
            st.button(f"Unpin {name}", key=f"unpin {name}", on_click=session.unpin, args=(name,))


if __name__ == "__main__":
    page()
