"""The run sheet of the open case; its plan is worked out once, whatever is ticked or read."""

from __future__ import annotations

from functools import lru_cache

from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.runsheet import RunSheet, run_sheet
from engine.job.runsheet.plan import Plan, plan_of

# entries that no number of the sheet rests on
_ASIDE = {name: FIELDS[name].blank for name in ("title", "note", "place", "tested_by", "witnessed_by", "permit",
                                                "instrument_list", "deviations", "ticks", "readings",
                                                "heater_readings")}


@lru_cache(maxsize=32)
def _planned(case: Case) -> Plan:
    return plan_of(case)


def sheet_of(case: Case) -> RunSheet:
    """The run sheet of a case. Raises InputError where an entry cannot be used."""
    return run_sheet(case, _planned(case.with_(**_ASIDE)))
