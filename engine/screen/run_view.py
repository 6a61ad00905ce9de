"""One run on the page: its channels, the window that counts, readings that lie apart, means, corrections."""

from __future__ import annotations

from collections.abc import Callable

import streamlit as st

from engine.job.result import Result
from engine.job.result.decisions import (
    window_row,
    with_removed,
    with_switch,
    with_window,
    without_removed,
    without_window,
)
from engine.job.result.reduction import RunResult
from engine.job.result.said import (
    channel_rows,
    correction_rows,
    drift_text,
    flagged,
    outlier_rows,
    unsettled_lines,
    upper_first,
)
from engine.screen import live, session
from engine.screen.charts.readings import run_diagram
from engine.screen.style import escaped, escaped_lines, legend
from engine.steam.units import to_si

ALL, WINDOW = "All of the run", "The window used"
AT_ONCE = 5  # rows of a table of readings that lie apart
LONGEST, BY_HAND = "The longest settled window", "By hand"
MOST_OFFERED = 6  # settled stretches to choose among by hand
LEGEND = (("green", "solid", "settled stretches, shaded"), ("blue", "solid", "frame: the window used"),
          ("text", "dotted", "saturation at the exhaust"), ("vermilion", "solid", "quality of every row"),
          ("blue", "solid", "line: quality of the means, band ± U"), ("pink", "solid", "× lies apart, ○ left out"))


def run_view(run: RunResult, result: Result) -> None:
    """Everything about one run, its picture first."""
    units = session.units()
    if run.unable:
        st.warning(escaped(run.unable))
    shown = st.segmented_control("Show", (ALL, WINDOW), key="part of the run shown", default=ALL, required=True,
                                 label_visibility="collapsed")
    live.show((run_diagram(run, result, units, window=shown == WINDOW),), key=f"channels {run.run.name}", height=620,
              columns=1)
    legend(LEGEND)
    if run.run.start:
        st.caption(f"The readings start at {escaped(run.run.start)}.")
    if run.cautions:
        st.info(escaped_lines("\n".join(f"{upper_first(line)}." for line in run.cautions)))
    left, right = st.columns(2, gap="large")
    with left:
        st.markdown("**Window**")
        _window(run)
    with right:
        st.markdown("**Readings that lie apart**")
        _apart(run)
    if run.means:
        st.markdown("**Channels over the window used**")
        st.table([{k: escaped(v) for k, v in row.items()} for row in channel_rows(run, units)])


# ---- the window


def _window(run: RunResult) -> None:
    name, chosen = run.run.name, window_row(session.case(), run.run.name)
    if run.run.time is None:
        st.caption("No time was recorded: every set of readings counts, and nothing can be said of a trend.")
        return
    key = f"window of {name}"
    session.mirror(key, BY_HAND if chosen else LONGEST)
    st.segmented_control("Window", (LONGEST, BY_HAND), key=key, required=True, label_visibility="collapsed",
                         on_change=_window_kind(run, key))
    if chosen:
        _by_hand(run, chosen)
    for line in unsettled_lines(run, session.units()):
        st.caption("Not settled, " + escaped(line))
    if drift := drift_text(run):
        st.caption(escaped(drift))


def _window_kind(run: RunResult, key: str) -> Callable[[], None]:
    def changed() -> None:
        case, name = session.case(), run.run.name
        if st.session_state[key] == LONGEST:
            session.change(without_window(case, name))
        else:  # start from what is used, else from all of the run
            begin = run.settling.begin if run.settling.begin is not None else float(run.run.time[0])
            end = run.settling.end if run.settling.end is not None else float(run.run.time[-1])
            session.change(with_window(case, name, begin, end))
    return changed


def _by_hand(run: RunResult, chosen) -> None:
    name, first, last = run.run.name, float(run.run.time[0]) / 60, float(run.run.time[-1]) / 60
    begin, end = (to_si(chosen[n].value, chosen[n].unit, "time") / 60 for n in ("begin", "end"))
    keys = {part: f"{part} of the window of {name}" for part in ("begin", "end", "reason")}

    def changed() -> None:
        state = st.session_state
        low, high = (state[keys[part]] for part in ("begin", "end"))
        session.change(with_window(session.case(), name, 60 * (begin if low is None else low),
                                   60 * (end if high is None else high), state[keys["reason"]] or ""))

    for place, part, value in zip(st.columns(2), ("begin", "end"), (begin, end), strict=True):
        session.mirror(keys[part], value)
        place.number_input("From, min" if part == "begin" else "To, min", value=None, step=1.0, format="%.7g",
                           key=keys[part], on_change=changed)
    _settled_stretches(run, chosen["reason"])
    session.mirror(keys["reason"], chosen["reason"])
    st.text_input("Reason for this window", key=keys["reason"], max_chars=300, on_change=changed,
                  placeholder="needed: what was known of the plant")
    st.caption(f"The run lasts from {first:.4g} to {last:.4g} min.")


