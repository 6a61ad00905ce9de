"""Everyone can use it: an accessibility checker on every page, the keyboard alone, a phone, a wall five metres away.

The checker is axe-core; only its script is used, from the installed package.
"""

from pathlib import Path

import axe_playwright_python
import pytest
from conftest import PAGES, settle, turn_to
from test_documents import measured, sideways

from engine.job.case.casefile import to_link

AXE = (Path(axe_playwright_python.__file__).parent / "axe.min.js").read_text(encoding="utf-8")
GRAVE = ("serious", "critical")
# Findings in elements of Streamlit's own that nothing of ours can reach, by rule: a part of the element, and why.
EXCEPTIONS: dict[str, tuple[str, str]] = {}
OPEN_ALL = """() => document.querySelectorAll('[data-testid=stExpander] details:not([open]) > summary').forEach(
  (summary) => summary.click())"""


def findings(page):
    """What the checker finds grave on the page as it stands: one line for each element."""
    if not page.evaluate("Boolean(window.axe)"):
        page.evaluate(AXE)
    page.evaluate("Promise.all(document.getAnimations().map((one) => one.finished.catch(() => {})))")
    found = page.evaluate("axe.run(document, { resultTypes: ['violations'] })")
    assert len(found["passes"]) > 10  # it did look
    return [f"{rule['id']}: {node['html'][:300]} {' '.join(c['message'] for c in node['any'] + node['all'])[:200]}"
            for rule in found["violations"] if rule["impact"] in GRAVE for node in rule["nodes"]
            if not (rule["id"] in EXCEPTIONS and EXCEPTIONS[rule["id"]][0] in node["html"])]


@pytest.mark.slow
@pytest.mark.parametrize(("window", "dark"), [("desk", False), ("desk", True), ("phone", False), ("phone", True)])
def test_no_grave_finding_and_nothing_wider_than_the_window(app_address, visit, window, dark):
    size = {"width": 390, "height": 844, "phone": True} if window == "phone" else {}
    page = visit(f"{app_address}?case={to_link(measured())}", dark=dark, **size)
    for name in PAGES:
        turn_to(page, name)
        page.evaluate(OPEN_ALL)
        settle(page)
        page.wait_for_timeout(800)  # what opens slides
        assert not findings(page), name
        assert sideways(page) == 0, name
        figures = page.locator("[role=figure]").evaluate_all("all => all.map((one) => one.ariaLabel ?? '')")
        assert all(len(label) > 20 for label in figures), name  # they say what is seen in them
    turn_to(page, "Run sheet")
    page.get_by_role("radio", name="Rehearsal").click()
    page.get_by_role("button", name="Start: nothing is wrong").click()
    page.get_by_text("What did you find?").wait_for()
    settle(page)
    assert not findings(page) and sideways(page) == 0
    if window == "desk":
        page.get_by_role("button", name="Case", exact=True).click()
        page.get_by_text("Open a case file").wait_for()
        page.wait_for_timeout(500)
        assert not findings(page)


STOP = """async () => {
  const at = document.activeElement;
  if (!at || at === document.body) return null;
  const rest = () => new Promise((done) => setTimeout(done, 60)); // Streamlit's elements follow a little later
  const look = () => {
    for (const one of document.getAnimations()) one.finish();
    const around = [at, at.parentElement, at.parentElement.parentElement, at.parentElement.parentElement.parentElement];
    return [...around, ...at.parentElement.querySelectorAll('*')].map((one) => {
      const style = getComputedStyle(one);
      return [style.outline, style.boxShadow, style.borderColor, style.backgroundColor];
    }).join();
  };
  await rest();
  const focused = look();
  at.blur();
  await rest();
  const shown = look() !== focused;
  at.focus();
  const words = at.ariaLabel || at.labels?.[0]?.textContent || at.textContent || '';
  return { tag: at.tagName.toLowerCase(), type: at.type ?? '', words: words.trim().slice(0, 60), shown };
}"""


def test_the_keyboard_alone_reaches_everything_and_shows_where_it_is(app_address, visit):
    page = visit(app_address)
    page.wait_for_selector(".diagrams[data-drawn]")
    stops = []
    for _ in range(120):
        page.keyboard.press("Tab")
        stop = page.evaluate(STOP)
        if stop is None:
            break
        stops.append(stop)
    stops = [stop for stop in stops if stop["tag"] != "main"]  # the page itself, to be scrolled
    words = [stop["words"].removeprefix("keyboard_arrow_right") for stop in stops]  # the name of a picture
    wanted = ["Reach", "Record", "SI", "Pin", "Case", "I have a reading", "Throttling alone", "gauge", "Process",
              "Enlarge T–s", "Enlarge P–h", "Save the states as CSV", "Cautions"]
    places = [next((k for k, said in enumerate(words) if said.startswith(w)), None) for w in wanted]
    assert None not in places, dict(zip(wanted, places, strict=True))
    assert places == sorted(places)  # in reading order
    assert sum(stop["type"] == "range" for stop in stops) == 3
    assert sum(stop["type"] == "number" for stop in stops) >= 3
    hidden = [stop for stop in stops if not stop["shown"]]
    assert not hidden, hidden
    page.get_by_role("button", name="Enlarge T–s").focus()
    page.keyboard.press("Enter")
    page.get_by_role("button", name="Back to all diagrams").wait_for()
    page.keyboard.press("Enter")
    page.get_by_role("button", name="Enlarge T–s").wait_for()


CAPITAL = """(element) => {
  const style = getComputedStyle(element);
  const pen = document.createElement('canvas').getContext('2d');
  pen.font = `${style.fontWeight} ${style.fontSize} ${style.fontFamily}`;
  return pen.measureText('H').actualBoundingBoxAscent;
}"""
PICTURE, DISTANCE = 1900.0, 5000.0  # mm: 1.9 m of picture for 1920 pixels, seen from five metres


def test_the_answer_can_be_read_from_five_metres(app_address, visit):
    """Letters a two-hundredth of the distance high are common practice for a text on a wall: 25 mm at five metres.

    What one comes nearer for, a twelfth of a degree and more (7 mm), a good eye still makes out.
    """
    page = visit(app_address, width=1920, height=1080)
    page.wait_for_selector(".diagrams[data-drawn]")
    per_pixel = PICTURE / 1920
    answer = page.locator(".st-key-answer h3").evaluate(CAPITAL) * per_pixel
    bar = page.locator(".st-key-casebar p").first.evaluate(CAPITAL) * per_pixel
    axis = page.locator(".stage .xtick text").first.evaluate(CAPITAL) * per_pixel
    assert answer >= DISTANCE / 200, answer
    assert bar >= 12.0 and axis >= 7.3, (bar, axis)
