"""A sheet's rows: the values that openpyxl reads from the same workbook, and XML that other programs write."""

import datetime as dt
import io
from xml.parsers.expat import ExpatError

import openpyxl
import pytest

from engine.measurement.logbook.sheet import Workbook
from engine.measurement.logbook.sheet_rows import Formats, UncomputedFormula, sheet_rows
from engine.measurement.logbook.text import source_of

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
STRICT = "http://purl.oclc.org/ooxml/spreadsheetml/main"
FORMATS = Formats(["shared"], frozenset({3}), frozenset(), dt.datetime(1899, 12, 30))


def rows_of(body, columns=3, first=1, space=MAIN, prefix=""):
    head = f'xmlns:{prefix[:-1]}="{space}"' if prefix else f'xmlns="{space}"'
    xml = f"<{prefix}worksheet {head}><{prefix}sheetData>{body}</{prefix}sheetData></{prefix}worksheet>"
    return list(sheet_rows(io.BytesIO(xml.encode()), FORMATS, first, columns))


def test_values_are_those_of_openpyxl():
    book = openpyxl.Workbook()
    sheet = book.active
    table = [["time", "p1 [bar g]", "T2 [°C]"], [dt.datetime(2024, 5, 6, 7, 8, 9, 500_000), 9.01, 121],
             [dt.date(2024, 5, 6), -1e-300, 10**20], [dt.time(7, 8), True, False], [dt.timedelta(hours=30), "", None],
             ["#N/A", "  spaced ", "\u00fc\n<&>"], [0.1 + 0.2, 1e300, 0], [None, None, "late"]]
    for k, row in enumerate(table, start=1):
        for column, value in enumerate(row, start=1):
            sheet.cell(k + (k == len(table)), column, value)  # a row without cells before the last
    file = io.BytesIO()
    book.save(file)
    by_openpyxl = list(openpyxl.load_workbook(file, read_only=True, data_only=True).active.iter_rows(values_only=True))
    with Workbook(source_of(file.getvalue())) as ours:
        found = list(ours.rows("Sheet", columns=3))
    assert [number for number, _ in found] == list(range(1, len(table) + 2))
    for (_, values), expected in zip(found, by_openpyxl, strict=True):
        assert [v or None for v in values] == [v or None for v in expected]


@pytest.mark.parametrize(("cell", "value"), [
    ('<c r="A1"><v>9.5</v></c>', 9.5), ('<c r="A1" t="n"><v>12</v></c>', 12), ("<c><v>7</v></c>", 7),
    ('<c r="A1" t="s"><v>0</v></c>', "shared"), ('<c r="A1" t="b"><v>1</v></c>', True),
    ('<c r="A1" t="e"><v>#DIV/0!</v></c>', "#DIV/0!"), ('<c r="A1" t="d"><v>2024-05-06</v></c>', dt.date(2024, 5, 6)),
    ('<c t="inlineStr"><is><r><t>bar</t></r><r><t> g</t></r><rPh sb="0" eb="1"><t>x</t></rPh></is></c>', "bar g"),
    ('<c r="A1"><v>NaN</v></c>', "NaN"), ('<c r="A1"><v>1e999</v></c>', "1e999"),
    ('<c r="A1" s="3"><v>45418.5</v></c>', dt.datetime(2024, 5, 6, 12)), ('<c r="A1" s="3"><v>1e18</v></c>', "#VALUE!"),
    ('<c r="A1"><f>1+2</f><v>3</v></c>', 3), ('<c r="A1" t="str"><f>""</f><v></v></c>', None),
    ('<c r="A1"/>', None), ('<c r="A1"><v></v></c>', None), ('<c r="ZZZ1"><v>1</v></c>', None)])
def test_one_cell(cell, value):
    found = rows_of(f'<row r="1">{cell}</row>')[0][1][0]
    assert (found, type(found)) == (value, type(value))


def test_a_formula_without_its_value_is_told_apart():
    (_, (computed, bare, empty)), = rows_of('<row><c><f>A9</f><v>1</v></c><c><f>A9</f></c><c><f>A9</f><v/></c></row>')
    assert computed == 1
    assert all(isinstance(cell, UncomputedFormula) and cell == "=A9" for cell in (bare, empty))


def test_rows_and_cells_stand_where_their_references_say():
    body = '<row r="2"><c r="C2"><v>3</v></c></row><row r="4"><c r="A4"><v>1</v></c><c r="AB4"><v>9</v></c></row><row/>'
    assert rows_of(body, first=2) == [(2, [None, None, 3]), (3, [None] * 3), (4, [1, None, None]), (5, [None] * 3)]
    assert rows_of(body, first=4) == [(4, [1, None, None]), (5, [None] * 3)]


def test_other_programs_name_the_same_elements_otherwise():
    assert rows_of("<x:row><x:c><x:v>1</x:v></x:c></x:row>", prefix="x:") == [(1, [1, None, None])]
    assert rows_of("<row><c><v>1</v></c></row>", space=STRICT) == [(1, [1, None, None])]
    assert rows_of("<row><c><v>1</v></c></row>", space="urn:other") == []


@pytest.mark.parametrize("body", [
    '<row r="5"/><row r="4"/>', '<row r="4"/><row r="4"/>', '<row r="2000000"/>', '<row r="0"/>', '<row r="x"/>',
    '<row><c r="7"><v>1</v></c></row>', '<row><c r="ABCD1"><v>1</v></c></row>', "<row><c><v>nine</v></c></row>",
    '<row><c t="s"><v>one</v></c></row>'])
def test_what_no_program_writes_is_refused(body):
    with pytest.raises(ValueError):
        rows_of(body)


def test_broken_xml_and_a_document_type_are_refused():
    with pytest.raises(ExpatError):
        rows_of("<row><c>")
    bomb = b'<?xml version="1.0"?><!DOCTYPE x [<!ENTITY a "aaaa">]><worksheet/>'
    with pytest.raises(ValueError, match="document type"):
        list(sheet_rows(io.BytesIO(bomb), FORMATS, 1, 3))
