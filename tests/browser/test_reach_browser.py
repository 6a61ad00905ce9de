"""Planning a test in a browser on three invented cases: one reads, one needs a separator, one a condenser."""

import re

import pytest
from conftest import pick, settle

from engine.job.case.casefile import from_link, to_link
from engine.job.case.examples import BOILER_OUTLET, HEATING_STEAM, WET_LINE


@pytest.fixture
def plan(app_address, visit):
    """The page of a case, reached as a reader does, by the navigation (a phone has it behind the menu)."""
    def opened(case, *, phone=False, **window):
        page = visit(f"{app_address}?case={to_link(case)}", phone=phone, **window)
        if phone:
            page.get_by_test_id("stExpandSidebarButton").click()
        page.get_by_role("link", name="Reach", exact=True).click()
        page.get_by_text("What the reach takes for granted").wait_for()
        drawn(page)
        return page
    return opened


def drawn(page):
    settle(page)
    page.wait_for_selector(".stage[data-key=reach-map] .js-plotly-plot, .stage[data-key=reach-map].js-plotly-plot")


def headline(page, words):
    """Wait until the answer begins so; gives the whole of it."""
    found = page.get_by_role("heading", level=3).filter(has_text=re.compile(words))
    found.wait_for()
    settle(page)
    return found.inner_text()


def case_in_address(page):
    page.wait_for_function("() => location.search.includes('case=')")
    return from_link(re.search(r"case=([\w-]+)", page.url)[1])


def place_on_map(page):
    """Where the map has this case, in the units of its axes: read from the picture."""
    return page.evaluate("""() => {
      const stage = document.querySelector('.stage[data-key=reach-map]');
      const { xaxis, yaxis } = stage._fullLayout;
      const traces = [...stage.querySelectorAll('.scatterlayer .trace')];
      const mark = traces[traces.length - 1].querySelector('.point').getAttribute('transform');
      const [x, y] = mark.match(/translate\\((-?[\\d.]+),(-?[\\d.]+)\\)/).slice(1);
      return [xaxis.p2d(+x), yaxis.p2d(+y)];
    }""")


def enter(page, label, value):
    field = page.get_by_role("spinbutton", name=label)
    field.fill(str(value))
    field.press("Enter")
    settle(page)


def sees_sideways(page):
    return page.evaluate("(() => { const m = document.querySelector('[data-testid=stMain]');"
                         " return m.scrollWidth - m.clientWidth; })()")


def test_a_boiler_test_at_40_bar_reads_as_planned(plan):
    page = plan(BOILER_OUTLET)
    assert headline(page, "All that is expected").startswith("● All that is expected, 0.30 to 2.00 % wetness")
    assert page.get_by_text("Ways out, the least effort first").count() == 0
    assert place_on_map(page) == pytest.approx([41.013, 1.048], rel=0.02)
    # how wet may it be? the range is widened until the answer says where it ends
    enter(page, "Expected wetness, wettest", 9)
    assert "up to 6.52 % of the 0.30 to 9.00 % wetness" in headline(page, "Only a part can be read")
    page.get_by_role("button", name="Undo").click()
    headline(page, "All that is expected")
    with page.expect_download() as download:
        page.get_by_role("button", name="Chart to print").click()
    text = download.value.path().read_text()
    assert "Boiler outlet at 40 bar" in text and "<svg" in text and "<script" not in text
    page.get_by_text("The same as a table").click()
    page.get_by_role("table").last.get_by_text("thin").first.wait_for()


def test_a_wet_line_cannot_be_read_until_the_water_is_drained(plan):
    page = plan(WET_LINE)
    assert headline(page, "Nothing").startswith("○ Nothing of the expected 10.00 to 14.00 % wetness")
    page.get_by_text("What does not help here").click()
    page.get_by_text("Not even the triple pressure of water would be low enough.").wait_for()
    page.get_by_role("button", name="Apply: Separator, 90 % of the water").click()
    assert headline(page, "All that is expected").endswith("can be read behind this separator.")
    page.get_by_text("Applied: Separator, 90 % of the water. Undo takes it back.").wait_for()
    page.wait_for_function("old => !location.search.includes(old)", arg=to_link(WET_LINE))
    assert case_in_address(page)["mode"] == "separating and throttling"
    # the Path page speaks of the same method
    page.get_by_role("link", name="Path", exact=True).click()
    headline(page, r"For a wetness of 12\.00 % with 10\.8 % of the sample drained as water")
    page.get_by_role("button", name="Undo").click()
    headline(page, r"A wetness of 12\.00 % cannot be read here")
    page.get_by_role("link", name="Reach", exact=True).click()
    headline(page, "Nothing of the expected")


def test_heating_steam_wants_a_condenser(plan):
    page = plan(HEATING_STEAM)
    headline(page, "Nothing of the expected 1.00 to 3.00 % wetness")
    above = place_on_map(page)
    assert above[1] == pytest.approx(1.02, rel=0.02)
    page.get_by_text("1. Lower the exhaust pressure to 0.172 bar abs or less.").wait_for()
    page.get_by_role("button", name="Apply: Exhaust 0.17 bar absolute").click()
    headline(page, "All that is expected")
    page.wait_for_function("() => Math.abs(Number(document.querySelector('input[aria-label^=\"Exhaust pressure\"]')"
                           ".value) - 0.17) < 1e-9")
    page.wait_for_timeout(300)
    below = place_on_map(page)
    assert below == pytest.approx([above[0], 0.17], rel=0.02)
    page.get_by_role("button", name="Undo").click()
    headline(page, "Nothing of the expected")
    page.get_by_role("button", name="Redo").click()
    headline(page, "All that is expected")


def test_examples_are_chosen_from_the_case_bar(plan):
    page = plan(BOILER_OUTLET)
    page.get_by_role("button", name="Case").click()
    pick(page, page.get_by_role("combobox", name="Invented examples"), "Plant at 2600 m")
    headline(page, "thinly where it is wettest")


@pytest.mark.parametrize("window", [{"width": 390, "height": 844, "phone": True}, {"width": 1920, "height": 1080},
                                    {"width": 1920, "height": 1080, "dark": True}], ids=["phone", "wall", "dark"])
def test_the_page_fits_its_window(plan, window):
    page = plan(WET_LINE, **window)
    headline(page, "Nothing of the expected")
    assert sees_sideways(page) <= 1
    figure = page.get_by_role("figure", name=re.compile("Map of the greatest readable wetness"))
    assert figure.count() == 1 and "Nothing of the expected" in figure.get_attribute("aria-label")


def test_nonsense_is_refused_beside_the_answer(plan):
    page = plan(BOILER_OUTLET)
    enter(page, "Expected wetness, wettest", 0.1)
    page.get_by_text("needs at least the driest, 0.3 %").wait_for()
    page.get_by_text("Nothing is lost").wait_for()
    page.get_by_role("button", name="Undo").click()
    headline(page, "All that is expected")
