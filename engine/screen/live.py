"""Diagrams that stay on the page while their paths move: a small component around Plotly.

Streamlit's own chart element is taken down and put up again at every change, which blinks and loses
the reader's zoom. This one keeps its drawings. Two elements do it: the first carries the background,
a message that Streamlit sends once and then only refers to; the second carries what moves.
"""

from __future__ import annotations

from collections.abc import Sequence

from engine.screen import served
from engine.screen.charts import wire
from engine.screen.charts.diagram import Diagram

_background = served.component("live.js", "background")
_diagrams = served.component("live.js", "diagrams")


def show(
    diagrams: Sequence[Diagram],
    *,
    key: str,
    height: int = 380,
    columns: int = 3,
    enlarged: str | None = None,
) -> None:
    """Draw the diagrams side by side, or move what moves in those that stand there already.

    At most ``columns`` stand in a row, fewer where the window is narrow, one on a phone. Each is
    ``height`` pixels high whatever it shows. ``key`` keeps the drawings between reruns and the
    reader's zoom and choice of view between pages too; ``enlarged`` is the key of the diagram that has
    the whole width at first (the reader changes that in the browser, without a rerun).
    """
    texts = wire.message(diagrams, key=key, height=height, columns=columns, enlarged=enlarged)
    _background(data=texts.background, key=f"{key}-background")
    _diagrams(data=texts.moving, key=key)
