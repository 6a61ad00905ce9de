"""Time as logs write it: dated stamps, times of day, elapsed seconds, serial days.

Stamps are read by *template*: every digit of a cell is put as 0, cells of one template are decoded
together by arithmetic on their digits, and the grammar is only asked once per template. A million
stamps cost a few array operations, and an odd one among them is still read, or refused, by the
same grammar.

All results are whole microseconds since 1970-01-01 (dated) or since midnight (times of day).
"""

from __future__ import annotations

import datetime as dt
import re
from collections import Counter
from collections.abc import Iterable
from typing import NamedTuple

import numpy as np

EMPTY_TIME = "no time in this row"
NOT_A_TIME = "not a time in a form known here"
NO_SUCH_DATE = "no such date in the day and month order of this file"
NO_SUCH_HOUR = "no such time of day"
OTHER_ZONE = "time zone given here but not in the first rows, or the other way round"
REASONS = ("", EMPTY_TIME, NOT_A_TIME, NO_SUCH_DATE, NO_SUCH_HOUR, OTHER_ZONE)

DATE_ORDERS = {"ymd": "year, month, day", "dmy": "day, month, year", "mdy": "month, day, year"}
# Units of a time column: how its cells become seconds. The first four are text, the rest numbers.
STAMPS = {"stamp": "date and time", "date": "date, its time in another column", "clock": "hh:mm or hh:mm:ss",
          "mm:ss": "minutes and seconds"}
COUNTS = {"s": 1.0, "min": 60.0, "h": 3600.0, "ms": 1e-3, "excel": 86_400.0, "unix": 1.0, "unix ms": 1e-3}
TIME_UNITS = (*STAMPS, *COUNTS)
SERIAL_ZERO_DAYS = 25_569  # days from the spreadsheet's day 0 (1899-12-30) to 1970-01-01
_SECOND, _DAY = 1_000_000, 86_400_000_000

_MONTHS = {}
for _number, _names in enumerate(("jan ene gen", "feb fév fev", "mar mär mrz mrt", "apr avr abr", "may mai mei mag maj",
                                  "jun jui giu", "jul lug", "aug aou aoû ago", "sep set", "oct okt ott out",
                                  "nov", "dec dez déc dic"), start=1):
    _MONTHS.update(dict.fromkeys(_names.split(), _number))
_MONTHS["juil"] = 7  # French July starts like June


def _form(pattern: str) -> re.Pattern:
    """A grammar of templates: there every digit has become a 0."""
    return re.compile(" *" + pattern.replace(r"\d", "0") + " *")


_CLOCK = (r"(?P<h>\d{1,3}):(?P<mi>\d\d)(?::(?P<s>\d\d)(?:[.,](?P<f>\d{1,9}))?)?"
          r"(?: ?(?P<ampm>[aApP])\.?[mM]\.?)?")
_PLAIN_CLOCK = r"(?P<h>\d\d)(?P<mi>\d\d)(?P<s>\d\d)(?:[.,](?P<f>\d{1,9}))?"
_ZONE = r"(?: ?(?P<zone>Z|UTC|GMT|(?P<zs>[+-])(?P<zh>\d\d):?(?P<zm>\d\d)?))?"
_WEEKDAY = r"(?:[^\W0_]{2,10}\.?,? )?"
_PLAIN_DATE = r"(?P<y>\d{4})(?P<mo>\d\d)(?P<d>\d\d)"
_DATES = (r"(?P<y>\d{4})(?P<sep>[-/.])(?P<mo>\d{1,2})(?P=sep)(?P<d>\d{1,2})\.?",
          r"(?P<a>\d{1,2})(?P<sep>[-/.])(?P<b>\d{1,2})(?P=sep)(?P<c>\d{4}|\d\d)",
          r"(?P<d>\d{1,2})\.?[-/ ]?(?P<name>[^\W0_]{3,9})\.?[-/ ,]{1,2}(?P<y>\d{4}|\d\d)",
          r"(?P<name>[^\W0_]{3,9})\.? (?P<d>\d{1,2}),? (?P<y>\d{4})")
_STAMP_FORMS = [_form(rf"{_WEEKDAY}{date}(?:(?:[T_-]| ?, ?| {{1,3}}){_CLOCK}{_ZONE})?") for date in _DATES]
_STAMP_FORMS += [_form(rf"{_PLAIN_DATE}(?:[T _-]?{_PLAIN_CLOCK}{_ZONE})?"),
                 _form(rf"{_PLAIN_DATE}[T _-]{_CLOCK}{_ZONE}")]
