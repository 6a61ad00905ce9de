"""The Readings page: from a log or typed sets to a quality that can be defended."""

from __future__ import annotations

from collections.abc import Callable
from io import BytesIO

import streamlit as st

from engine.job.assessment.cautions import CAUTIONS, SHORT
from engine.job.assessment.tables import as_csv
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS
from engine.job.case.fields_rig import ELECTRIC_PROBE, MERCURY, ORGANIC
from engine.job.rehearsal.demo_log import demo_log
from engine.job.result import Result
from engine.job.result.corrections import case_of, switched_off
from engine.job.result.data import as_json, run_table, write_rows
from engine.job.result.intake import mended
from engine.job.result.said import check_lines, counted, decision_words, rule_text, run_rows, told, upper_first
from engine.job.uncertainty.forecast_words import budget_rows
from engine.measurement.logbook.words import CHANNELS
from engine.screen import entries, live, log_columns, logs, run_view, session, typed
from engine.screen.charts.decision import decision_diagram, draws_diagram
from engine.screen.charts.forecast import budget_diagram
from engine.screen.instrument_entries import instruments
from engine.screen.pages.path import LOSSES
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError

LISTED = 200  # refused cells in the table; the counts are complete
FILES = ["csv", "tsv", "txt", "dat", "log", "asc", "xlsx", "xlsm"]
# as high with a result as without one, so that the grid stays where it is while sets are typed into it
_CSS = """
<style>
.st-key-readings_answer {min-height: 17rem;}
.st-key-readings_headline {padding-bottom: 1rem;}  /* text reaches a little out of its box */
.st-key-readings_headline h3 {padding: .3rem 0;}
@media (min-width: 641px) and (min-height: 700px) {  /* what a switch far below does is seen at once */
  [data-testid="stLayoutWrapper"]:has(> .st-key-readings_headline) {position: sticky; top: 3.75rem; z-index: 50;}
  [data-testid="stApp"] :has(.st-key-readings_headline), .st-key-readings_headline {background: inherit;}
}
</style>
"""
EVERYTHING, ALONE = "With sampling", "By the instruments alone"


def page() -> None:
    """The result first, then what it was made from, step by step."""
    st.html(_CSS)
    headline, top = st.container(key="readings_headline"), st.container(key="readings_answer", border=True)
    _intake()
    found = _result(headline, top)
    if found is None:
        return
    _runs(found)
    _corrections(found)
    _uncertainty(found)
    _decision(found)
    _draws(found)
    _save(found)
    st.caption(SHORT)
    with st.expander("Cautions"):
        st.markdown("\n".join(f"- {line}" for line in CAUTIONS))


# ---- the result


def _result(headline, top) -> Result | None:
    """The readings reduced; where an entry cannot be used, the refusal, and nothing below it."""
    with top:
        try:
            found = logs.result()
        except InputError as error:
            st.error(escaped_lines(str(error)))
            st.caption("Nothing is lost: correct the entry, or undo.")
            return None
        _say(found, headline)
    return found


def _say(found: Result, headline) -> None:
    said = told(found)
    kind = "" if found.final or found.x is None else " Exploration, not a result."
    headline.markdown(f"### {said.shape} {escaped(said.headline)}{kind}")
    decided = decision_words(found)
    for place, (word, reason) in zip(st.columns(2) if decided else (), decided, strict=True):
        place.markdown(f"##### {escaped(word)}  \n{escaped(reason)}")
    for line in (*_waiting(), *said.open_points):
        st.markdown(f"▸ {escaped(line)}")
    st.markdown(escaped(" ".join(said.reasons)))
    for line in found.cautions:
        st.caption(escaped(upper_first(line)))
    if found.x is not None and len(found.read) == 1:
        st.button("Take these means as the case's reading", key="take means", on_click=_take_means, args=(found,),
                  help="Line, exhaust and temperature of the case become the corrected means, for the other pages.")


def _waiting() -> list[str]:
    """Logs that do not count yet, and those in which something looks wrong that one answer would mend."""
    lines = []
    for one in logs.held().values():
        if one.refused:
            lines.append(f"{one.name} cannot be read: see below.")
        elif not one.confirmed:
            lines.append(f"{one.name} waits for its columns to be confirmed, below.")
        elif one.log is not None and any(suspicion.mend for suspicion in one.log.suspicions):
            lines.append(f"{one.name}: a unit, or gauge and absolute, looks wrong: see below.")
    return lines


def _take_means(found: Result) -> None:
    run, case = found.read[0], session.case()
    session.change(case_of(case, found.si, run.corrected, switched_off(case)))


# ---- readings in


def _stays_open(key: str, wanted: bool) -> bool:
    """Open as soon as it is wanted, and then for good: nothing shuts under the reader's hands."""
    st.session_state[key] = wanted or st.session_state.get(key, False)
    return st.session_state[key]


