"""Run sheet and record in a browser: ticked, reloaded and found; downloaded, opened, read, printed, opened again."""

import re
from pathlib import Path

import pytest
from conftest import settle

from engine.job.case.casefile import from_link, from_record, to_link
from engine.job.case.demo import DEMO
from engine.job.case.examples import HEATED
from engine.job.case.rows import Entry
from engine.job.record import record_html
from engine.job.rehearsal import begin
from engine.job.rehearsal.link import to_link as to_rehearsal
from engine.job.rehearsal.scenario import Scenario
from engine.job.result import reduce
from engine.job.result.runs import runs_typed
from engine.job.result.said import figures
from engine.job.runsheet import run_sheet, tick, ticks_of
from engine.job.runsheet.print import runsheet_html
from engine.job.runsheet.readings import with_reading
from engine.steam.units import SI, US

MM = 96 / 25.4  # CSS pixels
PAPERS = {"A4": (210.0, 297.0), "Letter": (215.9, 279.4)}


def measured(sets=8):
    """The demo case with its hold points ticked and a run typed."""
    case = DEMO.with_(title="Header at hall 2")
    for step in run_sheet(case).held:
        case = tick(case, step.key, "2025-03-04 08:15", "AB")
    for k in range(sets):
        case = with_reading(case, run="1", T_exhaust=Entry(121.1 + 0.1 * (k % 3), "°C"))
    return case


@pytest.fixture
def opened(app_address, visit):
    """A page of a case, reached as a reader does, by the navigation (a phone has it behind the menu)."""
    def go(name, case, *, phone=False, **window):
        page = visit(f"{app_address}?case={to_link(case)}", phone=phone, **window)
        menu = page.get_by_test_id("stExpandSidebarButton")
        if phone and menu.count():  # it stays open for the next page of the same phone
            menu.click()
        page.get_by_role("link", name=name, exact=True).click()
        page.get_by_text({"Run sheet": "On paper", "Record": "never permission"}[name]).first.wait_for()
        settle(page)
        return page
    return go


def case_in_address(page, wanted):
    """The case in the address, once it is the one waited for."""
    page.wait_for_function("() => location.search.includes('case=')")
    for _ in range(100):
        case = from_link(re.search(r"case=([\w-]+)", page.url)[1])
        if wanted(case):
            return case
        page.wait_for_timeout(50)
    raise AssertionError(f"the address kept {case['ticks']}")


def sideways(page):
    return page.evaluate("""() => {
      const main = document.querySelector('[data-testid=stMain]');
      return main.scrollWidth - main.clientWidth;
    }""")


def sign(page, initials):
    field = page.get_by_role("textbox", name="Initials")
    field.fill(initials)
    field.press("Enter")
    page.get_by_text("initials: got nothing").wait_for(state="detached")
    settle(page)


def press_tick(page, number):
    page.get_by_role("button", name="○ Tick").nth(number).click()


def turn_to(page, part, first_words):
    """Another part of the sheet, once its steps stand there: a click is on its way before the page knows of it."""
    page.get_by_text(part).click()
    page.get_by_text(first_words).wait_for()
    settle(page)


# ---- the run sheet


def test_a_run_sheet_is_ticked_on_a_tablet_and_found_after_a_reload(opened):
    page = opened("Run sheet", DEMO, width=1024, height=768, forgive="404")  # of Streamlit's own, by the reload
    assert sideways(page) == 0
    press_tick(page, 0)
    page.get_by_text("initials: got nothing").wait_for()
    sign(page, "AB")
    press_tick(page, 0)
    page.get_by_text("1 of 50 steps ticked").wait_for()
    button = page.get_by_role("button", name=re.compile("✓ .* AB"))
    assert button.bounding_box()["height"] >= 55  # a finger in a glove
    case = case_in_address(page, lambda case: ticks_of(case))
    page.reload()
    settle(page)
    page.get_by_text("1 of 50 steps ticked").wait_for()
    page.get_by_role("button", name=re.compile("✓ .* AB")).wait_for()
    assert ticks_of(case)["hold.permit"].initials == "AB"


def test_hold_points_hold_and_readings_are_taken(opened):
    page = opened("Run sheet", DEMO, width=1024, height=768)
    turn_to(page, "Warm up 0/4", "At first the metal condenses the steam")
    assert page.get_by_role("button", name="○ Tick").first.is_disabled()
    page = opened("Run sheet", measured(0), width=1024, height=768)
    turn_to(page, "Warm up 0/4", "At first the metal condenses the steam")
    press_tick(page, 1)
    page.get_by_text("10 of 50 steps ticked").wait_for()
    page.get_by_role("spinbutton", name="Thermometer, °C").fill("100.4")
    page.get_by_role("button", name="Write this set down").click()
    page.get_by_text("Its temperature says the pressure, not the quality").nth(1).wait_for()
    case = case_in_address(page, lambda case: case["readings"])
    assert case["readings"][0]["T_exhaust"] == Entry(100.4, "°C")


@pytest.mark.parametrize(("width", "height", "phone", "dark"), [(390, 844, True, False), (1920, 1080, False, True)])
def test_the_run_sheet_fits_other_screens(opened, width, height, phone, dark):
    page = opened("Run sheet", measured(), width=width, height=height, phone=phone, dark=dark)
    assert sideways(page) == 0
    page.get_by_text("9 of 50 steps ticked").wait_for()