def _settled_stretches(run: RunResult, reason: str) -> None:
    """The longest settled stretches, each a click away."""
    stretches = sorted(run.settling.found, key=lambda i: i.begin - i.end)[:MOST_OFFERED]
    if not stretches:
        return
    st.caption("Settled stretches found:")
    with st.container(horizontal=True):
        for k, one in enumerate(sorted(stretches, key=lambda i: i.begin)):
            st.button(f"{one.begin / 60:.1f} to {one.end / 60:.1f} min", key=f"stretch {k} of {run.run.name}",
                      on_click=_take_stretch, args=(run.run.name, one.begin, one.end, reason))


def _take_stretch(name: str, begin: float, end: float, reason: str) -> None:
    session.change(with_window(session.case(), name, begin, end, reason))


# ---- outliers


def _apart(run: RunResult) -> None:
    units, name = session.units(), run.run.name
    shown, count = flagged(run, units)
    if rows := outlier_rows(run, units):
        rows = [{k: escaped(v) for k, v in row.items()} for row in rows]
        st.table(rows[:AT_ONCE])
        if len(rows) > AT_ONCE:
            with st.expander(f"{len(rows) - AT_ONCE} more that lie apart"):
                st.table(rows[AT_ONCE:])
    if count > len(shown):
        st.caption(f"{count - len(shown)} more are flagged and not listed.")
    if not count:
        st.caption("None of the readings lies apart by either test.")
    else:
        st.caption("Tau flags one good reading in twenty; neither test removes anything. Leave a row out only for a "
                   "physical reason.")
    key = f"rows left out of {name}"
    options = sorted({f.row for f in shown} | set(run.removed))
    session.mirror(key, sorted(run.removed))
    st.multiselect("Rows left out", options, key=key, on_change=_left_out(run, key), placeholder="none",
                   format_func=lambda row: f"row {row}")
    for row, reason in run.removed.items():
        field = f"reason for row {row} of {name}"
        session.mirror(field, reason)
        st.text_input(f"Reason for leaving out row {row}", key=field, max_chars=300,
                      placeholder="needed: until then the row counts", on_change=_with_reason(name, row, field))
    scatter = run.scatter
    if scatter is not None and scatter.without is not None:
        st.caption(f"Mean of the rows {scatter.mean:.5f}; with those left out it was {scatter.without:.5f}.")


def _left_out(run: RunResult, key: str) -> Callable[[], None]:
    def changed() -> None:
        case, name, wanted = session.case(), run.run.name, set(st.session_state[key])
        for row in wanted - set(run.removed):
            case = with_removed(case, name, row)
        for row in set(run.removed) - wanted:
            case = without_removed(case, name, row)
        session.change(case)
    return changed


def _with_reason(name: str, row: int, key: str) -> Callable[[], None]:
    def changed() -> None:
        session.change(with_removed(session.case(), name, row, st.session_state[key]))
    return changed


# ---- corrections


def corrections(run: RunResult) -> None:
    """Corrections one by one: a switch, what it adds to the reading and to the quality, and why it is off."""
    if not run.corrections:
        st.caption("This case has no correction to make: none was entered.")
        return
    st.caption("Each with what it adds to the reading, and to the quality; in brackets what it would add.")
    for correction, row in zip(run.corrections, correction_rows(run, session.units()), strict=True):
        name = correction.name
        switch, size, reason = st.columns((3, 6, 5), vertical_alignment="center")
        key, words = f"switch {name}", f"why {name} is off"
        session.mirror(key, correction.on)
        switch.toggle(upper_first(name), key=key, on_change=_switched(name, key))
        adds = f"{row['Adds to the reading']}, {row['Adds to the quality']}"
        size.markdown(escaped(adds if correction.on else f"({adds})"))
        if not correction.on:
            session.mirror(words, correction.reason)
            reason.text_input(f"Why {name} is off", key=words, max_chars=300, label_visibility="collapsed",
                              placeholder="needed: why it is switched off", on_change=_off_because(name, words))


def _switched(name: str, key: str) -> Callable[[], None]:
    def changed() -> None:
        session.change(with_switch(session.case(), name, off=not st.session_state[key]))
    return changed


def _off_because(name: str, key: str) -> Callable[[], None]:
    def changed() -> None:
        session.change(with_switch(session.case(), name, off=True, reason=st.session_state[key]))
    return changed
