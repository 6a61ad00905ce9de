"""A real browser in front of a real server.

Every test in this folder is marked ``browser`` and skipped, with the reason, where there is no browser.
A page that writes an error to its console, throws, or asks for anything but from its own server fails its test;
so does a server that logs a traceback.
"""

from __future__ import annotations

import os
import re
import socket
import subprocess
import sys
import time
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from urllib.parse import urlsplit

import pytest

HERE = Path(__file__).parent
ROOT = HERE.parents[1]
CHROMIUM = Path("/usr/bin/chromium")
# No sandbox: tests often run as root in a container. The rest keeps the browser itself from calling home.
FLAGS = ["--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking"]
FLAGS += ["--disable-component-update", "--disable-sync"]
PATIENCE = 60_000  # ms, for a busy machine; nothing waits longer than it has to


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    for item in items:
        if HERE in item.path.parents:
            item.add_marker("browser")
            item.add_marker(pytest.mark.flaky(reruns=1))  # a busy machine may be late once; -rR tells of each such case


@contextmanager
def served(app: Path, log: Path, *, port: int = 0, **environment: str) -> Iterator[str]:
    """The address of the app, run by a server of its own with the project's settings, at a port if one is given."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = port or probe.getsockname()[1]
    base = environment.pop("base", "")
    address = f"http://127.0.0.1:{port}/{base}"
    command = [sys.executable, "-m", "streamlit", "run", str(app), f"--server.port={port}", "--server.headless=true"]
    command += [f"--server.baseUrlPath={base}"] if base else []
    with log.open("w") as out:
        server = subprocess.Popen(command, cwd=ROOT, stdout=out, stderr=out, env=os.environ | environment)
        try:
            _await(f"{address.rstrip('/')}/_stcore/health", server, log)
            yield address
        finally:
            server.terminate()
            server.wait(20)
    assert "Traceback" not in log.read_text(), log.read_text()[-4000:]


def _await(address: str, server: subprocess.Popen, log: Path) -> None:
    give_up = time.monotonic() + 60
    while time.monotonic() < give_up and server.poll() is None:
        try:
            urllib.request.urlopen(address, timeout=2).close()
            return
        except OSError:
            time.sleep(0.1)
    raise RuntimeError(f"no answer from {address}:\n{log.read_text()[-4000:]}")


@pytest.fixture(scope="session")
def app_address(tmp_path_factory) -> Iterator[str]:
    """The product."""
    with served(ROOT / "app.py", tmp_path_factory.mktemp("server") / "app.log") as address:
        yield address


@pytest.fixture(scope="session")
def sample_address(tmp_path_factory) -> Iterator[str]:
    """The small app beside this file that shows the components."""
    with served(HERE / "sample_app.py", tmp_path_factory.mktemp("server") / "sample.log") as address:
        yield address


# For this folder only: a running Playwright holds an event loop that other tests need not meet.
@pytest.fixture(scope="package")
def browser():
    try:
        from playwright.sync_api import sync_playwright
    except ImportError:
        pytest.skip("the package playwright is not installed")
    if not CHROMIUM.exists():
        pytest.skip(f"no browser at {CHROMIUM}: apt-get install chromium")
    with sync_playwright() as playwright:
        chromium = playwright.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield chromium
        chromium.close()


@pytest.fixture(scope="package")
def windows(browser):
    """Browser contexts by their kind, kept over the tests so that Streamlit's files are fetched once."""
    contexts = {}

    def context(width: int, height: int, dark: bool, phone: bool):
        kind = (width, height, dark, phone)
        if kind not in contexts:
            scheme = "dark" if dark else "light"
            size = {"width": width, "height": height}
            contexts[kind] = browser.new_context(viewport=size, color_scheme=scheme, is_mobile=phone, has_touch=phone)
            contexts[kind].set_default_timeout(PATIENCE)
            contexts[kind].add_init_script("localStorage.clear()")  # a menu left open is not for the next test
        return contexts[kind]

    yield context
    for context in contexts.values():
        context.close()


@pytest.fixture
def visit(windows):
    """Open an address in a page of its own: ``visit(address, width=1440, height=900, dark=False, phone=False)``.

    ``forgive`` is a pattern of complaints that the test provokes on purpose, ``prepare`` gets the page before it
    goes anywhere. Every other complaint fails the test when it ends.
    """
    pages, complaints = [], []

    def go(address, *, width=1440, height=900, dark=False, phone=False, forgive=None, prepare=None, settled=True):
        def complain(words: str) -> None:
            if not (forgive and re.search(forgive, words)):
                complaints.append(words)

        page = windows(width, height, dark, phone).new_page()
        pages.append(page)

        def asked(url: str) -> None:
            if astray(url, address):
                complain(f"leaves its server: {url}")

        page.on("console", lambda message: message.type == "error" and complain(f"console: {message.text}"))
        page.on("pageerror", lambda error: complain(f"thrown: {error}"))
        page.on("request", lambda request: asked(request.url))
        page.on("websocket", lambda channel: asked(channel.url))
        if prepare:
            prepare(page)
        page.goto(address)
        if settled:  # not a page of ours from a file, which no script runs
            settle(page)
        return page

    yield go
    for page in pages:
        page.close()
    assert not complaints, "\n".join(complaints)


def astray(url: str, opened: str) -> bool:
    """Whether a page opened at one address goes anywhere but to the server, or the file, that it came from."""
    asked, own = urlsplit(url), urlsplit(opened)
    if asked.scheme in ("data", "blob", "about"):  # made in the page itself
        return False
    if own.scheme == "file":
        return (asked.scheme, asked.path) != (own.scheme, own.path)
    return (asked.scheme.replace("ws", "http"), asked.netloc) != (own.scheme, own.netloc)


PAGES = {  # by name in the navigation: words that only this page has
    "Path": "What the answer takes for granted", "Reach": "What the reach takes for granted",
    "Rig": "Every effect with its cause", "Readings": "Readings: logs and typed sets",
    "Run sheet": "When it is otherwise", "Record": "what was done otherwise"}


def turn_to(page, name: str) -> None:
    """Another page, by the navigation as a reader goes there; a phone has it behind the menu, which then goes away."""
    page.wait_for_function("document.documentElement.dataset.everywhere")
    menu = page.get_by_test_id("stExpandSidebarButton")
    if menu.count():
        menu.click()
    page.get_by_role("link", name=name, exact=True).click()
    page.get_by_text(PAGES[name]).first.wait_for()
    page.wait_for_function("() => document.querySelector('#stSidebar')?.dataset.collapsed !== 'false'")
    settle(page)


def settle(page) -> None:
    """Wait until the script has run and its page stands."""
    page.wait_for_selector("[data-testid=stApp][data-test-script-state=notRunning]")


def pick(page, menu, name) -> None:
    """Choose from a menu; one that closes because the page is still being drawn is opened again."""
    from playwright.sync_api import TimeoutError  # there is a page, so there is the package

    option = page.get_by_role("option", name=name, exact=True)
    for _ in range(10):
        menu.press("ArrowDown")
        try:
            option.click(timeout=4000)
            return
        except TimeoutError:
            page.keyboard.press("Escape")
    raise AssertionError(f"{name} is not offered")
