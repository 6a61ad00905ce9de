"""What to do when a wetness cannot be read: each way with its numbers for this case, and its price.

Ranked by effort (common practice): a lower exhaust pressure leaves the method as it is, another tapping
moves the question to another place, a separator and a heater are other instruments, and a tracer is
another method altogether. What cannot be done here comes after what can. Where the wetness is no larger
than the uncertainty of the quality, no enthalpy method tells it from none, and the other method comes first.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum

from engine.calorimeter.checks import door, refuse
from engine.calorimeter.electric import power_needed
from engine.calorimeter.reach import exhaust_pressure_for, line_pressure_window
from engine.calorimeter.rig_inputs import admit, gather
from engine.calorimeter.separating import drain_needed
from engine.calorimeter.status import Status
from engine.calorimeter.throttle import least_quality
from engine.steam.errors import Fault, InputError

P_PRACTICAL = 10e3  # Pa, what a condenser with a small pump or an ejector holds (common practice)
SEPARATOR_SHARE = 0.9  # of the water, what a small separator takes (common practice)
_INSIDE = 1e-6  # a change goes this little beyond its limit, so that rounding does not undo it


class WayKind(StrEnum):
    """The ways out, in the order of their effort."""

    EXHAUST = "lower exhaust pressure"
    LINE = "another line pressure"
    SEPARATOR = "separator first"
    HEATER = "electric superheating"
    OTHER = "another method"


PRICES: dict[WayKind, str] = {
    WayKind.EXHAUST: "A condenser with a pump or an ejector, and an exhaust that holds a vacuum without leaks.",
    WayKind.LINE: "The answer is for the steam at that tapping; it holds here only if the wetness is the same.",
    WayKind.SEPARATOR: "A second vessel and its heat loss, a drain that must be cooled, and two masses to weigh.",
    WayKind.HEATER: "The sample flow enters the answer in full, so it must be weighed; a power meter, and a cut-out "
                    "for when the flow stops.",
    WayKind.OTHER: "A tracer or conductivity method: careful sampling and laboratory work, with no enthalpy in it.",
}


@dataclass(frozen=True)
class WayOut:
    """One way: ``numbers`` for this case and ``changes`` to its inputs, both SI by quantity name.

    ``why_not`` says why it is not feasible here, and ``changes`` is then empty.
    """

    kind: WayKind
    feasible: bool
    numbers: Mapping[str, float] = field(default_factory=dict)
    changes: Mapping[str, float] = field(default_factory=dict)
    why_not: str = ""

    @property
    def price(self) -> str:
        """What it costs, in words."""
        return PRICES[self.kind]


def ways_out(p_line, p_exhaust, x, *, superheat=5.0, sample_flow, U_quality=1e-3, p_exhaust_lowest=P_PRACTICAL,
             water_share=SEPARATOR_SHARE, heat_loss=0.0, line_velocity=0.0, exhaust_velocity=0.0,
             recovery=1.0) -> tuple[WayOut, ...]:
    """The ways to measure quality ``x`` where the exhaust would read less than ``superheat`` [K], ranked.

    ``superheat`` is the least readable one, and what the thermometer is unsure of on top where that counts.
    Single values: pressures [Pa, absolute], ``sample_flow`` [kg/s], ``U_quality`` the expanded uncertainty
    expected of the quality, ``p_exhaust_lowest`` [Pa] what can be had at the exhaust, ``water_share`` the part
    of the water that a separator would take; other arguments as for ``quality``. Empty where the steam can be
    read as it is. Raises InputError for inputs out of range or missing.

    >>> for way in ways_out(10e5, 101_325.0, 0.94, sample_flow=30 / 3600):
    ...     print(way.kind, "|", {name: round(value, 1) for name, value in way.changes.items()})
    lower exhaust pressure | {'p_exhaust': 51216.5}
    another line pressure | {'p_line': 2054445.4}
    separator first | {'water_share': 0.9}
    electric superheating | {'power': 246.8, 'p_heater': 101325.0}
    another method | {}
    """
    terms = {"heat_loss": heat_loss, "line_velocity": line_velocity, "exhaust_velocity": exhaust_velocity,
             "recovery": recovery}
    named, scalar = door(p_line=p_line, p_exhaust=p_exhaust, x=x, least_superheat=superheat, **terms)
    single = [scalar]

    def admitted(**given) -> None:
        single.append(admit(**given)[1])

    gather(lambda: refuse(named), lambda: admitted(sample_flow=sample_flow, water_share=water_share),
           lambda: admitted(U_quality=U_quality), lambda: admitted(p_exhaust_lowest=p_exhaust_lowest))
    if not all(single):
        raise InputError(Fault("ways out", "arrays", "", "single values", "they are ranked for one case",
                               "call it once for each"))
    wetness = 1.0 - x
    other = WayOut(WayKind.OTHER, True, {"wetness": wetness, "U_quality": U_quality})
    indistinct = wetness <= U_quality
    if least_quality(p_line, p_exhaust, superheat, **terms) <= x:
        return (other,) if indistinct else ()
    ways = [_exhaust(p_line, x, superheat, p_exhaust_lowest, terms), _line(p_line, p_exhaust, x, superheat, terms),
            _separator(p_line, p_exhaust, x, superheat, water_share, terms),
            _heater(p_line, p_exhaust, x, superheat, sample_flow, terms)]
    ways.sort(key=lambda way: not way.feasible)  # keeps the order of effort otherwise
    can = sum(way.feasible for way in ways)
    ways.insert(0 if indistinct else can, other)
    return tuple(ways)


def _exhaust(p_line, x, superheat, p_exhaust_lowest, terms) -> WayOut:
    found = exhaust_pressure_for(p_line, x, superheat, **terms)
    if found.status != Status.OK:
        return WayOut(WayKind.EXHAUST, False, why_not="Not even the triple pressure of water would be low enough.")
    numbers = {"p_exhaust": found.p_exhaust}
    if found.p_exhaust < p_exhaust_lowest:
        return WayOut(WayKind.EXHAUST, False, numbers, why_not="It is lower than can be had at the exhaust.")
    return WayOut(WayKind.EXHAUST, True, numbers, {"p_exhaust": found.p_exhaust * (1 - _INSIDE)})


def _line(p_line, p_exhaust, x, superheat, terms) -> WayOut:
    window = line_pressure_window(x, p_exhaust, superheat, **terms)
    if window.status != Status.OK:
        return WayOut(WayKind.LINE, False, {"p_best": window.p_best, "x_least": window.x_least},
                      why_not="With this exhaust it cannot be read at any line pressure.")
    edge = window.p_low if p_line < window.p_low else window.p_high
    inside = edge * (window.p_best / edge) ** 1e-3
    numbers = {"p_low": window.p_low, "p_high": window.p_high, "p_best": window.p_best}
    return WayOut(WayKind.LINE, True, numbers, {"p_line": inside})


def _separator(p_line, p_exhaust, x, superheat, water_share, terms) -> WayOut:
    needed = drain_needed(p_line, x, p_exhaust, superheat, **terms)
    if needed.status != Status.OK:
        return WayOut(WayKind.SEPARATOR, False, why_not="With this exhaust not even dry steam could be read.")
    numbers = {"drain_fraction": needed.drain_fraction, "water_share": needed.water_share,
               "x_throttled": needed.x_throttled}
    if needed.water_share > water_share:
        return WayOut(WayKind.SEPARATOR, False, numbers, why_not="It is more of the water than the separator takes.")
    return WayOut(WayKind.SEPARATOR, True, numbers, {"water_share": water_share})


def _heater(p_line, p_exhaust, x, superheat, sample_flow, terms) -> WayOut:
    """Heat behind the throttle, where it takes the least power; what the rig loses is to be made up."""
    lost = max(terms["heat_loss"], 0.0) * sample_flow
    power = power_needed(p_line, x, p_exhaust, sample_flow, superheat, power_loss=lost)
    changes = {"power": power * (1 + _INSIDE), "p_heater": p_exhaust} | ({"power_loss": lost} if lost else {})
    return WayOut(WayKind.HEATER, True, {"power": power}, changes)
