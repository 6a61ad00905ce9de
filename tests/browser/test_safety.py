"""Nothing leaves the machine, and nothing that a user or a file says is ever taken for more than words."""

import io
import zipfile
from pathlib import Path

import pytest
from conftest import PAGES, astray, settle, turn_to

from engine.job.case.casefile import to_json, to_link
from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.rows import TEXT, Entry

EVIL = ("<script>hit=1</script><img src=x onerror='hit=1'> ![p](http://127.0.0.1:9/p.png) [a](javascript:hit=1) "
        "<a href='https://example.invalid/'>b</a> $\\href{javascript:hit=1}{c}$ :material/home: www.example.invalid "
        "<svg onload='hit=1'></svg> \"'</style></textarea>")
BEGIN = "<script>hit=1</script>"
TRACES = """() => ({
  ran: window.hit,
  images: [...document.images].map((image) => image.src).filter((src) => src && new URL(src).origin !== origin),
  links: [...document.querySelectorAll('a[href]')].map((link) => link.href).filter((to) => {
    return new URL(to).origin !== origin && !to.startsWith('blob:' + origin);
  }),
  handlers: document.querySelectorAll('[onerror], [onload]').length,
  scripts: [...document.scripts].filter((script) => script.type !== 'application/json' &&
    script.text.includes('hit=1')).length,
  icons: document.querySelectorAll('[data-testid=stMarkdown] [data-testid=stIconMaterial]').length,
})"""
UNHARMED = {"ran": None, "images": [], "links": [], "handlers": 0, "scripts": 0, "icons": 0}


def hostile():
    """A usable case in which every word that can be written is hostile."""
    words = {name: EVIL for name, field in FIELDS.items() if field.form == TEXT and not name.endswith("_grade")}
    ticks, readings = FIELDS["ticks"], FIELDS["readings"]
    rows = [readings.row(run=run, T_exhaust=Entry(121.1 + 0.1 * (k % 2), "°C"), remark=EVIL)
            for run in (EVIL, "![2](http://127.0.0.1:9/2.png)") for k in range(6)]
    return DEMO.with_(**words, readings=tuple(rows), ticks=(
        ticks.row(step="hold.permit", time="2025-03-04 08:15", initials=EVIL, remark=EVIL),))


def unharmed(page):
    page.wait_for_timeout(200)  # for what would run late
    assert page.evaluate(TRACES) == UNHARMED


def test_what_counts_as_leaving_the_server():
    own = "http://127.0.0.1:8501/path?case=1"
    for url in ("http://127.0.0.1:8501/static/a.js", "ws://127.0.0.1:8501/_stcore/stream", "data:image/png;base64,",
                "blob:http://127.0.0.1:8501/1"):
        assert not astray(url, own)
    for url in ("http://127.0.0.1:8502/", "https://127.0.0.1:8501/", "http://localhost:8501/", "wss://example.invalid/",
                "https://example.invalid/a.js", "file:///etc/hosts", "ftp://127.0.0.1:8501/"):
        assert astray(url, own)
    assert not astray("file:///tmp/record.html", "file:///tmp/record.html")
    assert astray("file:///tmp/other.html", "file:///tmp/record.html")


def test_every_page_is_served_by_its_own_server_alone(app_address, visit):
    """The fixture fails the test for any other request, and for any error in the console."""
    asked = []
    page = visit(app_address, prepare=lambda page: page.on("request", lambda request: asked.append(request.url)))
    for name in PAGES:
        turn_to(page, name)
    turn_to(page, "Run sheet")
    page.get_by_role("radio", name="Rehearsal").click()
    page.get_by_role("button", name="Start: nothing is wrong").click()
    page.get_by_text("What did you find?").wait_for()
    settle(page)
    assert any("plotly.min.js" in url for url in asked)  # so these were all there to be seen
    assert any("live.js" in url for url in asked) and any(url.endswith(".woff2") for url in asked)


def test_a_page_opened_by_its_own_address_asks_twice_in_vain(app_address, visit):
    """Streamlit's own script looks for its server below the page first; nothing else may go wrong."""
    missing = []
    page = visit(f"{app_address}record", forgive="404", prepare=lambda page: page.on(
        "response", lambda response: response.status >= 400 and missing.append(response.url)))
    page.get_by_text(PAGES["Record"]).first.wait_for()
    assert set(missing) <= {f"{app_address}record/_stcore/{name}" for name in ("health", "host-config")}


