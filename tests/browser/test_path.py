"""The Path page in a browser: inputs, diagrams, units, pins, address, files, a phone."""

import json
import re

import pytest
from conftest import settle

from engine.job.assessment import assess
from engine.job.case.casefile import from_json, to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.rows import Entry

READING = "Measured temperature, °C"
PATHS = """() => [...document.querySelectorAll('.stage')].map((stage) =>
  [...stage.querySelectorAll('.js-line')].filter((line) => line.getBBox().width > 20).length)"""


@pytest.fixture
def path(app_address, visit):
    """The page with its diagrams drawn."""

    def opened(query="", **window):
        page = visit(app_address + query, **window)
        page.wait_for_selector(".diagrams[data-drawn]")
        return page

    return opened


def answer(page):
    return page.locator(".st-key-answer h3")


def bar(page):
    return page.locator(".st-key-casebar")


def says(page, words, where=answer):
    where(page).get_by_text(words).first.wait_for()


def slider(page, name):
    return page.get_by_role("slider", name=name)


def type_in(page, label, text):
    box = page.get_by_label(label, exact=True)
    box.fill(text)
    box.press("Enter")


def case_menu(page):
    page.get_by_role("button", name="Case", exact=True).click()
    page.get_by_text("Open a case file").wait_for()


def upload(page, name, text):
    """Into the open menu, in place of a file that is there already."""
    page.locator("input[type=file]").set_input_files(
        {"name": name, "mimeType": "application/json", "buffer": text.encode()})


def drawn(page):
    """How many lines each diagram shows; none may be blank."""
    return page.evaluate(PATHS)


def sideways(page):
    """By how many pixels the page is wider than its window."""
    return page.evaluate("""() => Math.max(document.documentElement.scrollWidth - innerWidth,
        document.querySelector('[data-testid=stMain]').scrollWidth - innerWidth)""")


def test_the_page_stands_with_its_answer_and_diagrams(path):
    page = path()
    says(page, "Quality in the line 0.9720 ± 0.0058, wetness 2.80 ± 0.58 %.")
    says(page, "reads 0.9720", bar)
    figures = page.get_by_role("figure", name=re.compile("diagram. Quality in the line 0.9720"))
    assert figures.count() == 3
    page.wait_for_function(f"() => ({PATHS})().length === 4")
    assert min(drawn(page)) >= 2
    page.get_by_text("This is an invented demo case.").wait_for()
    assert page.title() == "Steam quality by throttling"


def test_a_slider_by_keyboard_moves_answer_and_diagrams(path):
    page = path()
    before = page.get_attribute(".diagrams", "data-drawn")
    slider(page, READING).press("ArrowRight")
    says(page, "Quality in the line 0.9721")
    for _ in range(9):
        slider(page, READING).press("ArrowRight")
    says(page, "Quality in the line 0.9730")
    page.wait_for_function("before => +document.querySelector('.diagrams').dataset.drawn > before", arg=int(before))
    page.get_by_role("figure", name="T–s diagram. Quality in the line 0.9730 ± 0.0058, wetness 2.70 ±").wait_for()
    assert min(drawn(page)) >= 2
    assert page.get_by_label(READING, exact=True).last.input_value() == "122.1"


def test_a_slider_by_mouse_moves_answer_and_diagrams(path):
    page = path()
    thumb = slider(page, READING)
    box = thumb.bounding_box()
    x, y = box["x"] + box["width"] / 2, box["y"] + box["height"] / 2
    page.mouse.move(x, y)
    page.mouse.down()
    page.mouse.move(x - 150, y, steps=10)
    page.mouse.up()
    says(page, "No quality can be given: it is below 0.9558.")
    says(page, "cannot read", bar)
    page.get_by_role("figure", name=re.compile("^P–h diagram. No quality can be given")).wait_for()
    assert min(drawn(page)) >= 2


def test_units_switch_everywhere(path):
    page = path()
    page.get_by_text("What the answer takes for granted").click()
    page.get_by_label("Barometric pressure, kPa", exact=True).wait_for()
    page.get_by_role("radio", name="US").click()
    page.get_by_text("The exhaust is 37.6 °F superheated").wait_for()
    slider(page, "Measured temperature, °F").wait_for()
    page.wait_for_function("() => [...document.querySelectorAll('.stage .ytitle')].some((t) => "
                           "t.textContent.includes('°F'))")
    page.get_by_label("Barometric pressure, inHg", exact=True).wait_for()
    page.get_by_role("radio", name="SI").click()
    page.get_by_text("The exhaust is 20.9 K superheated").wait_for()
    says(page, "line 9 bar gauge", bar)


