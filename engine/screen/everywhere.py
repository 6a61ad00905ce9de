"""What the browser does on every page, beside what Streamlit does: numbers with a comma, scrolling by keyboard."""

from __future__ import annotations

from engine.screen import served

_everywhere = served.component("everywhere.js", "everywhere")


def listen() -> None:
    """Have the browser take 9,5 for 9.5 in number fields, refuse what could mean two things, and let the keyboard
    reach whatever scrolls.

    Call it in every run, from the entry point. The server hears of numbers only.
    """
    _everywhere(data=None, key="everywhere")
