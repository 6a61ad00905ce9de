"""The Record page: what the record will say, and the record itself to sign and to keep."""

from __future__ import annotations

from functools import partial

import streamlit as st

from engine.job.assessment.cautions import SHORT
from engine.job.case import Case
from engine.job.case.fields_modes import ELECTRIC
from engine.job.paper import PAPERS, usual_paper
from engine.job.record import Facts, decided, facts_of, headline, reasons_against, record_html, record_zip, summary
from engine.job.result import Result
from engine.job.runsheet import RunSheet
from engine.measurement.logbook import Log
from engine.screen import clock, entries, logs, session
from engine.screen.sheets import sheet_of
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import Fault, InputError


def page() -> None:
    """What it will say first, then what only a person can add, then the files."""
    top = st.container(key="record answer", border=True)
    with top:
        logs.read_all()
        facts, result = _facts()
    _by_hand()
    if facts is not None:
        _preview(facts)
        _files(result, facts.logs)
    st.caption(SHORT)


def _facts() -> tuple[Facts | None, Result | None]:
    """All that the record tells; where there is none yet, every reason in words."""
    case, units = session.case(), session.units()
    try:
        # the means of a test with a heater are entered one by one
        result = logs.result() if case["mode"] != ELECTRIC and logs.runs(case) else None
        if faults := reasons_against(case, result):
            _refuse(faults)
            return None, None
        facts = facts_of(case, result, units, _read(), sheet=_sheet(case))
    except InputError as error:
        st.error(escaped_lines(str(error)))
        st.caption("Nothing is lost: correct the entry, or undo. A record is made once every entry can be used.")
        return None, None
    shape, sentence, kind = headline(facts)
    st.markdown(f"### {shape} {escaped(sentence)}")
    for name, words in decided(facts):
        st.markdown(f"**{name}** {escaped(words)}")
    if kind == "exploration":
        missing = escaped(", ".join(facts.sure.missing) or "the uncertainty")
        st.markdown(f"**Exploration, not a result**, as long as it is not stated: {missing}. The record will say so.")
    return facts, result


def _sheet(case: Case) -> RunSheet | None:
    try:
        return sheet_of(case)
    except InputError:  # the record itself says why
        return None


def _read() -> tuple[Log, ...]:
    return tuple(one.log for one in logs.held().values() if one.log is not None)


def _refuse(faults: tuple[Fault, ...]) -> None:
    st.markdown("### ○ No record yet")
    st.markdown("A record would say more than is known. To be decided first:")
    st.error(escaped_lines("\n".join(map(str, faults))))


def _by_hand() -> None:
    with st.expander("Where, who, and what was done otherwise"), entries.who_and_where():
        entries.words("deviations", area=True)


def _preview(facts: Facts) -> None:
    st.subheader("What it will say", anchor=False)
    st.table([{"What": name, "In the record": escaped(text)} for name, text in summary(facts)])
    st.caption("And with it: every reading, the settled windows, each correction with its size, states and diagrams, "
               "the budget, steps of the run sheet that were not ticked, everything entered, and the case itself. The "
               "page opens offline, can be printed and signed, and opened here again under “Case”.")


def _files(result: Result | None, brought: tuple[Log, ...]) -> None:
    case, units, made = session.case(), session.units(), clock.now()
    st.subheader("The record", anchor=False)
    paper = st.segmented_control("Paper", PAPERS, key=f"record paper {units.name}", default=usual_paper(units),
                                 required=True) or usual_paper(units)
    asked = (case, result, units, paper)
    with st.container(horizontal=True):
        st.download_button(f"Save the record on {paper}", partial(record_html, *asked, made=made, logs=brought),
                           "record.html", "text/html", key="record html", on_click="ignore", type="primary",
                           help="One page of HTML: open it in any browser, print it, sign it.")
        st.download_button("Save record and data", partial(record_zip, *asked, made=made, logs=brought), "record.zip",
                           "application/zip", key="record zip", on_click="ignore",
                           help="The page, the case as JSON, and every row of the readings as CSV.")


if __name__ == "__main__":
    page()
