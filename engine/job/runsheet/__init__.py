"""The run sheet: the procedure for the open case, made from its own numbers, and what of it was done."""

from engine.job.runsheet.runsheet import (
    RunSheet,
    headline,
    notices,
    run_sheet,
    tick,
    ticks_of,
    untick,
)

__all__ = [
    "headline",
    "notices",
    "run_sheet",
    "RunSheet",
    "tick",
    "ticks_of",
    "untick",
]