_CLOCK_FORM = _form(_CLOCK)
_MINUTES_FORM = _form(r"(?P<mi>\d{1,5}):(?P<s>\d\d)(?:[.,](?P<f>\d{1,9}))?")
_DIGITS_TO_ZERO = bytes.maketrans(b"123456789", b"0" * 9)
_TEXT_TO_ZERO = str.maketrans("123456789", "0" * 9)
MOST_TEMPLATES = 64  # per call; a column with more forms than this is read cell by cell


class Times(NamedTuple):
    """``micros`` int64, ``reason`` uint8 (index into REASONS, 0 is good), ``zoned`` bool; one per cell."""

    micros: np.ndarray
    reason: np.ndarray
    zoned: np.ndarray


def read_times(cells: np.ndarray, unit: str, date_order: str = "ymd") -> Times:
    """Decode time cells, shape (n,), dtype "S" (UTF-8 bytes) or text objects, of a text unit in STAMPS.

    >>> cells = np.array([b"06.05.2024 07:08:09", b"31.02.2024 00:00:00"])
    >>> times = read_times(cells, "stamp", "dmy")
    >>> str(times.micros[0].astype("M8[us]")), REASONS[times.reason[1]]
    ('2024-05-06T07:08:09.000000', 'no such date in the day and month order of this file')
    """
    if cells.dtype.kind != "S":
        cells = np.array([str(c).strip().encode() for c in cells], dtype="S") if cells.size else np.empty(0, "S1")
    n, width = cells.size, cells.dtype.itemsize
    times = Times(np.zeros(n, np.int64), np.full(n, REASONS.index(NOT_A_TIME), np.uint8), np.zeros(n, bool))
    if n == 0:
        return times
    letters = np.ascontiguousarray(cells).view(np.uint8).reshape(n, width)
    places = np.ascontiguousarray(letters.T)  # one place of all cells lies together
    template = bytes(letters[0]).translate(_DIGITS_TO_ZERO)
    if _all_alike(places, template):  # one form throughout, as a logger writes it
        _decode(places, slice(None), template, unit, date_order, times)
    else:
        templates = np.frombuffer(cells.tobytes().translate(_DIGITS_TO_ZERO), cells.dtype)
        _decode_mixed(places, templates, unit, date_order, times)
    return times


def _all_alike(places: np.ndarray, template: bytes) -> bool:
    """Whether every cell has this template: digits where it has digits, its own letters elsewhere."""
    return all((place - np.uint8(48) <= 9).all() if letter == 48 else (place == letter).all()
               for place, letter in zip(places, template, strict=True))


def _decode_mixed(places: np.ndarray, templates: np.ndarray, unit: str, date_order: str, times: Times) -> None:
    """Form by form; what is left after the most frequent ones goes through the same grammar one by one."""
    todo = np.arange(templates.size)
    for _ in range(MOST_TEMPLATES):
        if not todo.size:
            return
        same = templates[todo] == templates[todo[0]]
        _decode(places, todo[same], templates[todo[0]], unit, date_order, times)
        todo = todo[~same]
    for i in todo:
        _decode(places, slice(i, i + 1), templates[i], unit, date_order, times)


def _decode(places: np.ndarray, here, template: bytes, unit: str, date_order: str, times: Times) -> None:
    """Decode the cells ``here``, all of one template, into ``times``."""
    text = template.rstrip(b"\0").decode("utf-8", "replace")
    if not text.strip():
        times.reason[here] = REASONS.index(EMPTY_TIME)
        return
    match = _match(text, unit)
    if match is None:
        return
    parts = {name: found for name, found in match.groupdict().items() if found is not None}
    number = {name: _number(places, here, *(len(text[:at].encode()) for at in match.span(name)))
              for name, found in parts.items() if found.isdigit()}
    clock, good_clock = _clock(parts, number, dated=unit in ("stamp", "date"))
    days, good_date = _days(parts, number, date_order) if unit in ("stamp", "date") else (0, True)
    if days is None:
        return
    times.micros[here] = days * _DAY + clock
    times.reason[here] = np.where(good_date, np.where(good_clock, 0, REASONS.index(NO_SUCH_HOUR)),
                                  REASONS.index(NO_SUCH_DATE))
    times.zoned[here] = "zone" in parts


