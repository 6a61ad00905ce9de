"""What a steam state is, or why there is none: one word per element of an array result."""

from __future__ import annotations

from enum import IntEnum


class SteamStatus(IntEnum):
    """Values up to ``SUPERHEATED`` are answers; the rest say why there is none."""

    WET = 0
    SUPERHEATED = 1
    LIQUID = 2
    OUT_OF_RANGE = 3
    MISSING = 4


SENTENCES = {
    SteamStatus.WET: "Wet steam: saturated liquid and saturated vapour together.",
    SteamStatus.SUPERHEATED: "Vapour at or above saturation.",
    SteamStatus.LIQUID: "Below saturation there is liquid here, not steam.",
    SteamStatus.OUT_OF_RANGE: "Outside 611.657 Pa to 16.529 MPa absolute, or above 1073.15 K.",
    SteamStatus.MISSING: "A value is missing.",
}
