"""The rehearsal: a simulated rig to practise on, from cold to a verdict, on a tablet or a big screen.

``show()`` draws it wherever it is called. What was done lives in the session as one frozen record; the
clock may run by itself, a minute for each second.
"""

from __future__ import annotations

import random
import time

import streamlit as st

from engine.job.rehearsal import Kind, Rehearsal
from engine.job.rehearsal import rehearsal as practice
from engine.job.rehearsal.link import from_link, to_link
from engine.job.rehearsal.looks import LOOK_WORDS, Look
from engine.job.rehearsal.said import clock
from engine.job.rehearsal.scenario import MOST_SEED, HiddenFault, Load, Scenario, surprise
from engine.job.rehearsal.simulation import LONGEST
from engine.job.rehearsal.valves import CRACKED, DEED_WORDS, Deed
from engine.job.runsheet.plan import Plan, plan_of
from engine.job.runsheet.steps import sections_of
from engine.screen import live, rehearsal_end, served, session
from engine.screen.charts.dials import faces_html
from engine.screen.charts.rehearsal import recorder
from engine.screen.rehearsal_faces import faces_of
from engine.screen.style import escaped, escaped_lines
from engine.steam.errors import InputError

FAST = 60.0  # the clock that runs by itself, against the one on the wall
TICK = 1.0  # s on the wall
SETS_SHOWN = 6
WORDS = 205  # pixels
SHEET = "sheet"  # in the address, while the sheet is shown and the rehearsal waits
REHEARSED = ("blow", "warm", "settle", "read", "close")  # parts of the sheet; before them nothing is under steam
STEPS = ((30, "30 s"), (60, "1 min"), (300, "5 min"), (900, "15 min"))

_CSS = """
<style>
.st-key-rehearsal [data-testid^="stBaseButton"] {min-height: 3.4rem;}
.st-key-rehearsal [data-testid^="stBaseButton"] * {white-space: normal; overflow: visible;}
.st-key-rehearsal [data-testid^="stBaseButton"] p {font-size: 1.05rem; line-height: 1.2;}
[data-testid="stLayoutWrapper"]:has(> .st-key-rehearsal-words) {position: sticky; top: 4rem; z-index: 9;
  background: Canvas; border-radius: .5rem;}
</style>
"""
_address = served.component("address.js", "address")


def asked() -> bool:
    """Whether the page was opened by a link to a rehearsal, and not on the sheet beside it."""
    return bool(st.query_params.get("rehearsal")) and st.query_params.get("on") != SHEET


def beside() -> None:
    """Have the rehearsal wait while the sheet is on the page: a reload comes back to the sheet, and keeps both."""
    _open_link()
    r = st.session_state.get("rehearsal")
    _keep(r, SHEET if r else None)


def show() -> None:
    """Draw the rehearsal: a beginning, the rig, or the verdict."""
    st.html(_CSS)
    _open_link()
    r = st.session_state.get("rehearsal")
    if r is None or r.stated is not None:
        with st.container(key="rehearsal"):
            notice()
            if r is None:
                _beginning()
            else:
                rehearsal_end.show(r, _set)
        _keep(r)
        return
    running = st.session_state["rehearsal drawn running"] = _runs()
    st.fragment(_played, run_every=TICK if running else None)()


def _runs() -> bool:
    """Whether the clock runs by itself."""
    state = st.session_state
    return bool(state.get("rehearsal runs")) and state["rehearsal"].stated is None


def _keep(r: Rehearsal | None, on: str | None = None) -> None:
    """Have the address hold the rehearsal, so that a reload goes on with it."""
    _address(data={"page": "rehearsal", "query": {"rehearsal": r and to_link(r), "on": on}}, key="rehearsal address")


def _open_link() -> None:
    """A scenario or a rehearsal in the address, once a session."""
    state = st.session_state
    if state.get("rehearsal link read"):
        return
    state["rehearsal link read"] = True
    word = st.query_params.get("rehearsal")
    if not word:
        return
    try:
        _set(from_link(word))
    except InputError as error:
        state["rehearsal notice"] = f"The rehearsal in the link could not be opened.\n\n{error}"
        return
    if st.query_params.get("case"):  # what is open, with its ticks and readings, stays open
        return
    session.change(state["rehearsal"].scenario.case)
    st.rerun()  # the bar above has drawn another case already


def _set(r: Rehearsal | None) -> None:
    state = st.session_state
    state["rehearsal"], state["rehearsal notice"] = r, None
    if r is None or r.stated is not None:
        state["rehearsal runs"] = False


def _do(change, *arguments) -> None:
    """Change the record by a callback; what cannot be done is said, and changes nothing."""
    state = st.session_state
    try:
        _set(change(state["rehearsal"], *arguments))
    except InputError as error:
        state["rehearsal notice"] = str(error)


