"""Widgets that show one entry of the case and write it back as entered."""

from __future__ import annotations

from dataclasses import replace
from math import isfinite
from typing import NamedTuple

import streamlit as st

from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.screen import session

BASES = ("gauge", "absolute")
WIDGETS = ("slide ", "exact ", "basis ", "choice ", "words ")  # how the keys of the widgets here begin


class Range(NamedTuple):
    """Ends and step of a slider, per unit. They are for dragging; what is allowed the case decides."""

    low: float
    high: float
    step: float


SLIDERS: dict[str, dict[str, Range]] = {
    "p_line": {"bar": Range(0.5, 165.0, 0.1), "psi": Range(5.0, 2390.0, 1.0)},
    "p_exhaust": {"bar": Range(0.05, 4.0, 0.005), "psi": Range(0.5, 60.0, 0.1)},
    "T_exhaust": {"°C": Range(40.0, 220.0, 0.1), "°F": Range(100.0, 430.0, 0.2)},
    "wetness": {"%": Range(0.0, 15.0, 0.05)},
    "T_heater": {"°C": Range(60.0, 400.0, 0.1), "°F": Range(140.0, 750.0, 0.2)},
    "power": {"W": Range(0.0, 5000.0, 1.0)},
}
_STEPS = {"bar": 0.01, "psi": 0.1, "°C": 0.1, "°F": 0.1, "%": 0.01, "1": 0.01, "mm": 0.1, "in": 0.01, "kPa": 0.1,
          "inHg": 0.01, "m": 0.1, "ft": 0.1, "m/s": 0.5, "ft/s": 1.0, "kg/h": 0.1, "lb/h": 0.1, "W/K": 0.01,
          "Btu/(h °F)": 0.01, "kJ/kg": 0.1, "Btu/lb": 0.1, "K": 0.5,
          "W": 1.0, "%pt": 0.01, "kg": 0.01, "lb": 0.01, "L": 0.01, "in³": 1.0,
          "µm": 1.0, "t/h": 0.1, "min": 1.0}


def slider(name: str) -> None:
    """A slider with an exact entry below it, and for pressures the choice of gauge or absolute."""
    entry, unit = session.shown_entry(name), session.display_unit(name)
    span = SLIDERS[name][unit]
    key = f"slide {name} {unit}"
    basis_now = entry.basis if entry is not None else ""
    session.mirror(key, span.low if entry is None else min(max(entry.value, span.low), span.high))
    marked = ", ".join(filter(None, (FIELDS[name].label, f"{unit} {basis_now}".strip())))
    st.slider(marked, span.low, span.high, step=span.step, format="%g", key=key,
              on_change=session.callback(name, key, lambda v: Entry(v, unit, basis_now)))
    if basis_now:
        with st.container(horizontal=True, vertical_alignment="bottom"):
            number(name, label_hidden=True)
            basis(name)
    else:
        number(name, label_hidden=True)


def number(name: str, *, help: str | None = None, label_hidden: bool = False,
           step: float | None = None) -> None:
    """An exact entry, in the reader's units; empty where the case has nothing and needs nothing."""
    field, entry, unit = FIELDS[name], session.shown_entry(name), session.display_unit(name)
    key = f"exact {name} {unit}"
    named = f"{field.label}, {unit}" if unit != "1" else field.label
    # a pressure typed into an empty entry is meant like that of the line
    like_line = session.case()["p_line"].basis if field.kind == "pressure" else ""
    basis_now = entry.basis if entry is not None else like_line

    def read(value: object) -> Entry | None:
        return field.blank if value is None else Entry(float(value), unit, basis_now)

    session.mirror(key, entry.value if entry is not None and isfinite(entry.value) else None)
    st.number_input(named, value=None, step=step or _STEPS.get(unit, 0.1), format="%.7g", key=key,
                    help=help or field.hint or None, on_change=session.callback(name, key, read),
                    label_visibility="collapsed" if label_hidden else "visible")


def pressure(name: str) -> None:
    """An exact entry of a pressure that may be left empty, and gauge or absolute once there is one."""
    number(name)
    if session.case()[name] is not None:
        basis(name)


def basis(name: str) -> None:
    """Gauge or absolute. Changing it keeps the number and changes its meaning."""
    key = f"basis {name}"
    entry = session.case()[name]
    session.mirror(key, entry.basis)
    st.segmented_control(f"{FIELDS[name].label} is", BASES, key=key, label_visibility="collapsed", required=True,
                         help="Keeps the number typed and changes what it means.",
                         on_change=session.callback(name, key, lambda v: replace(entry, basis=v or entry.basis)))


def choice(name: str, words: dict[str, str], *, horizontal: bool = False) -> None:
    """One of a few choices, in words."""
    field, key = FIELDS[name], f"choice {name}"
    session.mirror(key, session.case()[name])
    if horizontal:
        st.segmented_control(field.label, field.options, key=key, format_func=lambda o: words.get(o, o), required=True,
                             label_visibility="collapsed", on_change=session.callback(name, key, lambda v: v))
    else:
        st.selectbox(field.label, field.options, key=key, format_func=lambda o: words.get(o, o),
                     help=field.hint or None, on_change=session.callback(name, key, lambda v: v))


def words(name: str, *, area: bool = False) -> None:
    """Free words."""
    key = f"words {name}"
    session.mirror(key, session.case()[name])
    widget = st.text_area if area else st.text_input
    widget(FIELDS[name].label, key=key, max_chars=4000 if area else 200,
           on_change=session.callback(name, key, lambda v: v))


def who_and_where():
    """Place, permit, people and instruments in two columns; gives the right one, which has room for more."""
    left, right = st.columns(2, gap="medium")
    with left:
        for name in ("place", "permit", "tested_by", "witnessed_by"):
            words(name)
    with right:
        words("instrument_list", area=True)
    return right
