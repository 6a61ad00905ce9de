"""Every broken case file, link and record is refused with what, got, needs and what to do; nothing else happens."""

import os
import tracemalloc

import pytest

from engine.job.assessment import assess
from engine.job.case import Case
from engine.job.case.casefile import from_json, from_link, to_json
from engine.job.case.fields import FIELDS
from engine.job.record.data import reopened
from engine.job.runsheet.print import runsheet_html
from engine.steam.errors import InputError
from engine.steam.units import SI
from tests.job.broken_cases import CASES, HARMLESS, LINKS, RECORDS

READERS = [pytest.param(read, broken, id=broken.name) for read, these in (
    (from_json, CASES), (reopened, RECORDS), (lambda data: from_link(data.decode()), LINKS)) for broken in these]


@pytest.mark.parametrize(("read", "broken"), READERS)
def test_refused_with_what_got_needs_and_remedy(read, broken, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(InputError) as caught:
        read(broken.data)
    message = str(caught.value)
    for words in broken.says:
        assert words in message
    for fault in caught.value.faults:
        assert fault.quantity and fault.value != "" and fault.limit
        named = fault.name in FIELDS or fault.quantity.split(",")[0] in {f.label for f in FIELDS.values()}
        told = any(words in fault.limit for words in ("one of", "at most", " or ", " to ", '"value"', "number", "text"))
        assert fault.hint or fault.why or named or told, "no word of what to do"
    assert all(len(line) < 600 for line in message.splitlines()), "a message that nobody reads"
    assert os.listdir(tmp_path) == [], "something was executed"


@pytest.mark.parametrize("broken", [b for b in CASES + RECORDS + LINKS if "bomb" in b.name], ids=lambda b: b.name)
def test_a_bomb_is_not_unpacked(broken):
    read = from_json if broken in CASES else reopened if broken in RECORDS else lambda data: from_link(data.decode())
    tracemalloc.start()
    with pytest.raises(InputError):
        read(broken.data)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak < 3_000_000


@pytest.mark.parametrize("broken", HARMLESS, ids=lambda b: b.name)
def test_wicked_words_are_words(broken):
    case = from_json(broken.data)
    assert isinstance(case, Case) and from_json(to_json(case)) == case
    assert assess(case).x is not None
    page = runsheet_html(case, SI, "A4")
    assert "<script" not in page and "<img src=x" not in page and "\x00" not in page


def test_there_are_enough_of_them_and_each_is_another():
    names = [broken.name for broken in (*CASES, *RECORDS, *LINKS, *HARMLESS)]
    assert len(names) >= 100 and len(CASES) >= 60
    assert len(set(names)) == len(names)
    assert len({(b.file, b.data) for b in (*CASES, *RECORDS, *LINKS)}) == len(CASES) + len(RECORDS) + len(LINKS)
