"""What one cell of a workbook holds: numbers, dates, formulae, errors."""

from __future__ import annotations

import datetime as dt

import pytest
from reader_made import notes, places, rows
from workbook_made import row, sheet, styles, value, workbook

from outcomes.intake.reading import ErrorCell, Number


def cell(inner: str, **more: object) -> object:
    """The one cell below the header."""
    found = rows(workbook(sheet(row(1, "h") + f'<row r="2">{inner}</row>'), **more), kind="xlsx")
    return found[0][0]


@pytest.mark.parametrize(
    ("raw", "text"),
    [
        ("12", "12"),
        ("12.0", "12"),
        ("2.2000000000000002", "2.2"),
        ("1E-3", "0.001"),
        ("-0", "0"),
        ("123456789012345", "123456789012345"),
        ("1.5E+3", "1500"),
        ("1E-12", "1e-12"),
        ("1E22", "1e+22"),
        ("100", "100"),
    ],
)
def test_numbers_keep_their_shortest_text(raw, text):
    assert cell(f"<c><v>{raw}</v></c>") == Number(float(raw), text)


def test_numbers_that_lost_digits_are_noted():
    data = workbook(sheet(row(1, "h") + row(2, value("A2", "1234567890123456"))))
    assert rows(data, kind="xlsx") == [[Number(1234567890123456.0, "1234567890123456")]]
    assert [(n.code, n.line, n.column) for n in notes(data, kind="xlsx")] == [
        ("READ.LONG-NUMBER", 2, "column 1")
    ]


def test_other_types():
    assert cell('<c t="b"><v>1</v></c>') is True
    assert cell('<c t="b"><v>false</v></c>') is False
    assert cell('<c t="e"><v>#N/A</v></c>') == ErrorCell("error")
    assert cell("<c><v>1E999</v></c>") == ErrorCell("error")
    assert cell('<c t="str"><f>A1</f><v>abc</v></c>') == "abc"
    assert cell('<c t="inlineStr"><is><r><t>a</t></r><rPh><t>k</t></rPh></is></c>') == "a"


@pytest.mark.parametrize(
    "wrong",
    [
        '<c t="b"><v>2</v></c>',
        '<c t="x"><v>2</v></c>',
        "<c><v>1,5</v></c>",
        '<c t="s"><v>0</v></c>',
        '<c t="s"><v>-1</v></c>',
        '<c s="1"><v>5</v></c>',
        '<c s="x"><v>5</v></c>',
    ],
)
def test_values_that_their_type_does_not_allow(wrong):
    data = workbook(sheet(row(1, "h") + f'<row r="2">{wrong}</row>'))
    assert places(data, kind="xlsx") == [("WORKBOOK", 2, "column 1")]


def test_formulae():
    assert cell("<c><f>1+1</f></c>") == ErrorCell("formula")
    assert cell("<c><f>1+1</f><v></v></c>") == ErrorCell("formula")
    assert cell("<c><f>1+1</f><v>2</v></c>") == Number(2.0, "2")
    assert cell('<c t="e"><f>1/0</f><v>#DIV/0!</v></c>') == ErrorCell("error")
    load = '<calcPr fullCalcOnLoad="1"/>'
    assert cell("<c><f>1+1</f><v>0</v></c>", book=load) == ErrorCell("formula")
    assert cell("<c><v>0</v></c>", book=load) == Number(0.0, "0")
    empty = '<row r="2"><c t="str"><f>A1</f><v></v></c><c><v>1</v></c><c><f>1</f><v>1</v></c></row>'
    data = workbook(sheet(row(1, "a", "b", "c") + empty))
    assert rows(data, kind="xlsx")[0][0] is None
    found = notes(data, kind="xlsx")
    assert [(n.code, n.line) for n in found] == [("READ.FORMULA", 2)] and "2 in all" in found[0].rule


MOMENT = styles("dd.mm.yyyy hh:mm")


