"""From the instruments named in a case to the causes of doubt in each reading."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from engine.calorimeter import WEATHER_HALF_WIDTH
from engine.job.case import GAUGE, Case, Resolved, describe
from engine.job.case.fields import FIELDS
from engine.job.case.fields_instruments import AS_ENTERED, CERTIFICATE, LIMIT, SHOWS_GAUGE
from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.fields_path import BY_ALTITUDE
from engine.measurement import KINDS, Component, Instrument, certificate, gauge_temperature, rectangular, resolution
from engine.steam.errors import Fault, InputError
from engine.steam.units import from_si

GROUPS = {"line_gauge": "line gauge", "exhaust_gauge": "exhaust gauge", "thermometer": "thermometer",
          "barometer": "barometer", "flow_meter": "sample flow"}
GAUGES = {"p_line": "line_gauge", "p_exhaust": "exhaust_gauge"}


@dataclass(frozen=True)
class Doubts:
    """Causes of doubt in one reading. ``missing`` says in words what was not stated, ``cautions`` what an
    experienced eye would add."""

    components: tuple[Component, ...] = ()
    missing: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()

    def __add__(self, other: Doubts) -> Doubts:
        return Doubts(self.components + other.components, self.missing + other.missing,
                      self.cautions + other.cautions)


def rests_on_barometer(case: Case, name: str, basis: Mapping[str, str] | None = None) -> bool:
    """Whether a pressure ("p_line" or "p_exhaust") is read against the atmosphere.

    ``basis`` is that of a log's columns, which is what the instrument showed; else the case says.
    """
    if basis and name in basis:
        return basis[name] == GAUGE
    shows = case[f"{GAUGES[name]}_shows"]
    return case[name].basis == GAUGE if shows == AS_ENTERED else shows == SHOWS_GAUGE


def pressure_doubts(case: Case, si: Resolved, name: str, shown: float, on_barometer: bool) -> Doubts:
    """Doubts of a pressure whose gauge shows ``shown`` [Pa]; with those of the barometer where it rests on it."""
    stem = GAUGES[name]
    doubts = _instrument(case, si, stem, shown)
    return doubts + barometer_doubts(case, si) if on_barometer else doubts


def thermometer_doubts(case: Case, si: Resolved, T: float) -> Doubts:
    """Doubts of the exhaust thermometer at ``T`` [K], the same instrument in every reading taken with it."""
    return _instrument(case, si, "thermometer", T, shared="thermometer")


def barometer_doubts(case: Case, si: Resolved) -> Doubts:
    """Doubts of the barometer: one reading for both pressures, so one error. By altitude it is the weather's."""
    if case["barometer_source"] == BY_ALTITUDE:
        weather = rectangular("weather", WEATHER_HALF_WIDTH, source="barometer: weather", group="barometer")
        return Doubts((weather,))
    doubts = _instrument(case, si, "barometer", si.p_barometer, shared="barometer", read_once=True)
    # named apart from the gauge's own causes, beside which they stand in one quantity
    return replace(doubts, components=tuple(replace(c, name=f"barometer {c.name}") for c in doubts.components))


def flow_doubts(case: Case, si: Resolved, flow: float) -> Doubts:
    """Doubts of the sample flow, stated as a share of ``flow`` [kg/s]."""
    return _instrument(case, si, "flow_meter", flow, scale=flow)


def tolerance_doubts(tolerance: float | None, group: str, cause: str = "tolerance") -> Doubts:
    """Doubts of what is known to ± ``tolerance`` of itself, or of a correction; named as missing where not stated."""
    if tolerance is None:
        return Doubts(missing=(f"the uncertainty of the {group}",))
    return Doubts((rectangular(cause, tolerance, group=group),))


def _instrument(case: Case, si: Resolved, stem: str, reading: float, *, scale: float = 1.0, shared: str = "",
                read_once: bool = False) -> Doubts:
    kind, group = case[f"{stem}_kind"], GROUPS[stem]
    if kind == NOT_STATED:
        return Doubts(missing=(f"the uncertainty of the {group}",))
    instrument = _chosen(case, si, stem, kind, reading, scale)
    components = instrument.components(reading, group=group, shared=shared, read_once=read_once)
    return Doubts(components, (), tuple(f"{group}: {line}" for line in instrument.cautions(reading)))


def _chosen(case: Case, si: Resolved, stem: str, kind: str, reading: float, scale: float) -> Instrument:
    """The instrument of a channel; InputError in the case's own words where an entry is lacking or does not fit."""
    def given(item: str) -> float:
        value = si.si.get(f"{stem}_{item}")
        return 0.0 if value is None else scale * value

    extra = [resolution(given("resolution"))] if given("resolution") else []
    extra += [rectangular("other", given("other"))] if given("other") else []
    if kind in (LIMIT, CERTIFICATE):
        _need(case, stem, "U")
        own = rectangular("limit", given("U")) if kind == LIMIT else certificate(given("U"), si[f"{stem}_k"])
        return Instrument("certificate", extra=(own, *extra))
    span = None
    if f"{stem}_high" in FIELDS:
        _need(case, stem, "high")
        span = (si[f"{stem}_low"], si[f"{stem}_high"])
        _check_scale(case, stem, span, reading)
        if kind == "EN 837-1" and si["T_ambient"] is not None:
            away = gauge_temperature(span, si["T_ambient"])
            extra += [away] if away.u else []
    return Instrument(kind, grade_of(kind, case[f"{stem}_grade"]), span, tuple(extra))


def grade_of(kind: str, typed: str) -> str:
    """A class as typed, in the standard's own spelling where there is one.

    >>> grade_of("EN 837-1", "1,0"), grade_of("IEC 60751", " a"), grade_of("EN 837-1", "9")
    ('1', 'A', '9')
    """
    plain = typed.strip().removesuffix("%").strip().replace(",", ".").upper()
    for known in KINDS[kind]:
        if plain == known.upper() or _number(plain) == _number(known) is not None:
            return known
    return plain or typed


def _number(text: str) -> float | None:
    try:
        return float(text)
    except ValueError:
        return None


def _check_scale(case: Case, stem: str, span: tuple[float, float], reading: float) -> None:
    """InputError for a scale that ends before it begins, or that the reading is not on."""
    low, high = (case[f"{stem}_{end}"] for end in ("low", "high"))
    field = FIELDS[f"{stem}_high"]
    if not span[0] < span[1]:
        raise InputError(Fault(field.label, high.value, high.unit, f"more than the other end, {describe(low)}",
                               name=field.name))
    if not span[0] <= reading <= span[1]:
        shown = f"{from_si(reading, high.unit, field.kind):.5g} {high.unit}"
        raise InputError(Fault(field.label, high.value, high.unit, f"a scale that holds the reading, {shown}",
                               "an instrument says nothing beyond its scale",
                               "check the scale, and whether the gauge shows gauge or absolute pressure", field.name))


def _need(case: Case, stem: str, item: str) -> None:
    name = f"{stem}_{item}"
    if case[name] is None:
        raise InputError(Fault(FIELDS[name].label, "nothing", "", f"a value, since '{case[f'{stem}_kind']}' is chosen",
                               hint="enter it, or choose another kind of instrument", name=name))