@pytest.mark.parametrize("way", ["link", "file"])
def test_hostile_words_stay_words_on_every_page(app_address, visit, way):
    if way == "link":
        page = visit(f"{app_address}?case={to_link(hostile())}")
    else:
        page = visit(app_address)
        page.get_by_role("button", name="Case", exact=True).click()
        page.locator("input[type=file]").set_input_files(
            {"name": "![x](http://127.0.0.1:9/x.png)<img src=x onerror='hit=1'>.json", "mimeType": "application/json",
             "buffer": to_json(hostile()).encode()})
        page.get_by_text("Opened ![x](http").wait_for()
        page.keyboard.press("Escape")
    page.locator(".st-key-casebar").get_by_text(BEGIN).first.wait_for()
    page.get_by_role("button", name="Pin").click()
    page.get_by_text("Side by side").wait_for()
    unharmed(page)
    for name in PAGES:
        turn_to(page, name)
        unharmed(page)
    page.get_by_role("cell", name=BEGIN).first.wait_for()  # what the record will say, with the name of a run


def test_hostile_words_stay_words_in_tips_and_labels(app_address, visit):
    page = visit(f"{app_address}?case={to_link(hostile())}")
    turn_to(page, "Run sheet")
    page.get_by_role("button", name="Save the run sheet to print").hover()
    page.get_by_test_id("stTooltipContent").get_by_text(BEGIN).wait_for()
    unharmed(page)
    page.get_by_role("button", name="✓ 08:15").click()
    page.get_by_label("Initials").last.wait_for()
    unharmed(page)
    turn_to(page, "Readings")
    page.get_by_role("radio", name="![2](http").wait_for()  # a run by its name
    unharmed(page)


def test_a_hostile_log_stays_words(app_address, visit):
    page = visit(app_address)
    turn_to(page, "Readings")
    rows = "".join(f"{10 * k},9.0{k % 3},1.3,121.{k % 4},{EVIL.replace(',', ' ')}\n" for k in range(100))
    text = f"Time [s],p1 [bar g],p2 [kPa g],T2 [°C],\"Remark {EVIL.replace(chr(34), '')}\"\n{rows}"
    page.locator("[data-testid=stMain] input[type=file]").last.set_input_files(
        {"name": "![l](http://127.0.0.1:9/l.png)<img src=x onerror='hit=1'>.csv", "mimeType": "text/csv",
         "buffer": text.encode()})
    page.get_by_text("columns to be confirmed").wait_for()
    unharmed(page)
    page.get_by_role("button", name="Read with these columns").click()
    page.get_by_text("rows read").wait_for()
    settle(page)
    unharmed(page)


def test_hostile_words_stay_words_in_what_is_saved(app_address, visit, tmp_path):
    page = visit(f"{app_address}?case={to_link(hostile())}")
    saved = {}
    for name, button in (("Run sheet", "Save the run sheet to print"), ("Record", "Save the record"),
                         ("Record", "Save record and data"), ("Reach", "Chart to print")):
        turn_to(page, name)
        with page.expect_download() as caught:
            page.get_by_role("button", name=button).first.click()
        saved[button] = tmp_path / caught.value.suggested_filename
        caught.value.save_as(saved[button])
    for button, file in saved.items():
        if file.suffix == ".html":
            paper = visit(file.as_uri(), settled=False)
            assert button == "Chart to print" or paper.get_by_text(BEGIN).first.is_visible()
            unharmed_paper(paper)
    with zipfile.ZipFile(io.BytesIO(saved["Save record and data"].read_bytes())) as bundle:
        assert all(Path(name).name == name for name in bundle.namelist())
        rows = bundle.read("readings.csv").decode()
    assert not [cell for cell in rows.replace("\n", ",").split(",") if cell[:1] in ("=", "@", "\t")]


def unharmed_paper(page):
    found = page.evaluate(TRACES.replace("new URL(src).origin !== origin", "true"))
    assert found == UNHARMED


def test_an_upload_says_and_keeps_its_limit(app_address, visit, tmp_path):
    page = visit(app_address)
    page.get_by_role("button", name="Case", exact=True).click()
    page.get_by_text("20MB").first.wait_for()
    big = tmp_path / "big.json"
    big.write_bytes(b" " * (22 * 1024 * 1024))
    page.locator("input[type=file]").first.set_input_files(big)
    page.get_by_text("must be 20.0MB or smaller").wait_for()
    assert "Factory main" in page.locator(".st-key-casebar").inner_text()  # the open case is untouched
