"""Diagrams as text for the browser: the background apart from what moves, in few digits."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from functools import lru_cache
from math import inf
from typing import Any, NamedTuple

import numpy as np

from engine.screen.charts.diagram import COLOURS, FONT, Diagram, dressed

DIGITS = 6  # a zoomed-in reader sees no more than one part in 10^4 of what is sent

# The parts of a layout that may follow the inputs; the rest belongs to the background.
MOVING_LAYOUT = ("meta", "annotations", "shapes")


class Message(NamedTuple):
    """What the browser gets: ``background`` rarely changes, ``moving`` with every input."""

    background: str
    moving: str


def message(diagrams: Sequence[Diagram], **settings: Any) -> Message:
    """The diagrams as two JSON texts; the moving one names the background it belongs to.

    Background traces and layouts that are the same objects as in an earlier call are not turned into
    text again, so keep them as they are: build once, never change in place.
    """
    background = _object(
        tokens=_TOKENS,
        diagrams=_object(**{diagram.key: _background(diagram) for diagram in diagrams}),
    )
    name = hashlib.blake2b(background.encode(), digest_size=9).hexdigest()
    moving = _object(
        background=_text(name),
        settings=_text(settings),
        diagrams="[" + ",".join(map(_moving, diagrams)) + "]",
    )
    return Message(_object(name=_text(name), ground=background), moving)


def _background(diagram: Diagram) -> str:
    traces = [
        "null" if index in diagram.moving else _kept_text(_Same(trace))
        for index, trace in enumerate(diagram.figure["data"])
    ]
    layout = {name: value for name, value in dressed(diagram.figure["layout"]).items() if name not in MOVING_LAYOUT}
    return _object(data="[" + ",".join(traces) + "]", moving=_text(diagram.moving), layout=_text(layout))


def _moving(diagram: Diagram) -> str:
    figure = diagram.figure
    return _object(
        key=_text(diagram.key),
        title=_text(diagram.title),
        label=_text(diagram.label),
        traces=_text([figure["data"][index] for index in diagram.moving]),
        layout=_text({name: figure["layout"][name] for name in MOVING_LAYOUT if name in figure["layout"]}),
    )


class _Same:
    """Equal only to itself, and alive as long as it is remembered: a safe key for what cannot be hashed."""

    __slots__ = ("part",)

    def __init__(self, part: Any):
        self.part = part

    def __hash__(self) -> int:
        return id(self.part)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Same) and self.part is other.part


@lru_cache(maxsize=256)  # a dozen diagrams' backgrounds in two systems of units
def _kept_text(same: _Same) -> str:
    return _text(same.part)


def _object(**members: str) -> str:
    return "{" + ",".join(f"{json.dumps(name)}:{text}" for name, text in members.items()) + "}"


def _text(part: Any) -> str:
    """JSON in few digits; what JSON has no word for (NaN, infinity) becomes null, a gap in a line."""
    if isinstance(part, np.ndarray):
        part = part.tolist()
    if isinstance(part, dict):
        return _object(**{name: _text(value) for name, value in part.items()})
    if isinstance(part, (list, tuple)):
        return "[" + ",".join([_number(item) if type(item) is float else _text(item) for item in part]) + "]"
    if isinstance(part, float):  # a float64 scalar of NumPy is one too
        return _number(part)
    return json.dumps(part.item() if isinstance(part, np.generic) else part)


def _number(value: float) -> str:
    return f"{value:.{DIGITS}g}" if -inf < value < inf else "null"


_TOKENS = _text({name: colour._asdict() for name, colour in {**COLOURS, "font": FONT}.items()})