def test_a_pinned_case_stays_beside_the_open_one(path):
    page = path()
    alone = drawn(page)[0]
    page.get_by_role("button", name="Pin").click()
    page.get_by_text("Side by side").wait_for()
    page.wait_for_function(f"alone => ({PATHS})()[0] > alone", arg=alone)
    type_in(page, "Line pressure, bar", "20")
    says(page, "line 20 bar gauge", bar)
    row = page.get_by_role("row", name="Line pressure")
    row.get_by_text("20 bar gauge").wait_for()
    assert row.get_by_role("cell").all_inner_texts()[-2:] == ["20 bar gauge", "9 bar gauge"]
    page.get_by_role("button", name="Open A").click()
    says(page, "Quality in the line 0.9720")
    page.get_by_role("button", name="Unpin A").click()
    page.get_by_text("Side by side").wait_for(state="detached")


def test_a_reload_and_a_second_tab_find_the_same_case(path):
    page = path()
    type_in(page, "Line pressure, bar", "20")
    says(page, "line 20 bar gauge", bar)
    shown = answer(page).inner_text()
    word = to_link(DEMO.with_(p_line=Entry(20.0, "bar", "gauge")))
    page.wait_for_function("word => new URLSearchParams(location.search).get('case') === word", arg=word)
    page.reload()
    says(page, "line 20 bar gauge", bar)
    assert answer(page).inner_text() == shown

    other = path(page.url.split("/", 3)[3])
    says(other, "line 20 bar gauge", bar)
    assert answer(other).inner_text() == shown
    type_in(other, "Line pressure, bar", "30")
    says(other, "line 30 bar gauge", bar)
    assert "line 20 bar gauge" in bar(page).inner_text()


def test_a_link_cut_off_on_the_way_is_refused(path):
    page = path("?case=" + to_link(DEMO)[:-9])
    page.get_by_text("The case in the link could not be opened; the demo case is shown.").wait_for()
    says(page, "Quality in the line 0.9720")


def test_a_broken_case_file_is_refused_and_the_open_case_stays(path):
    page = path()
    slider(page, READING).press("ArrowRight")
    says(page, "Quality in the line 0.9721")
    case_menu(page)
    for name, text, reason in (
        ("table.json", "p1;p2;T2", "needs a JSON file as saved by this program"),
        ("newer.json", to_json(DEMO).replace('"schema": 1', '"schema": 99'), "it was saved by a newer version"),
        ("nonsense.json", to_json(DEMO).replace("121.1", "1211"), "Measured temperature: got 1211 °C, needs 0 to 500"),
    ):
        upload(page, name, text)
        page.get_by_text(f"{name} was not opened; the open case is unchanged.").wait_for()
        page.get_by_text(reason).wait_for()
        says(page, "Quality in the line 0.9721")


def test_a_case_file_is_opened_saved_and_opened_again(path):
    page = path()
    case = DEMO.with_(title="From a file", p_line=Entry(150.0, "psi", "gauge"))
    case_menu(page)
    upload(page, "mine.json", to_json(case))
    says(page, "From a file", bar)
    says(page, f"Quality in the line {assess(case).x:.4f}")
    with page.expect_download() as saved:
        page.get_by_role("button", name="Save case file").click()
    text = saved.value.path().read_text(encoding="utf-8")
    assert saved.value.suggested_filename == "case.json" and from_json(text) == case
    page.keyboard.press("Escape")
    type_in(page, "Line pressure, bar", "20")
    says(page, "line 20 bar gauge", bar)
    case_menu(page)
    upload(page, "again.json", text)
    says(page, "line 150 psi gauge", bar)


def test_the_states_are_saved_as_csv(path):
    page = path()
    with page.expect_download() as saved:
        page.get_by_role("button", name="Save the states as CSV").click()
    header, *rows = saved.value.path().read_text(encoding="utf-8").splitlines()
    assert header.startswith('State,"p, bar abs","T, °C",x,')
    assert [row.split(",")[0] for row in rows] == ["Line", "Dries out", "Exhaust", '"Constant bore']
    assert float(rows[0].split(",")[3]) == pytest.approx(0.9720, abs=5e-5)