def notice() -> None:
    """What could not be done."""
    words = st.session_state.get("rehearsal notice")
    if words:
        st.error(escaped_lines(words))


# ---- the beginning


def _beginning() -> None:
    st.markdown("### Practise the test without steam")
    st.markdown("A simulated rig, made from the open case, waits cold. Open it up in the order of the run sheet, read "
                "the gauges, decide when it has settled, take readings, and state the quality, and what is wrong with "
                "the rig if something is. Then you see the truth.")
    left, right = st.columns(2, gap="medium")
    left.button("Start: something may be wrong", key="begin surprise", type="primary", width="stretch",
                on_click=_begin_surprise)
    right.button("Start: nothing is wrong", key="begin sound", width="stretch", on_click=_begin_sound)
    st.caption("Nothing here is a permission: at a real rig valves are opened by the person authorised for that steam "
               "system, under the site's permit.")
    _instructor()


def _seed() -> int:
    return random.SystemRandom().randrange(MOST_SEED)


def _begin(scenario: Scenario) -> None:
    try:
        _set(practice.begin(scenario))
    except InputError as error:
        st.session_state["rehearsal notice"] = str(error)


def _begin_surprise() -> None:
    _begin(surprise(session.case(), _seed()))


def _begin_sound() -> None:
    _begin(Scenario(session.case(), seed=_seed()))


def _instructor() -> None:
    """What an instructor hides, and the link that carries it."""
    with st.expander("For instructors: prepare a scenario"):
        faults = st.multiselect("Hidden faults", list(HiddenFault), key="prepare faults", placeholder="none",
                                format_func=lambda f: str(f).capitalize())
        seed_place, quality_place, load_place = st.columns(3, gap="medium")
        if "prepare seed" not in st.session_state:
            st.session_state["prepare seed"] = _seed() % 10_000
        seed = seed_place.number_input("Seed", 0, MOST_SEED, step=1, key="prepare seed",
                                       help="Fixes the truth and all chance; another seed, another rig.")
        quality = quality_place.number_input("True quality", value=None, step=0.001, format="%.4f",
                                             key="prepare quality", placeholder="drawn by the seed",
                                             help="Empty: drawn from the expected range of the case.")
        load = load_place.selectbox("Line pressure", list(Load), key="prepare load",
                                    format_func=lambda v: str(v).capitalize())
        try:
            scenario = Scenario(session.case(), frozenset(faults), int(seed or 0), quality, load)
            word = to_link(practice.begin(scenario))
        except InputError as error:
            st.error(escaped_lines(str(error)))
            return
        st.caption("Whoever opens this link gets the scenario, and no word of what it hides:")
        st.code(rehearsal_end.address_of(word), language=None, wrap_lines=True)
        st.button("Start this scenario here", key="begin prepared", on_click=_begin, args=(scenario,))


# ---- the rig


def _played() -> None:
    """The rig; drawn anew by itself while the clock runs."""
    state = st.session_state
    r = state.get("rehearsal")
    if r is None or r.stated is not None or state["rehearsal drawn running"] != _runs():
        st.rerun()
    _tick()
    r = state["rehearsal"]
    with st.container(key="rehearsal"):
        _rig(r)
    _keep(r)


def _tick() -> None:
    """Let the clock of the rig follow the one on the wall."""
    state, now = st.session_state, time.monotonic()
    last, state["rehearsal tick"] = state.get("rehearsal tick", now), now
    r = state["rehearsal"]
    if _runs():
        ahead = min(FAST * (now - last), 5 * FAST, LONGEST - r.now)
        state["rehearsal"] = practice.advance(r, ahead)


def _rig(r: Rehearsal) -> None:
    units = session.units()
    instruments, hands = st.columns(2, gap="large")
    with instruments:
        st.html(faces_html(faces_of(r, _planned(r), units)))
        _time(r)
    with hands:
        _words(r)
        _valves(r)
        _looks(r)
    _order(r)
    live.show(recorder(r, units), key="recorder", height=240)
    _readings(r)
    rehearsal_end.conclude(r, _do)
    _aside(r)


def _order(r: Rehearsal) -> None:
    """The steps of the run sheet that are rehearsed, to keep at hand."""
    plan = _planned(r)
    if plan is None:
        return
    with st.expander("The steps of the run sheet, from draining to closing down"):
        for section in sections_of(plan):
            if section.key in REHEARSED:
                st.markdown(f"**{escaped(section.title)}**\n" + "\n".join(
                    f"{k}. {escaped(step.said.text(session.units()))}" for k, step in enumerate(section.steps, 1)))


def _planned(r: Rehearsal) -> Plan | None:
    """The plan of the run sheet, so that the faces carry its bands."""
    known = st.session_state.get("rehearsal plan")
    if known is None or known[0] != r.scenario.case:
        try:
            known = (r.scenario.case, plan_of(r.scenario.case))
        except InputError:
            known = (r.scenario.case, None)
        st.session_state["rehearsal plan"] = known
    return known[1]


