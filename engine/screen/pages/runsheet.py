"""The Run sheet page: the procedure for the open case, to tick on a tablet at the line, to print, to rehearse."""

from __future__ import annotations

import streamlit as st

from engine.job.assessment.cautions import CAUTIONS, SHORT
from engine.job.case import faults_of
from engine.job.case.fields_modes import ELECTRIC
from engine.job.case.fields_runsheet import GAS_NONE, GAS_NOTED
from engine.job.case.rows import Entry
from engine.job.paper import PAPERS, Table, usual_paper
from engine.job.result.heated import reduce_heated
from engine.job.runsheet import RunSheet, headline, notices, tick, untick
from engine.job.runsheet.print import (
    deviation_table,
    gauge_table,
    mark_table,
    runsheet_html,
    title_of,
)
from engine.job.runsheet.readings import (
    columns_of,
    reading_table,
    readings_outside,
    runs_of,
    table_of,
    with_reading,
)
from engine.job.runsheet.steps import Section, Step
from engine.job.uncertainty.answer_with import answer_with
from engine.screen import clock, entries, rehearsal_view, session
from engine.screen.sheets import sheet_of
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import Fault, InputError
from engine.steam.units import to_si

# hands in gloves: whatever is pressed during the test is a finger wide and high
_CSS = """
<style>
.st-key-steps button, .st-key-take button {min-height: 3.5rem; font-size: 1.1rem;}
.st-key-steps [data-testid="stMarkdownContainer"] p {font-size: 1.08rem; line-height: 1.4;}
.st-key-take input, .st-key-hand input {min-height: 3.2rem; font-size: 1.15rem;}
.st-key-take [data-testid^="stNumberInputStep"] {display: none;}
.st-key-parts button, .st-key-onward button {min-height: 3rem;}
[class*="st-key-step-"] {border-bottom: 1px solid var(--st-border-color-light, rgba(128,128,128,.3));
  padding-bottom: .7rem;}
@media (max-width: 640px) {  /* one below the other: read first, then tick */
  .st-key-steps [data-testid="stHorizontalBlock"] {flex-wrap: wrap-reverse;}
}
</style>
"""
SHEET, REHEARSAL = "Run sheet", "Rehearsal"
_BODY = (("body_mass", 0.5), ("body_length", 10.0), ("body_inner_diameter", 1.0), ("T_ambient", 1.0))


def page() -> None:
    """The sheet, or the rehearsal of it on a simulated rig."""
    state = st.session_state
    if "run sheet shows" not in state:
        state["run sheet shows"] = REHEARSAL if rehearsal_view.asked() else SHEET
    session.mirror("sheet or rehearsal", state["run sheet shows"])
    st.segmented_control("What to show", (SHEET, REHEARSAL), key="sheet or rehearsal", required=True,
                         label_visibility="collapsed", on_change=_turned)
    if state["run sheet shows"] == REHEARSAL:
        rehearsal_view.show()
    else:
        rehearsal_view.beside()
        _whole_sheet()


def _turned() -> None:
    """What is shown outlives its widget, which a change of the page takes away."""
    st.session_state["run sheet shows"] = st.session_state["sheet or rehearsal"]


def _whole_sheet() -> None:
    """What it leads to, then the steps, the gauges, the readings, the paper."""
    st.html(_CSS)
    top = st.container(key="sheet answer", border=True)
    sheet = _sheet(top)
    _about()
    if sheet is None:
        return
    part = _steps(sheet)
    # whoever reads wants the room for the readings right below the steps, whoever waits the gauges
    for show in (_readings, _gauges) if part == "read" else (_gauges, _readings):
        show(sheet)
    _deviations(sheet)
    _paper(sheet)
    with st.expander("Cautions"):
        st.markdown("\n".join(f"- {line}" for line in CAUTIONS))


