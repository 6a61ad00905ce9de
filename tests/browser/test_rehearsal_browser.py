"""The rehearsal in a browser: driven from cold to the verdict, stopped where it would hurt, on tablet and phone."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from conftest import PATIENCE, pick, served, settle

from engine.job.case.demo import DEMO
from engine.job.commands.rehearse import by_the_book
from engine.job.rehearsal import begin
from engine.job.rehearsal.link import to_link
from engine.job.rehearsal.scenario import Scenario

APP = Path(__file__).parents[1] / "screen" / "rehearsal_app.py"


@pytest.fixture(scope="module")
def address(tmp_path_factory):
    with served(APP, tmp_path_factory.mktemp("server") / "rehearsal.log") as found:
        yield found


@pytest.fixture
def rehearsal(address, visit):
    def opened(r=None, **window):
        page = visit(address + (f"?rehearsal={to_link(r)}" if r else ""), **window)
        page.locator(".st-key-rehearsal").wait_for()
        return page

    return opened


def press(page, name):
    page.get_by_role("button", name=name, exact=True).click()


def says(page, words):
    page.locator(".st-key-rehearsal-words").get_by_text(words).wait_for()


def sideways(page):
    return page.evaluate("""() => Math.max(document.documentElement.scrollWidth - innerWidth,
        document.querySelector('[data-testid=stMain]').scrollWidth - innerWidth)""")


def test_a_rehearsal_from_cold_to_the_verdict_on_a_tablet(rehearsal):
    page = rehearsal(begin(Scenario(DEMO, frozenset({"wet lagging"}), 3)), width=1024, height=768)
    says(page, "The rig is cold")
    press(page, "Crack the stop valve")
    says(page, "No valve is touched without the site's permit")
    for deed, seen in (("Permit in hand", "permit is in hand"), ("Walk the exhaust", "the blank is off"),
                       ("Open the drain", "first water, then steam")):
        press(page, deed)
        says(page, seen)
    press(page, "Open the stop valve fully")
    says(page, "has blown for less than a minute")
    press(page, "+ 5 min")
    says(page, "5 min 30 s")
    for deed, seen in (("Crack the stop valve", "No knocking"), ("Close the drain", "The drain is closed.")):
        press(page, deed)
        says(page, seen)
    press(page, "Open the stop valve fully")
    says(page, "Listen for half a minute")
    press(page, "+ 30 s")
    says(page, "6 min 20 s")
    press(page, "Open the stop valve fully")
    says(page, "only the orifice throttles now")
    for clock in ("21 min 30 s", "36 min 30 s", "51 min 30 s"):
        press(page, "+ 15 min")
        says(page, clock)
    press(page, "Take 11 sets, one every 1 min")
    says(page, "11 sets of readings")
    press(page, "Take 11 sets, one every 1 min")
    says(page, "22 sets of readings")
    press(page, "Look at the lagging")
    says(page, "drips from its lower edge")
    page.get_by_text("Work it out with the program").click()
    page.get_by_text(re.compile(r"from \d+ of 22 sets")).wait_for()
    from playwright.sync_api import expect  # only where there is a browser
    page.get_by_role("button", name="Take over").click()
    expect(page.get_by_label("Quality of the line")).to_have_value(re.compile(r"0\.9\d+"), timeout=PATIENCE)
    pick(page, page.get_by_role("combobox", name="What is wrong with the rig?"), "Wet lagging")
    page.keyboard.press("Escape")
    press(page, "State it, and see the truth")
    verdict = page.locator(".st-key-rehearsal-verdict")
    verdict.get_by_text("The answer is wrong, and every hidden fault was named.").wait_for()
    page.get_by_text("Wet lagging, unnoticed:").wait_for()
    page.get_by_text("The stop valve was left open.").wait_for()
    assert sideways(page) <= 1


def test_a_reload_goes_on_where_it_was(rehearsal):
    page = rehearsal(by_the_book(Scenario(DEMO, seed=1)))
    says(page, "25 sets of readings")
    press(page, "Take a set now")
    says(page, "26 sets of readings")
    page.wait_for_function("was => !location.search.includes(was)", arg=to_link(by_the_book(Scenario(DEMO, seed=1))))
    page.reload()
    settle(page)
    says(page, "26 sets of readings")


def test_the_clock_runs_by_itself_and_stops(rehearsal):
    page = rehearsal(begin(Scenario(DEMO)))
    switch = page.get_by_text("Clock runs, 1 min a second")
    switch.click()
    told = page.locator(".st-key-rehearsal-words strong").first
    page.wait_for_function("was => document.querySelector('.st-key-rehearsal-words strong').innerText !== was",
                           arg="0 min 00 s")
    first = told.inner_text()
    page.wait_for_function("was => document.querySelector('.st-key-rehearsal-words strong').innerText !== was",
                           arg=first)
    switch.click()
    settle(page)
    page.wait_for_timeout(1500)  # what was under way has arrived
    stopped = told.inner_text()
    page.wait_for_timeout(2500)
    assert told.inner_text() == stopped


def test_the_faces_are_drawn_and_turn(rehearsal):
    page = rehearsal(begin(Scenario(DEMO)))
    faces = page.get_by_role("img", name="Exhaust thermometer")
    cold = faces.get_attribute("aria-label")
    turned = "() => [...document.querySelectorAll('.face .pointer')].map(p => getComputedStyle(p).transform)"
    before = page.evaluate(turned)
    box = page.locator(".face .pointer").first.bounding_box()
    assert box["height"] > 10 and len(before) == 4
    page = rehearsal(by_the_book(Scenario(DEMO, seed=1)))
    assert page.get_by_role("img", name="Exhaust thermometer").get_attribute("aria-label") != cold
    assert page.evaluate(turned) != before


@pytest.mark.parametrize("window", [{"width": 390, "height": 844, "phone": True}, {"width": 1024, "height": 768}])
def test_buttons_fit_a_gloved_finger_and_nothing_runs_sideways(rehearsal, window):
    page = rehearsal(begin(Scenario(DEMO)), **window)
    says(page, "The rig is cold")
    buttons = page.locator(".st-key-rehearsal [data-testid^=stBaseButton-]").filter(visible=True)
    for name in ("Permit in hand", "Crack the stop valve", "Weigh the condensate, 5 min", "+ 1 min", "Take a set now"):
        box = page.get_by_role("button", name=name, exact=True).bounding_box()
        assert box["height"] >= 48, name
    assert buttons.count() > 15
    assert sideways(page) <= 1
    cut = page.evaluate("""() => [...document.querySelectorAll('.st-key-rehearsal button p')]
        .filter((p) => p.scrollWidth > p.clientWidth + 1).map((p) => p.innerText)""")
    assert cut == []


def test_words_may_come_and_go_but_no_button_moves(rehearsal):
    page = rehearsal(begin(Scenario(DEMO)), width=1024, height=768)
    says(page, "The rig is cold")
    button = page.get_by_role("button", name="Open the body", exact=True)
    before = button.bounding_box()
    press(page, "Crack the stop valve")
    says(page, "Refused")
    assert button.bounding_box() == before
