"""The choice of the method, and the entries that only one of them needs."""

from __future__ import annotations

import streamlit as st

from engine.calorimeter import MassBasis
from engine.job.assessment.methods_said import METHODS
from engine.job.case.fields_modes import BY_MASS, BY_VOLUME, ELECTRIC, NOT_STATED, SEPARATING
from engine.job.case.fields_path import EXPECTED
from engine.screen import entries, session

WATER = {BY_MASS: "By its mass", BY_VOLUME: "By its volume and temperature"}
BASES = {NOT_STATED: "Not stated yet", MassBasis.THROTTLED: "Throttled steam, condensed",
         MassBasis.TOTAL: "All that was collected, the drained water in it"}


def choose() -> None:
    """Throttling alone, behind a separator, or electric superheating."""
    entries.choice("mode", METHODS, horizontal=True)


def main_entries() -> tuple[str, str, str]:
    """The three entries that decide the answer, for the sliders."""
    case = session.case()
    asked = case["question"] == EXPECTED
    if case["mode"] == ELECTRIC:
        return "p_line", "power", "wetness" if asked else "T_heater"
    return "p_line", "p_exhaust", "wetness" if asked else "T_exhaust"


def tolerances() -> tuple[str, ...]:
    """What is to be stated of a separator's or a heater's readings, for their uncertainty."""
    return {SEPARATING: ("water_tolerance", "weighed_tolerance", "vessel_loss_tolerance"),
            ELECTRIC: ("power_tolerance", "power_loss_tolerance")}.get(session.case()["mode"], ())


def entries_of_method(*, planning: bool = False) -> None:
    """What a separator or a heater brings; nothing for throttling alone. A plan needs no readings."""
    case = session.case()
    if case["mode"] == SEPARATING:
        with st.container(border=True, key="method entries"):
            _separator(planning or case["question"] == EXPECTED)
    elif case["mode"] == ELECTRIC:
        with st.container(border=True, key="method entries"):
            _heater()


def _separator(planning: bool) -> None:
    case = session.case()
    if planning:
        share, at, vessel = st.columns(3, gap="medium")
        with share:
            entries.number("water_share")
        with at:
            entries.pressure("p_separator")
        with vessel:
            entries.number("vessel_loss")
        return
    water, weighed, vessel = st.columns(3, gap="medium")
    with water:
        entries.choice("water_by", WATER)
        if case["water_by"] == BY_MASS:
            entries.number("water_mass")
        else:
            entries.number("water_volume")
            entries.number("T_water")
    with weighed:
        entries.choice("weighed_basis", BASES)
        entries.number("weighed_mass")
    with vessel:
        entries.pressure("p_separator")
        entries.number("vessel_loss")


def _heater() -> None:
    flow, after, loss = st.columns(3, gap="medium")
    with flow:
        entries.number("sample_flow")
    with after:
        entries.pressure("p_heater")
    with loss:
        entries.number("power_loss")
