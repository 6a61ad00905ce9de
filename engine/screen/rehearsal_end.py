"""The end of a rehearsal on the screen: what the readings say, what is stated, and the verdict."""

from __future__ import annotations

import io
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import streamlit as st

from engine.job.rehearsal import Finding, Rehearsal, Statement
from engine.job.rehearsal import rehearsal as practice
from engine.job.rehearsal.link import to_link
from engine.job.rehearsal.looks import Look
from engine.job.rehearsal.readings import (
    Way,
    basis_of,
    channels_of,
    reckoned,
    second_shift,
    typed,
    weighed_flow,
)
from engine.job.rehearsal.said import clock, cost, headline, journal, judged, truth
from engine.job.rehearsal.scenario import HiddenFault
from engine.job.rehearsal.verdict import verdict_of
from engine.measurement.logbook.write import write_log
from engine.screen import session
from engine.screen.rehearsal_faces import decimals_of
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError
from engine.steam.units import UnitSystem, from_si

FINDINGS = {Finding.QUALITY: "A quality", Finding.CANNOT: "It cannot be read", Finding.SUPERHEATED: "Line superheated"}


def address_of(word: str) -> str:
    """The link that opens a rehearsal, as far as the server knows where its readers reach it."""
    return f"{(st.context.url or '').split('?')[0]}?rehearsal={word}"


def reading_rows(r: Rehearsal, units: UnitSystem) -> list[dict[str, str]]:
    """The sets of readings as the gauges showed them."""
    course, rig = r.course, r.rig
    k = course.at(np.array(r.readings, dtype=float))
    columns = {"Time": [clock(t) for t in r.readings]}
    for name, label, kind in (("line", "Line gauge", "pressure"), ("exhaust", "Exhaust gauge", "pressure"),
                              ("exhaust thermometer", "Exhaust thermometer", "temperature"),
                              ("line thermometer", "Line thermometer", "temperature")):
        unit, step = units.unit(kind), rig.gauges[name].step
        places = decimals_of(from_si(step, unit, kind)) if kind == "pressure" else 1
        values = from_si(course.shown[name][k], unit, kind) + 0.0
        columns[f"{label}, {unit}"] = [f"{round(v, places) + 0.0:.{places}f}" for v in values.tolist()]
    return [dict(zip(columns, row, strict=True)) for row in zip(*columns.values(), strict=True)]


# ---- to a statement


def conclude(r: Rehearsal, do: Callable[..., None]) -> None:
    """What the readings say by the way chosen, and the statement."""
    with st.container(border=True, key="rehearsal-state"):
        st.markdown("**What did you find?**")
        x = _work_out(r)
        finding = st.segmented_control("Finding", list(Finding), key="stated finding", format_func=FINDINGS.get,
                                       default=Finding.QUALITY, required=True, label_visibility="collapsed")
        value = None
        if finding == Finding.QUALITY:
            with st.container(horizontal=True, vertical_alignment="bottom"):
                value = st.number_input("Quality of the line", value=None, step=0.001, format="%.4f", key="stated x",
                                        placeholder="for instance 0.9720", width=260)
                if x is not None:
                    st.button(f"Take over {x:.4f}", key="take over", on_click=_take_over, args=(x,))
        suspected = st.multiselect("What is wrong with the rig?", list(HiddenFault), key="stated faults",
                                   format_func=lambda f: str(f).capitalize(), placeholder="nothing suspected")
        st.button("State it, and see the truth", key="state it", type="primary", on_click=_state,
                  args=(do, finding, value, tuple(suspected)))


def _take_over(x: float) -> None:
    st.session_state["stated x"] = min(round(x, 4), 1.0)


def _state(do: Callable[..., None], finding: Finding, value: float | None, suspected: tuple[HiddenFault, ...]) -> None:
    def stated(r: Rehearsal) -> Rehearsal:
        x = value if finding == Finding.QUALITY else None
        return practice.state(r, Statement(finding, x, frozenset(suspected)))

    st.session_state["rehearsal way"] = _way()
    do(stated)


def _way() -> Way:
    """The way as it stands in the widgets; what they do not say is as the sheet has it."""
    state = st.session_state
    return Way(line_absolute={"gauge": False, "absolute": True}.get(state.get("way line")),
               exhaust_read=state.get("way exhaust", "read") == "read",
               barometer_read=state.get("way barometer") == "read",
               flow_weighed=state.get("way flow") == "weighed",
               second_read=state.get("way second") == "second",
               settled_only=state.get("way sets", "settled") == "settled")


