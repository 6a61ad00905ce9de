"""One call from a case to everything that the Path page, and whatever follows it, shows."""

from engine.job.assessment.assessment import (
    Assessment,
    StatePoint,
    Verdict,
    assess,
)

__all__ = [
    "assess",
    "Assessment",
    "StatePoint",
    "Verdict",
]
