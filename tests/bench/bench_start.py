"""Start-up and pages against an empty app, in one run.

    python tests/bench/bench_start.py [--rounds 3]

Both are served with the project's settings and started by turns. In seconds, medians: from the start of the process
until it answers, until the first reader has the first page (imports included), until a second reader has it, each
page when turned to for the first and for the second time. Then the same seen by Debian's chromium with an empty
cache: until the first page stands, and until its diagrams are drawn.
"""

import argparse
import asyncio
import pathlib
import statistics
import sys
import tempfile
import time
from collections import defaultdict

sys.path.insert(0, str(pathlib.Path(__file__).resolve().parent))

from sessions import Session, resident, served  # noqa: E402

CHROMIUM = "/usr/bin/chromium"
EMPTY = 'import streamlit as st\n\nst.title("Nothing")\nst.slider("A", 0.0, 1.0)\n'
SETTLED = "[data-testid=stApp][data-test-script-state=notRunning]"


async def pages(address: str, begun: float, times: dict[str, list[float]]) -> None:
    async with Session(address) as reader:
        await reader.run()
        times["first page, first reader"].append(time.perf_counter() - begun)
        for again in ("first", "second"):
            for name in list(reader.pages):
                times[f"{name}, {again} time"].append(await reader.run(page=name))
    async with Session(address) as reader:
        times["first page, second reader"].append(await reader.run())


def in_browser(address: str, drawn: bool, times: dict[str, list[float]]) -> None:
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=CHROMIUM, args=["--no-sandbox", "--disable-gpu"])
        for kind in ("empty cache", "warm cache"):
            page = browser.contexts[0].new_page() if browser.contexts else browser.new_context().new_page()
            begun = time.perf_counter()
            page.goto(f"http://{address}/")
            page.wait_for_selector(SETTLED, timeout=120_000)
            times[f"browser, {kind}: page"].append(time.perf_counter() - begun)
            if drawn:
                page.wait_for_selector(".diagrams[data-drawn]", timeout=120_000)
                times[f"browser, {kind}: diagrams"].append(time.perf_counter() - begun)
        browser.close()


def measure(app: str, drawn: bool, times: dict[str, list[float]]) -> None:
    begun = time.perf_counter()
    with served(app) as (address, pid):
        times["server answers"].append(time.perf_counter() - begun)
        asyncio.run(pages(address, begun, times))
        times["memory, MB"].append(resident(pid))
        if pathlib.Path(CHROMIUM).exists():
            in_browser(address, drawn, times)


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--rounds", type=int, default=3)
    options = parser.parse_args()
    ours, empty = defaultdict(list), defaultdict(list)
    with tempfile.TemporaryDirectory() as folder:
        nothing = pathlib.Path(folder) / "empty.py"
        nothing.write_text(EMPTY)
        for _ in range(options.rounds):
            measure(str(nothing), False, empty)
            measure("app.py", True, ours)
    print(f"{'':32}{'app.py':>9}{'empty':>9}{'ratio':>9}")
    for name, found in ours.items():
        here = statistics.median(found)
        there = statistics.median(empty[name]) if name in empty else None
        beside = f"{there:9.2f}{here / there:9.1f}" if there else ""
        print(f"{name:32}{here:9.2f}{beside}")


if __name__ == "__main__":
    main()
