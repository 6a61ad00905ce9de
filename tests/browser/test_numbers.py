"""Numbers as people type them, in a real browser: a comma is a decimal comma, and nothing is guessed."""

import pytest
from conftest import settle, turn_to

FIELD = "Line pressure, bar"


@pytest.fixture
def field(app_address, visit):
    """The exact entry of the line pressure, which shows 9; and the page it is on."""
    page = visit(app_address)
    page.wait_for_selector(".diagrams[data-drawn]")
    page.wait_for_function("document.documentElement.dataset.everywhere")
    return page, page.get_by_role("spinbutton", name=FIELD)


def typed(field, text, key="Enter"):
    page, box = field
    box.click()
    box.press("Control+a")
    page.keyboard.type(text)
    box.press(key)
    settle(page)
    return box


def stands(page, words):
    page.locator(".st-key-casebar").get_by_text(f"line {words} bar gauge").wait_for()


def refused(page, words):
    page.locator(".number-fault[role=alert]").get_by_text(words).wait_for()
    page.wait_for_timeout(300)  # whatever might still be taken


def test_a_comma_is_a_decimal_comma(field):
    for text, number in (("9,5", "9.5"), ("9.25", "9.25"), ("0,972", "0.972"), ("9.017", "9.017"), (",5", "0.5")):
        for key in ("Enter", "Tab"):
            typed(field, text, key)
            stands(field[0], number)
            assert field[1].input_value() == number


def test_what_could_be_two_numbers_or_is_none_is_not_taken(field):
    page, box = field
    for text, words in (("1,234", "1,234 can mean 1.234 or 1234"), ("1.234,5", "two decimal signs"),
                        ("1,234.5", "two decimal signs"), ("-", "this is not a number")):
        typed(field, text, "Enter")
        refused(page, words)
        stands(page, "9")
        box.press("Tab")  # and left like that
        refused(page, "What stood there before stands again")
        stands(page, "9")
        assert box.input_value() == "9"
    typed(field, "8,5")  # and it goes on
    stands(page, "8.5")
    assert not page.locator(".number-fault").is_visible()


def test_letters_take_nothing_away(field):
    page, box = field
    typed(field, "abc", "c")
    refused(page, "this is not a number")
    box.press("Enter")
    stands(page, "9")
    assert box.input_value() == "9"


def test_the_clipboard_is_read_the_same_way(field):
    page, box = field
    for text, shown in (("9,5", "9.5"), ("8.25", "8.25"), ("1.234,5", "8.25"), ("1,234,567", "8.25")):
        box.focus()
        box.press("Control+a")
        page.keyboard.insert_text(text)
        assert box.input_value() == shown
    page.locator(".number-fault").get_by_text("One decimal sign only").wait_for()
    box.press("Enter")
    stands(page, "8.25")


def test_arrows_and_buttons_still_step(field):
    page, box = field
    typed(field, "9,5")
    stands(page, "9.5")
    box.press("ArrowUp")
    box.press("Enter")
    stands(page, "9.51")


def test_it_holds_on_every_page(field):
    page, _ = field
    turn_to(page, "Reach")
    box = page.get_by_role("spinbutton", name="Expected wetness, driest, %")
    box.click()
    box.press("Control+a")
    page.keyboard.type("2,5")
    box.press("Enter")
    settle(page)
    assert box.input_value() == "2.5"
    turn_to(page, "Run sheet")
    box = page.get_by_role("spinbutton", name="Thermometer, °C")
    box.click()
    page.keyboard.type("121,3")
    box.press("Tab")
    settle(page)
    assert box.input_value() == "121.3"
