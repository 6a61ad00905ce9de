"""One call from a case to everything that the Path page, and whatever follows it, shows."""

from engine.job.assessment.assessed import Assessment, StatePoint
from engine.job.assessment.assessment import assess
from engine.job.assessment.verdict import Verdict

__all__ = ["Assessment", "StatePoint", "Verdict", "assess"]
