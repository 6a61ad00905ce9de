"""What cannot be opened changes nothing but the notice: the open case, its history, what is pinned stay as they are."""

import os
from collections import deque
from pathlib import Path
from types import SimpleNamespace

import pytest
from streamlit.testing.v1 import AppTest

from engine.job.case.casefile import from_json
from engine.job.case.demo import DEMO
from engine.job.case.rows import Entry
from engine.screen import session
from tests.job.broken_cases import CASES, HARMLESS, LINKS, RECORDS

OPEN = DEMO.with_(title="Being worked on", T_exhaust=Entry(122.5, "°C"))


@pytest.fixture
def state(monkeypatch):
    """A session without a browser: one that has a case open, with a past, a future and a pin."""
    found = {"case": OPEN, "past": [DEMO], "future": [DEMO], "pinned": [("A", DEMO)], "notice": None, "units": "SI",
             "heard": deque(), "acted": False, "put": {}}
    monkeypatch.setattr(session, "st", SimpleNamespace(session_state=found, query_params={}))
    return found


def upload(state, broken):
    state["open"] = SimpleNamespace(name=broken.file, getvalue=lambda: broken.data)
    session.open_file("open")


@pytest.mark.parametrize("broken", CASES + RECORDS, ids=lambda b: b.name)
def test_the_open_case_is_untouched_and_the_notice_says_why(state, broken, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    upload(state, broken)
    kind, said = state["notice"]
    assert kind == "error" and said.startswith(f"{broken.file} was not opened; the open case is unchanged.")
    for words in broken.says:
        assert words in said
    assert (state["case"], state["past"], state["future"], state["pinned"]) == (OPEN, [DEMO], [DEMO], [("A", DEMO)])
    assert "reopened" not in state and os.listdir(tmp_path) == []


@pytest.mark.parametrize("broken", HARMLESS, ids=lambda b: b.name)
def test_wicked_words_open_and_can_be_undone(state, broken):
    upload(state, broken)
    assert state["case"] == from_json(broken.data) and state["notice"][0] == "success"
    session.undo()
    assert state["case"] == OPEN


@pytest.mark.parametrize("broken", LINKS[1:], ids=lambda b: b.name)  # an empty word is no word
def test_a_broken_link_shows_the_demo_case_and_says_so(monkeypatch, broken):
    found, address = {}, {"case": broken.data.decode()}
    monkeypatch.setattr(session, "st", SimpleNamespace(session_state=found, query_params=address))
    session.start()
    assert found["case"] == DEMO
    assert found["notice"][0] == "error" and all(words in found["notice"][1] for words in broken.says)


@pytest.mark.parametrize("broken", [CASES[3], next(b for b in CASES if b.name == "script as number"), RECORDS[2]],
                         ids=lambda b: b.name)
def test_on_the_page_the_refusal_is_read_as_text(broken):
    app = AppTest.from_file(Path(__file__).parents[2] / "app.py", default_timeout=60).run()
    app.file_uploader(key="open").upload(broken.file, broken.data).run()
    assert not app.exception and app.session_state["case"] == DEMO
    assert "was not opened" in app.error[0].value
    assert "<script>" not in app.error[0].value
