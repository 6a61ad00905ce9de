"""What a logger or a clipboard gave, and what of it could not be read."""

from engine.measurement.logbook.reading import (
    Log,
    absolute,
    fit_mapping,
    propose_mapping,
    read_log,
)

__all__ = [
    "Log",
    "absolute",
    "fit_mapping",
    "propose_mapping",
    "read_log",
]
