"""What tests of documents share: a page taken apart by the standard library's parser, and texts that mean harm."""

import re
from html.parser import HTMLParser

HOSTILE = ('</style></title></script><script>alert(1)</script><img src=x onerror=alert(2)> & "quoted" \'single\' '
           '"; } body { display: none } /* ${1+1} {0} %s \u2028 \x00')
VOID = {"meta", "br", "wbr", "rect", "path", "circle"}


class Page(HTMLParser):
    """Tags with their attributes, visible text, tables as rows of cells, and blocks of data by id."""

    def __init__(self, html):
        super().__init__(convert_charrefs=True)
        self.tags, self.tables, self.blocks, self.open, self._text = [], [], {}, [], []
        self.feed(html)
        self.close()
        assert not self.open, self.open

    def handle_starttag(self, tag, attributes):
        self.tags.append((tag, dict(attributes)))
        if tag == "br":
            self._text.append("\n")
        if tag not in VOID:
            self.open.append(tag)
        if tag == "table":
            self.tables.append([])
        elif tag == "tr":
            self.tables[-1].append([])
        elif tag in ("td", "th"):
            self.tables[-1][-1].append("")
        elif tag == "script":
            self.blocks[dict(attributes).get("id")] = ""

    def handle_startendtag(self, tag, attributes):
        self.tags.append((tag, dict(attributes)))

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if "script" in self.open:
            identity = next(a.get("id") for t, a in reversed(self.tags) if t == "script")
            self.blocks[identity] += data
        elif "style" not in self.open:
            self._text.append(data)
            if self.open and self.open[-1] in ("td", "th"):
                self.tables[-1][-1][-1] += data

    @property
    def text(self):
        return " ".join("".join(self._text).split())


def harmless(html, own_tags):
    """Nothing in it runs, and nothing in it comes from elsewhere; gives the page."""
    page = Page(html)
    assert {tag for tag, _ in page.tags} <= own_tags
    for tag, attributes in page.tags:
        assert not any(name.startswith("on") or name in ("src", "href", "srcdoc", "action") for name in attributes), tag
        if tag == "script":
            assert attributes["type"] == "application/json"
    style = re.search(r"<style>(.*?)</style>", html, re.DOTALL)[1]
    assert "@import" not in style and "url(" not in style and "display: none" not in style
    assert not re.search(r"https?://(?!www\.w3\.org/2000/svg)", html)
    return page
