"""Instruments as chosen: class, scale and whatever else makes their readings doubtful.

A class limit says "within ± a" and nothing more, so it is taken as rectangular: u = a/√3
(JCGM 100, 4.3.7). Limits that add up in the standard (class and ambient temperature, say) stay
separate terms, each with its name, because each is cured in a different way.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from engine.measurement.given import finite, is_span, number, shown, size
from engine.measurement.inputs import Component, expanded, rectangular
from engine.measurement.tolerances import (
    ASME_B40_100,
    EN_837_1,
    EN_837_AMBIENT,
    GAUGE_REFERENCE,
    IEC_60584,
    IEC_60751,
    gauge_tolerance,
    pt100_tolerance,
    row_of,
    thermocouple_tolerance,
    transmitter_tolerance,
    zoned_gauge_tolerance,
)
from engine.steam.arrays import fault, give_back
from engine.steam.errors import Fault, InputError

_READ_ANEW = ("resolution", "scale reading")  # errors of reading off: new each time, never shared


def resolution(step: float, **labels) -> Component:
    """The last digit of a display: half-width step/2 (JCGM 100, F.2.2.1)."""
    return rectangular("resolution", size("step of the display", step) / 2, **labels)


def scale_reading(division: float, told_apart: float = 0.5, **labels) -> Component:
    """A pointer or thread read to the nearest part ``told_apart`` of a ``division``: half-width half of that.

    >>> round(scale_reading(0.5e5).u)  # half divisions on a scale of 0.5 bar
    7217
    """
    part = size("part of a division told apart", told_apart)
    return rectangular("scale reading", size("division of the scale", division) * part / 2, **labels)


def gauge_temperature(span: tuple[float, float], T_ambient: float, **labels) -> Component:
    """What EN 837-1 allows a gauge that is not at 20 °C: 0.4 % of span for each 10 K."""
    if not 173.15 < number(T_ambient) < 473.15:
        raise InputError(fault("T_ambient", shown(T_ambient), "173.15 K to 473.15 K",
                               hint="temperatures are in kelvin here"))
    away = abs(T_ambient - GAUGE_REFERENCE)
    return rectangular("gauge temperature", EN_837_AMBIENT / 100 * away * _width(span), **labels)


def stability(percent: float, span: tuple[float, float], **labels) -> Component:
    """Drift since the last calibration, as a limit in % of span."""
    return rectangular("stability", size("stability in % of span", percent) / 100 * _width(span), **labels)


def cold_junction(half_width: float, **labels) -> Component:
    """Limit of the cold-junction temperature [K], taken one to one.

    The emf rises a little faster at steam temperature than at the junction, so this errs on the
    wide side.
    """
    return rectangular("cold junction", half_width, **labels)


def certificate(U: float, k: float = 2.0, **labels) -> Component:
    """A calibration certificate whose corrections are applied: u = U/k."""
    return expanded("certificate", U, k, **labels)


class Doubt(NamedTuple):
    """A standard uncertainty ``u`` and its ``terms`` by name; u² is the sum of their squares."""

    u: float | np.ndarray
    terms: dict[str, float | np.ndarray]


KINDS = {
    "IEC 60751": tuple(IEC_60751), "IEC 60751 film": tuple(IEC_60751), "IEC 60584-1": tuple(IEC_60584),
    "EN 837-1": tuple(EN_837_1), "ASME B40.100": tuple(ASME_B40_100), "transmitter": (), "certificate": (),
}
_WITH_SPAN = ("EN 837-1", "ASME B40.100", "transmitter")


@dataclass(frozen=True)
class Instrument:
    """An instrument as chosen: what it is, its class, its scale, and what else makes it doubtful.

    Attributes:
        kind: a key of ``KINDS``; "certificate" has no class and lives by its ``extra`` terms
        grade: one of ``KINDS[kind]``; of a transmitter its accuracy in % of span, as "0.1"
        span: both ends of the scale in SI, for gauges and transmitters
        extra: further terms, such as ``resolution``, ``gauge_temperature``, ``stability``

    Readings are what the instrument itself shows, in SI: a gauge's pressure above atmosphere in Pa,
    a thermometer's temperature in K.

    >>> gauge = Instrument("EN 837-1", "1.6", (0, 16e5), extra=(resolution(0.1e5),))
    >>> {name: round(u) for name, u in gauge.standard_uncertainty(9e5).terms.items()}
    {'class 1.6': 14780, 'resolution': 2887}
    """

    kind: str
    grade: str = ""
    span: tuple[float, float] | None = None
    extra: tuple[Component, ...] = ()

    def __post_init__(self):
        object.__setattr__(self, "extra", tuple(self.extra))
        if is_span(self.span):
            object.__setattr__(self, "span", tuple(map(number, self.span)))
        row_of(KINDS, self.kind, "kind of instrument")
        faults = []
        if self.kind in _WITH_SPAN and not is_span(self.span):
            faults.append(Fault(f"span of the {self.kind} instrument", shown(self.span), "",
                                "two finite numbers, low then high", hint="give both ends of the scale"))
        if KINDS[self.kind] and not (isinstance(self.grade, str) and self.grade in KINDS[self.kind]):
            faults.append(Fault(f"class by {self.kind}", shown(self.grade), "",
                                "one of: " + ", ".join(KINDS[self.kind])))
        if self.kind == "transmitter" and not 0 < _percent(self.grade) <= 100:
            faults.append(Fault("accuracy of the transmitter", shown(self.grade), "% of span",
                                "a number above 0, up to 100"))
        if self.kind == "certificate" and not self.extra:
            faults.append(Fault("instrument with a certificate", "no terms", "", "its certificate among the terms",
                                why="without it nothing is known of its error"))
        names = [self._class_name, *(c.name for c in self.extra)]
        if len(set(names)) < len(names):
            faults.append(Fault("terms of the instrument", ", ".join(names), "", "names used once"))
        if faults:
            raise InputError(*faults)

    def tolerance(self, reading):
        """Half-width of the class limit at ``reading``, in the unit of the reading; 0 with a certificate."""
        if self.kind.startswith("IEC 60751"):
            return pt100_tolerance(reading, self.grade, film=self.kind.endswith("film"))
        if self.kind == "IEC 60584-1":
            return thermocouple_tolerance(reading, self.grade)
        if self.kind == "EN 837-1":
            return gauge_tolerance(reading, self.grade, self.span)
        if self.kind == "ASME B40.100":
            return zoned_gauge_tolerance(reading, self.grade, self.span)
        if self.kind == "transmitter":
            return transmitter_tolerance(reading, _percent(self.grade), self.span)
        array = finite("reading", reading, hint="leave missing readings out")
        return give_back(np.zeros_like(array), array.ndim == 0)

    def standard_uncertainty(self, reading) -> Doubt:
        """Standard uncertainty at ``reading`` (scalar or array) with its terms by name."""
        limit = self.tolerance(reading)
        terms = {} if self.kind == "certificate" else {self._class_name: limit / np.sqrt(3)}
        terms |= {c.name: c.u + 0 * limit for c in self.extra}
        total = np.sqrt(sum(u * u for u in terms.values()))
        if isinstance(limit, float):
            return Doubt(float(total), {name: float(u) for name, u in terms.items()})
        return Doubt(total, terms)

    def components(self, reading: float, *, group: str = "", shared: str = "",
                   read_once: bool = False) -> tuple[Component, ...]:
        """The same as components for a budget, at one reading.

        ``group`` names the instrument in the budget. ``shared`` is a label for an instrument that
        serves more than one quantity: its errors are then the same in all of them, except what is
        lost in reading it off, which is new each time; unless it was ``read_once`` for all of them,
        as a barometer is.
        """
        own = () if self.kind == "certificate" else (rectangular(self._class_name, float(self.tolerance(reading))),)
        return tuple(replace(c, group=c.group or group, source=c.source or _shared_source(c, shared, read_once))
                     for c in own + self.extra)

    def cautions(self, reading: float) -> tuple[str, ...]:
        """What an experienced eye would say about this instrument at this reading."""
        if self.kind not in ("EN 837-1", "ASME B40.100"):
            return ()
        part = (reading - self.span[0]) / (self.span[1] - self.span[0])
        said = []
        if part > 0.75:
            said.append(f"the gauge works at {part:.0%} of its scale; a steady pressure should stay below 75 %")
        if part < 0.25:
            weight = self.tolerance(reading) / max(abs(reading), 1.0)
            said.append(f"the gauge works at {part:.0%} of its scale, where its class limit is {weight:.1%} of the "
                        "reading; a smaller scale is better")
        return tuple(said)

    @property
    def _class_name(self) -> str:
        return f"{self.grade} % of span" if self.kind == "transmitter" else f"class {self.grade}"


def _shared_source(term: Component, shared: str, read_once: bool) -> str:
    return f"{shared}: {term.name}" if shared and (read_once or term.name not in _READ_ANEW) else ""


def _percent(text: str) -> float:
    try:
        return float(text)
    except (TypeError, ValueError):
        return 0.0


def _width(span: tuple[float, float]) -> float:
    """From end to end of a scale."""
    if not is_span(span):
        raise InputError(Fault("span", shown(span), "", "two finite numbers, low then high"))
    return number(span[1]) - number(span[0])
