"""What a column heading says: channel, unit, and whether a pressure is gauge or absolute.

A heading is taken apart into words; units are known by their spellings, channels by the words of
several languages for "line", "exhaust", "pressure" and so on, or by the field's own symbols (p1,
T2). Whatever is found is a proposal for a person to confirm; a heading that names no place
("Temp 3") is left open rather than guessed.
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from typing import NamedTuple

from engine.measurement.logbook.time import TIME_UNITS
from engine.steam.units import UNITS


@dataclass(frozen=True)
class Channel:
    """``possible`` bounds what a cell may hold at all, ``usual`` what such a channel holds (absolute SI)."""

    name: str
    kind: str
    label: str
    possible: tuple[float, float] = (-float("inf"), float("inf"))
    usual: tuple[float, float] = (-float("inf"), float("inf"))


VACUUM_GAUGE = -1.1e5  # Pa; no gauge pressure is lower, whatever the weather
_T = (1.0, 2000.0)
CHANNELS = {c.name: c for c in (
    Channel("time", "time", "time"),
    Channel("date", "time", "date"),
    Channel("p_line", "pressure", "line pressure", (0.0, 1e9), (1.1e5, 165.3e5)),
    Channel("p_exhaust", "pressure", "exhaust pressure", (0.0, 1e9), (0.05e5, 10e5)),
    Channel("T_exhaust", "temperature", "exhaust temperature", _T, (310.0, 560.0)),
    Channel("T_line", "temperature", "line temperature", _T, (372.0, 720.0)),
    Channel("p_barometer", "pressure", "barometric pressure", (0.0, 1e7), (0.50e5, 1.10e5)),
    Channel("T_ambient", "temperature", "ambient temperature", _T, (223.0, 335.0)),
    Channel("sample_flow", "mass flow", "sample flow", (0.0, 1e4), (2e-4, 0.2)),
    Channel("condensate", "mass", "condensate mass", (0.0, 1e6), (0.0, 1e4)),
    Channel("remark", "text", "remark"),
)}
PRESSURES = tuple(name for name, c in CHANNELS.items() if c.kind == "pressure")
MEASURED = tuple(name for name, c in CHANNELS.items() if c.kind not in ("time", "text"))
BASES = ("gauge", "absolute")


class Found(NamedTuple):
    """What a heading says; "" where it does not. ``score`` ranks columns that name one channel."""

    channel: str = ""
    unit: str = ""
    basis: str = ""
    score: float = 0.0


# Spellings (without spaces, dots, brackets; lower case) -> unit, basis. Longer headings are cut from the end.
_UNIT_SPELLINGS = {
    "pressure": {"pa": "Pa", "kpa": "kPa", "mbar": "mbar", "hpa": "mbar", "bar": "bar", "mpa": "MPa",
                 "psi": "psi", "lb/in2": "psi", "lbf/in2": "psi", "lb/sqin": "psi", "inhg": "inHg", "\"hg": "inHg",
                 "mmhg": "mmHg", "torr": "mmHg", "kgf/cm2": "kgf/cm²", "kg/cm2": "kgf/cm²", "at": "kgf/cm²",
                 "mmh2o": "mmH2O", "mmws": "mmH2O", "mmwc": "mmH2O", "mmwg": "mmH2O", "mmca": "mmH2O",
                 "inh2o": "inH2O", "inwc": "inH2O", "inwg": "inH2O"},
    "temperature": {"°c": "°C", "c": "°C", "degc": "°C", "gradc": "°C", "celsius": "°C", "degreesc": "°C", "ºc": "°C",
                    "°f": "°F", "f": "°F", "degf": "°F", "fahrenheit": "°F", "degreesf": "°F", "ºf": "°F",
                    "k": "K", "kelvin": "K"},
    "mass flow": {"kg/s": "kg/s", "kg/h": "kg/h", "kg/hr": "kg/h", "kgh": "kg/h", "kgph": "kg/h", "t/h": "t/h",
                  "lb/h": "lb/h", "lb/hr": "lb/h", "lbs/h": "lb/h", "lbs/hr": "lb/h", "pph": "lb/h", "lbph": "lb/h",
                  "kg/min": "kg/min", "g/s": "g/s"},
    "mass": {"kg": "kg", "g": "g", "lb": "lb", "lbs": "lb", "gram": "g", "grams": "g"},
    "time": {"s": "s", "sec": "s", "secs": "s", "second": "s", "seconds": "s", "sek": "s", "sekunden": "s",
             "secondes": "s", "segundos": "s", "secondi": "s", "min": "min", "mins": "min", "minute": "min",
             "minutes": "min", "minuten": "min", "minutos": "min", "minuti": "min", "h": "h", "hr": "h", "hrs": "h",
             "hours": "h", "stunden": "h", "ms": "ms", "msec": "ms", "millisecond": "ms", "milliseconds": "ms",
             "mm:ss": "mm:ss", "min:s": "mm:ss", "m:s": "mm:ss", "hh:mm:ss": "clock", "h:mm:ss": "clock",
             "hh:mm": "clock", "h:m:s": "clock", "unix": "unix", "epoch": "unix"},
}
_BASIS_ENDINGS = {"": "", "g": "gauge", "gauge": "gauge", "gage": "gauge", "ü": "gauge", "ue": "gauge", "rel": "gauge",
                  "relative": "gauge", "relativ": "gauge", "eff": "gauge", "a": "absolute", "abs": "absolute",
                  "absolute": "absolute", "absolut": "absolute", "absolu": "absolute"}
_BASIS_WORDS = {**{k: v for k, v in _BASIS_ENDINGS.items() if len(k) > 1},
                **dict.fromkeys(("absolue", "absoluta", "absoluto", "assoluta", "absolutdruck"), "absolute"),
                **dict.fromkeys(("uberdruck", "ueberdruck", "manometrica", "manometrique", "overdruk", "relativa"),
                                "gauge")}

# Word beginnings; one of five letters or more is also found inside a compound, one with a dot is a whole word.
_KINDS = {
    "pressure": "press druck presion pressao druk cisnien tryck",
    "temperature": "temp temperatur thermo",
    "mass flow": "flow durchfluss massenstrom mengenstrom dampfmenge debit debiet caudal portata vazao",
    "mass": "mass masse masa massa weight gewicht poids peso",
    "text": "remark note comment bemerkung anmerkung kommentar remarque observ commento opmerking nota uwagi",
}
_PLACES = {
    "line": "line. lines. main. mains. leitung frischdampf conduite ligne linea. tuberia leiding linha upstream inlet "
            "supply header vordruck tubazione collettore eintritt entree entrada ingresso",
    "exhaust": "exhaust exh outlet downstream discharge abdampf auslass austritt auspuff echappement sortie escape "
               "salida scarico uscita uitlaat saida exaustao descarga calorimet kalorimet wylot",
    "barometer": "barom baro luftdruck luchtdruk atmos atm. athmos",
    "ambient": "ambient amb. room. umgebung raum luft omgeving air. aire. aria. otocz",
    "sample": "sample probe echantillon muestra campione monster amostra",
    "condensate": "condens kondens cond",
}


def _set(words: str) -> frozenset[str]:
    return frozenset(words.split())


_TIME_WORDS = _set("time zeit uhrzeit heure hora ora tijd tempo temps timestamp zeitstempel datetime elapsed clock uhr "
                   "horodatage czas zeitpunkt")
_DATE_WORDS = _set("date datum fecha data dato day tag")
_SYMBOLS = {"p1": "p_line", "pl": "p_line", "pline": "p_line", "t1": "T_line", "tl": "T_line", "tline": "T_line",
            "p2": "p_exhaust", "pexh": "p_exhaust", "pexhaust": "p_exhaust",
            "t2": "T_exhaust", "texh": "T_exhaust", "texhaust": "T_exhaust",
            "pa": "p_barometer", "pb": "p_barometer", "pamb": "p_barometer", "patm": "p_barometer",
            "pbaro": "p_barometer", "ta": "T_ambient", "tamb": "T_ambient", "tu": "T_ambient", "mdot": "sample_flow"}
# Columns about a channel that are not its readings.
_NOT_READINGS = _set("setpoint sp soll sollwert alarm status limit std stdev sigma consigne target quality flag error "
                     "saturation tsat superheat")
_BRACKETS = re.compile(r"[\[({<]([^\[\](){}<>]*(?:\([^()]*\))?[^\[\](){}<>]*)[\])}>]")
_BEFORE_UNIT = re.compile(r"(?<=[^\s/;,|:])\s*[;,|]\s*|\s+/\s*|\s+in\s+|(?<=\w)/(?=[a-zA-Z°]+[ (]?[a-z()]*$)|\s+")


def fold(text: str) -> str:
    """Lower case, compatibility forms unified, accents off: the form in which words are compared."""
    text = unicodedata.normalize("NFKD", text.replace("º", "°")).casefold()
    return "".join(c for c in text if not unicodedata.combining(c))


def unit_of(text: str, kind: str = "") -> tuple[str, str, str]:
    """(kind, unit, basis) of a unit's spelling, all "" when it is none; ``kind`` narrows what is tried.

    >>> unit_of("bar(g)"), unit_of("deg F"), unit_of("psia"), unit_of("furlong")
    (('pressure', 'bar', 'gauge'), ('temperature', '°F', ''), ('pressure', 'psi', 'absolute'), ('', '', ''))
    """
    low = unicodedata.normalize("NFC", text.strip()).casefold().replace("²", "2").replace("₂", "2")
    low = re.sub(r"[\s.()\[\]{}_\-^]|deg\.", "", low)
    for each in (kind,) if kind else _UNIT_SPELLINGS:
        known = _UNIT_SPELLINGS.get(each, {})
        if low in known:
            return each, known[low], ""
        for spelling, unit in known.items() if each == "pressure" else ():
            ending = low[len(spelling):].strip("/,;:") if low.startswith(spelling) else None
            if ending in _BASIS_ENDINGS:
                return each, unit, _BASIS_ENDINGS[ending]
    return "", "", ""


def recognise(heading: str, unit_row: str = "") -> Found:
    """What a heading (and the cell under it in a row of units) says about its column.

    >>> recognise("Exhaust temp (degF)")
    Found(channel='T_exhaust', unit='°F', basis='', score=2.0)
    >>> recognise("p1 / bar g")[:3], recognise("Leitungsdruck;barg")[:3]
    (('p_line', 'bar', 'gauge'), ('p_line', 'bar', 'gauge'))
    """
    name, unit_text = _cut_unit(heading)
    unit_text = unit_row.strip() or unit_text
    words = _words(name)
    channel, score = _channel(words, unit_of(unit_text)[0])
    if not channel:
        return Found()
    kind = CHANNELS[channel].kind
    _, unit, basis = unit_of(unit_text, kind) if unit_text else ("", "", "")
    if not unit:  # "T_exhaust_F": the last word alone, now that the kind is known
        _, unit, basis = unit_of(words[-1], kind) if len(words) > 1 and kind != "text" else ("", "", "")
    if kind == "pressure":
        basis = "absolute" if channel == "p_barometer" else basis or _basis(words, unit_text)
    return Found(channel, unit, basis if kind == "pressure" else "", score + 0.5 * bool(unit))


def _cut_unit(heading: str) -> tuple[str, str]:
    """The heading without its unit, and the unit's text: in brackets, after a sign, or as last words."""
    for inside in _BRACKETS.findall(heading):
        if unit_of(inside)[1]:
            return heading.replace(inside, " ", 1), inside
    parts = _BEFORE_UNIT.split(heading.strip())
    for count in (3, 2, 1):
        tail = " ".join(parts[-count:])
        if len(parts) > count and unit_of(tail)[1]:
            return " ".join(parts[:-count]), tail
    return heading, ""


