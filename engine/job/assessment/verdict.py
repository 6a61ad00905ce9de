"""What can be said about a case, in a word."""

from __future__ import annotations

from enum import StrEnum


class Verdict(StrEnum):
    READS = "reads"
    THIN = "thin"
    CANNOT = "cannot read"
    SUPERHEATED = "line superheated"
    CONTRADICTS = "readings contradict"


def verdict_of(superheat: float, least: float, comfortable: float, *, wet: bool = False) -> Verdict:
    """By the superheat at the thermometer alone [K]."""
    if wet or superheat < least:
        return Verdict.CANNOT
    return Verdict.THIN if superheat < comfortable else Verdict.READS
