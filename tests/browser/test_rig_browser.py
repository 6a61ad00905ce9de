"""The Rig page in a browser: planning a rig, what wet lagging does, offers, nonsense, a phone, the dark."""

from __future__ import annotations

import re

import pytest
from conftest import pick, settle

from engine.job.case.casefile import to_link
from engine.job.case.demo import DEMO

BARS = """() => [...document.querySelector('.stage[data-key=ranking]').querySelectorAll('.barlayer .point path')]
  .map((bar) => bar.getBBox().width)"""


@pytest.fixture
def rig(app_address, visit):
    """The page, reached as a reader does: by the navigation (a phone has it behind the menu)."""

    def opened(query="", *, phone=False, **window):
        page = visit(app_address + query, phone=phone, **window)
        if phone:
            page.get_by_test_id("stExpandSidebarButton").click()
        page.get_by_role("link", name="Rig", exact=True).click()
        headline(page).wait_for()
        settle(page)
        page.locator(".diagrams[data-drawn]").first.wait_for()
        return page

    return opened


def headline(page):
    return page.locator(".st-key-rig_answer h3")


def says(page, words):
    headline(page).get_by_text(words).wait_for()


def tab(page, name):
    page.get_by_role("tab", name=name, exact=True).click()


def type_in(page, label, text):
    box = page.get_by_label(label, exact=True)
    box.fill(text)
    box.press("Enter")


def shows(page, label, text):
    """Wait until an entry shows a value."""
    page.wait_for_function("([label, text]) => document.querySelector(`input[aria-label='${label}']`)?.value === text",
                           arg=[label, text])


def choose(page, label, option):
    pick(page, page.get_by_role("combobox", name=re.compile(f"^{label}|{label}")).first, option)


def sideways(page):
    return page.evaluate("""() => Math.max(document.documentElement.scrollWidth - innerWidth,
        document.querySelector('[data-testid=stMain]').scrollWidth - innerWidth)""")


def test_planning_the_rig_of_the_demo(rig):
    """A planner without a weighed flow takes the computed one, sizes the bore, checks the pipe, and goes back."""
    page = rig()
    says(page, "What matters most here: heat loss, 0.098 %pt, already taken out of the answer.")
    page.get_by_role("figure", name=re.compile("Effects on the quality, largest first")).wait_for()
    assert len(page.evaluate(BARS)) == 11
    type_in(page, "Sample flow, kg/h", "")
    page.get_by_text("the sizes below rest on the flow computed from the orifice").wait_for()
    page.get_by_role("button", name="Use the computed flow, 31.43 kg/h").click()
    page.get_by_text("the sizes below rest on the flow computed").wait_for(state="detached")
    shows(page, "Sample flow, kg/h", "31.43")
    type_in(page, "Wanted sample flow, kg/h", "60")
    page.get_by_role("button", name="Use the bore for the wanted flow, 4.15 mm").click()
    page.get_by_text("The flow in the case was taken over earlier; the orifice now passes 60.").wait_for()
    page.get_by_role("button", name=re.compile("Use the computed flow, 60")).click()
    tab(page, "Exhaust")
    page.get_by_role("button", name=re.compile("Use the computed exhaust pressure, 1.05")).click()
    page.get_by_role("figure", name=re.compile("Back pressure of the exhaust [0-9.]+ %pt drier, taken out")).wait_for()
    for _ in range(6):  # every one of them comes back
        page.get_by_role("button", name="Undo", exact=True).click()
        settle(page)
    says(page, "heat loss, 0.098 %pt, already taken out")


def test_wet_lagging_changes_the_ranking(rig):
    page = rig()
    longest = page.evaluate(BARS)
    tab(page, "Heat")
    choose(page, "Lagging of the body", "Wet")
    says(page, "heat loss beyond the correction, 0.20 %pt, still in the answer: the steam reads wetter than it is.")
    page.get_by_role("figure", name=re.compile("heat loss beyond the correction")).wait_for()
    assert page.evaluate(BARS) != longest
    page.get_by_role("button", name=re.compile("Use the conductance from dimensions and lagging")).click()
    says(page, "heat loss, 0.30 %pt, already taken out of the answer.")


def test_nonsense_is_named_and_the_page_stands(rig):
    page = rig()
    type_in(page, "Orifice bore, mm", "-3")
    page.get_by_text("Orifice bore: got -3 mm, needs 0.2 to 50 mm").first.wait_for()
    says(page, "heat loss")
    tab(page, "Exhaust")
    type_in(page, "Exhaust bore, mm", "1e-3")
    page.get_by_text("Exhaust bore: got 0.001 mm").first.wait_for()
    page.get_by_role("heading", name="Thermometer").wait_for()
    for _ in range(2):
        page.get_by_role("button", name="Undo", exact=True).click()
        settle(page)
    page.get_by_text("Left out, since it cannot be used").wait_for(state="detached")
    assert page.get_by_test_id("stException").count() == 0


def test_an_entry_typed_just_before_an_offer_is_clicked_is_kept(rig):
    page = rig()
    page.get_by_label("Discharge coefficient", exact=True).fill("0.9")
    page.get_by_role("button", name=re.compile("Use the computed flow")).click()
    settle(page)
    page.get_by_text("Sample flow, as taken over earlier").wait_for()
    shows(page, "Discharge coefficient", "0.9")


def test_units_switch_everywhere(rig):
    page = rig()
    page.get_by_role("radio", name="US").click()
    page.get_by_label("Orifice bore, in", exact=True).wait_for()
    page.get_by_text("69.89 lb/h").wait_for()


def test_on_a_phone_nothing_runs_out_of_the_window(rig):
    page = rig("?case=" + to_link(DEMO.with_(lagging_state="wet")), width=390, height=844, phone=True)
    says(page, "heat loss beyond the correction")
    assert sideways(page) <= 1
    names = page.locator(".stage[data-key=ranking] .textpoint text")
    right = max(names.nth(i).bounding_box()["x"] + names.nth(i).bounding_box()["width"] for i in range(names.count()))
    assert right <= 390
    page.get_by_role("tab", name="Warm-up").click()
    page.get_by_label("Mass of the body, kg", exact=True).wait_for()


def test_in_the_dark_the_bars_and_words_stand_out(rig):
    page = rig(dark=True)
    words = page.locator(".stage[data-key=ranking] .textpoint text").first
    fill = words.evaluate("(text) => getComputedStyle(text).fill")
    assert min(int(v) for v in re.findall(r"\d+", fill)[:3]) > 200
    assert len(page.evaluate(BARS)) == 11
