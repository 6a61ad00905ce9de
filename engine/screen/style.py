"""The little styling that Streamlit leaves to us, and the escaping of what users wrote."""

from __future__ import annotations

import html
import re

import streamlit as st

from engine.job.paper import TURNS
from engine.screen.charts.diagram import COLOURS

_CSS = """
<style>
.st-key-casebar {border-bottom: 1px solid var(--st-border-color-light, rgba(128,128,128,.3)); padding-bottom: .4rem;}
.st-key-answer {min-height: 12.9rem;}
.st-key-answer h3 {padding: 0 0 .3rem 0;}
[data-testid="stMainBlockContainer"] {padding-top: 4.5rem; padding-bottom: 3rem;}
[data-testid="stCaptionContainer"] {color: inherit; opacity: .8;} /* Streamlit's grey is too faint on white */
.legends {font-size: .9rem; line-height: 1.7;}
.legend {white-space: nowrap; margin-right: 1.6em;}
.legend i {display: inline-block; width: 2.2em; vertical-align: middle; margin-right: .5em;}
@media (max-width: 640px) {
  [data-testid="stMainBlockContainer"] {padding-left: .8rem; padding-right: .8rem;}
  .legend {white-space: normal;}
}
@media (min-width: 1800px) {
  html {font-size: 19px;}
  [class*="answer"] h3 {font-size: 2.15rem;} /* letters of 25 mm on a wall 1.9 m wide, for five metres */
}
</style>
"""

_STROKES = {"solid": "3px solid {}", "dashed": "3px dashed {}", "dotted": "3px dotted {}",
            "band": "10px solid {}; opacity: .35"}


def legend(rows: tuple[tuple[str, str, str], ...]) -> None:
    """What the lines of the diagrams above are: (colour by meaning, stroke, words)."""
    parts = []
    for colour, stroke, words in rows:
        paint = "currentColor" if colour == "text" else COLOURS[colour].light
        parts.append(f'<span class="legend"><i style="border-top: {_STROKES[stroke].format(paint)}"></i>'
                     f"{html.escape(words)}</span>")
    st.html(f'<div class="legends">{" ".join(parts)}</div>')


# Addresses become links even where every sign is escaped; an invisible joiner inside keeps them words
_LINKS, _JOINER = re.compile(r"(?<=:)(?=//)|(?i:(?<=www)(?=\.))|(?=@)"), "\u2060"
_MARKDOWN = re.compile(r"([\\`*_{}\[\]()<>#+\-.!|~$:&])")


def apply() -> None:
    """Put the styles on the page."""
    st.html(_CSS)


def escaped(text: str) -> str:
    """User's words inside Markdown: shown as typed, on one line, meaning nothing."""
    return _MARKDOWN.sub(r"\\\1", _LINKS.sub(_JOINER, " ".join(text.translate(TURNS).split())))


def escaped_lines(text: str) -> str:
    """The same for several lines: each stays a line of its own."""
    return "  \n".join(escaped(line) if line.strip() else "" for line in text.split("\n"))
