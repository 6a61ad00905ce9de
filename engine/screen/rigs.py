"""What pages compute once for a case: rig, uncertainty to expect, reach. A page itself starts anew every run."""

from __future__ import annotations

from functools import lru_cache

from engine.job.case import Case
from engine.job.reach import ReachAssessment, assess_reach
from engine.job.reach.ways import Way, ways
from engine.job.rig import RigAssessment, assess_rig
from engine.job.uncertainty import Forecast, forecast, forecast_or_why
from engine.screen.shell import assessed


@lru_cache(maxsize=64)
def rig_of(case: Case) -> RigAssessment:
    """The rig of a case. Raises InputError."""
    return assess_rig(case)


@lru_cache(maxsize=64)
def expected_of(case: Case) -> Forecast:
    """The uncertainty to expect of a case. Raises InputError."""
    return forecast(case, assessed(case))


@lru_cache(maxsize=64)
def sure_of(case: Case) -> Forecast:
    """The same beside an answer: what cannot be forecast says why. Raises InputError where there is no answer."""
    return forecast_or_why(case, assessed(case))


@lru_cache(maxsize=32)
def planned(case: Case) -> tuple[ReachAssessment, tuple[Way, ...]]:
    """The reach of a case and the ways out. Raises InputError."""
    plan = assess_reach(case)
    return plan, ways(plan)
