"""What the columns of a log are: shown as recognised, to be corrected, and confirmed before anything is read."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import streamlit as st

from engine.job.result.intake import assigned
from engine.job.result.runs import told_of
from engine.measurement.logbook.mapping import Mapping
from engine.measurement.logbook.words import BASES, CHANNELS, PRESSURES, recognise, units_of
from engine.screen import logs, session
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError

_ALWAYS = ("time", "p_line", "p_exhaust", "T_exhaust")
_UNITS_SAID = {"clock": "h:min:s", "stamp": "date and time", "mm:ss": "min:s", "excel": "spreadsheet date",
               "unix": "seconds since 1970", "unix ms": "milliseconds since 1970", "": "choose"}
_ORDERS = {"dmy": "day, month, year", "mdy": "month, day, year", "ymd": "year, month, day", "": "choose"}
_DECIMALS = {".": "point", ",": "comma", "": "choose"}
_WIDTHS = (2, 5, 2, 3)  # of what a channel is, its column, unit, gauge or absolute
_SAMPLES = 3  # cells shown beside a heading


def confirm(one: logs.Held) -> None:
    """The button that takes the columns as they are; beside it the way back where others were taken before."""
    st.button("Read with these columns", key=f"confirm {one.name}", type="primary", on_click=logs.confirm,
              args=(one.name,), disabled=bool(one.mapping.questions), width="stretch",
              help="What the columns are is remembered in the case, for this log and the next one like it.")
    if told_of(session.case(), one.name) and one.data:
        st.button("As they were", key=f"as before {one.name}", on_click=logs.as_told, args=(one.name,),
                  width="stretch", help="Back to the columns with which this log was read.")


def columns(one: logs.Held) -> None:
    """The columns of one log: first what only a person can answer, then what each seems to be."""
    mapping = one.mapping
    if mapping.questions:
        st.warning(escaped_lines("\n".join(_upper_first(question.text) for question in mapping.questions)))
    for note in one.layout.notes if one.layout else ():
        st.caption(escaped(_upper_first(note)))
    used = [name for name in CHANNELS if name in mapping.used or name in _ALWAYS]
    with st.container(gap="xsmall"):
        for channel in used:
            _channel(one, channel)
        _whole_file(one)
    others = [name for name in CHANNELS if name not in used]
    with st.expander("More channels: " + ", ".join(CHANNELS[name].label for name in others)):
        for channel in others:
            _channel(one, channel)
    if one.layout and one.layout.preview:
        with st.expander("First rows as they stand in the file"):
            _preview(one)


def _channel(one: logs.Held, channel: str) -> None:
    """Which column a channel is in, its unit, and for a pressure gauge or absolute."""
    mapping, column = one.mapping, one.mapping.used.get(channel)
    label = CHANNELS[channel].label.capitalize()
    name, where, unit, basis = st.columns(_WIDTHS, vertical_alignment="center")
    name.markdown(label)
    with where:
        key = f"column of {channel} in {one.name}"
        positions = [None, *range(len(mapping.columns))]
        session.mirror(key, column.position if column else None)
        st.selectbox(label, positions, key=key, format_func=lambda k: _heading(one, k), label_visibility="collapsed",
                     placeholder=_heading(one, None),
                     on_change=_changed(one, key, lambda value: _moved(mapping, channel, value)))
    if column is None:
        return
    units = units_of(channel)
    if units:
        with unit:
            key = f"unit of {channel} in {one.name}"
            options = units if column.unit else ("", *units)
            session.mirror(key, column.unit)
            st.selectbox(f"{label}, unit", options, key=key, format_func=lambda u: _UNITS_SAID.get(u, u),
                         label_visibility="collapsed", on_change=_changed(
                             one, key, lambda value: assigned(mapping, channel, column.position, value, column.basis)))
    if channel in PRESSURES:
        with basis:
            key = f"basis of {channel} in {one.name}"
            session.mirror(key, column.basis or None)
            st.segmented_control(f"{label} is", BASES, key=key, label_visibility="collapsed", on_change=_changed(
                one, key, lambda value: assigned(mapping, channel, column.position, column.unit, value or "")))


def _moved(mapping: Mapping, channel: str, position: int | None) -> Mapping:
    """The channel in another column; what that column's heading says of unit and basis is taken along."""
    if position is None:
        return assigned(mapping, channel, None)
    said = recognise(mapping.columns[position].name)
    unit = said.unit if said.unit in units_of(channel) else ""
    basis = said.basis if channel in PRESSURES else ""
    return assigned(mapping, channel, position, unit, "absolute" if channel == "p_barometer" else basis)


def _heading(one: logs.Held, position: int | None) -> str:
    if position is None:
        return "not in this log"
    cells = [row[position] for _, row in one.layout.preview if position < len(row) and row[position].strip()]
    seen = ", ".join(cells[:_SAMPLES])
    return one.mapping.columns[position].label + (f"  ({seen} …)" if seen else "")


def _whole_file(one: logs.Held) -> None:
    mapping = one.mapping
    open_items = {question.item for question in mapping.questions}
    dated = any(c.unit in ("stamp", "date") for c in mapping.used.values())
    _one_of(one, "decimal", "Decimal sign", _DECIMALS, "decimal" in open_items)
    if dated:
        _one_of(one, "date_order", "Order of dates", _ORDERS, "date_order" in open_items)


def _one_of(one: logs.Held, item: str, label: str, words: dict[str, str], asked: bool) -> None:
    key = f"{item} of {one.name}"
    session.mirror(key, getattr(one.mapping, item))
    name, where, _ = st.columns((_WIDTHS[0], _WIDTHS[2], _WIDTHS[1] + _WIDTHS[3]), vertical_alignment="center")
    name.markdown(label)
    where.selectbox(label, [o for o in words if o or asked], key=key, format_func=lambda o: words[o],
                    label_visibility="collapsed",
                    on_change=_changed(one, key, lambda value: replace(one.mapping, **{item: value})))


def _changed(one: logs.Held, key: str, new: Callable[[object], Mapping]) -> Callable[[], None]:
    """A callback that puts a widget's value into the mapping; one that cannot be is refused and nothing changes."""
    def changed() -> None:
        try:
            logs.change_mapping(one.name, new(st.session_state[key]))
        except InputError as error:
            st.session_state["notice"] = ("error", str(error))
    return changed


def _preview(one: logs.Held) -> None:
    names = [column.label for column in one.mapping.columns]
    names = [name if names.count(name) == 1 else f"{name} ({k + 1})" for k, name in enumerate(names)]
    rows = [{"Row": str(line), **dict(zip(names, cells, strict=False))} for line, cells in one.layout.preview[:8]]
    st.dataframe(rows, hide_index=True)


def _upper_first(text: str) -> str:
    return text[:1].upper() + text[1:]