def _sheet(place) -> RunSheet | None:
    units = session.units()
    with place:
        try:
            sheet = sheet_of(session.case())
        except InputError as error:
            st.error(escaped_lines(str(error)))
            st.caption("Nothing is lost: correct the entry, or undo. A run sheet is made once every entry can be used.")
            return None
        done, held = len(sheet.steps) - len(sheet.unticked), len(sheet.held)
        holds = f" **■ {held} hold point{'s' if held != 1 else ''} open.**" if held else ""
        st.markdown(f"### {escaped(headline(sheet, units))}")
        st.markdown(f"{done} of {len(sheet.steps)} steps ticked.{holds}")
        for line in notices(sheet, units):
            st.markdown(escaped(line))
        st.caption(SHORT)
    return sheet


def _about() -> None:
    with st.expander("Where, who, how many readings"):
        with entries.who_and_where():
            entries.choice("gas_hazard", {GAS_NONE: "None noted", GAS_NOTED: "Toxic or suffocating gas possible"})
            for name, step in (("runs_planned", 1.0), ("read_every", 0.5), ("duration", 5.0)):
                entries.number(name, step=step)
        if session.case()["mode"] == ELECTRIC:  # the Rig page describes what throttles
            st.caption("For the warm-up: the body between heater and thermometer.")
            places = st.columns(4, gap="medium")
            for place, (name, step) in zip(places, _BODY, strict=True):
                with place:
                    entries.number(name, step=step)


# ---- steps


def _steps(sheet: RunSheet) -> str:
    """The part chosen, step by step. Returns its key."""
    st.subheader("Steps", anchor=False)
    with st.container(key="hand"):
        session.mirror("initials", st.session_state.get("hand", next((t.initials for t in sheet.ticks.values()), "")))
        st.text_input("Initials", key="initials", max_chars=12, placeholder="of whoever ticks", on_change=_signed,
                      help="A tick without a name says nothing. They are needed once, before the first tick.")
    sections = {section.key: section for section in sheet.sections}
    with st.container(key="parts"):
        chosen = st.segmented_control("Part", list(sections), key="part", label_visibility="collapsed",
                                      format_func=lambda key: _progress(sections[key], sheet),
                                      default=_current(sheet).key, required=True)
    section = sections.get(chosen) or _current(sheet)
    _section(section, sheet)
    _onward(section, sheet)
    return section.key


def _progress(section: Section, sheet: RunSheet) -> str:
    done = sum(step.key in sheet.ticks for step in section.steps)
    return f"{section.title.split(':')[0]} {done}/{len(section.steps)}"


def _current(sheet: RunSheet) -> Section:
    """The first part in which something is left to do."""
    left = {step.key for step in sheet.unticked}
    return next((s for s in sheet.sections if any(step.key in left for step in s.steps)), sheet.sections[-1])


def _section(section: Section, sheet: RunSheet) -> None:
    held = sheet.held and not section.hold
    if held:
        st.warning(f"■ {len(sheet.held)} hold points are open. Nothing here starts before all of them are ticked.")
    with st.container(key="steps"):
        for step in section.steps:
            _step(step, sheet, bool(held))


def _onward(section: Section, sheet: RunSheet) -> None:
    """To the next part without a way back to the top."""
    done = all(step.key in sheet.ticks for step in section.steps)
    following = next((s for before, s in zip(sheet.sections, sheet.sections[1:], strict=False)
                      if before.key == section.key), None)
    if done:
        st.success(f"All of “{section.title}” is ticked.")
    if following is not None:
        with st.container(key="onward"):
            st.button(f"Next part: {following.title.split(':')[0]}", key="next part", width="stretch",
                      type="primary" if done else "secondary", on_click=_turn_to, args=(following.key,))


def _turn_to(part: str) -> None:
    st.session_state["part"] = part


