"""The Rig page: what each part of the rig does to the quality, ranked; then the numbers behind it."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import streamlit as st

from engine.job.assessment.cautions import SHORT
from engine.job.assessment.tables import as_csv
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL
from engine.job.case.fields_rig import BARE, COMPUTED, ELECTRIC_PROBE, MERCURY, OPEN_AIR, ORGANIC, VESSEL, WEIGHED
from engine.job.rig import RigAssessment
from engine.job.rig.offers import Offer, offers
from engine.job.rig.tables import (
    comparison_rows,
    effect_rows,
    exhaust_rows,
    exhaust_words,
    flow_rows,
    flow_words,
    gauge_rows,
    geometry_words,
    headline,
    left_words,
    loss_rows,
    loss_words,
    nozzle_rows,
    nozzle_words,
    thermometer_rows,
    thermometer_words,
    warming_rows,
)
from engine.job.uncertainty.forecast_words import budget_rows, forecast_advice, forecast_headline
from engine.screen import entries, live, session
from engine.screen.charts.diagram import Diagram
from engine.screen.charts.forecast import budget_diagram
from engine.screen.charts.ranking import ranking_diagram
from engine.screen.charts.rig_curves import flow_diagram, sampling_diagram, warm_up_diagram
from engine.screen.instrument_entries import instruments
from engine.screen.pages.path import LOSSES
from engine.screen.rigs import expected_of, rig_of
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError

LAGGING = {"dry": "Dry", "wet": "Wet", BARE: "Bare"}


def page() -> None:
    """What matters most first, then the ranking beside the entries, then each part of the rig."""
    top = st.container(key="rig_answer", border=True)
    rig = _assessment(top)
    ranking, typed = st.columns([6, 5], gap="large")
    with typed:
        _entries(rig)
    if rig is None:
        return
    units = session.units()
    with ranking:
        if rig.sized:
            live.show((ranking_diagram(rig, units),), key="rig ranking", height=540, columns=1)
        _unsized(rig)
    _every_effect(rig)
    st.caption(SHORT)
    for section in (_flow, _exhaust, _nozzle, _heat, _thermometer, _warm_up, _forecast, _comparison):
        section(rig)


def _assessment(place) -> RigAssessment | None:
    """The rig of the open case; where that cannot be used at all, the refusal and the last rig that could be."""
    try:
        rig = st.session_state["last good rig"] = rig_of(session.case())
    except InputError as error:
        with place:
            st.error(escaped_lines(str(error)))
            st.caption("Nothing is lost: correct the entry, or undo. What follows is the last usable case.")
        return st.session_state.get("last good rig")
    with place:
        st.markdown(f"### {escaped(headline(rig))}")
        if words := left_words(rig):
            st.markdown(escaped(words))
        if rig.notes:
            st.warning(escaped_lines("\n".join(rig.notes)))
        if aside := rig.point.aside:
            st.error(escaped_lines("Left out, since it cannot be used:\n" + "\n".join(map(str, aside))))
    return rig


# ---- what is entered


def _entries(rig: RigAssessment | None) -> None:
    offered = offers(rig, session.units()) if rig is not None else ()
    parts: dict[str, tuple[str, Callable[[], None]]] = {
        "orifice": ("Orifice and flow", _orifice_entries), "exhaust": ("Exhaust", _exhaust_entries),
        "nozzle": ("Nozzle and line", _nozzle_entries), "heat": ("Heat", _heat_entries),
        "thermometer": ("Thermometer", _thermometer_entries), "warm-up": ("Warm-up", _warm_up_entries)}
    tabs = st.tabs([title for title, _ in parts.values()], key="rig parts")
    for tab, (part, (_, draw)) in zip(tabs, parts.items(), strict=True):
        with tab:
            draw()
            _offers([o for o in offered if o.section == part])


def _offers(offered: Sequence[Offer]) -> None:
    for o in offered:
        st.button(o.label, key=f"offer {o.key}", on_click=session.take, kwargs=dict(o.changes), width="stretch",
                  help="Writes it into the case. Undo brings back what stood there.")


def _grid(*draw: Callable[[], None]) -> None:
    """Entries in two columns, in reading order; one below the other on a phone."""
    for pair in (draw[i:i + 2] for i in range(0, len(draw), 2)):
        for column, one in zip(st.columns(2), pair, strict=False):
            with column:
                one()


def _number(name: str, step: float | None = None) -> Callable[[], None]:
    return lambda: entries.number(name, step=step)


def _choice(name: str, words: dict[str, str]) -> Callable[[], None]:
    return lambda: entries.choice(name, words)


def _orifice_entries() -> None:
    _grid(_number("bore"), _number("discharge"), _number("sample_flow"),
          _choice("flow_source", {WEIGHED: "Weighed", COMPUTED: "Computed from the orifice"}), _number("wanted_flow"))


def _exhaust_entries() -> None:
    _grid(_number("exhaust_bore"), _number("exhaust_length"), _number("elbows", 1.0), _number("tees", 1.0),
          _number("loss_coefficient", 0.5), _number("roughness"), _number("kinetic_error"),
          _choice("exhaust_to", {OPEN_AIR: "Open air", VESSEL: "A vessel or condenser"}))
    if session.case()["exhaust_to"] == VESSEL:
        entries.pressure("p_discharge")


def _nozzle_entries() -> None:
    _grid(_number("line_flow"), _number("pipe_bore"), _number("line_velocity"), _number("ports", 1.0),
          _number("port_bore"), _number("drop_diameter"), _number("wall_film"), _number("drip_flow"))


def _heat_entries() -> None:
    case = session.case()
    by = {BY_CONDUCTANCE: "conductance", BY_KG: "heat_loss", BY_NORMAL: "T_normal"}.get(case["heat_loss_method"])
    _grid(_choice("heat_loss_method", LOSSES), *([_number(by)] if by else []), _number("T_ambient"),
          _choice("outer_air", {}))
    st.caption("Body, from the orifice to the thermometer")
    _grid(_number("body_length"), _choice("lagging_state", LAGGING), _number("body_outer_diameter"),
          _number("body_inner_diameter"), _number("lagging"))
    st.caption("Sampling line, from the tapping to the orifice")
    _grid(_number("sampling_length"), _choice("sampling_lagging", LAGGING), _number("sampling_outer_diameter"),
          _number("line_bore"))
    st.caption("The same steam read at a second flow")
    _grid(_number("second_flow"), _number("T_second"))
    entries.pressure("p_second")


def _thermometer_entries() -> None:
    kinds = {ELECTRIC_PROBE: "Electric", MERCURY: "Mercury in glass", ORGANIC: "Organic liquid in glass"}
    glass = [] if session.case()["thermometer"] == ELECTRIC_PROBE else [_number("exposed"), _number("T_stem")]
    _grid(_choice("thermometer", kinds), _number("immersion"), _number("probe_outer_diameter"),
          _number("probe_inner_diameter"), _number("T_head"), _number("T_wall"), _number("recovery"), *glass)


def _warm_up_entries() -> None:
    _grid(_number("body_mass"), _number("T_start"), _number("warmup_error"), _number("duration"))
    st.caption("Length and inner diameter of the body stand under Heat.")


# ---- what follows from it


def _unsized(rig: RigAssessment) -> None:
    if rig.unsized:
        lines = (f"- **{e.name}**: {escaped(e.trouble)}" for e in rig.unsized)
        st.markdown("\n".join(["○ Not sized yet", "", *lines]))


def _every_effect(rig: RigAssessment) -> None:
    rows = effect_rows(rig, session.units())
    with st.expander("Every effect with its cause"):
        st.table(rows)
        st.download_button("Save the effects as CSV", as_csv(rows), "effects.csv", "text/csv", key="effects csv",
                           on_click="ignore")


def _rows(rows: Sequence[tuple[str, str]]) -> None:
    st.table([{"Quantity": label, "Value": value} for label, value in rows])


def _section(title: str, rows: Sequence[tuple[str, str]], trouble: str, words: str = "",
             diagram: Diagram | None = None, otherwise: str = "") -> None:
    """A part of the rig: its numbers and a sentence on the left, its picture on the right."""
    st.subheader(title, anchor=False)
    left, right = st.columns([4, 5], gap="large")
    with left:
        if words:
            st.markdown(escaped(words))
        if rows:
            _rows(rows)
        if trouble:
            st.caption(escaped(trouble))
    with right:
        if diagram is not None:
            live.show((diagram,), key=f"rig {diagram.key}", height=360, columns=1)
        elif otherwise:
            st.caption(otherwise)


def _flow(rig: RigAssessment) -> None:
    units = session.units()
    _section("Orifice and flow", flow_rows(rig, units), rig.flow.trouble, flow_words(rig, units),
             flow_diagram(rig, units), "With the orifice described, its flow over the bore is drawn here.")


def _exhaust(rig: RigAssessment) -> None:
    units = session.units()
    st.subheader("Exhaust and gauges", anchor=False)
    left, right = st.columns([5, 4], gap="large")
    with left:
        if words := exhaust_words(rig, units):
            st.markdown(escaped(words))
        if rows := exhaust_rows(rig, units):
            _rows(rows)
        trouble = rig.exhaust.value.pipe.trouble if rig.exhaust else rig.exhaust.trouble
        if trouble:
            st.caption(escaped(trouble))
    with right:
        _rows(gauge_rows(rig, units))


def _nozzle(rig: RigAssessment) -> None:
    units = session.units()
    trouble = rig.nozzle.value.entry.trouble if rig.nozzle else rig.nozzle.trouble
    _section("Nozzle and line", nozzle_rows(rig, units), trouble, nozzle_words(rig, units),
             sampling_diagram(rig, units), "With line and ports described, the sampling error is drawn here.")


def _heat(rig: RigAssessment) -> None:
    units = session.units()
    st.subheader("Heat loss, every way side by side", anchor=False)
    st.table(loss_rows(rig, units))
    st.markdown(escaped(" ".join(words for words in (loss_words(rig), geometry_words(rig, units)) if words)))


def _thermometer(rig: RigAssessment) -> None:
    units = session.units()
    st.subheader("Thermometer", anchor=False)
    if words := thermometer_words(rig, units):
        st.markdown(escaped(words))
    st.table(thermometer_rows(rig, units))


def _warm_up(rig: RigAssessment) -> None:
    units = session.units()
    _section("Warm-up and steam used", warming_rows(rig, units), rig.warming.trouble,
             diagram=warm_up_diagram(rig, units), otherwise="With the body described, its warm-up is drawn here.")


def _forecast(rig: RigAssessment) -> None:
    """How sure the quality will be with the instruments chosen, before anyone climbs a ladder."""
    units = session.units()
    st.subheader("Uncertainty to expect", anchor=False)
    try:
        expected = expected_of(rig.point.case)
    except InputError as error:
        st.caption(escaped_lines(str(error)))
        expected = None
    if expected is not None:
        st.markdown(f"**{escaped(forecast_headline(expected))}** "
                    + " ".join(escaped(line) for line in forecast_advice(expected)))
    with st.expander("Instruments, and what else is in doubt", expanded=expected is None or bool(expected.missing)):
        instruments()
    if expected is None or (diagram := budget_diagram(expected)) is None:
        return
    left, right = st.columns([5, 6], gap="large")
    with left:
        live.show((diagram,), key="rig budget", height=460, columns=1)
    with right:
        st.table(budget_rows(expected, units))


def _comparison(rig: RigAssessment) -> None:
    named = [("open", rig)]
    for name, case in session.pinned():
        try:
            named.append((name, rig_of(case)))
        except InputError:
            continue
    if len(named) > 1:
        st.subheader("Side by side", anchor=False)
        st.table(comparison_rows(named, session.units()))


if __name__ == "__main__":
    page()
