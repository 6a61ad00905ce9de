"""The Readings page in a browser: a clean log, a messy one, a hopeless one, typed sets, decisions with reasons."""

import io
import re

import numpy as np
import pytest
from conftest import pick, settle

from engine.job.case.casefile import to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import UNDECIDED
from engine.measurement.logbook.write import write_log


@pytest.fixture
def readings(app_address, visit):
    """The page, entered by the navigation."""
    def opened(case=DEMO, **window):
        page = visit(f"{app_address}?case={to_link(case)}", **window)
        page.wait_for_selector(".st-key-answer h3")
        if window.get("phone"):
            page.get_by_test_id("stExpandSidebarButton").click()
        page.get_by_role("link", name="Readings", exact=True).click()
        page.wait_for_selector(".st-key-readings_headline h3")
        if window.get("phone"):
            page.get_by_test_id("stSidebarCollapseButton").locator("button").click()
        settle(page)
        return page

    return opened


def a_log(spike=None, swing=0.0):
    """Settles near 121.1 °C after twenty minutes: the quality is 0.972."""
    rng, time = np.random.default_rng(5), np.arange(0.0, 2401.0, 10.0)
    T = 394.25 - 20.0 * np.exp(-time / 240.0) + 0.05 * rng.standard_normal(time.size)
    if spike is not None:
        T[spike] += 3.0
    target = io.BytesIO()
    write_log(target, {"p_line": 9e5 + swing * np.sin(time / 60) + 300 * rng.standard_normal(time.size),
                       "p_exhaust": 1300 + 20 * rng.standard_normal(time.size), "T_exhaust": T}, time=time,
              basis={"p_line": "gauge", "p_exhaust": "gauge"})
    return target.getvalue()


def bring(page, name, data):
    page.get_by_test_id("stFileUploaderDropzone").locator("input[type=file]").first.set_input_files(
        {"name": name, "mimeType": "text/csv", "buffer": data})
    page.get_by_text(name, exact=False).first.wait_for()
    settle(page)


def confirm(page):
    page.get_by_role("button", name="Read with these columns").first.click()
    settle(page)


def headline(page):
    return page.locator(".st-key-readings_headline h3").first


def says(page, words):
    page.locator(".st-key-readings_headline h3").get_by_text(re.compile(words)).first.wait_for()
    settle(page)


def test_a_clean_log_from_upload_to_decision(readings):
    page = readings()
    says(page, "No quality can be given yet")
    bring(page, "run1.csv", a_log())
    page.get_by_text("· columns to be confirmed").wait_for()
    confirm(page)
    says(page, r"Quality 0\.97\d\d ± 0\.0058, wetness 2\.\d\d ± 0\.58 %\.")
    page.get_by_role("heading", name="◇ undecided with sampling").wait_for()
    page.get_by_role("heading", name="✓ accept by the instruments alone").wait_for()
    page.get_by_text("1 000 000 draws").wait_for()
    for name in ("Channels of run1.csv over time with 1 settled stretches", "Uncertainty budget, largest first",
                 "Result against the limit", "Distribution of the quality"):
        figure = page.get_by_role("figure", name=re.compile(name))
        figure.wait_for()
        figure.locator(".js-line, .bars path, .scatterlayer path").nth(1).wait_for(state="attached")
    page.get_by_role("link", name="Path", exact=True).click()
    page.wait_for_selector(".st-key-answer h3")
    page.get_by_role("link", name="Readings", exact=True).click()
    says(page, r"Quality 0\.97")  # the log stayed with the session


def test_a_messy_log_is_read_with_everything_refused_said(readings):
    lines = ["Zeit [s];Leitungsdruck [bar ü];p2 [kPa g];T2 [°C];Bemerkung"]
    lines += [f"{10 * k};9,0{k % 7};1,3;121,{k % 4};" for k in range(200)]
    lines[20], lines[40] = "190;9,01;1,3;n/a;<b>lauter</b>", "390;Störung;1,3;121,1;"
    lines[60:62] = [lines[61], lines[60]]
    page = readings()
    bring(page, "messy.csv", "\n".join(lines).encode("cp1252"))
    confirm(page)
    says(page, r"Quality 0\.97")
    page.get_by_text("200 of 200 rows read · 2 refusals").wait_for()
    page.get_by_text(re.compile("The time runs backwards at 1 row")).wait_for()
    page.get_by_text("What was refused, 2 in all").click()
    page.get_by_role("cell", name="the instrument says that it has no value").wait_for()
    assert page.locator("b", has_text="lauter").count() == 0  # what a log says is never markup


