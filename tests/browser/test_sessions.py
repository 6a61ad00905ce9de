"""Readers beside each other, and a server that goes away: nobody sees another's case, and nothing kept is lost."""

import socket

import pytest
from conftest import ROOT, served, settle, turn_to

from engine.job.case.casefile import from_link, to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.rows import Entry
from engine.job.runsheet.readings import with_reading


def bar(page, words):
    page.locator(".st-key-casebar").get_by_text(words).first.wait_for()


def word_of(page):
    page.wait_for_function("() => location.search.includes('case=')")
    return page.evaluate("new URLSearchParams(location.search).get('case')")


def test_readers_do_not_see_each_others_cases(app_address, visit):
    mine = DEMO.with_(title="Mine", p_line=Entry(12.0, "bar", "gauge"))
    first = visit(f"{app_address}?case={to_link(mine)}")
    second = visit(app_address)
    bar(first, "Mine")
    bar(second, "Factory main")
    second.get_by_role("slider", name="Measured temperature").press("ArrowRight")
    bar(second, "121.2")
    second.get_by_role("button", name="Pin").click()
    second.get_by_text("Side by side").wait_for()
    first.get_by_role("slider", name="Line pressure").press("ArrowRight")
    bar(first, "line 12.1 bar gauge")
    assert first.get_by_text("Side by side").count() == 0
    assert "121.2" not in first.locator(".st-key-casebar").inner_text()
    turn_to(second, "Record")
    assert "Mine" not in second.content()
    assert from_link(word_of(first))["title"] == "Mine"


def test_a_restart_of_the_server_loses_nothing_that_was_kept(visit, tmp_path):
    case = with_reading(DEMO.with_(title="Before the restart"), run="1", T_exhaust=Entry(121.3, "°C"))
    (tmp_path / "case.json").write_text(to_json(case), encoding="utf-8")
    with served(ROOT / "app.py", tmp_path / "before.log") as address:
        port = address.rstrip("/").rsplit(":", 1)[1]
        page = visit(address, forgive="server|Failed to load|WebSocket")
        page.get_by_role("button", name="Case", exact=True).click()
        page.locator("input[type=file]").first.set_input_files(tmp_path / "case.json")
        page.get_by_text("Opened case.json").wait_for()
        page.keyboard.press("Escape")
        page.get_by_role("slider", name="Line pressure").press("ArrowRight")
        bar(page, "line 9.1 bar gauge")
        page.wait_for_function("before => new URLSearchParams(location.search).get('case') !== before",
                               arg=to_link(case))
        kept = from_link(word_of(page))
        assert kept == case.with_(p_line=Entry(9.1, "bar", "gauge"))
    with served(ROOT / "app.py", tmp_path / "after.log", port=int(port)):
        page.reload()
        settle(page)
        bar(page, "Before the restart")
        bar(page, "line 9.1 bar gauge")
        turn_to(page, "Readings")
        page.get_by_text("1 set of readings").first.wait_for()
        assert from_link(word_of(page)) == kept
        page.close()  # before its server goes


def test_the_server_listens_on_this_machine_only(app_address):
    """On Linux all of 127.0.0.0/8 is this machine: a server that listened everywhere would answer there too."""
    port = int(app_address.rstrip("/").rsplit(":", 1)[1])
    socket.create_connection(("127.0.0.1", port), timeout=5).close()
    with pytest.raises(ConnectionRefusedError):
        socket.create_connection(("127.0.0.2", port), timeout=5)
