"""What a case is made of: one row per entry.

The file, the link, the pages and the error texts all follow this table; a new entry is a new row in
one of the modules gathered here.
"""

from __future__ import annotations

from engine.job.case.fields_instruments import INSTRUMENT_FIELDS
from engine.job.case.fields_modes import MODE_FIELDS
from engine.job.case.fields_path import PATH_FIELDS
from engine.job.case.fields_reach import REACH_FIELDS
from engine.job.case.fields_readings import READING_FIELDS
from engine.job.case.fields_rig import RIG_FIELDS
from engine.job.case.fields_runsheet import RUNSHEET_FIELDS
from engine.job.case.rows import Field

_ROWS = (*PATH_FIELDS, *MODE_FIELDS, *REACH_FIELDS, *RIG_FIELDS, *INSTRUMENT_FIELDS, *READING_FIELDS,
         *RUNSHEET_FIELDS)
FIELDS: dict[str, Field] = {row.name: row for row in _ROWS}
