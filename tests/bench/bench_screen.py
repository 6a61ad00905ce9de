"""How long a change takes to be seen, with the diagrams and without them, measured in one run.

    python tests/bench/bench_screen.py [APP] [--steps 21] [--rounds 2] [--slider "Line pressure" ...]

Serves APP twice (default: app.py) and drives both in Debian's chromium by turns, a key press on a slider
here, a key press there, so that whatever else the machine does falls on both. The copy without pictures
is the same app in which the functions named by --blank (default: see BLANKS) do nothing and give None, so it
has the same widgets and texts.
Time runs from the key press until the frame that shows the new answer, and with pictures until every
diagram on the page has changed too. A blank frame is one in which a diagram that was there is not.
"""

import argparse
import importlib
import socket
import statistics
import subprocess
import sys
import time
import urllib.request
from contextlib import ExitStack, contextmanager
from pathlib import Path

CHROMIUM = "/usr/bin/chromium"
QUIET = ["--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking"]
BLANKS = [  # what draws, and what prepares the drawings of app.py
    "engine.screen.live:show",
    "streamlit:plotly_chart",
    "streamlit.delta_generator:DeltaGenerator.plotly_chart",
    "engine.screen.charts.process:process_diagrams",
    "engine.screen.charts.speed:velocity_diagram",
]

# Looks at the page once a frame from the key press on. A diagram counts as changed when one of its lines or points has.
WATCH = """(pictures) => {
  const answers = () => [...document.querySelectorAll(
    '[data-testid=stMarkdown],[data-testid=stMetric],[data-testid=stAlert],[data-testid=stHeading]')]
    .map((element) => element.textContent).join('|');
  const diagrams = () => [...document.querySelectorAll('.js-plotly-plot')].map((plot) =>
    [...plot.querySelectorAll('.js-line, .point, .textpoint text')]
      .map((mark) => (mark.getAttribute('d') ?? '') + (mark.getAttribute('transform') ?? '')).join()).filter(Boolean);
  const before = { answer: answers(), diagrams: diagrams() };
  window.seen = new Promise((resolve) => {
    let start = null, frames = 0, blank = 0;
    addEventListener('keydown', (event) => (start = event.timeStamp), { capture: true, once: true });
    const look = () => {
      const now = diagrams();
      if (start !== null) frames += 1;
      if (now.length < before.diagrams.length) blank += 1;
      const changed = now.length === before.diagrams.length && now.every((state, i) => state !== before.diagrams[i]);
      if (start !== null && performance.now() - start > 5000) return resolve(null);
      if (start === null || answers() === before.answer || (pictures && !changed)) return requestAnimationFrame(look);
      const { port1, port2 } = new MessageChannel(); // its message comes after this frame has been painted
      port1.onmessage = () => resolve({ ms: performance.now() - start, frames, blank });
      port2.postMessage(null);
    };
    requestAnimationFrame(look);
  });
  return before.diagrams.length;
}"""


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("app", nargs="?", default="app.py")
    parser.add_argument("--steps", type=int, default=21, help="key presses on each slider and page in a round")
    parser.add_argument("--rounds", type=int, default=2)
    parser.add_argument("--slider", action="append", help="label; may be repeated")
    parser.add_argument("--blank", action="append", default=[], help="module:name that does nothing without pictures")
    parser.add_argument("--option", action="append", default=[], help="Streamlit's, as in runner.postScriptGC=false")
    parser.add_argument("--serve", type=int, metavar="PORT", help=argparse.SUPPRESS)
    options = parser.parse_args()
    if options.serve:
        serve(options)
    else:
        options.slider = options.slider or ["Line pressure", "Exhaust pressure", "Measured temperature"]
        compare(options)


def serve(options: argparse.Namespace) -> None:
    """Run the app in this process, after the functions to be left away have been replaced."""
    sys.path.insert(0, str(Path(options.app).resolve().parent))
    sys.path.insert(0, str(Path(__file__).parents[2]))
    for blank in options.blank:
        module, _, name = blank.partition(":")
        *owners, name = name.split(".")
        owner = importlib.import_module(module)
        for step in owners:
            owner = getattr(owner, step)
        setattr(owner, name, lambda *args, **more: None)
    from streamlit.web import cli

    flags = {"server.address": "127.0.0.1", "server.port": options.serve, "server.headless": "true"}
    flags |= {"server.fileWatcherType": "none", "browser.gatherUsageStats": "false"}
    sys.argv = ["streamlit", "run", options.app, *(f"--{name}={value}" for name, value in flags.items())]
    sys.argv += [f"--{option}" for option in options.option]
    cli.main()


