"""The address that follows the case, in a browser, beside Streamlit's own handling of the query."""

import pytest


@pytest.fixture
def opened(sample_address, visit):
    def go(query="?pages=1"):
        page = visit(sample_address + query)
        page.wait_for_function("location.search.includes('case=')")
        return page

    return go


def warm(page, answer):
    """One step of a slider, and the wait until the address carries it."""
    page.get_by_role("slider", name="Measured temperature").press("ArrowRight")
    page.wait_for_function("kept => location.search.includes('case=' + kept)", arg=answer)


def test_the_case_is_in_the_address_without_history_entries(opened):
    page = opened()
    entries = page.evaluate("history.length")
    warm(page, "10.0-1.0-120.5")
    warm(page, "10.0-1.0-121.0")
    assert page.evaluate("history.length") == entries
    assert "pages=1" in page.url  # other names stay


def test_a_reload_opens_what_was_kept_last(opened):
    page = opened()
    page.get_by_text("Opened with nothing").wait_for()
    warm(page, "10.0-1.0-120.5")
    warm(page, "10.0-1.0-121.0")
    page.reload()
    page.get_by_text("Opened with 10.0-1.0-121.0").wait_for()


def test_the_case_goes_along_to_other_pages_and_back(opened):
    page = opened()
    warm(page, "10.0-1.0-120.5")
    page.get_by_role("link", name="Other").click()
    page.wait_for_url("**/other?*case=10.0-1.0-120.5*")
    page.get_by_text("The other page.").wait_for()
    warm(page, "10.0-1.0-121.0")
    page.get_by_role("link", name="Row").click()
    page.wait_for_function("!location.pathname.includes('other') && location.search.includes('case=10.0-1.0-121.0')")
    page.get_by_text("Below the diagrams.").wait_for()
    page.go_back()
    page.wait_for_url("**/other?*case=10.0-1.0-121.0*")
    page.get_by_text("The other page.").wait_for()
    page.go_back()
    page.get_by_text("Below the diagrams.").wait_for()
    page.wait_for_function("location.search.includes('case=10.0-1.0-121.0')")  # not what it was when it was left
    warm(page, "10.0-1.0-121.5")


def test_the_elements_that_only_carry_take_no_room(opened):
    page = opened()
    hidden = page.locator("[data-testid=stElementContainer]:has([data-testid=stBidiComponentRegular])")
    heights = hidden.evaluate_all("boxes => boxes.map((box) => box.getBoundingClientRect().height)")
    assert sorted(height > 0 for height in heights) == [False, False, True]
