"""What stands on every page: the case bar, its tools, notices; then the page itself."""

from __future__ import annotations

import gc
import sys
import textwrap
from collections.abc import Sequence
from functools import lru_cache

import streamlit as st

from engine.job.assessment import Assessment, Verdict, assess
from engine.job.assessment.answer import SHAPES, quality_text
from engine.job.assessment.methods_said import in_short
from engine.job.case import Case
from engine.job.case.casefile import MAX_RECORD, to_json
from engine.job.case.examples import EXAMPLES
from engine.screen import address, entries, everywhere, session, style
from engine.steam.errors import InputError
from engine.steam.units import SYSTEMS


@lru_cache(maxsize=32)
def _settle(modules: int) -> None:
    """Leave what the imports brought out of every later garbage collection: again when a page brought more."""
    gc.collect()
    gc.freeze()


@lru_cache(maxsize=64)
def assessed(case: Case) -> Assessment:
    """The assessment of a case; the same case is not computed twice. Raises InputError."""
    return assess(case)


def run(pages: Sequence) -> None:
    """Draw the bar, then the chosen page."""
    session.start()
    session.listen()
    style.apply()
    page = st.navigation(list(pages), position="top")
    _lead(pages, page)
    _turn_to(page.url_path)
    _bar()
    with st.container(key="notices"):  # always there, so that nothing below moves when a notice goes
        _notice()
    page.run()
    address.keep(page.url_path, case=session.link())
    everywhere.listen()
    session.listen()
    _settle(len(sys.modules))


def _lead(pages: Sequence, page) -> None:
    """A link to a rehearsal leads to the page that plays it, whichever page it was put behind."""
    if "led" in st.session_state:
        return
    st.session_state["led"] = True
    there = next((one for one in pages if one.url_path == "runsheet"), page)
    if st.query_params.get("rehearsal") and page.url_path != there.url_path:
        st.switch_page(there, query_params=st.query_params.to_dict())


def _turn_to(page: str) -> None:
    """On a page just opened no widget shows anything yet, not even one that it shares with the page before."""
    state = st.session_state
    if state.get("page") != page:
        state["page"] = page
        for key in [key for key in state if isinstance(key, str) and key.startswith(entries.WIDGETS)]:
            del state[key]


def _bar() -> None:
    with st.container(key="casebar"):
        told, tools = st.columns([3, 2], vertical_alignment="center")
        with told:
            st.markdown(_summary(session.case()))
        with tools, st.container(horizontal=True, horizontal_alignment="right", vertical_alignment="center"):
            _units()
            state = st.session_state
            st.button("Undo", key="undo", disabled=not state["past"], on_click=session.undo)
            st.button("Redo", key="redo", disabled=not state["future"], on_click=session.redo)
            st.button("Pin", key="pin", on_click=session.pin, disabled=_usable(session.case()) is None,
                      help="Keep this case beside the ones to come: in the comparison and on the diagrams. "
                      f"The last {session.PINS} are kept.")
            _case_tools()


def _units() -> None:
    session.mirror("units choice", st.session_state["units"])

    def changed() -> None:
        session.show_in(st.session_state["units choice"] or "SI")

    st.segmented_control("Units", list(SYSTEMS), key="units choice", required=True, label_visibility="collapsed",
                         on_change=changed)


def _summary(case: Case) -> str:
    """The case in one line: what it is, what was entered, what can be said."""
    title = style.escaped(textwrap.shorten(case["title"], 80, placeholder=" …")) or "Untitled case"
    parts = [f"**{title}**", *in_short(case), f"**{_verdict(case)}**"]
    return " · ".join(parts)


def _usable(case: Case) -> Assessment | None:
    try:
        return assessed(case)
    except InputError:
        return None


def _verdict(case: Case) -> str:
    a = _usable(case)
    if a is None:
        return "✕ an entry cannot be used"
    said = f"{SHAPES[a.verdict]} {a.verdict.value}"
    return f"{said} {quality_text(a.x)}" if a.x is not None and a.verdict is not Verdict.CANNOT else said


def _case_tools() -> None:
    case = session.case()
    with st.popover("Case", help="Name, open, save, share, start anew"):
        entries.words("title")
        entries.words("note", area=True)
        if _usable(case):
            st.download_button("Save case file", to_json(case), "case.json", "application/json", key="save",
                               on_click="ignore")
        else:
            st.caption("The case file can be saved once every entry can be used.")
        st.file_uploader("Open a case file, or a record", type=["json", *session.RECORDS], key="open",
                         max_upload_size=MAX_RECORD // 1_000_000,
                         on_change=session.open_file, args=("open",))
        st.selectbox("Invented examples", list(EXAMPLES), index=None, placeholder="Choose one to open it",
                     key="example", on_change=session.open_example, args=("example",))
        left, right = st.columns(2)
        left.button("Demo case", key="demo", on_click=session.open_demo, width="stretch")
        right.button("Empty case", key="blank", on_click=session.open_blank, width="stretch")
        st.caption("Link to this case: the page's own address holds it; copy it, or this word behind `?case=`.")
        st.code(f"?case={session.link()}", language=None, height=70)


def _notice() -> None:
    notice = st.session_state["notice"]
    if notice:
        kind, text = notice
        {"error": st.error, "success": st.success}[kind](style.escaped_lines(text))
    if session.case() in EXAMPLES.values():
        st.caption("This is an invented demo case. Change it, open your own, or start with an empty one under “Case”.")
