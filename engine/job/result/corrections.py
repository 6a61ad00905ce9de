"""From what the instruments showed to what was there, one correction at a time, each on or off.

Every correction is a step that can be left out; its size in the quality is the difference that
leaving it out makes, all others standing.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import NamedTuple

import numpy as np

from engine.calorimeter import StemLiquid, stem_error
from engine.job.assessment.balance import Balance, balance_of
from engine.job.assessment.separation import stage_of
from engine.job.assessment.terms import two_flow_conductance
from engine.job.case import GAUGE, Case, Resolved
from engine.job.case.fields_modes import SEPARATING
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_NORMAL, BY_READING, BY_TWO_FLOWS, NONE, READING, UNDECIDED
from engine.job.case.fields_readings import (
    BAROMETER,
    BAROMETER_CERTIFICATE,
    CORRECTIONS,
    EXHAUST_CERTIFICATE,
    HEAT_LOSS,
    KINETIC,
    LEG,
    LINE_CERTIFICATE,
    STEM,
    THERMOMETER_CERTIFICATE,
)
from engine.job.case.fields_rig import MERCURY, ORGANIC
from engine.job.case.rows import Entry
from engine.job.uncertainty import leg_pressure
from engine.job.uncertainty.method_doubts import SeparatedBalance
from engine.steam.units import P_STANDARD, from_si, to_si

_LIQUIDS = {MERCURY: StemLiquid.MERCURY, ORGANIC: StemLiquid.ORGANIC}
_CERTIFICATES = {LINE_CERTIFICATE: "line_gauge_correction", EXHAUST_CERTIFICATE: "exhaust_gauge_correction",
                 BAROMETER_CERTIFICATE: "barometer_correction", THERMOMETER_CERTIFICATE: "thermometer_correction"}
_ON = {LINE_CERTIFICATE: "p_line", EXHAUST_CERTIFICATE: "p_exhaust", BAROMETER_CERTIFICATE: "p_barometer",
       THERMOMETER_CERTIFICATE: "T_exhaust", STEM: "T_exhaust", BAROMETER: "p_line", LEG: "p_line"}


class Shown(NamedTuple):
    """Readings as shown, SI: single values or arrays of one length. ``basis`` says of ``p_line`` and
    ``p_exhaust`` whether the gauge shows gauge or absolute pressure."""

    p_line: float | np.ndarray
    p_exhaust: float | np.ndarray
    T_exhaust: float | np.ndarray
    p_barometer: float | np.ndarray
    sample_flow: float | np.ndarray | None
    T_ambient: float | np.ndarray | None
    basis: Mapping[str, str]


class Corrected(NamedTuple):
    """The same corrected: pressures absolute, ``p_line`` at the tapping; ``T_normal`` for the normal reading."""

    p_line: float | np.ndarray
    p_exhaust: float | np.ndarray
    T_exhaust: float | np.ndarray
    p_barometer: float | np.ndarray
    sample_flow: float | np.ndarray | None
    T_ambient: float | np.ndarray | None
    T_normal: float | None


class Correction(NamedTuple):
    """One correction as applied, or as it would be.

    ``size`` is what it adds to ``quantity`` [SI, of ``kind``]; ``effect`` what it adds to the quality,
    None where there is none to compare; ``reason`` why it was switched off.
    """

    name: str
    on: bool
    reason: str
    quantity: str
    kind: str
    size: float
    effect: float | None


def switched_off(case: Case) -> dict[str, str]:
    """Corrections that a person switched off, with the reason."""
    return {row["correction"]: row["reason"].strip() for row in case["switched_off"]}


def corrected(case: Case, si: Resolved, shown: Shown, off: Mapping[str, str] | set[str]) -> Corrected:
    """All corrections of the readings but those ``off``."""
    def certificate(name: str) -> float:
        return 0.0 if name in off else si[_CERTIFICATES[name]] or 0.0

    p_air = P_STANDARD + 0.0 * shown.p_barometer if BAROMETER in off else (
        shown.p_barometer + certificate(BAROMETER_CERTIFICATE))
    air = {name: p_air if shown.basis[name] == GAUGE else 0.0 for name in ("p_line", "p_exhaust")}
    leg = 0.0 if LEG in off else leg_pressure(si)
    offset = certificate(THERMOMETER_CERTIFICATE)

    def temperature(T):
        T = T + offset
        return T if STEM in off else T - _stem(case, si, T)

    T_normal = temperature(si["T_normal"]) if case["heat_loss_method"] == BY_NORMAL else None
    return Corrected(shown.p_line + certificate(LINE_CERTIFICATE) + air["p_line"] - leg,
                 shown.p_exhaust + certificate(EXHAUST_CERTIFICATE) + air["p_exhaust"],
                 temperature(shown.T_exhaust), p_air, shown.sample_flow, shown.T_ambient, T_normal)


def _stem(case: Case, si: Resolved, T):
    """Error of the emergent stem [K]; 0 for thermometers without one, and where it was not described."""
    liquid = _LIQUIDS.get(case["thermometer"])
    if liquid is None or si["exposed"] is None or si["T_stem"] is None:
        return 0.0
    # straight in T, so that rows without a reading stay without one instead of being refused
    per_kelvin = stem_error(si["T_stem"] + 1.0, si["T_stem"], si["exposed"], liquid=liquid)
    return per_kelvin * (T - si["T_stem"])


def balance_without(case: Case, si: Resolved, off: Mapping[str, str] | set[str]) -> Balance:
    """The balance with the terms that are on."""
    return balance_of(*_with_terms(case, si, off))


def model_without(case: Case, si: Resolved, off: Mapping[str, str] | set[str]) -> Callable:
    """The balance up to the line: that of the throttle, and behind a separator what was drained put back."""
    throttled = balance_without(case, si, off)
    if case["mode"] != SEPARATING:
        return throttled
    _, s = stage_of(case, si)
    # a kilogram of sample, of which the drained part is known
    return SeparatedBalance(throttled, s.p / si["p_line"], s.drain_fraction, 1.0, True, s.vessel_loss)


def _with_terms(case: Case, si: Resolved, off) -> tuple[Case, Resolved]:
    if HEAT_LOSS in off:
        case = case.with_(heat_loss_method=NONE)
    if KINETIC in off:
        si = Resolved({**si.si, "line_velocity": None, "exhaust_bore": None}, si.p_barometer)
    return case, si


def reduced(balance: Callable, si: Resolved, true: Corrected) -> tuple[np.ndarray, np.ndarray]:
    """Quality (not cut off at 1) and status of readings, as 1-d arrays."""
    p1, p2, T = np.broadcast_arrays(*(np.atleast_1d(np.asarray(a, float)) for a in true[:3]))
    return balance(p1, p2, T, sample_flow=true.sample_flow, recovery=recovery_of(si), T_normal=true.T_normal,
                   T_ambient=true.T_ambient)


def recovery_of(si: Resolved) -> float:
    return 1.0 if si["recovery"] is None else si["recovery"]


def one_by_one(case: Case, si: Resolved, shown: Shown) -> tuple[Correction, ...]:
    """Every correction that this case has, with its size at one set of readings (means, usually)."""
    off = switched_off(case)
    x = _x(case, si, shown, off)
    found = []
    for name in CORRECTIONS:
        if _present(case, si, shown, name):
            on = name not in off
            other = _x(case, si, shown, {*off, name} if on else {*off} - {name})
            effect = None if np.isnan(x) or np.isnan(other) else (x - other if on else other - x)
            quantity, kind, size = _size(case, si, shown, off, name)
            found.append(Correction(name, on, off.get(name, ""), quantity, kind, size, effect))
    return tuple(found)


def _x(case: Case, si: Resolved, shown: Shown, off) -> float:
    return float(reduced(model_without(case, si, off), si, corrected(case, si, shown, off))[0][0])


def _present(case: Case, si: Resolved, shown: Shown, name: str) -> bool:
    if name in _CERTIFICATES:
        return bool(si[_CERTIFICATES[name]]) and (name != BAROMETER_CERTIFICATE or GAUGE in shown.basis.values())
    if name == STEM:
        return bool(_stem(case, si, shown.T_exhaust))
    if name == BAROMETER:
        return GAUGE in shown.basis.values()
    if name == LEG:
        return bool(si["leg_height"])
    if name == HEAT_LOSS:
        return case["heat_loss_method"] not in (UNDECIDED, NONE)
    return bool(si["line_velocity"] or (si["exhaust_bore"] and shown.sample_flow))


def _size(case: Case, si: Resolved, shown: Shown, off, name: str) -> tuple[str, str, float]:
    """What a correction adds, and to which quantity."""
    on, without = {*off} - {name}, {*off, name}
    true = corrected(case, si, shown, on)
    if name in _ON:
        quantity = _ON[name]
        if name == BAROMETER and shown.basis["p_line"] != GAUGE:
            quantity = "p_exhaust"
        kind = "difference" if quantity == "T_exhaust" else "pressure difference"
        return quantity, kind, float(getattr(true, quantity) - getattr(corrected(case, si, shown, without), quantity))
    balance = balance_without(case, si, on)
    q, c2 = balance.terms(true.p_line, true.p_exhaust, true.T_exhaust, sample_flow=true.sample_flow,
                          recovery=recovery_of(si), T_normal=true.T_normal, T_ambient=true.T_ambient)
    if name == KINETIC:
        q = 0.5 * (1.0 - recovery_of(si)) * c2 * c2 - 0.5 * balance.line_velocity**2
    return "h_line", "enthalpy", float(q)


def case_of(case: Case, si: Resolved, true: Corrected, off) -> Case:
    """The case with corrected readings in place of its own, for everything that starts from a case."""
    bar, pascal = "bar", "pressure"
    changes: dict[str, object] = {
        "question": READING, "leg_height": Entry(0.0, "m"),
        "p_line": Entry(from_si(float(true.p_line), bar, pascal), bar, "absolute"),
        "p_exhaust": Entry(from_si(float(true.p_exhaust), bar, pascal), bar, "absolute"),
        "T_exhaust": Entry(from_si(float(true.T_exhaust), "°C", "temperature"), "°C"),
    }
    if not np.isclose(float(true.p_barometer), si.p_barometer, rtol=1e-12):  # else it stays as given, by altitude too
        changes |= {"barometer_source": BY_READING,
                    "p_barometer": Entry(float(true.p_barometer) / 1e3, "kPa", "absolute")}
    if true.sample_flow is not None:
        changes["sample_flow"] = Entry(from_si(float(true.sample_flow), "kg/h", "mass flow"), "kg/h")
    if true.T_ambient is not None:
        changes["T_ambient"] = Entry(from_si(float(true.T_ambient), "°C", "temperature"), "°C")
    if true.T_normal is not None:
        changes["T_normal"] = Entry(from_si(float(true.T_normal), "°C", "temperature"), "°C")
    if case["heat_loss_method"] == BY_TWO_FLOWS:  # the pair was read apart: its conductance stays
        changes |= {"heat_loss_method": BY_CONDUCTANCE, "conductance": Entry(two_flow_conductance(case, si), "W/K")}
    if HEAT_LOSS in off:
        changes["heat_loss_method"] = NONE
    if KINETIC in off:
        changes |= {"line_velocity": None, "exhaust_bore": None}
    return case.with_(**changes)


def shown_of(case: Case, name: str) -> tuple[float, str]:
    """The case's own reading of a pressure as shown [Pa], and its basis."""
    entry = case[name]
    return to_si(entry.value, entry.unit, "pressure"), entry.basis
