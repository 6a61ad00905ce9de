"""What one reader's session holds: the open case, its history, pinned cases, units and notices.

The case is the truth; widgets only mirror it. What a widget was changed to is entered into the case
by its callback, and before a widget is drawn its state is set from the case where the two differ.
Nothing else writes widget state, so no key press is overwritten by an older run.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Callable
from dataclasses import replace
from typing import NamedTuple

import streamlit as st

from engine.job.case import BLANK, Case, Value, as_entered, barometer, entry_si
from engine.job.case.casefile import from_json, from_link, to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import EXAMPLES
from engine.job.case.fields import FIELDS
from engine.job.case.rows import Entry
from engine.steam.errors import InputError
from engine.steam.units import SYSTEMS, UnitSystem, from_si

HISTORY = 200
STEPS = 64  # of a slider, by which a browser may be late
PINS = 4
RECORDS = (".html", ".htm")


class Heard(NamedTuple):
    """What a widget was changed to; ``echo`` where that is something we had put there ourselves."""

    name: str
    value: Value
    echo: bool


def start() -> None:
    """Set up a new session: the case in the address if there is one, else the demo case."""
    state = st.session_state
    if "case" in state:
        return
    state["case"], state["past"], state["future"], state["pinned"], state["notice"] = DEMO, [], [], [], None
    state["units"] = "SI"
    state["put"] = {}  # what we have put into each widget lately
    word = st.query_params.get("case")
    if word:
        try:
            state["case"] = from_link(word)
        except InputError as error:
            state["notice"] = ("error", f"The case in the link could not be opened; the demo case is shown.\n\n{error}")


def case() -> Case:
    return st.session_state["case"]


def units() -> UnitSystem:
    return SYSTEMS[st.session_state["units"]]


def show_in(system: str) -> None:
    """Have everything shown in "SI" or "US" units; what was entered stays as entered."""
    _act()
    st.session_state["units"] = system


def pinned() -> list[tuple[str, Case]]:
    return st.session_state["pinned"]


def link() -> str:
    """The open case as a word for the address."""
    return to_link(case())


def change(new: Case) -> None:
    """Make ``new`` the open case; the old one can be brought back."""
    _act()
    _put(new)


def take(**entries: Value) -> None:
    """Write entries that a button offers into the open case, beside what was typed just before it."""
    _act()
    _put(case().with_(**entries))


def _act() -> None:
    """Something other than an entry happens: echoes that come along with it are taken back, or left out."""
    state = st.session_state
    if state["heard"] and all(one.echo for one in state["heard"]):
        _as_before()
    state["heard"], state["acted"] = [], True


def _put(new: Case) -> None:
    state = st.session_state
    if new == state["case"]:
        return
    state["past"] = [*state["past"][-HISTORY + 1:], state["case"]]
    state["future"], state["case"], state["notice"] = [], new, None


def listen() -> None:
    """Be ready for the next message of the browser: call it at the start and at the end of each run."""
    st.session_state["heard"], st.session_state["acted"] = [], False


def _hear(one: Heard) -> None:
    """Enter what a widget was changed to, without the echoes that come along with it.

    With whatever is touched the browser sends the state of every widget. One that we have moved meanwhile,
    like the exact entry beside a slider, may still be sent as we had put it a few steps ago, and Streamlit
    takes it for changed. Such an echo comes along with something new, and is left out. Where nothing else is
    new, someone has entered the old value again. Callbacks come one by one, so each looks at all so far.
    """
    state = st.session_state
    if not state["heard"]:
        state["before"] = {name: state[name] for name in ("case", "past", "future")}
    state["heard"] = [*state["heard"], one]
    _as_before()
    fresh = [one for one in state["heard"] if not one.echo]
    for one in fresh if fresh or state["acted"] else state["heard"]:
        _put(case().with_(**{one.name: one.value}))


def _as_before() -> None:
    for name, value in st.session_state["before"].items():
        st.session_state[name] = value


def undo() -> None:
    _step("past", "future")


def redo() -> None:
    _step("future", "past")


def _step(source: str, target: str) -> None:
    state = st.session_state
    _act()
    if state[source]:
        state[target] = [*state[target], state["case"]]
        *state[source], state["case"] = state[source]
        state["notice"] = None


def open_demo(demo: Case = DEMO) -> None:
    change(demo)


def open_example(key: str) -> None:
    """Open the invented case chosen in the widget ``key``, and leave the widget ready for the next choice."""
    name = st.session_state[key]
    if name:
        change(EXAMPLES[name])
        st.session_state[key] = None


def open_blank() -> None:
    change(BLANK)


def open_file(key: str) -> None:
    """Open the case file or the record in the uploader ``key``; one that cannot be used changes nothing but the notice.

    The logs of a record wait under "reopened" for whoever keeps the logs of the session.
    """
    upload = st.session_state.get(key)
    if upload is None:
        return
    try:
        if upload.name.lower().endswith(RECORDS):
            from engine.job.record.data import reopened  # reads logs, which few sessions do: not loaded before
            found = reopened(upload.getvalue())
            change(found.case)
            st.session_state["reopened"] = found.logs
        else:
            change(from_json(upload.getvalue()))
        st.session_state["notice"] = ("success", f"Opened {upload.name}.")
    except InputError as error:
        st.session_state["notice"] = ("error", f"{upload.name} was not opened; the open case is unchanged.\n\n{error}")


def pin() -> None:
    """Keep the open case beside those to come, under the next free letter."""
    _act()
    taken = {name for name, _ in pinned()}
    name = next(letter for letter in "ABCDEFGH" if letter not in taken)
    st.session_state["pinned"] = [*pinned(), (name, case())][-PINS:]


def unpin(name: str) -> None:
    _act()
    st.session_state["pinned"] = [(n, c) for n, c in pinned() if n != name]


def open_pinned(name: str) -> None:
    change(dict(pinned())[name])


def mirror(key: str, wanted: object) -> str:
    """Have widget ``key`` show ``wanted``; untouched where it does already. Returns the key."""
    state = st.session_state
    if key not in state or state[key] != wanted:
        put = state["put"].setdefault(key, deque(maxlen=STEPS))
        put.extend([state[key], wanted] if key in state else [wanted])
        state[key] = wanted
    return key


def display_unit(name: str) -> str:
    """The unit in which an entry is shown and typed."""
    field, special = FIELDS[name], _ENTRY_UNITS.get(name)
    return special[units().name] if special else units().unit(field.kind)


# where the trade enters a quantity in another unit than the one results are shown in
_ENTRY_UNITS = {
    "wetness": {"SI": "%", "US": "%"},
    "p_barometer": {"SI": "kPa", "US": "inHg"},
    "altitude": {"SI": "m", "US": "ft"},
    "leg_height": {"SI": "m", "US": "ft"},
    "wetness_low": {"SI": "%", "US": "%"},
    "wetness_high": {"SI": "%", "US": "%"},
    "U_quality": {"SI": "%pt", "US": "%pt"},
    "water_share": {"SI": "%", "US": "%"},
    "power": {"SI": "W", "US": "W"},
    "power_loss": {"SI": "W", "US": "W"},
    "exhaust_length": {"SI": "m", "US": "ft"},
    "roughness": {"SI": "µm", "US": "µm"},
    "kinetic_error": {"SI": "%pt", "US": "%pt"},
    "line_flow": {"SI": "t/h", "US": "lb/h"},
    "drop_diameter": {"SI": "µm", "US": "µm"},
    "wall_film": {"SI": "%", "US": "%"},
    "sampling_length": {"SI": "m", "US": "ft"},
    "exhaust_gauge_U": {"SI": "kPa", "US": "psi"},
    "barometer_U": {"SI": "kPa", "US": "inHg"},
    "barometer_resolution": {"SI": "kPa", "US": "inHg"},
    "flow_meter_U": {"SI": "%", "US": "%"},
    "heat_loss_tolerance": {"SI": "%", "US": "%"},
    "water_tolerance": {"SI": "%", "US": "%"},
    "weighed_tolerance": {"SI": "%", "US": "%"},
    "vessel_loss_tolerance": {"SI": "%", "US": "%"},
    "power_tolerance": {"SI": "%", "US": "%"},
    "power_loss_tolerance": {"SI": "%", "US": "%"},
    "sampling": {"SI": "%pt", "US": "%pt"},
    "coverage": {"SI": "%", "US": "%"},
    "decision_risk": {"SI": "%", "US": "%"},
    "steady_p_line": {"SI": "%", "US": "%"},
    "steady_p_exhaust": {"SI": "%", "US": "%"},
    "exhaust_gauge_correction": {"SI": "kPa", "US": "psi"},
    "barometer_correction": {"SI": "kPa", "US": "inHg"},
}


def shown_entry(name: str) -> Entry | None:
    """The entry as it is to stand in its widget: as entered, or converted for display."""
    field, entry, unit = FIELDS[name], case()[name], display_unit(name)
    if entry is None or entry.unit == unit:
        return entry
    if entry.basis:  # stays gauge or absolute, in another unit
        return as_entered(field, entry_si(field, entry, 0.0), replace(entry, unit=unit), 0.0)
    return Entry(from_si(entry_si(field, entry, 0.0), unit, field.kind), unit)


def callback(name: str, key: str, read: Callable[[object], Value]) -> Callable[[], None]:
    """A widget callback that has the widget's value become an entry of the case."""
    def changed() -> None:
        value, put = st.session_state[key], st.session_state["put"]
        echo = value in put.get(key, ())
        if not echo:  # what we had put there before cannot come back any more
            put.pop(key, None)
        _hear(Heard(name, read(value), echo))
    return changed


def site_barometer() -> float:
    """Barometric pressure of the open case [Pa]."""
    return barometer(case())