def _number(places: np.ndarray, here, start: int, stop: int) -> np.ndarray:
    """The number that the places from ``start`` to ``stop`` write; int32, of nine digits at most."""
    small = np.int16 if stop - start <= 4 else np.int32
    value = places[start, here].astype(small) - 48
    for place in places[start + 1:stop]:
        value *= 10
        value += place[here]
        value -= 48
    return value.astype(np.int32, copy=False)


def _clock(parts: dict, number: dict, *, dated: bool):
    """Microseconds since midnight, and whether each is a time of day (or an elapsed hh:mm:ss)."""
    seconds, good = np.int32(0), True  # 32 bits hold 999 h and 99 999 min
    if "h" in parts:
        hour = number["h"]
        if "ampm" in parts:
            good = (hour >= 1) & (hour <= 12)
            hour = hour % 12 + (12 if parts["ampm"] in "pP" else 0)
        elif dated:
            good = hour <= 23
        good = good & (number["mi"] <= 59)
        seconds = hour * 3600
    if "mi" in parts:
        seconds = seconds + number["mi"] * 60
    if "s" in parts:
        good = good & (number["s"] <= 59)
        seconds = seconds + number["s"]
    if "zh" in parts:
        ahead = (number["zh"] * 60 + number.get("zm", 0)) * 60
        seconds = seconds - ahead if parts["zs"] == "+" else seconds + ahead
    micros = np.asarray(seconds, np.int64) * _SECOND
    if "f" in parts:
        digits = len(parts["f"])
        fraction = number["f"].astype(np.int64)
        micros += fraction * 10 ** (6 - digits) if digits <= 6 else fraction // 10 ** (digits - 6)
    return micros, good


def _days(parts: dict, number: dict, date_order: str):
    """Days since 1970-01-01 and whether each date exists; None when the month's name is unknown."""
    if "a" in parts:
        long_year = len(parts["c"]) == 4
        if long_year and date_order == "ymd":  # the year is written last: the order given does not fit
            return 0, False
        y, mo, d = {"ymd": "abc", "dmy": "cba", "mdy": "cab"}[date_order]
        year, month, day = number[y], number[mo], number[d]
    else:
        year, day, long_year = number["y"], number["d"], len(parts["y"]) == 4
        month = number.get("mo")
    if month is None:
        low = parts["name"].casefold()
        month = _MONTHS.get(low[:4], _MONTHS.get(low[:3]))
        if month is None:
            return None, False
    if not long_year:  # POSIX: 69-99 are 1969-1999, 00-68 are 2000-2068
        year = year + np.where(year >= 69, 1900, 2000)
    # A log stays on one day for many rows: the calendar is asked once per run of equal dates.
    key = (year * 100 + month) * 100 + day
    starts = np.flatnonzero(np.diff(key, prepend=-1))
    days, good = _calendar(key[starts])
    length = np.diff(starts, append=key.size)
    return np.repeat(days, length), np.repeat(good, length)


