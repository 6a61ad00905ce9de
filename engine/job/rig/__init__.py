"""One call from a case to everything about its rig: flows, losses, misreadings, and what each does to the quality."""

from engine.job.rig.rig import (
    RigAssessment,
    assess_rig,
)

__all__ = [
    "assess_rig",
    "RigAssessment",
]