def test_a_refused_entry_leaves_the_page_and_can_be_undone(path):
    page = path()
    type_in(page, "Line pressure, bar", "900")
    page.get_by_text("Line pressure: got 900 bar gauge, needs 0.042 to 163.99 bar gauge").wait_for()
    says(page, "an entry cannot be used", bar)
    assert page.get_by_role("button", name="Pin").is_disabled()
    assert min(drawn(page)) >= 2
    page.get_by_role("button", name="Undo").click()
    says(page, "Quality in the line 0.9720")
    page.get_by_role("button", name="Redo").click()
    page.get_by_text("Line pressure: got 900 bar gauge").wait_for()


def test_nonsense_typed_into_a_number_breaks_nothing(path):
    page = path()
    for text in ("1e308", "-1e308", "1e400", "-0", "", "e"):
        box = page.get_by_label("Line pressure, bar", exact=True)
        box.click()
        box.press("Control+a")
        box.press("Delete")
        box.press_sequentially(text)
        box.press("Enter")
        page.get_by_role("radio", name="US").click()
        slider(page, "Measured temperature, °F").wait_for()
        page.get_by_role("radio", name="SI").click()
        slider(page, READING).wait_for()
        settle(page)
        assert page.locator("[data-testid=stException]").count() == 0
        assert not re.search(r"\b(nan|none|inf)\b", bar(page).inner_text(), re.IGNORECASE)
        type_in(page, "Line pressure, bar", "13")
        says(page, "line 13 bar", bar)


def test_a_hostile_title_is_only_words(path):
    title = "<img src=//e.example> http://e.example www.e.example a@e.example ![x](//b.png) *b*"
    page = path("?case=" + to_link(DEMO.with_(title=title)))
    says(page, "reads 0.9720", bar)
    assert title[:60] in bar(page).inner_text().replace("\u2060", "")
    assert bar(page).locator("a, img, em, script").count() == 0
    page.get_by_role("button", name="Pin").click()
    type_in(page, "Line pressure, bar", "20")
    page.get_by_role("row", name="Line pressure").wait_for()
    case_menu(page)
    type_in(page, "Title", "Other")
    says(page, "Other", bar)
    page.get_by_role("row", name="Title").wait_for()
    assert page.locator("[data-testid=stTable] :is(a, img, em, script)").count() == 0


def test_a_title_longer_than_its_field_is_kept(path):
    case = DEMO.with_(title="long " * 300)
    page = path("?case=" + to_link(case))
    says(page, "reads 0.9720", bar)
    slider(page, READING).press("ArrowRight")
    says(page, "Quality in the line 0.9721")
    word = to_link(case.with_(T_exhaust=Entry(121.2, "°C")))
    page.wait_for_function("word => new URLSearchParams(location.search).get('case') === word", arg=word)


def test_a_phone_scrolls_one_way_only(path):
    page = path(width=390, height=844, phone=True)
    says(page, "Quality in the line 0.9720")
    assert sideways(page) <= 0
    page.get_by_role("button", name="Pin").click()
    page.get_by_text("Side by side").wait_for()
    assert sideways(page) <= 0
    type_in(page, "Line pressure, bar", "900")
    page.get_by_text("Line pressure: got 900 bar gauge").wait_for()
    assert sideways(page) <= 0
    case_menu(page)
    assert sideways(page) <= 0


def test_the_diagrams_have_one_whole_width_for_a_shared_screen(path):
    page = path(width=1920, height=1080)
    page.get_by_role("button", name="Enlarge h–s").click()
    page.get_by_role("button", name="Back to all diagrams").wait_for()
    wide = page.locator(".stage[data-key=hs]").bounding_box()["width"]
    assert wide > 1500
    slider(page, READING).press("ArrowRight")
    page.get_by_role("figure", name="h–s diagram. Quality in the line 0.9721").wait_for()
    page.get_by_role("button", name="Back to all diagrams").click()
    page.wait_for_function("() => document.querySelector('.stage[data-key=hs]').clientWidth < 900")
    assert min(drawn(page)) >= 2


def test_the_case_in_the_menu_is_that_of_the_address(path):
    page = path()
    case_menu(page)
    shown = page.locator("[data-testid=stCode]").first.inner_text().strip()
    assert shown == f"?case={to_link(DEMO)}"
    assert json.loads(to_json(DEMO))["schema"] == 1