def test_a_wrong_unit_is_mended_and_taken_back(readings):
    lines = ["t [s],p1 [bar g],p2 [kPa g],T2 [°C]"] + [f"{10 * k},9.0{k % 7},1.3,{250 + 0.1 * (k % 3):.1f}"
                                                      for k in range(200)]
    page = readings()
    bring(page, "us.csv", "\n".join(lines).encode())
    confirm(page)
    says(page, "No quality can be given from these readings")
    page.get_by_role("button", name="Read the exhaust temperature as °F").click()
    says(page, r"Quality 0\.97")
    box = page.locator(".st-key-readings_headline").bounding_box
    page.get_by_role("heading", name="Decision", exact=True).scroll_into_view_if_needed()
    assert 0 <= box()["y"] < 120  # the result stays in sight
    page.get_by_role("button", name="Undo").click()
    says(page, "No quality can be given from these readings")


def test_a_hopeless_file_is_refused_and_the_rest_stays(readings):
    page = readings()
    bring(page, "run1.csv", a_log())
    confirm(page)
    says(page, r"Quality 0\.97")
    before = headline(page).inner_text()
    page.get_by_text("Readings: logs and typed sets").click()
    bring(page, "picture.csv", bytes(range(256)) * 40)
    page.get_by_text("✕ cannot be read").wait_for()
    assert headline(page).inner_text() == before
    page.get_by_test_id("stAlert").first.wait_for()
    page.locator("[class*='st-key-log-picture']").get_by_role("button", name="Remove").click()
    settle(page)
    assert page.get_by_text("✕ cannot be read").count() == 0


def test_an_outlier_leaves_only_with_a_reason(readings):
    page = readings()
    bring(page, "run1.csv", a_log(spike=200))
    confirm(page)
    says(page, r"Quality 0\.97")
    rows = page.get_by_role("combobox", name=re.compile("Rows left out"))
    page.get_by_text(re.compile(r"draws: mean")).first.wait_for()  # the last that a run of the page says
    settle(page)
    pick(page, rows, "row 202")
    page.keyboard.press("Escape")
    says(page, "Exploration, not a result")
    reason = page.get_by_label("Reason for leaving out row 202")
    reason.fill("slug of water heard")
    reason.press("Enter")
    page.get_by_text("with those left out it was").wait_for()
    page.get_by_role("cell", name="left out: slug of water heard").wait_for()
    assert "Exploration" not in headline(page).inner_text()


def test_the_heat_loss_must_be_decided_first(readings):
    page = readings(DEMO.with_(heat_loss_method=UNDECIDED))
    bring(page, "run1.csv", a_log())
    confirm(page)
    says(page, "No quality can be given from these readings")
    page.get_by_text("The heat loss has not been decided").first.wait_for()
    pick(page, page.get_by_role("combobox", name=re.compile("Heat loss")), "Knowingly none")
    says(page, r"Quality 0\.971")


def test_sets_are_typed_into_the_grid_with_a_decimal_comma(readings):
    page = readings()
    page.get_by_role("tab", name="Typed sets").click()
    grid = page.get_by_test_id("stDataFrame").first
    grid.wait_for()
    settle(page)
    for number, text in enumerate(("121,0", "121,2", "121,1")):
        page.wait_for_timeout(1500)  # the grid is painted some frames after it is there
        box = grid.bounding_box()  # cells are painted: they are found by their place
        page.mouse.click(box["x"] + 660, box["y"] + 35 + 17 + 35 * number)
        page.keyboard.type(text, delay=150)
        page.keyboard.press("Enter")
        page.get_by_text(f"{number + 1} set").first.wait_for()
        page.get_by_text("draws: mean").first.wait_for()
        settle(page)
    says(page, r"Quality 0\.97")
    page.get_by_text("3 sets of readings").wait_for()
    page.get_by_role("button", name="Undo").click()
    page.get_by_text("2 sets of readings").wait_for()


def test_everything_fits_on_a_phone(readings):
    page = readings(width=390, height=844, phone=True)
    bring(page, "run1.csv", a_log())
    confirm(page)
    says(page, r"Quality 0\.97")
    settle(page)
    wider = page.evaluate("document.querySelector('[data-testid=stMain]').scrollWidth - innerWidth")
    assert wider <= 0
