"""The data in and beside a record: case and logs kept to the last digit, the rows as CSV, and the way back."""

from __future__ import annotations

import io
import json
import math
from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np

from engine.job.case import Case
from engine.job.case.casefile import as_block, block_of, from_record, to_json
from engine.job.result import Result
from engine.job.result.data import write_rows
from engine.job.result.runs import Run, run_of_log, runs_typed
from engine.measurement.logbook import Log
from engine.measurement.logbook.mapping import Mapping
from engine.measurement.logbook.rows import Rejected, Remark
from engine.measurement.logbook.suspicion import Suspicion
from engine.steam.errors import Fault, InputError
from engine.steam.quantities import QUANTITIES

MOST_CELLS = 200_000  # of logs kept in the record itself; longer ones have to be kept beside it


class Reopened(NamedTuple):
    """What a record holds: its case, and the logs that its readings came from."""

    case: Case
    logs: tuple[Log, ...]

    @property
    def runs(self) -> tuple[Run, ...]:
        """The runs behind the record, those typed into the case last."""
        return (*map(run_of_log, self.logs), *runs_typed(self.case))


def fits(logs: Sequence[Log]) -> bool:
    """Whether logs are short enough to be kept in the record itself."""
    return sum(len(log) * (2 + len(log.channels)) + 2 * len(log.remarks) for log in logs) <= MOST_CELLS


def blocks(case: Case, logs: Sequence[Log]) -> str:
    """The case, and the logs as read where they fit, as blocks of data for a page."""
    data = [_as_data(log) for log in logs] if fits(logs) else []
    text = json.dumps({"logs": data}, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    return as_block("case", to_json(case)) + "\n" + as_block("readings", text)


def _as_data(log: Log) -> dict[str, Any]:
    """A log in SI, every digit; NaN, where there is no reading, as null."""
    def column(values: np.ndarray | None) -> list | None:
        return None if values is None else [None if v != v else v for v in values.tolist()]

    return {"name": log.name, "mapping": log.mapping.to_dict(), "start": log.start, "time": column(log.time),
            "channels": {name: column(values) for name, values in log.channels.items()}, "basis": log.basis,
            "rows": column(log.rows), "remarks": log.remarks, "rejected": log.rejected,
            "rejected_counts": log.rejected_counts, "suspicions": log.suspicions, "rows_read": log.rows_read,
            "blank_rows": log.blank_rows, "notes": log.notes}


def reopened(data: bytes | str) -> Reopened:
    """A record read back. InputError where it is none, or has been changed so that it cannot be used."""
    case, text = from_record(data), block_of(data, "readings")
    try:
        return Reopened(case, tuple(_as_log(raw) for raw in json.loads(text)["logs"]))
    except (ValueError, TypeError, KeyError, AttributeError, IndexError, RecursionError, OverflowError) as error:
        raise InputError(Fault("readings in the record", type(error).__name__, "",
                               "readings as this program keeps them", "the record was changed after it was made",
                               "use the files beside it")) from error


def _as_log(raw: dict[str, Any]) -> Log:
    rows = np.array([int(n) for n in raw["rows"]], dtype=np.int64)
    channels = {name: _column(values, rows.size) for name, values in raw["channels"].items() if name in QUANTITIES}
    time = None if raw["time"] is None else _column(raw["time"], rows.size)
    if time is not None and not np.isfinite(time).all():
        raise ValueError("time")
    rows.setflags(write=False)
    return Log(
        str(raw["name"]), Mapping.from_dict(raw["mapping"]), str(raw["start"]), time, channels,
        {str(n): str(b) for n, b in raw["basis"].items() if b in ("gauge", "absolute")}, rows,
        tuple(Remark(int(row), None if at is None else float(at), str(text)) for row, at, text in raw["remarks"]),
        tuple(Rejected(int(row), str(column), str(content), str(why)) for row, column, content, why in raw["rejected"]),
        {str(reason): int(count) for reason, count in raw["rejected_counts"].items()},
        tuple(_suspicion(*fields) for fields in raw["suspicions"]), int(raw["rows_read"]), int(raw["blank_rows"]),
        tuple(map(str, raw["notes"])))


def _suspicion(kind, channel, sentence, rows, count, remedy, mend=()) -> Suspicion:
    return Suspicion(str(kind), str(channel), str(sentence), tuple((int(a), int(b)) for a, b in rows), int(count),
                     str(remedy), tuple(map(str, mend)))


def _column(values: list, size: int) -> np.ndarray:
    found = np.array([math.nan if v is None else float(v) for v in values])
    if found.shape != (size,) or np.isinf(found).any():
        raise ValueError("column of readings")
    found.setflags(write=False)
    return found


def readings_csv(result: Result) -> bytes:
    """Every row of every run, corrected and reduced."""
    target = io.BytesIO()
    write_rows(target, result)
    return target.getvalue()
