"""Numbers as people and loggers write them: decimal comma or point, thousands signs, stray units.

Two jobs. ``number_signs`` decides from many cells which sign is the decimal one, and says so when
they do not decide it. ``read_number`` reads one cell strictly: it either gives the value or the
reason why not, and never guesses.
"""

from __future__ import annotations

import math
import re
from collections import Counter
from collections.abc import Callable, Iterable
from functools import lru_cache
from typing import NamedTuple

from engine.measurement.logbook.words import unit_of

# The reasons a numeric cell can be refused for; the words are the ones a user reads.
NOT_A_NUMBER = "not a number"
NO_VALUE = "the instrument says that it has no value"
SHEET_ERROR = "an error value of the spreadsheet"
FORMULA = "a formula without a stored value; nothing is computed here"
NOT_FINITE = "not a finite number"
WRONG_SIGN = "not written with this file's decimal sign"
WRONG_GROUPS = "thousands sign in a place where none can stand"
OTHER_UNIT = "a unit in the cell that is not the column's"
CONTROL = "control characters in the cell"

_NO_VALUE_WORDS = {
    "nan", "n/a", "na", "n.a.", "nil", "null", "none", "void", "-", "\u2013", "\u2014", "*", "?", "over", "under",
    "ovl", "ol", "o.l.", "overrange", "underrange", "over-range", "under-range", "overflow", "err", "error", "fail",
    "fault", "open", "short", "bad", "invalid", "missing", "inop", "off", "unplugged", "disconnected", "stale",
    "timeout", "fehler", "ungültig", "defekt", "aus", "erreur", "défaut", "errore", "fallo"}
_SHEET_ERRORS = {"#n/a", "#value!", "#ref!", "#div/0!", "#name?", "#num!", "#null!", "#spill!", "#calc!",
                 "#wert!", "#nv", "#bezug!", "#zahl!", "#valeur!", "#nombre!", "#valor!", "#nom?"}
_SPACES = " \u00a0\u202f"  # plain, no-break and narrow no-break space
_BLANK_GROUPS = _SPACES + "'\u2019"  # signs that only ever group digits
_CONTROL = re.compile(r"[\x00-\x08\x0b-\x1f\x7f]")
# Numbers that loggers write for "no reading"; only those that no channel here can hold by itself.
NO_VALUE_CODES = (-9999.0, -9999.9, -9999.99, -99999.0, -32768.0)


_TO_SHAPE = str.maketrans("12345678", "99999999")  # a leading zero still tells that no thousands follow
_PLAIN_SHAPE = re.compile(rf"([09.,]+)(?:[{_SPACES}]?[^\W0-9_].*|[{_SPACES}]?[°%].*)?")  # a unit may follow
_GROUPED_SHAPE = re.compile(r"9[09]{0,2}([.,])[09]{3}(\1[09]{3})*")


class Signs(NamedTuple):
    """Decimal and thousands sign of a file; ``settled`` is False where the cells leave it open."""

    decimal: str
    thousands: str
    settled: bool = True


def number_signs(cells: Iterable[str]) -> Signs:
    """Which sign is the decimal one, from the cells themselves.

    >>> number_signs(["9,01", "1.013,2"])
    Signs(decimal=',', thousands='.', settled=True)
    >>> number_signs(["1,013", "9,017"]).settled
    False
    """
    points = commas = groups_comma = groups_point = open_commas = open_points = 0
    # Only the shape of a number matters, and a log has few: 9.017 and 8.365 are both 9.999.
    shapes = Counter(cell.translate(_TO_SHAPE).strip().lstrip("+-\u2212") for cell in cells)
    for shape, n in shapes.items():
        plain = _PLAIN_SHAPE.fullmatch(shape)
        if plain is None:
            continue
        shape = plain[1]
        point, comma = shape.count("."), shape.count(",")
        if point and comma:  # the last sign is the decimal one, the other groups digits
            if shape.rfind(",") > shape.rfind("."):
                commas, groups_point = commas + n, groups_point + n
            else:
                points, groups_comma = points + n, groups_comma + n
        elif comma > 1:
            groups_comma += n * bool(_GROUPED_SHAPE.fullmatch(shape))
        elif point > 1:
            groups_point += n * bool(_GROUPED_SHAPE.fullmatch(shape))
        elif comma:
            could_group = bool(_GROUPED_SHAPE.fullmatch(shape))
            commas, open_commas = commas + n * (not could_group), open_commas + n * could_group
        elif point:
            could_group = bool(_GROUPED_SHAPE.fullmatch(shape))
            points, open_points = points + n * (not could_group), open_points + n * could_group
    if commas and (points or groups_comma) or points and groups_point:
        # Two habits in one file: the more frequent one wins only when it wins clearly.
        many, few = max(commas, points), min(commas, points)
        return Signs("," if commas > points else ".", "", settled=few <= 0.2 * many)
    if commas or groups_point:
        return Signs(",", "." if groups_point or open_points else "")
    if points or groups_comma:
        return Signs(".", "," if groups_comma or open_commas else "")
    if open_commas:  # every comma could be either: 1,013
        return Signs(",", "", settled=False)
    return Signs(".", "")


