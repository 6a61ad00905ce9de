"""The component that keeps the diagrams, in a browser."""

import re

import pytest
from conftest import HERE, served

BACKGROUND = 30_000  # bytes; the background of the sample is 70 kB, what moves 4 kB


@pytest.fixture
def sheet(sample_address, visit):
    """The sample page with its diagrams drawn."""

    def opened(query="", **window):
        page = visit(sample_address + query, **window)
        page.wait_for_selector(".diagrams[data-drawn]")
        return page

    return opened


def drawn(page) -> int:
    return int(page.get_attribute(".diagrams", "data-drawn"))


def press(page, key="ArrowRight", slider="Measured temperature"):
    """One step of a slider, and the wait until the diagrams show it."""
    before = drawn(page)
    page.get_by_role("slider", name=slider).press(key)
    page.wait_for_function("before => +document.querySelector('.diagrams').dataset.drawn > before", arg=before)


def path_of(page, diagram="a"):
    """Where the drawn path begins, in the units of the axes: read from the picture, not from Plotly's data."""
    return page.evaluate(
        """(key) => {
          const stage = document.querySelector(`.stage[data-key=${key}]`);
          const line = [...stage.querySelectorAll('.scatterlayer .trace')][3].querySelector('.js-line');
          const [x, y] = line.getAttribute('d').match(/M(-?[\\d.]+),(-?[\\d.]+)/).slice(1);
          const { xaxis, yaxis } = stage._fullLayout;
          return [xaxis.p2d(+x), yaxis.p2d(+y)];
        }""",
        diagram,
    )


def ranges(page, diagram="a"):
    return page.evaluate(
        """(key) => {
          const { xaxis, yaxis } = document.querySelector(`.stage[data-key=${key}]`)._fullLayout;
          return [...xaxis.range, ...yaxis.range];
        }""",
        diagram,
    )


def figure(page, name):
    return page.get_by_role("figure", name=re.compile(f"^Path {name} "))


def zoom(page, diagram="a"):
    """Draw a rectangle over the middle of a diagram."""
    box = page.locator(f".stage[data-key={diagram}] .nsewdrag").first.bounding_box()
    page.mouse.move(box["x"] + box["width"] * 0.3, box["y"] + box["height"] * 0.3)
    page.mouse.down()
    page.mouse.move(box["x"] + box["width"] * 0.7, box["y"] + box["height"] * 0.7, steps=5)
    page.mouse.up()
    page.mouse.move(5, 5)
    return ranges(page, diagram)


def test_the_path_is_drawn_where_the_inputs_say(sheet):
    page = sheet()
    assert path_of(page) == pytest.approx([2.2, 160 + 10 * 0.8085], abs=0.3)  # 100 + 120/2 + 10 sin 2.2
    press(page)
    press(page)
    assert path_of(page) == pytest.approx([2.2, 160.5 + 10 * 0.8085], abs=0.3)
    press(page, slider="Line pressure")
    assert path_of(page, "c") == pytest.approx([2.21, 160.5 + 10 * 0.8026], abs=0.3)


def test_the_background_is_sent_once(sheet):
    received = []
    page = sheet(
        prepare=lambda page: page.on("websocket", lambda w: w.on("framereceived", lambda f: received.append(len(f))))
    )
    assert max(received) > BACKGROUND
    received.clear()
    for _ in range(5):
        press(page)
    assert received
    assert max(received) < BACKGROUND
    assert sum(received) / 5 < 12_000


def test_the_drawings_stay_the_same_elements(sheet):
    page = sheet()
    page.evaluate("document.querySelectorAll('.stage .main-svg').forEach((svg) => { svg.kept = true; })")
    press(page)
    assert page.evaluate("[...document.querySelectorAll('.stage .main-svg')].every((svg) => svg.kept)")


def test_no_blank_frame_during_fast_key_presses(sheet):
    page = sheet()
    page.evaluate(
        """() => {
          window.frames = [];
          const look = () => {
            frames.push([...document.querySelectorAll('.stage')].map((stage) =>
              [...stage.querySelectorAll('.js-line')].filter((line) => line.getBBox().width > 50).length).join());
            requestAnimationFrame(look);
          };
          look();
        }"""
    )
    slider = page.get_by_role("slider", name="Measured temperature")
    for _ in range(15):
        slider.press("ArrowRight")
        page.wait_for_timeout(40)
    page.wait_for_function("document.querySelector('[data-testid=stMarkdown]').textContent.includes('128.8')")
    page.wait_for_timeout(500)
    assert path_of(page)[1] == pytest.approx(100 + 127.5 / 2 + 10 * 0.8085, abs=0.3)
    frames = page.evaluate("frames")
    assert len(frames) > 15
    assert set(frames) == {"11,11,11"}  # the dome, eight lines in view, limit and path, in every frame


