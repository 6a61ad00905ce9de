"""The Reach page: before the test, can what is expected be read, with what margin, and what would help?"""

from __future__ import annotations

import streamlit as st

from engine.calorimeter import Readability
from engine.job.assessment.cautions import SHORT
from engine.job.assessment.tables import as_csv
from engine.job.case import Case
from engine.job.case.fields_modes import ELECTRIC
from engine.job.reach import ReachAssessment
from engine.job.reach.instrument_chart import InstrumentChart, instrument_chart
from engine.job.reach.map import sections
from engine.job.reach.printable import chart_page, chart_rows, conditions, slopes_said
from engine.job.reach.said import SHAPES, VERDICTS, ladder_rows, percent, said, way_change, way_title
from engine.job.reach.ways import Way
from engine.screen import entries, live, methods, session, style
from engine.screen.charts.reach import instrument_diagram, reach_map_diagram, section_diagrams
from engine.screen.rigs import planned
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError

MAP_LEGEND = (("blue", "solid", "greatest readable wetness, darker where more is read"),
              ("vermilion", "dashed", "where the wettest steam expected is just readable"),
              ("vermilion", "solid", "● this case"), ("green", "solid", "● pinned cases"))
SECTION_LEGEND = (("blue", "solid", "readable"), ("blue", "dashed", "with a comfortable margin"),
                  ("vermilion", "solid", "the expected range, ● this case"))


def page() -> None:
    """Answer first, then what is expected, then the ways out and the pictures."""
    place = st.container(key="answer", border=True)
    _inputs()
    found = _planned(place)
    if found is None:
        return
    plan, ways_out = found
    _ways(plan, ways_out)
    _pictures(plan)
    _ladder(plan)
    _instrument(plan)
    _comparison(plan)
    st.caption(SHORT)


def _inputs() -> None:
    case = session.case()
    methods.choose()
    low, high, line, other = st.columns(4, gap="medium")
    with low:
        entries.number("wetness_low")
    with high:
        entries.number("wetness_high")
    with line:
        entries.pressure("p_line")
    with other:
        if case["mode"] == ELECTRIC:
            entries.number("power")
        else:
            entries.pressure("p_exhaust")
    methods.entries_of_method(planning=True)
    with st.expander("What the reach takes for granted: uncertainties, limits, what is to be had"):
        sure, limits, had = st.columns(3, gap="medium")
    with sure:
        entries.number("U_thermometer")
        entries.number("U_quality")
    with limits:
        entries.number("least_superheat")
        entries.number("comfortable_superheat")
    with had:
        entries.pressure("p_exhaust_lowest")
        if case["mode"] != ELECTRIC:
            entries.number("sample_flow")


def _planned(place) -> tuple[ReachAssessment, tuple[Way, ...]] | None:
    try:
        found = st.session_state["last good reach"] = planned(session.case())
    except InputError as error:
        with place:
            st.error(escaped_lines(str(error)))
            st.caption("Nothing is lost: correct the entry, or undo. What follows is the last usable case.")
        return st.session_state.get("last good reach")
    with place:
        told = said(found[0], session.units())
        st.markdown(f"### {told.shape} {told.headline}")
        st.markdown(" ".join(told.reasons))
        st.caption(" ".join(told.assumed))
    return found


# --- ways out ---------------------------------------------------------------------------------------

def _ways(plan: ReachAssessment, ways_out: tuple[Way, ...]) -> None:
    can = [way for way in ways_out if way.feasible]
    cannot = [way for way in ways_out if not way.feasible]
    if not ways_out:
        return
    what = "Ways to more margin" if plan.verdict is Readability.THIN else "Ways out"
    st.subheader(f"{what}, the least effort first", anchor=False)
    for number, way in enumerate(can, 1):
        _way(number, way, plan)
    if cannot:
        with st.expander(f"What does not help here ({len(cannot)})"):
            st.markdown("\n".join(f"- **{way_title(way, plan, session.units())}.** {way.why_not}" for way in cannot))


