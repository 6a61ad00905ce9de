"""What can be said about a reading, before any number: one status per element, one sentence per status.

A temperature at or below saturation carries no enthalpy, so there is no quality to report, only an
upper bound; a line that is itself superheated has no quality either. The status says which of
these holds, and a reader asks it before the number.
"""

from __future__ import annotations

from enum import IntEnum

import numpy as np

from engine.steam.arrays import shortened
from engine.steam.errors import Fault, InputError


class Status(IntEnum):
    """One verdict on one reading; arrays of results carry it as int8 beside the numbers."""

    OK = 0
    THIN_MARGIN = 1
    NOT_SUPERHEATED = 2
    LINE_SUPERHEATED = 3
    OUT_OF_RANGE = 4
    MISSING = 5


SENTENCES: dict[Status, str] = {
    Status.OK: "The exhaust is clearly superheated: the quality follows from its pressure and temperature.",
    Status.THIN_MARGIN: "The exhaust is superheated by less than was asked for: the quality is given, but a small "
                        "error of the thermometer or of the exhaust pressure could hide wet exhaust steam.",
    Status.NOT_SUPERHEATED: "The exhaust is not superheated, so its enthalpy does not follow from pressure and "
                            "temperature: only an upper bound of the quality is known.",
    Status.LINE_SUPERHEATED: "The enthalpy found is above that of dry saturated steam: the line is superheated, "
                             "and it has a superheat, not a quality.",
    Status.OUT_OF_RANGE: "An input is outside the range in which the properties or the equations hold.",
    Status.MISSING: "An input is missing, so nothing was computed.",
}


def reasons(status) -> list[tuple[Status, str, int, np.ndarray]]:
    """One row per distinct status found: (status, its sentence, how many, flat positions).

    ``status``: Status, int or array of them. An empty array gives an empty list.

    >>> [(kind.name, count) for kind, _, count, _ in reasons([0, 2, 2, 5])]
    [('OK', 1), ('NOT_SUPERHEATED', 2), ('MISSING', 1)]
    """
    try:
        flat = np.asarray(status).ravel()
    except ValueError:  # lists of different lengths
        flat = np.array([None])
    if not np.isin(flat, list(Status)).all():
        raise InputError(Fault("status", shortened(status), "", "statuses of readings, 0 to 5"))
    rows = []
    for kind in Status:
        places = np.flatnonzero(flat == kind)
        if places.size:
            rows.append((kind, SENTENCES[kind], int(places.size), places))
    return rows
