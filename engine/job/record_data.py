"""The data in and beside a record: readings kept to the last digit, their CSV, and the way back."""

from __future__ import annotations

import io
import json
import math
from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np

from engine.job.case import Case
from engine.job.casefile import as_block, block_of, from_record, to_json
from engine.job.result import Result
from engine.job.result_data import write_rows
from engine.job.runs import CHANNELS, Run, runs_typed
from engine.measurement.logbook import Log
from engine.steam.errors import Fault, InputError

MOST_CELLS = 200_000  # of readings kept in the record itself; more go beside it


class Refusal(NamedTuple):
    """What of a log could not be used: where it stood, what it was, and why."""

    log: str
    row: int
    column: str
    content: str
    reason: str


class Reopened(NamedTuple):
    """What a record holds: its case, the runs that came from logs, and what of them could not be used."""

    case: Case
    runs: tuple[Run, ...]
    refusals: tuple[Refusal, ...]

    @property
    def all_runs(self) -> tuple[Run, ...]:
        """The runs of the record in its own order, those typed into the case last."""
        return (*self.runs, *runs_typed(self.case))


def refusals_of(logs: Sequence[Log]) -> tuple[Refusal, ...]:
    """What of the logs could not be used, as far as they list it."""
    return tuple(Refusal(log.name, *rejected) for log in logs for rejected in log.rejected)


def blocks(case: Case, runs: Sequence[Run], refusals: Sequence[Refusal]) -> str:
    """The case, and the readings that are not in it, as blocks of data for a page."""
    logged = logged_runs(case, runs)
    kept = logged if fits(logged) else ()
    data = {"runs": [_as_data(run) for run in kept], "refusals": [list(r) for r in refusals[:MOST_CELLS // 5]]}
    text = json.dumps(data, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    return as_block("case", to_json(case)) + "\n" + as_block("readings", text)


def logged_runs(case: Case, runs: Sequence[Run]) -> tuple[Run, ...]:
    """The runs that came from logs: those not typed into the case."""
    typed = {run.name for run in runs_typed(case)}
    return tuple(run for run in runs if run.name not in typed)


def fits(runs: Sequence[Run]) -> bool:
    """Whether readings are few enough to be kept in the record itself."""
    return sum(len(run) * (2 + len(run.channels)) for run in runs) <= MOST_CELLS


def _as_data(run: Run) -> dict[str, Any]:
    """A run in SI, every digit; NaN, where there is no reading, as null."""
    def column(values: np.ndarray | None) -> list | None:
        return None if values is None else [None if v != v else v for v in values.tolist()]

    return {"name": run.name, "rows": column(run.rows), "time": column(run.time), "start": run.start,
            "channels": {name: column(values) for name, values in run.channels.items()}, "basis": run.basis,
            "usable": column(run.usable), "notes": list(run.notes)}


def reopened(data: bytes | str) -> Reopened:
    """A record read back. InputError where it is none, or has been changed so that it cannot be used."""
    case, text = from_record(data), block_of(data, "readings")
    try:
        found = json.loads(text)
        runs = tuple(_as_run(raw) for raw in found["runs"])
        refusals = tuple(Refusal(str(log), int(row), str(column), str(content), str(reason))
                         for log, row, column, content, reason in found["refusals"])
    except (ValueError, TypeError, KeyError, AttributeError, RecursionError) as error:
        raise InputError(Fault("readings in the record", type(error).__name__, "", "readings as this program keeps "
                               "them", "the record was changed after it was made",
                               "use the readings.csv beside it")) from error
    return Reopened(case, runs, refusals)


def _as_run(raw: dict[str, Any]) -> Run:
    rows = np.array([int(n) for n in raw["rows"]])
    channels = {str(name): _floats(values, rows.size) for name, values in raw["channels"].items() if name in CHANNELS}
    time = None if raw["time"] is None else _floats(raw["time"], rows.size)
    usable = np.array([bool(u) for u in raw["usable"]])
    basis = {str(name): str(b) for name, b in raw["basis"].items() if b in ("gauge", "absolute")}
    if usable.size != rows.size or (time is not None and not np.isfinite(time).all()):
        raise ValueError("columns of a run")
    return Run(str(raw["name"]), rows, time, channels, basis, usable, str(raw["start"]),
               tuple(map(str, raw["notes"])))


def _floats(values: list, size: int) -> np.ndarray:
    found = np.array([math.nan if v is None else float(v) for v in values])
    if found.shape != (size,) or np.isinf(found).any():
        raise ValueError("column of readings")
    return found


def readings_csv(result: Result) -> bytes:
    """Every row of every run, corrected and reduced."""
    target = io.BytesIO()
    write_rows(target, result)
    return target.getvalue()