def _work_out(r: Rehearsal) -> float | None:
    """The readings reduced by the program, if the trainee wants it; the quality where there is one."""
    if not st.toggle("Work it out with the program", key="way shown",
                     help="By the case's own corrections. How the gauges are understood stays your decision."):
        return None
    if not r.readings:
        st.caption("Take readings first.")
        return None
    _choices(r)
    try:
        result = reckoned(r, _way())
    except InputError as error:
        st.error(escaped_lines(str(error)))
        return None
    for line in (*result.unable, *(f"Not stated in the case: {m}." for m in result.missing)):
        st.markdown(escaped(line.removeprefix("rehearsal: ")))
    if result.x is None:
        return None
    U = result.instruments.U if result.instruments else None
    used = sum(int(run.used.sum()) for run in result.runs)
    told = f"Quality **{result.x:.4f}**" + (f" ± {U:.4f} by the instruments" if U else "")
    st.markdown(f"{told}, from {used} of {len(r.readings)} sets.")
    return result.x


def _choices(r: Rehearsal) -> None:
    """How the readings are understood. What has not been looked at is not offered."""
    believed = basis_of(r.rig)["p_line"]
    rows = [("way sets", "Sets used", {"settled": "Longest settled stretch", "all": "All of them"}),
            ("way line", "The line gauge shows", {believed: f"{believed.capitalize()}, as on the sheet",
                                                  _other(believed): _other(believed).capitalize()}),
            ("way exhaust", "Exhaust pressure", {"read": "As its gauge shows", "planned": "As planned"})]
    if r.looked(Look.BAROMETER) is not None:
        rows.append(("way barometer", "Barometer", {"sheet": "As on the sheet", "read": "As read here"}))
    if weighed_flow(r) is not None:
        rows.append(("way flow", "Sample flow", {"planned": "As planned", "weighed": "As weighed"}))
    if second_shift(r) is not None:
        rows.append(("way second", "Exhaust thermometer", {"first": "The first", "second": "The second one"}))
    places = [place for _ in range(0, len(rows), 3) for place in st.columns(3, gap="medium")]
    for place, (key, label, options) in zip(places, rows, strict=False):
        place.selectbox(label, list(options), key=key, format_func=options.get)


def _other(basis: str) -> str:
    return "absolute" if basis == "gauge" else "gauge"


# ---- the verdict


def show(r: Rehearsal, put: Callable[[Rehearsal | None], None]) -> None:
    """The verdict, what the faults cost, what was missed; and what to take along."""
    units = session.units()
    verdict = verdict_of(r, st.session_state.get("rehearsal way"))
    with st.container(border=True, key="rehearsal-verdict"):
        st.markdown(f"### {escaped(headline(verdict))}")
        st.markdown(escaped(truth(verdict).text(units)))
        st.markdown(escaped(judged(verdict, r).text(units)))
        st.caption("The sampling itself was simulated as perfect; at a real line it is often the largest doubt.")
    _listed("What the hidden faults cost", [cost(c).text(units) for c in verdict.costs])
    _listed("What was missed, or out of order", [said.text(units) for said in verdict.lessons])
    with st.container(horizontal=True):
        st.button("Another rehearsal", key="another rehearsal", type="primary", on_click=put, args=(None,))
        st.button("The same rig again", key="same rig again", on_click=put, args=(practice.begin(r.scenario),))
        st.button("Go on with this one", key="go on rehearsing", on_click=put, args=(replace(r, stated=None),))
        if r.readings:
            st.button("Take the readings into the case", key="rehearsal into case", on_click=session.change,
                      args=(typed(r),),
                      help="The open case becomes that of the rehearsal, with its readings typed in. Undo brings it "
                           "back.")
            st.download_button("Save the readings as a log", _log(r), "rehearsal.csv", "text/csv", key="rehearsal log",
                               on_click="ignore")
    with st.expander("Everything that was done and seen"):
        st.table([{"Time": when, "What": escaped(what), "Seen": escaped(seen)}
                  for when, what, seen in journal(r, units)])
    with st.expander("Hand it in: a link that opens the rehearsal with its verdict"):
        st.code(address_of(to_link(r)), language=None, wrap_lines=True)


def _listed(title: str, lines: list[str]) -> None:
    if lines:
        st.markdown(f"**{title}**\n" + "\n".join(f"- {escaped(line)}" for line in lines))


def _log(r: Rehearsal) -> str:
    """The sets of readings as a log, as any logger would have written them."""
    target, times = io.StringIO(), np.array(r.readings, dtype=float)
    channels = channels_of(r.course, times, r.rig.sheet.p_barometer)
    write_log(target, channels, time=times, basis=basis_of(r.rig))
    return target.getvalue()
