"""Documents for paper and for offline browsers: one self-contained page, no script, every text escaped."""

from __future__ import annotations

import re
from collections.abc import Sequence
from html import escape
from typing import NamedTuple

from engine.steam.errors import Fault, InputError
from engine.steam.units import UnitSystem

PAPERS = ("A4", "Letter")
TURNS = dict.fromkeys((*range(0x202A, 0x202F), *range(0x2066, 0x206A)))
"""Marks that turn round whatever is written after them, figures too: taken out of users' words (str.translate)."""
_HEAD = 52  # signs of a title at the head of a sheet
_LONG = re.compile(r"\S{24}(?=\S)")  # a word that needs a place to be broken at

_STYLE = """
@page { size: %(paper)s; margin: 17mm 13mm 15mm;
  @top-left { content: %(left)s; font: 8.5pt system-ui, sans-serif; color: #333; }
  @top-right { content: "Page " counter(page) " of " counter(pages); font: 8.5pt system-ui, sans-serif; color: #333; }
  @bottom-left { content: %(foot)s; font: 7.5pt system-ui, sans-serif; color: #555; }
}
* { box-sizing: border-box; }
html { color-scheme: light; -webkit-print-color-adjust: exact; print-color-adjust: exact; }
body { font: 10pt/1.32 system-ui, sans-serif; color: #111; background: #fff; margin: 0 auto; max-width: 184mm;
  overflow-wrap: break-word; }
@media screen { body { padding: 8mm 5mm; } }
h1 { font-size: 16pt; line-height: 1.15; margin: 0 0 1.5mm; }
h2 { font-size: 12pt; margin: 5mm 0 1.5mm; break-after: avoid; border-bottom: 0.3mm solid #111; }
h3 { font-size: 10.5pt; margin: 3mm 0 1mm; break-after: avoid; }
p { margin: 0 0 1.8mm; }
ul { margin: 0 0 2mm; padding-left: 5mm; }
table { border-collapse: collapse; width: 100%%; margin: 0 0 2.5mm; font-variant-numeric: tabular-nums; }
thead { display: table-header-group; }
tr { break-inside: avoid; }
tbody tr:first-child:not(:last-child), tr:nth-last-child(2) { break-after: avoid; }
p:has(+ ul), p:has(+ .scroll) { break-after: avoid; }
th, td { border: 0.2mm solid #999; padding: 0.7mm 1.4mm; text-align: left; vertical-align: top; font-size: 9pt; }
th { background: #eee; font-weight: 600; }
h1, h2, h3, p, li, td.words, table.words td { overflow-wrap: anywhere; }
td.n { text-align: right; white-space: nowrap; }
th.n { text-align: right; }
.small { font-size: 8.5pt; color: #333; }
.stop { border: 0.6mm solid #111; padding: 1.5mm 2.5mm; margin: 2mm 0; break-inside: avoid; font-weight: 600; }
.note { border-left: 1mm solid #111; padding: 0.3mm 2.5mm; margin: 2mm 0; break-inside: avoid; }
.new { break-before: page; }
@media screen { .scroll { overflow-x: auto; } }
svg { display: block; width: 100%%; height: auto; break-inside: avoid; }
"""


class Table(NamedTuple):
    """Headings, if any, and rows of plain text; ``numbers`` are the columns set to the right."""

    headings: Sequence[str]
    rows: Sequence[Sequence[str]]
    numbers: frozenset[int] = frozenset()
    kind: str = ""

    def html(self) -> str:
        """The table with its head repeated on every sheet of paper."""
        def cell(tag: str, k: int, text: str) -> str:
            return f'<{tag}{" class=n" if k in self.numbers else ""}>{lines(text)}</{tag}>'

        def row(tag: str, cells: Sequence[str]) -> str:
            return f"<tr>{''.join(cell(tag, k, text) for k, text in enumerate(cells))}</tr>"

        kind = f' class="{self.kind}"' if self.kind else ""
        head = f"<thead>{row('th', self.headings)}</thead>" if self.headings else ""
        body = "\n".join(row("td", cells) for cells in self.rows)
        return f'<div class="scroll"><table{kind}>{head}<tbody>\n{body}\n</tbody></table></div>'


def check_paper(paper: str) -> str:
    """The paper, or InputError for a size that is not made."""
    if paper not in PAPERS:
        raise InputError(Fault("paper", str(paper)[:40], "", "one of: " + ", ".join(PAPERS), name="paper"))
    return paper


def usual_paper(units: UnitSystem) -> str:
    """What a reader of these units has in his printer."""
    return {"SI": "A4", "US": "Letter"}[units.name]


def document(title: str, body: str, paper: str, *, foot: str = "", style: str = "", data: str = "") -> str:
    """A whole page. ``title`` and ``foot`` are plain text and stand on every sheet; ``body`` is HTML; ``data``
    are blocks that nobody sees."""
    css = _STYLE % {"paper": check_paper(paper), "left": css_text(_short(title)), "foot": css_text(foot)}
    return ('<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
            '<meta name="viewport" content="width=device-width, initial-scale=1">'
            '<meta http-equiv="Content-Security-Policy" '
            "content=\"default-src 'none'; style-src 'unsafe-inline'; base-uri 'none'; form-action 'none'\">\n"
            f"<title>{escaped_line(title)}</title>\n<style>{css}{style}</style></head>\n"
            f"<body>\n{body}\n{data}</body></html>\n")


def _short(title: str) -> str:
    """A title that leaves room for the number of the page beside it, however wide its letters."""
    line = one_line(title)
    return line if len(line) <= _HEAD else f"{line[:_HEAD - 1].rstrip()}…"


def one_line(text: str) -> str:
    """Words on one line, without control characters."""
    return " ".join(_plain(text).split())


def escaped_line(text: str) -> str:
    """Words on one line, escaped."""
    return escape(one_line(text))


def lines(text: str) -> str:
    """Escaped text that keeps its lines."""
    return "<br>".join(map(_breakable, _plain(text).split("\n")))


def _breakable(line: str) -> str:
    """Escaped, with places in words of any length at which they may be broken."""
    return "<wbr>".join(escape(part) for part in _LONG.sub(r"\g<0>\n", line).split("\n"))


def paragraph(text: str, kind: str = "") -> str:
    """Escaped text as a paragraph; nothing for no text."""
    if not text:
        return ""
    return f'<p class="{kind}">{lines(text)}</p>' if kind else f"<p>{lines(text)}</p>"


def bullets(items: Sequence[str]) -> str:
    """Escaped texts as a list; nothing for none."""
    return "<ul>" + "".join(f"<li>{lines(item)}</li>" for item in items) + "</ul>" if items else ""


def css_text(text: str) -> str:
    r"""Text as a CSS string: whatever is not a letter, a digit or a space is written as its number.

    >>> css_text('5 bar" }')
    '"5 bar\\000022 \\00007d "'
    """
    return '"' + re.sub(r"[^A-Za-z0-9 ]", lambda found: f"\\{ord(found[0]):06x} ", one_line(text)) + '"'


def _plain(text: str) -> str:
    """Without the control characters that HTML does not know, and without those that turn the direction of what
    follows; tabulators and line ends stay."""
    text = text.replace("\r\n", "\n").replace("\r", "\n").translate(TURNS)
    return re.sub(r"[\x00-\x08\x0b-\x1f\x7f-\x9f]", " ", text)