@lru_cache(maxsize=16)
def _form(decimal: str, thousands: str) -> re.Pattern:
    groups = re.escape(_BLANK_GROUPS + thousands)
    grouped = rf"[0-9]{{1,3}}(?:(?P<group>[{groups}])[0-9]{{3}})(?:(?P=group)[0-9]{{3}})*"
    whole = rf"(?:{grouped}|[0-9]+)"
    point = re.escape(decimal)
    return re.compile(rf"(?P<number>[+-]?(?:{whole}(?:{point}[0-9]*)?|{point}[0-9]+)(?:[eE][+-]?[0-9]+)?)"
                      rf"[{_SPACES}]*(?P<tail>\D.*)?", re.DOTALL)


def read_number(cell: str, decimal: str = ".", thousands: str = "",
                is_unit: Callable[[str], bool] = lambda text: False) -> tuple[float, str]:
    """One cell -> (value, "") or (NaN, reason); an empty cell is (NaN, "").

    ``is_unit`` says whether the text after a number is the column's own unit ("121.3 °C").

    >>> read_number("1 013,25", ",")
    (1013.25, '')
    >>> read_number("12.5", ",")[1]
    "not written with this file's decimal sign"
    >>> read_number("#DIV/0!")[1]
    'an error value of the spreadsheet'
    """
    text = cell.strip().replace("−", "-")
    if not text:
        return math.nan, ""
    match = _form(decimal, thousands).fullmatch(text)
    if match is None:
        return math.nan, _why_not(text, decimal, thousands)
    tail = match["tail"]
    if tail and not is_unit(tail):
        return math.nan, OTHER_UNIT if unit_of(tail)[1] else _why_not(text, decimal, thousands)
    digits = match["number"]
    for sign in {*_BLANK_GROUPS, thousands} - {""}:
        digits = digits.replace(sign, "")
    value = float(digits.replace(decimal, "."))
    return (value, "") if math.isfinite(value) else (math.nan, NOT_FINITE)


def plain_numbers(cells: list[str], decimal: str = ".") -> list[float] | None:
    """Many cells at once where no doubt is possible: NaN for those that must be looked at singly.

    None where Python's own reading of numbers could differ from ``read_number``'s, which looks at
    cells one by one and says why one is refused.

    >>> plain_numbers(["9,01", "---", ""], ",")
    [9.01, nan, nan]
    """
    text = "\n".join(cells)
    if not text.isascii() or "_" in text or (decimal != "." and "." in text) or text.count("\n") >= max(len(cells), 1):
        return None
    numbers = []
    for cell in text.replace(decimal, ".").split("\n"):
        try:
            number = float(cell)
        except ValueError:
            number = math.nan
        numbers.append(number if math.isfinite(number) else math.nan)
    return numbers


def _why_not(text: str, decimal: str, thousands: str) -> str:
    """The most telling reason why a text is no number."""
    low = text.casefold()
    if low in _SHEET_ERRORS:
        return SHEET_ERROR
    if low in _NO_VALUE_WORDS or not low.strip("-#*._ "):
        return NO_VALUE
    if low.strip("+-") in ("inf", "infinity", "1.#inf", "∞"):
        return NOT_FINITE
    if text[0] in "=@" or re.match(r"[+-]\D*\(", text):
        return FORMULA
    if _CONTROL.search(text):
        return CONTROL
    if text.count(decimal) > 1:
        return NOT_A_NUMBER
    if re.fullmatch(r"[+-]?[0-9]+[.,][0-9]+(?:[eE][+-]?[0-9]+)?", text):
        return WRONG_GROUPS if thousands and thousands in text else WRONG_SIGN
    if re.fullmatch(rf"[+-]?[0-9][0-9.,{re.escape(_BLANK_GROUPS)}]*", text):
        return WRONG_GROUPS
    return NOT_A_NUMBER