def _intake() -> None:
    nothing_yet = not session.case()["readings"] and not any(one.confirmed for one in logs.held().values())
    with st.expander("Readings: logs and typed sets", expanded=_stays_open("intake open", nothing_yet)):
        files, by_hand = st.tabs(["Log files", "Typed sets"])
        with files:
            _upload()
        with by_hand:
            try:
                typed.sets()
            except InputError as error:
                st.caption(escaped_lines(str(error)))
    for name in list(logs.held()):
        _one_log(name)


def _upload() -> None:
    key = f"uploader {st.session_state.get('uploads', 0)}"
    st.file_uploader("Log files, each one run of the test", type=FILES, accept_multiple_files=True, key=key,
                     on_change=logs.upload(key),
                     help="CSV, TSV, semicolons, decimal commas, XLSX. They stay in this session, on this machine.")
    with st.container(horizontal=True):
        st.button("Bring an invented log", key="demo log", on_click=_demo_log,
                  help="A simulated test of the open case, with warm-up and noise, to see how this page works.")
        if (one := logs.dropped()) is not None:
            st.button(f"Bring {escaped(one.name)} back", key="bring back", on_click=logs.bring_back)


def _demo_log() -> None:
    target = BytesIO()
    try:
        demo_log(target, session.case(), seed=1 + len(logs.held()), duration=5400.0)
        logs.bring("invented log.csv", target.getvalue())
    except InputError as error:
        st.session_state["notice"] = ("error", str(error))


def _one_log(name: str) -> None:
    """One log: what it is, its columns until they are confirmed, then what was refused and what looks wrong."""
    with st.container(border=True, key=f"log {name}"):
        one = logs.read_in(name)
        words, take, button = st.columns([5, 2, 1], vertical_alignment="center")
        words.markdown(f"**{escaped(one.name)}** · {_state(one)}")
        button.button("Remove", key=f"drop {one.name}", on_click=logs.drop, args=(one.name,), width="stretch",
                      help="Takes it out of this session. The file is untouched.")
        if one.mapping is not None and not one.confirmed:
            with take:
                log_columns.confirm(one)
        if one.refused:
            st.error(escaped_lines(one.refused))
        if one.mapping is None:
            return
        if not one.confirmed:
            log_columns.columns(one)
            return
        with st.expander("Columns"):
            log_columns.columns(one)
        if one.log is not None:
            _noticed(one)


def _state(one: logs.Held) -> str:
    if one.refused:
        return "✕ cannot be read"
    if one.log is None:
        return "columns to be confirmed" if not one.confirmed else "to be read"
    log, lost = one.log, sum(one.log.rejected_counts.values())
    parts = [f"{len(log):,} of {log.rows_read:,} rows read".replace(",", " ")]
    parts += [counted(lost, "refusal")] if lost else []
    parts += [counted(len(log.suspicions), "suspicion")] if log.suspicions else []
    return " · ".join(parts)


def _noticed(one: logs.Held) -> None:
    for k, suspicion in enumerate(one.log.suspicions):
        st.warning(escaped(upper_first(str(suspicion))) + ".")
        mapping = mended(one.mapping, suspicion) if one.data else None
        if mapping is not None:
            st.button(f"Read the {CHANNELS[suspicion.channel].label} as {suspicion.mend[1]}", on_click=logs.correct,
                      key=f"mend {k} of {one.name}", args=(one.name, mapping), help="Undo takes it back.")
    if one.log.rejected_counts:
        with st.expander(f"What was refused, {sum(one.log.rejected_counts.values())} in all"):
            st.table([{"Reason": escaped(reason), "Times": str(count)}
                      for reason, count in one.log.rejected_counts.items()])
            st.dataframe([{"Row": r.row, "Column": r.column, "Content": r.content, "Reason": r.reason}
                          for r in one.log.rejected[:LISTED]], hide_index=True)
    if one.log.remarks:
        with st.expander(f"Remarks in the log, {len(one.log.remarks)}"):
            st.dataframe([{"Row": r.row, "Min": None if r.time is None else round(r.time / 60, 2), "Remark": r.text}
                          for r in one.log.remarks[:LISTED]], hide_index=True)


# ---- run by run


def _runs(found: Result) -> None:
    if not found.runs:
        return
    st.subheader("Readings and window", anchor=False)
    if len(found.runs) > 1:
        st.table([{k: escaped(v) for k, v in row.items()} for row in run_rows(found, session.units())])
    names = [run.run.name for run in found.runs]
    chosen = names[0]
    if len(names) > 1:
        chosen = st.segmented_control("Run", names, key="run shown", default=names[0], required=True,
                                      format_func=escaped, label_visibility="collapsed") or names[0]
    run = found.runs[names.index(chosen)] if chosen in names else found.runs[0]
    run_view.run_view(run, found)
    with st.expander("What counts as settled"):
        for place, name in zip(st.columns(5), ("steady_window", "steady_rate", "steady_scatter", "steady_p_line",
                                               "steady_p_exhaust"), strict=True):
            with place:
                entries.number(name)