@pytest.mark.parametrize(
    ("raw", "is_1904", "found"),
    [
        ("43874.204861111109", "0", dt.datetime(2020, 2, 13, 4, 55)),
        ("43874.3241970139", "0", dt.datetime(2020, 2, 13, 7, 46, 51)),
        ("43873.999999", "0", dt.datetime(2020, 2, 13)),
        ("42412.204861111109", "1", dt.datetime(2020, 2, 13, 4, 55)),
        ("0", "1", dt.datetime(1904, 1, 1)),
        ("1", "0", dt.datetime(1900, 1, 1)),
        ("59", "0", dt.datetime(1900, 2, 28)),
        ("60", "0", ErrorCell("error")),
        ("61", "0", dt.datetime(1900, 3, 1)),
        ("0", "0", ErrorCell("error")),
        ("-1", "0", ErrorCell("error")),
        ("2958465", "0", dt.datetime(9999, 12, 31)),
        ("2958466", "0", ErrorCell("error")),
        ("2958000", "1", ErrorCell("error")),
        ("-1E300", "0", ErrorCell("error")),
        ("1E300", "0", ErrorCell("error")),
    ],
)
def test_dates_of_both_epochs(raw, is_1904, found):
    book = f'<workbookPr date1904="{is_1904}"/>'
    assert cell(f'<c s="1"><v>{raw}</v></c>', styles=MOMENT, book=book) == found


def test_times_and_elapsed_times():
    clock = styles("h:mm", "[h]:mm")
    assert cell('<c s="1"><v>0.25</v></c>', styles=clock) == dt.time(6)
    assert cell('<c s="1"><v>0.9999999</v></c>', styles=clock) == dt.time(23, 59, 59)
    assert cell('<c s="1"><v>43874.25</v></c>', styles=clock) == dt.datetime(2020, 2, 13, 6)
    assert cell('<c s="2"><v>1.5104166667</v></c>', styles=clock) == "36:15:00"
    assert cell('<c s="2"><v>-1</v></c>', styles=clock) == ErrorCell("error")


@pytest.mark.parametrize(
    ("code", "is_dated"),
    [
        ("0.00", False),
        ("General", False),
        ('0 "days"', False),
        ("0\\d", False),
        ("[Red]0;[Blue]-0", False),
        ("@", False),
        ("yyyy-mm-dd", True),
        ("[$-407]d. mmm", True),
        ("mmm", True),
        ("0.0E+00", False),
        ("0;dd", False),
        ("# ?/?", False),
        ("_-* #,##0_-", False),
    ],
)
def test_which_formats_mean_dates(code, is_dated):
    made = styles(code.replace('"', "&quot;"))
    found = cell('<c s="1"><v>43874</v></c>', styles=made)
    assert found == (dt.datetime(2020, 2, 13) if is_dated else Number(43874.0, "43874"))


@pytest.mark.parametrize(
    ("number", "found"),
    [
        (1, Number(43874.5, "43874.5")),
        (14, dt.datetime(2020, 2, 13, 12)),
        (22, dt.datetime(2020, 2, 13, 12)),
        (20, dt.datetime(2020, 2, 13, 12)),
        (46, "1052988:00:00"),
        (49, Number(43874.5, "43874.5")),
    ],
)
def test_built_in_formats(number, found):
    assert cell('<c s="1"><v>43874.5</v></c>', styles=styles(builtin=(number,))) == found


@pytest.mark.parametrize(
    ("raw", "found"),
    [
        ("2020-02-13T04:55:00.7", dt.datetime(2020, 2, 13, 4, 55, 1)),
        ("2020-02-13", dt.datetime(2020, 2, 13)),
        ("2020-02-13T04:55:00+02:00", "2020-02-13T04:55:00+02:00"),
        ("04:55:10.2", dt.time(4, 55, 10)),
        ("9999-12-31T23:59:59.9", ErrorCell("error")),
        ("13.02.2020", ErrorCell("error")),
    ],
)
def test_dates_as_iso_text(raw, found):
    assert cell(f'<c t="d"><v>{raw}</v></c>') == found