def _step(step: Step, sheet: RunSheet, held: bool) -> None:
    with st.container(key=f"step {step.key}"):
        mark, words = st.columns([1, 4], vertical_alignment="center", gap="medium")
    ticked = sheet.ticks.get(step.key)
    with mark:
        if ticked:
            with st.popover(escaped(f"✓ {ticked.time[-5:]} {ticked.initials[:12]}"), width="stretch",
                            key=f"ticked {step.key}"):
                _correct(step, sheet)
        else:
            st.button("○ Tick", key=f"tick {step.key}", width="stretch", on_click=_tick, args=(step.key,),
                      disabled=held)
    with words:
        _refused(step.key)
        st.markdown(escaped(step.said.text(session.units())))
        if step.missing:
            st.caption(f"Number missing: {escaped(step.missing)}")
        if ticked and ticked.remark:
            st.caption(f"Remark: {escaped(ticked.remark)}")


def _signed() -> None:
    """Initials outlive their widget, which a change of the page takes away."""
    st.session_state["hand"] = st.session_state["initials"]


def _refuse(place: str, error: InputError) -> None:
    """Keep a refusal for the place where it is read."""
    st.session_state["refused"] = (place, str(error))


def _refused(place: str) -> None:
    where, words = st.session_state.get("refused") or ("", "")
    if where == place:
        st.error(escaped_lines(words))
        st.session_state["refused"] = None


def _tick(key: str) -> None:
    try:
        session.take(ticks=tick(session.case(), key, clock.now(), st.session_state["initials"])["ticks"])
    except InputError as error:
        _refuse(key, error)


def _correct(step: Step, sheet: RunSheet) -> None:
    """Time, initials and remark of a tick, to be corrected; or the tick taken back."""
    ticked = sheet.ticks[step.key]
    for label, name, most in (("Time", "time", 20), ("Initials", "initials", 12), ("Remark", "remark", 300)):
        key = f"{name} of {step.key}"
        session.mirror(key, getattr(ticked, name))
        st.text_input(label, key=key, max_chars=most, on_change=_corrected, args=(step.key,))
    st.button("Take the tick back", key=f"untick {step.key}", on_click=_untick, args=(step.key,))


def _corrected(key: str) -> None:
    time, initials, remark = (st.session_state[f"{name} of {key}"] for name in ("time", "initials", "remark"))
    try:
        session.take(ticks=tick(session.case(), key, time, initials, remark)["ticks"])
    except InputError as error:
        _refuse(key, error)


def _untick(key: str) -> None:
    session.take(ticks=untick(session.case(), key)["ticks"])


# ---- gauges and readings


def _table(table: Table) -> None:
    """A table whose headings may repeat or be empty: blanks of growing length keep them apart."""
    headings = [h or " " * (k + 1) for k, h in enumerate(table.headings)]
    st.table([dict(zip(headings, map(escaped, row), strict=True)) for row in table.rows])


def _gauges(sheet: RunSheet) -> None:
    units = session.units()
    st.subheader("What every gauge must show", anchor=False)
    _table(gauge_table(sheet, units))
    with st.expander("The scale of the thermometer, from dry to wet"):
        _table(mark_table(sheet, units))


def _deviations(sheet: RunSheet) -> None:
    st.subheader("When it is otherwise", anchor=False)
    _table(deviation_table(sheet, session.units()))


def _readings(sheet: RunSheet) -> None:
    st.subheader("Readings", anchor=False)
    run = _take(sheet)
    typed = runs_of(sheet.case)
    for name, rows in typed.items():
        st.markdown(f"**Run {escaped(name)}**" if name else "**Without a run**")
        _table(reading_table(rows, sheet.plan, session.units()))
    if typed.get(run):
        st.button(f"Take out the last set of run {run}", key="drop set", on_click=_drop, args=(run,))
    if sheet.plan.electric:
        _heated(sheet)