def _words(r: Rehearsal) -> None:
    """The clock, how everything stands, and what the last deed or look showed; always as high, so that no button
    moves away under a finger."""
    with st.container(key="rehearsal-words", border=True, height=WORDS):
        st.markdown(f"**{clock(r.now)}** · {_stands(r)} · {len(r.readings)} sets of readings")
        last = practice.last_sight(r)
        if last is None:
            st.markdown("The rig is cold, every valve is closed, and the line is under pressure.")
        elif last[0].kind is Kind.REFUSED:
            st.markdown(f":red[**■** {escaped(last[1].text(session.units()))}]")
        else:
            st.markdown(escaped(last[1].text(session.units())))
        notice()


def _stands(r: Rehearsal) -> str:
    v = r.valves
    stop = {0.0: "closed", CRACKED: "cracked", 1.0: "open"}[v.stop]
    parts = [f"stop valve {stop}", f"drain {'open' if v.drain else 'closed'}"]
    if v.body_open:
        parts.append("body open")
    return " · ".join(parts)


def _time(r: Rehearsal) -> None:
    with st.container(key="rehearsal-time", horizontal=True, vertical_alignment="center"):
        for seconds, words in STEPS:
            st.button(f"+ {words}", key=f"advance {seconds}", on_click=_do, args=(practice.advance, seconds),
                      disabled=r.now + seconds > LONGEST)
        session.mirror("rehearsal clock", _runs())
        st.toggle("Clock runs, 1 min a second", key="rehearsal clock", on_change=_wind)


def _wind() -> None:
    st.session_state["rehearsal runs"] = st.session_state["rehearsal clock"]
    st.session_state["rehearsal tick"] = time.monotonic()


def _valves(r: Rehearsal) -> None:
    st.markdown("**Do**")
    drain = Deed.CLOSE_DRAIN if r.valves.drain else Deed.OPEN_DRAIN
    rows = ((Deed.PERMIT, Deed.WALK_EXHAUST), (drain, Deed.CRACK_STOP), (Deed.OPEN_STOP, Deed.CLOSE_STOP),
            (Deed.BLANK_EXHAUST, Deed.OPEN_BODY))
    for row in rows:
        for place, deed in zip(st.columns(2), row, strict=True):
            place.button(DEED_WORDS[deed], key=f"do {deed}", width="stretch", on_click=_do, args=(practice.act, deed),
                         disabled=_done(r, deed))


def _done(r: Rehearsal, deed: Deed) -> bool:
    """Whether it is so already. What would be wrong stays open to be tried, and is stopped with the reason."""
    v = r.valves
    return {Deed.PERMIT: v.permit, Deed.WALK_EXHAUST: v.exhaust_free, Deed.CRACK_STOP: v.stop == CRACKED,
            Deed.OPEN_STOP: v.stop == 1.0, Deed.CLOSE_STOP: v.stop == 0.0, Deed.OPEN_BODY: v.body_open}.get(deed, False)


def _looks(r: Rehearsal) -> None:
    st.markdown("**Look and read**")
    looks = list(Look)
    for k in range(0, len(looks), 2):
        for place, where in zip(st.columns(2), looks[k:k + 2], strict=False):
            place.button(LOOK_WORDS[where], key=f"look {where}", width="stretch", on_click=_do,
                         args=(practice.look, where))


def _readings(r: Rehearsal) -> None:
    sets, every = practice.stretch(r)
    st.markdown("**Readings**")
    with st.container(key="rehearsal-readings", horizontal=True):
        st.button("Take a set now", key="take one", type="primary", on_click=_do, args=(practice.take_reading,))
        st.button(f"Take {sets} sets, one every {every / 60:g} min", key="take many", on_click=_do,
                  args=(practice.take_readings, sets, every), disabled=r.now + sets * every > LONGEST)
    if r.readings:
        st.table(rehearsal_end.reading_rows(r, session.units())[-SETS_SHOWN:])


def _aside(r: Rehearsal) -> None:
    with st.expander("This rehearsal: hand it in, or begin anew"):
        st.caption("This link opens the rehearsal as it stands, for an instructor to see or for you to go on with:")
        st.code(rehearsal_end.address_of(to_link(r)), language=None, wrap_lines=True)
        if Scenario(session.case()).case != r.scenario.case:
            st.caption("The open case has been changed since. The rehearsal goes on with the case it began with.")
        with st.container(horizontal=True):
            st.button("This rig again, cold", key="same rig cold", on_click=_set, args=(practice.begin(r.scenario),))
            st.button("Give up and begin anew", key="begin anew", on_click=_set, args=(None,))