def test_the_sheet_and_the_rehearsal_beside_it_are_found_after_a_reload(opened):
    page = opened("Run sheet", measured(0), width=820, height=1180, forgive="404")
    tabs = page.locator(".st-key-sheet-or-rehearsal")
    tabs.get_by_text("Rehearsal").click()
    page.get_by_role("button", name="Start: nothing is wrong").click()
    page.get_by_text("The rig is cold").wait_for()
    page.wait_for_function("() => location.search.includes('rehearsal=')")
    tabs.get_by_text("Run sheet").click()
    page.get_by_text("9 of 50 steps ticked").wait_for()
    page.wait_for_function("() => location.search.includes('on=sheet')")
    page.reload()
    page.get_by_text("9 of 50 steps ticked").wait_for()  # no rehearsal comes in its way, and none is lost
    tabs.get_by_text("Rehearsal").click()
    page.get_by_text("The rig is cold").wait_for()


def test_a_link_to_a_rehearsal_leads_there_from_the_first_page(app_address, visit):
    page = visit(f"{app_address}?rehearsal={to_rehearsal(begin(Scenario(DEMO, seed=2)))}")
    page.get_by_text("The rig is cold").wait_for()


def downloaded(page, button, tmp_path):
    with page.expect_download() as caught:
        page.get_by_role("button", name=button, exact=True).click()
    file = tmp_path / caught.value.suggested_filename
    caught.value.save_as(file)
    return file


def test_the_run_sheet_is_saved_for_the_paper_chosen(opened, tmp_path):
    page = opened("Run sheet", DEMO)
    page.get_by_role("radio", name="Letter").click()
    file = downloaded(page, "Save the run sheet to print on Letter", tmp_path)
    assert file.read_text(encoding="utf-8") == runsheet_html(DEMO, SI, "Letter")


# ---- the record


def test_the_record_is_saved_read_and_opened_again(opened, visit, tmp_path):
    case = measured()
    page = opened("Record", case)
    file = downloaded(page, "Save the record on A4", tmp_path)
    assert from_record(file.read_bytes()) == case

    x, U = figures(reduce(case, runs_typed(case)).budget)
    paper = visit_file(visit, file)
    assert paper.get_by_text(f"Quality {x} ± {U}").is_visible()
    assert paper.get_by_text("◇ undecided").first.is_visible() and paper.locator("svg").count() == 3
    assert paper.evaluate("document.querySelectorAll('script:not([type=\"application/json\"])').length") == 0

    page = opened("Record", HEATED)
    page.get_by_role("button", name="Case").click()
    page.locator("input[type=file]").first.set_input_files(file)
    page.get_by_text("Opened record.html").wait_for()
    settle(page)
    assert case_in_address(page, lambda found: found == case)
    page.get_by_role("heading", name=re.compile(re.escape(f"Quality {x} ± {U}"))).wait_for()


def visit_file(visit, file):
    """A page from a file: no server, no Streamlit."""
    return visit(file.as_uri(), settled=False)


def test_what_is_undecided_stands_where_the_record_would(opened):
    page = opened("Record", DEMO.with_(heat_loss_method="not decided"))
    page.get_by_text("No record yet").wait_for()
    assert page.get_by_role("button", name="Save the record on A4").count() == 0


@pytest.mark.parametrize(("width", "height", "phone", "dark"), [(390, 844, True, False), (1024, 768, False, False),
                                                                (1920, 1080, False, True)])
def test_the_record_page_fits_other_screens(opened, width, height, phone, dark):
    page = opened("Record", measured(), width=width, height=height, phone=phone, dark=dark)
    assert sideways(page) == 0
    page.get_by_role("button", name="Save the record on A4", exact=True).wait_for()


# ---- on paper


def pages_of(pdf):
    return len(re.findall(rb"/Type\s*/Page\b(?!s)", pdf))


@pytest.mark.parametrize(("paper", "units"), [("A4", SI), ("Letter", US)])
@pytest.mark.parametrize(("name", "least", "most"), [("sheet", 6, 10), ("record", 5, 9)])
def test_both_documents_fit_their_paper(visit, tmp_path, paper, units, name, least, most):
    case = measured()
    html = (runsheet_html(case, units, paper) if name == "sheet" else
            record_html(case, reduce(case, runs_typed(case)), units, paper, made="2025-03-04 14:20"))
    file = tmp_path / f"{name}.html"
    file.write_text(html, encoding="utf-8")
    page = visit_file(visit, file)
    width, height = PAPERS[paper]
    page.emulate_media(media="print")
    page.set_viewport_size({"width": round((width - 26) * MM), "height": round((height - 32) * MM)})
    too_wide = page.evaluate("""() => [...document.querySelectorAll('body :not(svg *)')].filter(
      (e) => e.getBoundingClientRect().right > document.documentElement.clientWidth + 1).length""")
    assert too_wide == 0
    pdf = page.pdf(prefer_css_page_size=True, print_background=True)
    assert least <= pages_of(pdf) <= most
    box = re.search(rb"/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)", pdf)
    assert [float(v) * 25.4 / 72 for v in box.groups()] == pytest.approx([width, height], abs=0.5)


def test_a_hostile_title_does_nothing_on_paper_or_screen(visit, tmp_path):
    case = DEMO.with_(title='</title></style><script>document.title = "taken"</script><img src=x onerror="alert(1)">')
    file = tmp_path / "record.html"
    file.write_text(record_html(case, None, SI, "A4", made="now"), encoding="utf-8")
    page = visit_file(visit, file)
    assert page.title().startswith("Record: </title>") and page.locator("img").count() == 0
    assert Path(file).stat().st_size < 200_000
