"""Entries of the instruments: only those that the chosen kind of instrument asks for."""

from __future__ import annotations

import streamlit as st

from engine.job.case.fields_instruments import CERTIFICATE, LIMIT
from engine.job.case.fields_modes import NOT_STATED
from engine.screen import entries, methods, session

_WORDS = {NOT_STATED: "Not stated", LIMIT: "± limit", CERTIFICATE: "Certificate"}


def instruments() -> None:
    """The instruments by channel, then what is not an instrument's: heat loss, recovery, sampling."""
    columns = st.columns(4, gap="medium")
    with columns[0]:
        _instrument("line_gauge", gauge=True)
    with columns[1]:
        _instrument("exhaust_gauge", gauge=True)
    with columns[2]:
        _instrument("thermometer")
        _instrument("barometer")
    with columns[3]:
        _instrument("flow_meter")
        for name in ("heat_loss_tolerance", "recovery_tolerance", *methods.tolerances()):
            entries.number(name)
        entries.choice("sampling_kind", _WORDS)
        if session.case()["sampling_kind"] != NOT_STATED:
            entries.number("sampling")


def _instrument(stem: str, *, gauge: bool = False) -> None:
    entries.choice(f"{stem}_kind", _WORDS)
    kind = session.case()[f"{stem}_kind"]
    if kind == NOT_STATED:
        return
    if kind in (LIMIT, CERTIFICATE):
        _numbers(stem, "U")
        if kind == CERTIFICATE:
            _numbers(stem, "k")
    else:
        entries.words(f"{stem}_grade")
        if gauge:
            _numbers(stem, "low", "high")
    if stem != "flow_meter":
        _numbers(stem, "resolution")
    if stem not in ("flow_meter", "barometer"):
        _numbers(stem, "other")
    if gauge:
        entries.choice(f"{stem}_shows", {})


def _numbers(stem: str, *items: str) -> None:
    for item in items:
        entries.number(f"{stem}_{item}")
