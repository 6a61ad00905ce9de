"""Sessions without a browser: what a browser and a Streamlit server say to each other, said by a short program.

A browser draws on the reader's machine, so what twenty readers share is the server; this talks to the server as
they do, through the same web socket and the same messages, and leaves the drawing away.
"""

from __future__ import annotations

import socket
import subprocess
import sys
import time
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import websockets
from streamlit.proto.BackMsg_pb2 import BackMsg
from streamlit.proto.ForwardMsg_pb2 import ForwardMsg

ROOT = Path(__file__).parents[2]
MOST = 64 * 2**20  # bytes of a message


@contextmanager
def served(app: str | Path = "app.py") -> Iterator[tuple[str, int]]:
    """Address (host:port) and process number of a server of its own, with the project's settings."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    command = [sys.executable, "-m", "streamlit", "run", str(app), f"--server.port={port}", "--server.headless=true"]
    server = subprocess.Popen(command, cwd=ROOT, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    try:
        while server.poll() is None:
            try:
                urllib.request.urlopen(f"http://127.0.0.1:{port}/_stcore/health", timeout=2).close()
                break
            except OSError:
                time.sleep(0.05)
        yield f"127.0.0.1:{port}", server.pid
    finally:
        server.terminate()
        server.wait(20)


def resident(pid: int) -> float:
    """Memory of a process, in MB; Linux only."""
    line = next(line for line in Path(f"/proc/{pid}/status").read_text().splitlines() if line.startswith("VmRSS"))
    return int(line.split()[1]) / 1024


class Session:
    """One reader: ``async with Session(address) as s: await s.run()``."""

    def __init__(self, address: str, query: str = ""):
        self.address, self.query = address, query
        self.pages: dict[str, str] = {}  # hash by title
        self.page, self.states = "", {}
        self.sliders, self.texts, self.faults = {}, {}, 0

    async def __aenter__(self) -> Session:
        self.line = await websockets.connect(f"ws://{self.address}/_stcore/stream", subprotocols=["streamlit"],
                                             max_size=MOST, ping_interval=None)
        return self

    async def __aexit__(self, *_) -> None:
        await self.line.close()

    async def run(self, *, page: str | None = None, slider: str = "", value: float = 0.0) -> float:
        """One run of the script, of a page or with a slider moved; seconds until its last message is here."""
        if page is not None:
            self.page, self.states, self.sliders, self.texts = self.pages[page], {}, {}, {}
        if slider:
            self.states[next(id for label, id in self.sliders.items() if label.startswith(slider))] = value
        ask = BackMsg()
        ask.rerun_script.query_string, ask.rerun_script.page_script_hash = self.query, self.page
        for id, number in self.states.items():
            state = ask.rerun_script.widget_states.widgets.add(id=id)
            state.double_array_value.data.append(number)
        begun = time.perf_counter()
        await self.line.send(ask.SerializeToString())
        while True:
            message = ForwardMsg.FromString(await self.line.recv())
            kind = message.WhichOneof("type")
            if kind == "script_finished" and message.script_finished != ForwardMsg.FINISHED_EARLY_FOR_RERUN:
                return time.perf_counter() - begun
            self._heard(kind, message)

    def _heard(self, kind: str, message: ForwardMsg) -> None:
        if kind == "navigation":
            self.pages = {page.page_name: page.page_script_hash for page in message.navigation.app_pages}
            self.page = message.navigation.page_script_hash
        if kind != "delta" or not message.delta.HasField("new_element"):
            return
        element = message.delta.new_element
        shown = element.WhichOneof("type")
        if shown == "slider":
            self.sliders[element.slider.label] = element.slider.id
        elif shown == "markdown":
            self.texts[tuple(message.metadata.delta_path)] = element.markdown.body
        elif shown == "exception":
            self.faults += 1

    def says(self, words: str) -> bool:
        """Whether any text on the page has these words."""
        return any(words in text for text in self.texts.values())
