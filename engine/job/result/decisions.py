"""What a person decides about readings, written into the case: windows, rows left out, corrections switched off.

Every decision has its reason beside it. Each function gives a changed copy of the case.
"""

from __future__ import annotations

from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry, Row


def with_window(case: Case, run: str, begin: float, end: float, reason: str = "") -> Case:
    """The window of a run chosen by hand, ``begin`` to ``end`` [s]; one chosen before gives way."""
    row = FIELDS["windows"].row(log=run, begin=Entry(begin / 60, "min"), end=Entry(end / 60, "min"), reason=reason)
    return _with_row(case, "windows", row, lambda other: other["log"] == run)


def without_window(case: Case, run: str) -> Case:
    """Back to the longest settled window."""
    return _without(case, "windows", lambda row: row["log"] == run)


def window_row(case: Case, run: str) -> Row | None:
    """The window chosen by hand for a run, if there is one."""
    return next((row for row in case["windows"] if row["log"] == run), None)


def with_removed(case: Case, run: str, row: int, reason: str = "") -> Case:
    """A row of a run left out; without a reason it stays in until one is given."""
    new = FIELDS["removed"].row(log=run, row=Entry(float(row), "1"), reason=reason)
    return _with_row(case, "removed", new, lambda other: _is(other, run, row))


def without_removed(case: Case, run: str, row: int) -> Case:
    """A row taken in again."""
    return _without(case, "removed", lambda other: _is(other, run, row))


def with_switch(case: Case, correction: str, *, off: bool, reason: str = "") -> Case:
    """A correction switched off, for a reason, or on again."""
    if not off:
        return _without(case, "switched_off", lambda row: row["correction"] == correction)
    new = FIELDS["switched_off"].row(correction=correction, reason=reason)
    return _with_row(case, "switched_off", new, lambda row: row["correction"] == correction)


def _is(row: Row, run: str, number: int) -> bool:
    return row["log"] == run and int(row["row"].value) == number


def _with_row(case: Case, table: str, row: Row, same) -> Case:
    """The row in place of the one it replaces, else at the end; where the table is full, the oldest gives way."""
    rows = [row if same(other) else other for other in case[table]]
    if row not in rows:
        rows = [*rows, row][-FIELDS[table].most:]
    return case.with_(**{table: tuple(rows)})


def _without(case: Case, table: str, same) -> Case:
    return case.with_(**{table: tuple(row for row in case[table] if not same(row))})