@contextmanager
def served(options: argparse.Namespace, blanks: list[str]):
    """The address of the app in a process of its own."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    command = [sys.executable, __file__, options.app, f"--serve={port}"]
    command += [f"--blank={blank}" for blank in blanks] + [f"--option={option}" for option in options.option]
    server = subprocess.Popen(command, stdout=subprocess.DEVNULL)
    try:
        for _ in range(300):
            if server.poll() is not None:
                raise SystemExit(f"the server of {options.app} stopped with status {server.returncode}")
            try:
                urllib.request.urlopen(f"http://127.0.0.1:{port}/_stcore/health", timeout=1).close()
                break
            except OSError:
                time.sleep(0.1)
        yield f"http://127.0.0.1:{port}/"
    finally:
        server.terminate()
        server.wait(10)


class Page:
    """One of the two pages, and what was measured on it."""

    def __init__(self, browser, address: str, pictures: bool, sliders: list[str]):
        self.pictures, self.times, self.blank, self.unseen, self.frames = pictures, [], 0, 0, 0
        self.page = browser.new_page(viewport={"width": 1440, "height": 1600})
        self.page.goto(address)
        self.sliders = {label: self.page.get_by_role("slider", name=label) for label in sliders}
        self.sliders[sliders[0]].wait_for(timeout=60_000)
        if pictures:
            self.page.wait_for_selector(".js-plotly-plot .js-line", timeout=60_000)
        self.page.wait_for_timeout(2000)

    def step(self, label: str, key: str) -> float | None:
        self.page.bring_to_front()
        self.sliders[label].focus()
        diagrams = self.page.evaluate(WATCH, self.pictures)
        if self.pictures and not diagrams:
            raise SystemExit("no diagram on the page")
        self.page.keyboard.press(key)
        seen = self.page.evaluate("window.seen")
        self.page.wait_for_timeout(150)  # the script's end, garbage collection included, belongs to no press
        if seen is None:
            self.unseen += 1
            return None
        self.blank += seen["blank"]
        self.frames += seen["frames"]
        self.times.append(seen["ms"])
        return seen["ms"]

    def row(self, name: str) -> str:
        p95 = statistics.quantiles(self.times, n=20)[-1]
        missing = f", {self.unseen} presses changed nothing" if self.unseen else ""
        return (
            f"{name:20}{statistics.median(self.times):8.0f}{p95:8.0f}{self.blank:10} of {self.frames} frames"
            f", {len(self.times)} presses{missing}"
        )


def compare(options: argparse.Namespace) -> None:
    from playwright.sync_api import sync_playwright

    with ExitStack() as stack:
        plain = stack.enter_context(served(options, options.blank or BLANKS))
        drawn = stack.enter_context(served(options, []))
        browser = stack.enter_context(sync_playwright()).chromium.launch(executable_path=CHROMIUM, args=QUIET)
        without, with_them = (Page(browser, url, seen, options.slider) for url, seen in ((plain, False), (drawn, True)))
        for number in range(options.rounds):
            for label in options.slider:
                for _ in range(options.steps):
                    key = "ArrowLeft" if number % 2 else "ArrowRight"
                    without.step(label, key)
                    with_them.step(label, key)
        browser.close()
    print(f"{options.app}: from the key press to the frame that shows the change")
    print(f"{'ms':20}{'median':>8}{'p95':>8}{'blank':>10}")
    print(without.row("without pictures"))
    print(with_them.row("with pictures"))
    ratio = statistics.median(with_them.times) / statistics.median(without.times)
    p95 = statistics.quantiles(with_them.times, n=20)[-1] / statistics.quantiles(without.times, n=20)[-1]
    print(f"{'ratio':20}{ratio:8.2f}{p95:8.2f}")


if __name__ == "__main__":
    main()
