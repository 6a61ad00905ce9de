"""Number fields that understand a decimal comma, on every page."""

from __future__ import annotations

from engine.screen import served

_numbers = served.component("numbers.js", "numbers")


def listen() -> None:
    """Have the browser take 9,5 for 9.5 in number fields, and refuse what could mean two things.

    Call it in every run, from the entry point. The server hears of numbers only.
    """
    _numbers(data=None, key="numbers")