def _words(name: str) -> list[str]:
    spaced = re.sub(r"(?<=[a-zà-ÿ]{2})(?=[A-Z])", " ", name)  # ExhaustTemp -> Exhaust Temp
    words = re.findall(r"[a-z]+\d*|\d+", fold(spaced))
    joined = []
    for word in words:  # "p 2", "T_2", "p_a": a symbol and its index
        if joined and joined[-1] in ("p", "t") and (joined[-1] + word) in _SYMBOLS:
            joined[-1] += word
        else:
            joined.append(word)
    return joined


def _holds(words: list[str], stems: str) -> bool:
    def fits(word: str, stem: str) -> bool:
        if stem.endswith("."):
            return word == stem[:-1]
        return word.startswith(stem) or (len(stem) >= 5 and stem in word)

    return any(fits(word, stem) for stem in stems.split() for word in words)


def _channel(words: list[str], unit_kind: str) -> tuple[str, float]:
    """The channel that the words name, with a score; ("", 0) when they name none."""
    if not words or any(w in _NOT_READINGS for w in words):
        return "", 0.0
    symbol = next((_SYMBOLS[w] for w in words if w in _SYMBOLS), "")
    if symbol and unit_kind in ("", CHANNELS[symbol].kind):
        return symbol, 2.0
    places = [place for place, stems in _PLACES.items() if _holds(words, stems)]
    kinds = [kind for kind, stems in _KINDS.items() if _holds(words, stems)]
    timed = any(w in _TIME_WORDS for w in words)
    if timed and unit_kind in ("", "time") or unit_kind == "time" and not places:
        return "time", 1.5
    if any(w in _DATE_WORDS for w in words) and not unit_kind:
        return "date", 1.0
    if "text" in kinds:
        return "remark", 1.0
    kind = unit_kind or (kinds[0] if kinds else "")
    return _by_place(places, kind, bool(kinds))