def _calendar(key: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """yyyymmdd -> days since 1970-01-01, and whether there is such a day."""
    year, month, day = key // 10_000, key // 100 % 100, key % 100
    months = ((year - 1970) * 12 + month - 1).astype("M8[M]")
    days = months.astype("M8[D]") + (day - 1)
    good = (month >= 1) & (month <= 12) & (day >= 1) & (days.astype("M8[M]") == months)
    return days.astype(np.int64), good


def _match(text: str, unit: str) -> re.Match | None:
    if unit == "mm:ss":
        return _MINUTES_FORM.fullmatch(text)
    if unit == "clock":
        return _CLOCK_FORM.fullmatch(text)
    return next((m for m in (form.fullmatch(text) for form in _STAMP_FORMS) if m), None)


def from_objects(cells: Iterable, unit: str, date_order: str) -> Times:
    """Time cells of a spreadsheet: dates, times and durations come as such, the rest as text."""
    cells = list(cells)
    times = read_times(np.array(["" if c is None or not isinstance(c, str) else c for c in cells], dtype=object),
                       unit, date_order)
    zero = dt.datetime(1970, 1, 1)
    for i, cell in enumerate(cells):
        if isinstance(cell, dt.datetime):
            span = cell - (zero if cell.tzinfo is None else zero.replace(tzinfo=dt.UTC))
        elif isinstance(cell, dt.date):
            span = dt.datetime.combine(cell, dt.time()) - zero
        elif isinstance(cell, dt.time):
            span = dt.datetime.combine(zero, cell.replace(tzinfo=None)) - zero
        elif isinstance(cell, dt.timedelta):
            span = cell
        else:
            if cell is not None and not isinstance(cell, str):
                times.reason[i] = REASONS.index(NOT_A_TIME)
            continue
        # An undated cell in a dated column has lost its day, and the other way round.
        dated = isinstance(cell, dt.date)
        fits = dated == (unit in ("stamp", "date"))
        times.micros[i] = round(span / dt.timedelta(microseconds=1))
        times.reason[i] = 0 if fits else REASONS.index(NOT_A_TIME)
    return times


def _template(cell: str) -> str:
    return cell.strip().translate(_TEXT_TO_ZERO)


def _templates(cells: list[str]) -> Counter:
    """Template -> how many cells have it, blank ones left out."""
    counts = Counter(map(_template, cells))
    counts.pop("", None)
    return counts


def text_unit(cells: list[str]) -> str:
    """The text unit most of these cells are written in; "" when they are no times in a known form.

    >>> text_unit(["07:08", "07:09"]), text_unit(["6 May 2024 07:08", ""]), text_unit(["12.1", "12.2"])
    ('clock', 'stamp', '')
    """
    counts = _templates(cells)
    enough = max(1, counts.total() // 2)
    dated = {t: m for t in counts if (m := _match(t, "stamp"))}
    if sum(counts[t] for t in dated) >= enough:
        return "stamp" if any(m["h"] is not None for m in dated.values()) else "date"
    return "clock" if sum(n for t, n in counts.items() if _match(t, "clock")) >= enough else ""


def count_unit(values: np.ndarray) -> str:
    """The unit of a numeric time column, where the size of its numbers tells it; else "".

    Serial days are recognised by their size and by steps far below one: 20 000 to 80 000 are the
    years 1954 to 2119. Seconds since 1970 and milliseconds by their size alone.

    >>> count_unit(np.array([45418.2971, 45418.2972])), count_unit(np.array([0.0, 10.0]))
    ('excel', '')
    """
    values = values[np.isfinite(values)]
    if values.size == 0:
        return ""
    low, high = values.min(), values.max()
    if low > 20_000 and high < 80_000 and (values.size < 2 or np.median(np.abs(np.diff(values))) < 0.05):
        return "excel" if (values % 1 != 0).any() else ""
    if low > 6e8 and high < 4e9:
        return "unix"
    return "unix ms" if low > 6e11 and high < 4e12 else ""


def date_order(cells: list[str]) -> str:
    """Order of day, month and year, decided by the data; "" where they fit more than one.

    Written with dots the day comes first, by the usage of all countries that write so. Otherwise an
    order must make dates of as many cells as any other does; of two that do, one is taken only when it
    makes the log at least twenty times as short, as the right one does when a night is crossed.

    >>> date_order(["03/04/2024", "13/04/2024"]), date_order(["03/04/2024"]), date_order(["2024-03-04"])
    ('dmy', '', 'ymd')
    """
    forms = {t: m for t in _templates(cells) if (m := _match(t, "stamp"))}
    loose = [c for c in cells if (m := forms.get(_template(c))) and "a" in m.re.groupindex]
    if not loose:
        return "ymd"
    array = np.array([c.strip().encode() for c in loose])
    spans = {}
    for order in ("dmy", "mdy", "ymd"):
        times = read_times(array, "stamp", order)
        good = times.micros[times.reason != REASONS.index(NO_SUCH_DATE)]
        if good.size:
            spans[order] = (int(np.ptp(good)) + _SECOND, bool((np.diff(good) < 0).any()), good.size)
    most = max((size for *_, size in spans.values()), default=0)  # a stray date must not decide
    spans = {order: span for order, span in spans.items() if span[2] >= most - 0.02 * len(loose)}
    if "dmy" in spans and all("." in c.split()[0] for c in loose):
        return "dmy"
    if len(spans) <= 1:
        return next(iter(spans), "")
    ranked = sorted(spans, key=lambda order: spans[order])
    best, other = spans[ranked[0]], spans[ranked[1]]
    return ranked[0] if not best[1] and best[0] * 20 < other[0] else ""