def test_own_zoom_stays_and_a_button_takes_it_back(sheet):
    page = sheet()
    process = ranges(page)
    own = zoom(page)
    assert own[0] > process[0] and own[1] < process[1]
    press(page)
    press(page, slider="Line pressure")
    assert ranges(page) == own
    assert ranges(page, "b") == process
    figure(page, "a").get_by_role("button", name="Process").click()
    page.wait_for_function("document.querySelector('.stage')._fullLayout.xaxis.range[0] === 1")
    assert ranges(page) == process


def test_double_click_goes_back_to_the_process(sheet):
    page = sheet()
    process = ranges(page)
    assert zoom(page) != process
    page.locator(".stage[data-key=a] .nsewdrag").first.dblclick()
    page.wait_for_function("document.querySelector('.stage')._fullLayout.xaxis.range[0] === 1")
    assert ranges(page) == process


def test_whole_dome_is_chosen_for_one_diagram_and_stays(sheet):
    page = sheet()
    button = figure(page, "b").get_by_role("button", name="Whole dome")
    button.click()
    page.wait_for_function("document.querySelector('.stage[data-key=b]')._fullLayout.xaxis.range[0] === 0")
    press(page)
    assert ranges(page, "b") == [0, 9, 0, 420]
    assert ranges(page, "a") == [1, 8, 50, 250]
    assert figure(page, "b").get_by_role("button", name="Whole dome").get_attribute("aria-pressed") == "true"
    assert figure(page, "b").get_by_role("button", name="Process").get_attribute("aria-pressed") == "false"


def test_the_process_window_follows_the_process(sheet):
    page = sheet("?follow=1")
    before = ranges(page)
    press(page)
    after = ranges(page)
    assert after[2] == pytest.approx(before[2] + 0.25)
    assert path_of(page)[1] == pytest.approx(160.25 + 10 * 0.8085, abs=0.3)


def test_axes_without_a_view_follow_the_data(sheet):
    page = sheet("?free=1")
    assert page.get_by_role("button", name="Whole dome").count() == 0
    for _ in range(8):
        press(page)
    low, high = ranges(page)[2:]
    assert 149 < low < 152 < 170.1 < high < 173  # the path: 162 - 10 to 162 + 10 sin 2.2
    own = zoom(page)
    press(page)
    assert ranges(page) == own
    page.locator(".stage[data-key=a] .nsewdrag").first.dblclick()
    page.wait_for_function("document.querySelector('.stage')._fullLayout.yaxis.autorange")
    press(page)
    assert ranges(page)[2:] == pytest.approx([low + 0.5, high + 0.5], abs=0.01)


def test_enlarge_and_back_by_button_and_by_key(sheet):
    page = sheet()
    width = figure(page, "b").bounding_box()["width"]
    runs = drawn(page)
    page.get_by_role("button", name="Enlarge Diagram b").press("Enter")
    figure(page, "a").wait_for(state="hidden")
    assert figure(page, "b").bounding_box()["width"] > 2.5 * width
    page.wait_for_function("document.querySelector('.stage[data-key=b] .main-svg').clientWidth > 1000")
    press(page)
    page.keyboard.press("Escape")
    figure(page, "a").wait_for()
    page.wait_for_function("document.querySelector('.stage[data-key=b] .main-svg').clientWidth < 600")
    assert path_of(page, "a") == path_of(page, "b")  # those out of sight have caught up
    page.get_by_role("button", name="Enlarge Diagram c").click()
    page.get_by_role("button", name="Back to all diagrams").click()
    assert page.get_by_role("figure").count() == 3
    assert drawn(page) > runs


def test_labels_carry_the_answer(sheet):
    page = sheet()
    before = figure(page, "a").get_attribute("aria-label")
    press(page)
    after = figure(page, "a").get_attribute("aria-label")
    assert re.fullmatch(r"Path a ends at \d+\.\d{4}", after)
    assert after != before


TRACE = "document.querySelectorAll('.stage .scatterlayer .trace')[{}]"
COLOUR = f"getComputedStyle({TRACE}.querySelector('.js-line')).stroke"


