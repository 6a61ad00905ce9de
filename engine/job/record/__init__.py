"""The record of a test: one page that opens offline, can be checked line by line, reopened and recomputed."""

from engine.job.record.record import (
    Facts,
    decided,
    facts_of,
    headline,
    reading_as_run,
    reasons_against,
    record_html,
    record_zip,
    summary,
)

__all__ = [
    "decided",
    "Facts",
    "facts_of",
    "headline",
    "reading_as_run",
    "reasons_against",
    "record_html",
    "record_zip",
    "summary",
]
