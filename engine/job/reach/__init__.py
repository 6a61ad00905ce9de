"""Before the test: can the wetness that is expected be read at all, and with what margin?"""

from engine.job.reach.reach import (
    AS_ENTERED,
    BY_INSTRUMENT,
    NOT_STATED,
    End,
    ReachAssessment,
    assess_reach,
    stage_pressure,
    wettest,
)

__all__ = [
    "AS_ENTERED",
    "assess_reach",
    "BY_INSTRUMENT",
    "End",
    "NOT_STATED",
    "ReachAssessment",
    "stage_pressure",
    "wettest",
]