def test_colours_follow_the_theme_when_it_changes(sheet):
    page = sheet()
    assert page.evaluate(COLOUR.format(0)) == page.evaluate("getComputedStyle(document.querySelector('h3')).color")
    light = page.evaluate(COLOUR.format(0))
    page.emulate_media(color_scheme="dark")
    page.wait_for_function(f"{COLOUR.format(0)} !== '{light}'")
    assert page.evaluate(COLOUR.format(0)) == page.evaluate("getComputedStyle(document.querySelector('h3')).color")
    assert page.evaluate(COLOUR.format(3)) == "rgb(213, 94, 0)"  # the path keeps its colour
    press(page)
    assert path_of(page)[1] == pytest.approx(160.25 + 10 * 0.8085, abs=0.3)


def test_dark_from_the_start(sheet):
    page = sheet(dark=True)
    red, green, blue = map(int, re.findall(r"\d+", page.evaluate(COLOUR.format(0)))[:3])
    assert min(red, green, blue) > 200
    paper = page.evaluate("getComputedStyle(document.querySelector('.stage .main-svg')).backgroundColor")
    assert max(map(int, re.findall(r"\d+", paper)[:3])) < 60


def test_on_a_phone_they_stand_below_one_another(sheet):
    page = sheet(width=390, height=844, phone=True)
    boxes = [figure(page, name).bounding_box() for name in "abc"]
    assert boxes[0]["y"] + boxes[0]["height"] <= boxes[1]["y"]
    assert boxes[1]["y"] + boxes[1]["height"] <= boxes[2]["y"]
    assert all(box["x"] >= 0 and box["x"] + box["width"] <= 390 for box in boxes)
    assert page.evaluate("document.documentElement.scrollWidth") <= 390
    assert page.evaluate("document.querySelector('[data-testid=stMain]').scrollWidth") <= 390
    assert page.evaluate("document.querySelector('.stage .nsewdrag').style.touchAction") != "none"


@pytest.mark.parametrize(("width", "columns"), [(1920, 3), (1440, 3), (800, 2)])
def test_columns_follow_the_window(sheet, width, columns):
    page = sheet(width=width)
    assert len({round(figure(page, name).bounding_box()["x"]) for name in "abc"}) == columns


def test_nothing_below_the_diagrams_moves(sheet):
    page = sheet()
    below = page.get_by_text("Below the diagrams.")
    before = below.bounding_box()
    for _ in range(3):
        press(page)
    figure(page, "b").get_by_role("button", name="Whole dome").click()
    page.emulate_media(color_scheme="dark")
    page.wait_for_timeout(300)
    assert below.bounding_box() == before


def test_view_and_zoom_survive_a_page_change(sheet):
    page = sheet("?pages=1")
    own = zoom(page, "a")
    page.get_by_role("link", name="Other").click()
    page.get_by_text("The other page.").wait_for()
    assert page.locator(".diagrams").count() == 0
    page.get_by_role("link", name="Row").click()
    page.wait_for_selector(".diagrams[data-drawn]")
    assert ranges(page, "a") == own
    press(page)


def test_a_figure_that_changes_its_traces_is_built_anew(sheet):
    page = sheet()
    page.get_by_text("Further path").click()
    page.wait_for_function("document.querySelectorAll('.stage[data-key=a] .scatterlayer .trace').length === 6")
    press(page)
    page.get_by_text("Further path").click()
    page.wait_for_function("document.querySelectorAll('.stage[data-key=a] .scatterlayer .trace').length === 5")
    press(page)
    assert path_of(page)[1] == pytest.approx(160.5 + 10 * 0.8085, abs=0.3)


def test_without_plotly_a_message_stands_in_its_place(sample_address, visit):
    page = visit(
        sample_address,
        forgive="Failed to load resource",
        prepare=lambda page: page.route("**/plotly.min.js*", lambda route: route.abort()),
    )
    alert = page.locator(".diagrams [role=alert]")
    alert.wait_for()
    assert "could not be drawn" in alert.text_content()
    assert "Path a ends at" in alert.text_content()
    page.unroute("**/plotly.min.js*")
    page.get_by_role("slider", name="Line pressure").press("ArrowRight")
    page.wait_for_selector(".diagrams[data-drawn]")  # the next change tries again
    assert alert.count() == 0


def test_under_a_base_path(tmp_path, visit):
    with served(HERE / "sample_app.py", tmp_path / "server.log", base="steam/desk") as address:
        page = visit(address)
        page.wait_for_selector(".diagrams[data-drawn]")
        assert path_of(page) == pytest.approx([2.2, 168.085], abs=0.3)
        page.close()  # before its server goes