def _corrections(found: Result) -> None:
    st.subheader("Corrections, one by one", anchor=False)
    read = [run for run in found.runs if run.corrections]
    if read:
        if len(found.runs) > 1:
            st.caption(f"Sizes at the means of {escaped(read[0].run.name)}; a switch holds for all runs.")
        run_view.corrections(read[0])
    undecided = any("heat loss" in line for line in found.unable)
    with st.expander("What the corrections rest on", expanded=_stays_open("corrections open", undecided)):
        loss, certificates, site, thermometer = st.columns(4, gap="medium")
        with loss:
            entries.choice("heat_loss_method", LOSSES)
            for name in {BY_CONDUCTANCE: ("conductance", "T_ambient"), BY_KG: ("heat_loss",),
                         BY_NORMAL: ("T_normal",), BY_TWO_FLOWS: ("second_flow", "T_second", "T_ambient"),
                         }.get(found.case["heat_loss_method"], ()):
                entries.number(name)
            for name in ("sample_flow", "line_velocity", "exhaust_bore", "recovery"):
                entries.number(name)
        with certificates:
            for stem in ("line_gauge", "exhaust_gauge", "barometer", "thermometer"):
                entries.number(f"{stem}_correction")
        with site:
            entries.choice("barometer_source", {"altitude": "From the altitude", "reading": "As read"})
            entries.number("altitude" if found.case["barometer_source"] == "altitude" else "p_barometer")
            entries.number("leg_height")
        with thermometer:
            entries.choice("thermometer", {ELECTRIC_PROBE: "Electric", MERCURY: "Mercury in glass",
                                           ORGANIC: "Organic liquid in glass"})
            if found.case["thermometer"] != ELECTRIC_PROBE:
                entries.number("exposed")
                entries.number("T_stem")


# ---- how sure


def _uncertainty(found: Result) -> None:
    st.subheader("Uncertainty, term by term", anchor=False)
    with st.expander("Instruments, sampling, and what else is in doubt",
                     expanded=_stays_open("instruments open", bool(found.missing))):
        instruments()
    if found.budget is None:
        st.caption("A budget needs a quality.")
        return
    shown = EVERYTHING
    if found.budget.u > found.instruments.u:
        shown = st.segmented_control("Budget", (EVERYTHING, ALONE), key="budget shown", default=ALONE, required=True,
                                     label_visibility="collapsed")
    diagram = budget_diagram(found, with_sampling=shown != ALONE)
    left, right = st.columns([5, 6], gap="large")
    with left:
        if diagram is not None:
            live.show((diagram,), key="result budget", height=480, columns=1)
    with right:
        st.table([{k: escaped(v) for k, v in row.items()}
                  for row in budget_rows(found, session.units(), with_sampling=shown != ALONE)])
        if found.better:
            best = found.better[0]
            st.caption(f"Half the doubt of the {escaped(best.group)} would bring U by the instruments from "
                       f"{100 * found.instruments.U:.3f} to {100 * best.U_halved:.3f} %pt.")


def _decision(found: Result) -> None:
    st.subheader("Decision", anchor=False)
    left, right = st.columns([4, 7], gap="large")
    with left:
        a, b = st.columns(2)
        with a:
            entries.choice("limit_side", {"at least": "At least", "at most": "At most"})
            entries.choice("decision_rule", {"guarded by risk": "Guarded, by a risk", "simple": "Simple",
                                             "guarded by U": "Guarded, by U"})
        with b:
            entries.number("x_limit")
            entries.number("decision_risk")
        entries.number("coverage")
    with right:
        st.markdown(escaped(rule_text(found.case)))
        diagram = decision_diagram(found)
        if diagram is not None:
            live.show((diagram,), key="decision", height=300, columns=1)


def _draws(found: Result) -> None:
    if found.budget is None:
        return
    st.subheader("Monte Carlo beside the budget", anchor=False)
    try:
        drawn = logs.checked(found)
    except InputError as error:
        st.error(escaped_lines(str(error)))
        return
    left, right = st.columns([4, 7], gap="large")
    with left:
        for line in check_lines(drawn):
            st.markdown(escaped(line))
    with right:
        live.show((draws_diagram(drawn, found),), key="draws", height=320, columns=1)


def _save(found: Result) -> None:
    if found.x is None:
        return
    with st.container(horizontal=True):
        st.download_button("Save the result as JSON", as_json(found, logs.checked(found)), "result.json",
                           "application/json", key="result json", on_click="ignore")
        st.download_button("Save the runs as CSV", as_csv(run_table(found)), "runs.csv", "text/csv", key="runs csv",
                           on_click="ignore")
        st.download_button("Save every row, reduced", _rows_of(found), "rows.csv", "text/csv", key="rows csv",
                           on_click="ignore")


def _rows_of(found: Result) -> Callable[[], bytes]:
    def made() -> bytes:
        target = BytesIO()
        write_rows(target, found)
        return target.getvalue()
    return made


if __name__ == "__main__":
    page()
