"""The case: one frozen record of everything entered, as entered, resolved to SI in one place."""

from engine.job.case.case import (
    ABSOLUTE,
    BLANK,
    GAUGE,
    T_LEG,
    Case,
    Resolved,
    Value,
    as_entered,
    barometer,
    describe,
    entry_fault,
    entry_faults,
    entry_si,
    faults_of,
    resolve,
)

__all__ = [
    "ABSOLUTE",
    "as_entered",
    "barometer",
    "BLANK",
    "Case",
    "describe",
    "entry_fault",
    "entry_faults",
    "entry_si",
    "faults_of",
    "GAUGE",
    "resolve",
    "Resolved",
    "T_LEG",
    "Value",
]
