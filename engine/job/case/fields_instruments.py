"""The entries behind the uncertainty: instruments by channel, sampling, heat loss, and the decision rule.

Nothing is assumed here: an instrument, a tolerance or the sampling that is not stated stays so, is
named as missing, and keeps a result from being final.
"""

from __future__ import annotations

from engine.job.case.fields_modes import NOT_STATED
from engine.job.case.rows import Entry, Field, choice, quantity, text
from engine.measurement import RULES

LIMIT, CERTIFICATE = "± limit", "certificate"
AS_ENTERED, SHOWS_GAUGE, SHOWS_ABSOLUTE = "as entered", "gauge", "absolute"
PRESSURE_KINDS = (NOT_STATED, "EN 837-1", "ASME B40.100", "transmitter", LIMIT, CERTIFICATE)
THERMOMETER_KINDS = (NOT_STATED, "IEC 60751", "IEC 60751 film", "IEC 60584-1", LIMIT, CERTIFICATE)
PLAIN_KINDS = (NOT_STATED, LIMIT, CERTIFICATE)
HALF_WIDTH, STANDARD = "half width", "standard uncertainty"
AT_LEAST, AT_MOST = "at least", "at most"
RULE_KINDS = ("guarded by risk", *(rule for rule in RULES if rule != "guarded by risk"))


def _own_terms(stem: str, label: str, kind: str, most: float) -> tuple[Field, ...]:
    """What any instrument can bring: its certificate or limit, what is read off it, and whatever else there is."""
    return (
        quantity(f"{stem}_U", f"{label}: U of the certificate, or ± limit", "instruments", 0.0, most, kind=kind),
        quantity(f"{stem}_k", f"{label}: coverage factor k of that U", "instruments", 1.0, 4.0, Entry(2.0, "1"),
                 kind="number", why="certificates give 2, seldom 1 or 3"),
        quantity(f"{stem}_resolution", f"{label}: smallest step that is read", "instruments", 0.0, most, kind=kind),
        quantity(f"{stem}_other", f"{label}: other limits ± (drift, mounting)", "instruments", 0.0, most, kind=kind),
    )


def _pressure(stem: str, label: str) -> tuple[Field, ...]:
    span = "pressure difference"
    return (
        choice(f"{stem}_kind", label, "instruments", PRESSURE_KINDS),
        text(f"{stem}_grade", f"{label}: class, or % of span", "instruments"),
        quantity(f"{stem}_low", f"{label}: scale from", "instruments", -1.1e5, 4e7, Entry(0.0, "bar"), kind=span),
        quantity(f"{stem}_high", f"{label}: scale to", "instruments", -1.1e5, 4e7, kind=span),
        *_own_terms(stem, label, "pressure difference", 1e7),
        choice(f"{stem}_shows", f"{label} shows", "instruments", (AS_ENTERED, SHOWS_GAUGE, SHOWS_ABSOLUTE),
               hint="a pressure above the atmosphere takes over the barometer's error, an absolute one does not"),
    )


INSTRUMENT_FIELDS = (
    *_pressure("line_gauge", "Line gauge"),
    *_pressure("exhaust_gauge", "Exhaust gauge"),
    choice("thermometer_kind", "Exhaust thermometer", "instruments", THERMOMETER_KINDS),
    text("thermometer_grade", "Exhaust thermometer: class", "instruments"),
    *_own_terms("thermometer", "Exhaust thermometer", "difference", 50.0),
    choice("barometer_kind", "Barometer's uncertainty", "instruments", PLAIN_KINDS),
    *_own_terms("barometer", "Barometer", "pressure difference", 2e4)[:3],
    choice("flow_meter_kind", "Sample flow's uncertainty", "instruments", PLAIN_KINDS),
    *_own_terms("flow_meter", "Sample flow", "fraction", 1.0)[:2],
    quantity("heat_loss_tolerance", "Heat loss known to ±", "uncertainty", 0.0, 2.0, kind="fraction",
             why="a correction more doubtful than that is no correction",
             hint="30 to 50 % where it is worked out from lagging and size, 10 % where it was measured"),
    quantity("recovery_tolerance", "Recovery factor known to ±", "uncertainty", 0.0, 1.0, Entry(0.1, "1"),
             kind="fraction"),
    choice("sampling_kind", "Sampling representativeness given as", "uncertainty",
           (NOT_STATED, HALF_WIDTH, STANDARD),
           hint="what the sample may differ by from the steam in the line; a judgement that someone must make"),
    quantity("sampling", "Sampling representativeness ±", "uncertainty", 0.0, 0.5, kind="fraction",
             why="it is an uncertainty of the quality, in %pt", hint="0.3 to 0.5 %pt on a wet line is common practice"),
    quantity("coverage", "Coverage probability", "decision", 0.5, 0.999, Entry(95.45, "%"), kind="fraction",
             hint="95.45 % is k = 2 where enough is known"),
    choice("limit_side", "The quality must be", "decision", (AT_LEAST, AT_MOST)),
    choice("decision_rule", "Decision rule", "decision", RULE_KINDS,
           hint="agreed by both parties before the first reading"),
    quantity("decision_risk", "Risk of a wrong decision", "decision", 0.001, 0.49, Entry(5.0, "%"), kind="fraction",
             why="at one half the guard band is gone: that is the simple rule"),
)