def _way(number: int, way: Way, plan: ReachAssessment) -> None:
    with st.container(border=True, key=f"way {way.kind}"):
        words, button = st.columns([5, 2], vertical_alignment="center")
        with words:
            thin = " Even then the margin stays thin." if way.thin else ""
            st.markdown(f"**{number}. {way_title(way, plan, session.units())}.**{thin}")
            st.caption(f"Price: {way.price}")
        if way.case is not None:
            button.button(f"Apply: {way_change(way, plan)}", key=f"apply {way.kind}", width="stretch",
                          on_click=_apply, args=(way, plan))


def _apply(way: Way, plan: ReachAssessment) -> None:
    session.change(way.case)
    st.session_state["notice"] = ("success", f"Applied: {way_change(way, plan)}. Undo takes it back.")


# --- pictures ---------------------------------------------------------------------------------------

def _pictures(plan: ReachAssessment) -> None:
    units = session.units()
    pinned = [(name, other) for name, other in _pinned() if other is not None]
    st.subheader("How far it reaches", anchor=False)
    left, right = st.columns([3, 2], gap="large")
    with left:
        live.show((reach_map_diagram(plan, units, pinned),), key="reach map", height=580, columns=1)
        style.legend(MAP_LEGEND)
    with right:
        live.show(section_diagrams(plan, sections(plan), units), key="reach sections", height=270, columns=1)
        style.legend(SECTION_LEGEND)


def _pinned() -> list[tuple[str, ReachAssessment | None]]:
    """Pinned cases with their reach; None where an entry cannot be used for it."""
    return [(name, _or_none(case)) for name, case in session.pinned()]


def _or_none(case: Case) -> ReachAssessment | None:
    try:
        return planned(case)[0]
    except InputError:
        return None


def _ladder(plan: ReachAssessment) -> None:
    if not any(left is not None for end in (plan.dry, plan.wet) for _, left in end.steps):
        return  # wet all the way down: there is no superheat to follow
    st.subheader("Where the superheat goes", anchor=False)
    st.table(ladder_rows(plan, session.units()))


# --- at the instrument ------------------------------------------------------------------------------

def _instrument(plan: ReachAssessment) -> None:
    units = session.units()
    chart = instrument_chart(plan, units)
    st.subheader("The chart for the instrument", anchor=False)
    st.markdown(escaped(conditions(plan, units)))
    left, right = st.columns([3, 2], gap="large")
    with left:
        live.show((instrument_diagram(plan, chart, units),), key="instrument", height=430, columns=1)
        if chart.T.size:
            st.caption(" ".join(slopes_said(chart)))
    with right:
        _table(plan, chart)


def _table(plan: ReachAssessment, chart: InstrumentChart) -> None:
    units = session.units()
    paper = "A4" if units.name == "SI" else "Letter"
    with st.container(horizontal=True):
        st.download_button(f"Chart to print ({paper})", chart_page(plan, chart, units), "instrument-chart.html",
                           "text/html", key="print chart", on_click="ignore")
        if chart.T.size:
            st.download_button("Table as CSV", as_csv(chart_rows(chart)), "instrument-chart.csv", "text/csv",
                               key="chart csv", on_click="ignore")
    if not chart.T.size:
        st.caption("Not even dry steam can be read here, so there is no temperature to read a quality from.")
        return
    with st.expander("The same as a table"):
        st.table(chart_rows(chart))


def _comparison(plan: ReachAssessment) -> None:
    others = _pinned()
    if not others:
        return
    units = session.units()

    columns = ("Verdict", "Wetness expected", "Reads up to", "Superheat left at the wet end")

    def row(p: ReachAssessment | None) -> dict[str, str]:
        if p is None:
            return dict(zip(columns, ("✕ an entry cannot be used", "", "", ""), strict=True))
        cells = (f"{SHAPES[p.verdict]} {VERDICTS[p.verdict]}",
                 f"{100 * p.dry.wetness:.2f} to {percent(p.wet.wetness)}",
                 percent(p.wetness_most) if p.wetness_most > 0 else "nothing",
                 units.text(p.wet.margin, "difference") if p.wet.superheat > 0 else "wet")
        return dict(zip(columns, cells, strict=True))

    st.subheader("Side by side", anchor=False)
    st.table([{"Case": name, **row(p)} for name, p in [("open", plan), *others]])


if __name__ == "__main__":
    page()
