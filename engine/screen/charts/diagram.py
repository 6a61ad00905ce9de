"""A diagram as data: one pure-Python figure that the page, the record and the tests all read."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, NamedTuple


class Colour(NamedTuple):
    """A colour by meaning. ``css`` names the page's own variable, the rest is for where there is none."""

    light: str
    dark: str
    css: str = ""


# Figures name colours by meaning, so that one figure serves light, dark and paper. The four path
# colours keep a contrast of 3:1 on white and on near-black and stay apart for colour-blind readers.
COLOURS = {
    "text": Colour("#31333f", "#fafafa", "--st-text-color"),
    "background": Colour("#ffffff", "#0e1117", "--st-background-color"),
    "grid": Colour("#e4e6ea", "#2b2f38", "--st-border-color-light"),
    "muted": Colour("#5b6673", "#aab4c0"),
    "vermilion": Colour("#d55e00", "#d55e00"),
    "green": Colour("#009e73", "#009e73"),
    "pink": Colour("#cc79a7", "#cc79a7"),
    "blue": Colour("#0072b2", "#0072b2"),
}
FONT = Colour("sans-serif", "sans-serif", "--st-font")  # resolved like a colour, under the token "var:font"

# What every diagram has in common; a figure's own layout goes over it.
LAYOUT = {
    "autosize": True,
    "paper_bgcolor": "var:background",
    "plot_bgcolor": "var:background",
    "font": {"family": "var:font", "color": "var:text"},
    "hoverlabel": {"bgcolor": "var:background", "bordercolor": "var:muted", "font": {"color": "var:text"}},
}


@dataclass(frozen=True)
class Diagram:
    """One diagram of a row.

    ``key`` tells it from the others and keeps the reader's zoom; ``title`` stands above it;
    ``figure`` is ``{"data": [...], "layout": {...}}`` in plain dictionaries with colours written
    ``"var:text"`` or, with an opacity, ``"var:blue/0.2"`` (the names are those of ``COLOURS``);
    ``moving`` holds the positions of the traces that follow the inputs, everything else in the
    figure is background that is sent once; ``label`` says in words what the diagram shows,
    the answer included, to those who cannot see it.

    Two views to choose from may stand in the layout, with logarithms on a logarithmic axis::

        layout["meta"] = {"process": {"xaxis.range": [6.0, 8.0], "yaxis.range": [350.0, 480.0]},
                          "whole": {"xaxis.range": [0.0, 9.0], "yaxis.range": [273.0, 900.0]}}

    Raises ValueError when ``moving`` points at no trace.
    """

    key: str
    title: str
    figure: dict[str, Any]
    moving: tuple[int, ...] = ()
    label: str = ""

    def __post_init__(self) -> None:
        traces = len(self.figure["data"])
        if not all(0 <= index < traces for index in self.moving):
            raise ValueError(f"diagram {self.key!r}: moving is {self.moving}, but the figure has {traces} traces")

    def painted(self, theme: str = "light", view: str = "process") -> dict[str, Any]:
        """The figure with real colours and one view's ranges, for paper, for files and for other drawing code.

        >>> layout = {"meta": {"whole": {"xaxis.range": [0, 9]}}}
        >>> figure = {"data": [{"line": {"color": "var:blue/0.5"}}], "layout": layout}
        >>> painted = Diagram("Ts", "T-s", figure).painted(view="whole")
        >>> painted["data"][0]["line"]["color"], painted["layout"]["xaxis"]["range"]
        ('rgba(0, 114, 178, 0.5)', [0, 9])
        """
        layout = dressed(self.figure["layout"])
        for path, limits in (layout.get("meta") or {}).get(view, {}).items():
            axis, _, item = path.partition(".")
            layout[axis] = {**layout.get(axis, {}), item: limits}
        return replaced({"data": self.figure["data"], "layout": layout}, lambda token: _concrete(token, theme))


def dressed(layout: dict[str, Any]) -> dict[str, Any]:
    """The layout over what every diagram has in common.

    >>> dressed({"font": {"size": 13}})["font"]["family"]
    'var:font'
    """
    both = {**LAYOUT, **layout}
    for name in ("font", "hoverlabel"):
        both[name] = {**LAYOUT[name], **layout.get(name, {})}
    return both


def replaced(part: Any, meaning: Callable[[str], str]) -> Any:
    """A copy of a figure's part in which each token has got its meaning; arrays of numbers are shared, not copied.

    >>> replaced({"a": ["var:text", 1.0]}, str.upper)
    {'a': ['TEXT', 1.0]}
    """
    if isinstance(part, str):
        return meaning(part[4:]) if part.startswith("var:") else part
    if isinstance(part, dict):
        return {name: replaced(value, meaning) for name, value in part.items()}
    if isinstance(part, (list, tuple)) and any(isinstance(item, (str, dict, list, tuple)) for item in part):
        return [replaced(item, meaning) for item in part]
    return part


def _concrete(token: str, theme: str) -> str:
    name, _, opacity = token.partition("/")
    colour = getattr({**COLOURS, "font": FONT}[name], theme)
    if not opacity:
        return colour
    red, green, blue = (int(colour[place : place + 2], 16) for place in (1, 3, 5))
    return f"rgba({red}, {green}, {blue}, {opacity})"
