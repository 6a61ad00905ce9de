"""Several runs together: one quality, its uncertainty, its repeatability, the decision; or why there is none."""

from engine.job.result.result import (
    Result,
    reduce,
)

__all__ = [
    "reduce",
    "Result",
]