def _heated(sheet: RunSheet) -> None:
    """What the sets with a heater say so far, and their means for the reading of the case: no other page has them."""
    try:
        found = reduce_heated(sheet.case)
    except InputError as error:
        st.error(escaped_lines(str(error)))
        return
    if found is None:
        return
    said = answer_with(found.forecast, session.units())
    st.markdown(f"By these sets: {said.shape} {escaped(said.headline)}")
    if found.assessment.case != sheet.case:
        st.button("Take the means for the reading of the case", key="take means", on_click=session.change,
                  args=(found.assessment.case,))


def _take(sheet: RunSheet) -> str:
    """Room for one set of readings, with buttons wide enough for gloves. Returns the run chosen."""
    plan = sheet.plan
    with st.container(key="take", border=True):
        names = [str(number) for number in range(1, plan.runs + 1)]
        run = st.segmented_control("Run", names, key="run", default=names[0], required=True) or names[0]
        taken = runs_of(sheet.case).get(run, [])
        st.markdown(f"Set {len(taken) + 1} of {plan.sets}, run {run}")
        last = taken[-1] if taken else None
        at = 0.0 if last is None or last["time"] is None else (
            to_si(last["time"].value, last["time"].unit, "time") + plan.a.si["read_every"]) / 60
        columns = columns_of(plan, session.units())
        key = f"set {run} {len(sheet.case[table_of(sheet.case)])}"
        grid = [*st.columns(4), *st.columns(4)]
        grid[0].number_input("Time from the start, min", value=at, step=0.5, format="%.7g", key=f"{key} time")
        for place, column in zip(grid[1:], columns, strict=False):
            place.number_input(column.heading, value=None, step=0.1, format="%.7g",
                               key=f"{key} {column.name} {column.unit}")
        grid[len(columns) + 1].text_input("Remark", max_chars=200, key=f"{key} remark")
        st.button("Write this set down", key="write set", type="primary", width="stretch", on_click=_write,
                  args=(run, key, columns))
    _refused("readings")
    _say_outside(sheet)
    return run


def _write(run: str, key: str, columns) -> None:
    state = st.session_state
    cells: dict[str, Entry | str | None] = {"run": run, "remark": state[f"{key} remark"]}
    if state[f"{key} time"] is not None:
        cells["time"] = Entry(state[f"{key} time"], "min")
    for c in columns:
        value = state[f"{key} {c.name} {c.unit}"]
        cells[c.name] = None if value is None else Entry(value, c.unit, c.basis)
    try:
        if all(cells[c.name] is None for c in columns):
            raise InputError(Fault("set of readings", "nothing", "", "one reading at least"))
        case = with_reading(session.case(), **cells)
        if faults := faults_of(case):
            raise InputError(*faults)
        session.take(**{table_of(case): case[table_of(case)]})
    except InputError as error:
        _refuse("readings", error)


def _drop(run: str) -> None:
    name = table_of(session.case())
    rows = session.case()[name]
    last = max(k for k, row in enumerate(rows) if row["run"].strip() == run)
    session.take(**{name: rows[:last] + rows[last + 1:]})


def _say_outside(sheet: RunSheet) -> None:
    """What the set written down last shows that it should not."""
    rows = sheet.case[table_of(sheet.case)]
    if not rows:
        return
    said = {d.key: d for d in sheet.deviations}
    for key in readings_outside(rows[-1], sheet.plan, session.site_barometer()):
        d, units = said[key], session.units()
        st.warning(f"**{escaped(d.name)}.** {escaped(d.means.text(units))} {escaped(d.do.text(units))}")


def _paper(sheet: RunSheet) -> None:
    case, units = sheet.case, session.units()
    st.subheader("On paper", anchor=False)
    paper = st.segmented_control("Paper", PAPERS, key=f"sheet paper {units.name}", default=usual_paper(units),
                                 required=True) or usual_paper(units)
    st.download_button(f"Save the run sheet to print on {paper}", lambda: runsheet_html(case, units, paper),
                       "run-sheet.html", "text/html", key="sheet html", on_click="ignore",
                       help=escaped(title_of(case)) + ": one page of HTML; open it in any browser and print.")


if __name__ == "__main__":
    page()