def _by_place(places: list[str], kind: str, said: bool) -> tuple[str, float]:
    score = 1.0 + 0.5 * said
    if kind == "pressure" or (not kind and places == ["barometer"]):
        if "barometer" in places or "ambient" in places:
            return "p_barometer", score
        place = _line_or_exhaust(places)
        return (f"p_{place}", score) if place else ("", 0.0)
    if kind == "temperature":
        place = _line_or_exhaust(places)
        if place:
            return f"T_{place}", score
        return ("T_ambient", score) if "ambient" in places else ("", 0.0)
    if kind == "mass flow" and ("sample" in places or "condensate" in places or "exhaust" in places):
        return "sample_flow", score
    if kind == "mass" and ("condensate" in places or "sample" in places):
        return "condensate", score
    if not kind and places == ["condensate"]:
        return "condensate", score
    return "", 0.0


def _line_or_exhaust(places: list[str]) -> str:
    found = [p for p in places if p in ("line", "exhaust")]
    return found[0] if len(found) == 1 else ""


def _basis(words: list[str], unit_text: str) -> str:
    for word in [*words, *_words(unit_text)]:
        if word in _BASIS_WORDS:
            return _BASIS_WORDS[word]
    return next(({"g": "gauge", "a": "absolute"}[w] for w in words[-2:] if w in ("g", "a")), "")


def units_of(channel: str) -> tuple[str, ...]:
    """The units a channel may be given in."""
    kind = CHANNELS[channel].kind
    if channel == "date":
        return ("date",)
    if kind == "time":
        return TIME_UNITS
    return () if kind == "text" else tuple(UNITS[kind])


