"""Readings typed by hand: a grid that can be typed into and pasted into, with a decimal point or comma."""

from __future__ import annotations

import pandas as pd
import streamlit as st

from engine.job.result.typed_sets import Edits, edited, grid, grid_columns, with_room
from engine.screen import session
from engine.screen.style import escaped_lines
from engine.steam.errors import InputError

_BASE, _LAST, _NUMBER, _FAULTS = "typed base", "typed last", "typed number", "typed faults"


def sets() -> None:
    """The grid of the readings typed into the case.

    The grid is laid out once, with empty rows to type into, and its edits are put on what stood there
    then, so that typing never loses its place; it is laid out anew when the readings have changed from
    elsewhere (undo, another case).
    """
    state, case, units = st.session_state, session.case(), session.units()
    laid_out = (case["readings"], units.name)
    if state.get(_LAST) != laid_out:
        state[_BASE], state[_LAST], state[_FAULTS] = with_room(case["readings"]), laid_out, ()
        state[_NUMBER] = state.get(_NUMBER, 0) + 1
    columns = grid_columns(case, units)
    key = f"typed sets {state[_NUMBER]}"
    base = case.with_(readings=state[_BASE])
    frame = pd.DataFrame(grid(base, columns), columns=[c.name for c in columns], dtype=object)
    st.data_editor(frame, key=key, num_rows="dynamic", hide_index=True, width="stretch",
                   column_config={c.name: st.column_config.TextColumn(c.heading, default="") for c in columns},
                   on_change=_typed, args=(key,))
    for fault in state[_FAULTS]:
        st.error(escaped_lines(str(fault)))
    st.caption("One set a row, all gauges read within a few seconds. Rows with the same word under Run are one run; "
               "times are minutes from its start. A column can be pasted from a spreadsheet. Beside log files, "
               "the sets count as further runs of the same test.")


def _typed(key: str) -> None:
    """Put the edits on what the grid was laid out from, and the outcome into the case."""
    state, case = st.session_state, session.case()
    done = state[key]
    edits = Edits(done["edited_rows"], done["added_rows"], done["deleted_rows"])
    try:
        rows, faults = edited(case, grid_columns(case, session.units()), state[_BASE], edits)
    except InputError as error:  # the case's own barometer cannot be used
        rows, faults = case["readings"], list(error.faults)
    state[_FAULTS] = tuple(faults)
    state[_LAST] = (rows, session.units().name)
    session.change(case.with_(readings=rows))
