"""Sheets of a workbook: where a cell stands, what is hidden, merged or out of order."""

from __future__ import annotations

import datetime as dt
import io

import openpyxl
import pytest
from reader_made import grids, notes, places, refused, rows
from workbook_made import HEAD, row, sheet, styles, value, workbook

from outcomes.intake.reading import ErrorCell, FileSpec, Number, SheetSpec, headers, merged, read
from outcomes.intake.reading.limits import COLUMNS, FIELD_CHARS, SHEETS


def test_a_workbook_of_another_program():
    book = openpyxl.Workbook()
    book.active.append(["run", "start", "kg", "ok"])
    book.active.append(["007", dt.datetime(2020, 2, 13, 4, 55, 0, 700_000), 81.5, True])
    book.active.append([12, dt.datetime(2020, 2, 14), None, False])
    held = io.BytesIO()
    book.save(held)
    grid = grids(held.getvalue(), kind="xlsx")[0]
    assert grid.header == ("run", "start", "kg", "ok") and grid.lines == [2, 3]
    assert grid.cells == [
        ["007", Number(12.0, "12")],
        [dt.datetime(2020, 2, 13, 4, 55, 1), dt.datetime(2020, 2, 14)],
        [Number(81.5, "81.5"), None],
        [True, False],
    ]


def test_gaps_never_shift_a_value():
    data = workbook(
        sheet(row(1, "a", "b", "c") + row(2, "", "", "x") + row(4, "1") + "<row><c><v>7</v></c></row>")
    )
    grid = grids(data, kind="xlsx")[0]
    assert grid.lines == [2, 4, 5]
    assert [list(r) for r in zip(*grid.cells, strict=True)] == [
        [None, None, "x"],
        ["1", None, None],
        [Number(7.0, "7"), None, None],
    ]
    assert [(n.code, n.line) for n in grid.notes] == [("READ.EMPTY-ROWS", 3)]


def test_empty_rows_at_the_end_are_ignored():
    assert notes(workbook(sheet(HEAD + row(2, "1") + row(3, "", " ") + row(9))), kind="xlsx") == []


def test_shared_texts_with_runs_reading_aids_and_escapes():
    shared = (
        "<si><t>run</t></si><si><r><t>a</t></r><r><t> b</t></r><rPh><t>kana</t></rPh></si>"
        "<si><t>x_x000D_&#10;y_x005F_x0041_</t></si><si/>"
    )
    inner = "".join(f'<row r="{n}"><c r="A{n}" t="s"><v>{n - 1}</v></c></row>' for n in (1, 2, 3, 4))
    data = workbook(sheet(inner), shared=shared)
    assert rows(data, kind="xlsx") == [["a b"], ["x\ny_x0041_"]]


def test_merged_cells_in_data_have_no_value():
    body = HEAD + row(2, "F-1", "80") + row(3, "", "81") + row(5, "F-2", "82")
    data = workbook(
        sheet(body, after='<mergeCells><mergeCell ref="A2:A4"/><mergeCell ref="B5"/></mergeCells>')
    )
    lost = ErrorCell("merged")
    assert rows(data, kind="xlsx") == [[lost, "80"], [lost, "81"], [lost, None], ["F-2", lost]]
    assert [(n.code, n.line, n.column) for n in notes(data, kind="xlsx")] == [("READ.MERGED", 2, "column 1")]
    wide = sheet(body, after='<mergeCells><mergeCell ref="A2:XFD1048576"/></mergeCells>')
    assert rows(workbook(wide.encode("utf-16")), kind="xlsx")[0] == [lost, lost]


def test_merged_cells_in_the_header_and_above():
    merge = '<mergeCells><mergeCell ref="{}"/></mergeCells>'
    above = sheet(row(1, "Title") + row(3, "run", "kg") + row(4, "1", "2"), after=merge.format("A1:B1"))
    assert rows(workbook(above), kind="xlsx", header_line=3) == [["1", "2"]]
    inside = sheet(HEAD + row(2, "1", "2"), after=merge.format("B1:C2"))
    assert places(workbook(inside), kind="xlsx") == [("HEADER-MERGED", 1, "column 2")]


def test_number_of_merged_cells(monkeypatch):
    data = workbook(
        sheet(HEAD + row(2, "1"), after='<mergeCells><mergeCell ref="B2"/><mergeCell ref="B3"/></mergeCells>')
    )
    monkeypatch.setattr(merged, "MERGED_RANGES", 2)
    assert rows(data, kind="xlsx") == [["1", ErrorCell("merged")]]
    monkeypatch.setattr(merged, "MERGED_RANGES", 1)
    assert places(data, kind="xlsx") == [("WORKBOOK", 0, "")]


@pytest.mark.parametrize("reference", ["", "B2:A1", "1:2", "A0"])
def test_merged_cells_without_a_place(reference):
    data = workbook(sheet(HEAD, after=f'<mergeCells><mergeCell ref="{reference}"/></mergeCells>'))
    assert places(data, kind="xlsx") == [("WORKBOOK", 0, "")]


def test_what_is_hidden_is_read_and_noted():
    some = '<col min="2" max="3" hidden="1"/><col min="x" max="3" hidden="1"/><col min="1" max="1"/>'
    columns = f"<cols>{some}</cols>"
    body = HEAD + row(2, "1", "2", more=' hidden="1"') + row(3, "3", "4", more=' hidden="true"')
    data = workbook(sheet(body, before=columns), states=("hidden",))
    assert rows(data, kind="xlsx") == [["1", "2"], ["3", "4"]]
    assert [(n.code, n.line, n.column) for n in notes(data, kind="xlsx")] == [
        ("READ.HIDDEN-SHEET", 0, ""),
        ("READ.HIDDEN-ROWS", 2, ""),
        ("READ.HIDDEN-COLUMNS", 0, "column 2"),
    ]


def test_sheets_by_number():
    made = (sheet(row(1, "a") + row(2, "1")), sheet(row(1, "Title") + row(3, "b") + row(4, "2")))
    sheets = (SheetSpec("second", 2, 3), SheetSpec("first", 1, 1))
    data = workbook(*made)
    assert [(g.sheet, g.header, g.lines) for g in grids(data, kind="xlsx", sheets=sheets)] == [
        ("second", ("b",), [4]),
        ("first", ("a",), [2]),
    ]
    assert headers(data, FileSpec("f", "xlsx", sheets=sheets)) == {"second": ("b",), "first": ("a",)}
    for position in (0, 3):
        assert places(data, kind="xlsx", sheets=(SheetSpec("x", position, 1),)) == [("SHEET", 0, "")]


def test_too_many_columns():
    wide = [f"c{n}" for n in range(COLUMNS)]
    for extra, is_wide in ((0, False), (1, True)):
        cells = "".join(f'<c t="inlineStr"><is><t>{c}</t></is></c>' for c in wide + ["more"] * extra)
        data = workbook(sheet(f'<row r="1">{cells}</row>'))
        assert (places(data, kind="xlsx") == [("COLUMNS", 1, "")]) if is_wide else grids(data, kind="xlsx")


def test_one_sheet_too_many():
    assert rows(workbook(*[sheet(HEAD + row(2, "1"))] * SHEETS), kind="xlsx", sheets=()) == [["1", None]]
    assert places(workbook(*[sheet(HEAD)] * (SHEETS + 1)), kind="xlsx") == [("SHEETS", 0, "")]


def test_content_beside_the_table():
    data = workbook(sheet(HEAD + row(2, "1", "2", "", "see note")))
    assert places(data, kind="xlsx") == [("HEADER-EMPTY", 2, "column 4")]


def test_title_totals_units_and_repeats_as_in_text_files():
    title = workbook(sheet(row(1, "Cobalt log") + row(3, "run", "kg")))
    assert "line 3" in refused(title, kind="xlsx").what
    body = (
        row(1, "run", "kg", "cm")
        + row(2, "", "kg", "cm")
        + row(3, "RUN", "kg ", "cm")
        + row(4, "Total", value("B4", "9"))
    )
    assert places(workbook(sheet(body)), kind="xlsx") == [
        ("UNITS-ROW", 2, ""),
        ("HEADER-REPEATED", 3, ""),
        ("TOTALS-ROW", 4, ""),
    ]


def test_headers_that_are_not_text():
    inner = (
        value("A1", "2019") + value("B1", "1", "b") + value("C1", "43874", style=1) + value("D1", "#N/A", "e")
    )
    words = row(1, "", "", "", "", "a", "b", "c").removeprefix('<row r="1">')
    data = workbook(
        sheet(f'<row r="1">{inner}{words}' + row(2, "1", "2", "3")), styles=styles("dd.mm.yyyy hh:mm")
    )
    grid = grids(data, kind="xlsx")[0]
    assert grid.header == ("2019", "True", "2020-02-13T00:00:00", "a", "b", "c")
    assert grid.places == (1, 2, 3, 5, 6, 7)


def test_no_table_at_the_header_line():
    assert places(workbook(sheet()), kind="xlsx") == [("HEADER-LINE", 1, "")]
    assert places(workbook(sheet(HEAD)), kind="xlsx", header_line=2) == [("HEADER-LINE", 2, "")]
    assert places(workbook(sheet(row(3, "a"))), kind="xlsx", header_line=2) == [("HEADER-LINE", 2, "")]


def test_rows_and_cells_out_of_order():
    for body in (
        HEAD + HEAD,
        HEAD + '<row r="x"/>',
        HEAD + '<row r="1048577"/>',
        HEAD + '<row r="2"><c r="B2"/><c r="A2"/></row>',
        HEAD + '<row r="2"><c r="B3"/></row>',
        HEAD + '<row r="2"><c r="XFE2"/></row>',
        HEAD + '<row r="2"><c r="b"/></row>',
    ):
        assert [p[0] for p in places(workbook(sheet(body)), kind="xlsx")] == ["WORKBOOK"]


def test_characters_and_lengths_of_texts():
    assert places(workbook(sheet(HEAD + row(2, "1", "a&#x202E;b"))), kind="xlsx") == [("BIDI", 2, "column 2")]
    assert places(workbook(sheet(HEAD + row(2, "1", "a_x0000_b"))), kind="xlsx") == [("NUL", 2, "column 2")]
    assert places(workbook(sheet(HEAD + row(2, "_xD800_"))), kind="xlsx") == [("CONTROL", 2, "column 1")]
    assert [n.code for n in notes(workbook(sheet(HEAD + row(2, "\ufffd"))), kind="xlsx")] == ["READ.REPLACED"]
    assert rows(workbook(sheet(HEAD + row(2, "x" * FIELD_CHARS))), kind="xlsx")[0][0] == "x" * FIELD_CHARS
    long = "x" * (FIELD_CHARS + 1)
    assert places(workbook(sheet(HEAD + row(2, "", long))), kind="xlsx") == [("FIELD-LONG", 2, "column 2")]
    shared = f"<si><t>{long}</t></si>"
    body = HEAD + row(2, value("A2", "0", "s"))
    assert places(workbook(sheet(body), shared=shared), kind="xlsx") == [("FIELD-LONG", 2, "column 1")]


def test_a_chunk_at_a_time():
    body = HEAD + "".join(row(n, f"r{n}") for n in range(2, 9))
    assert [g.lines for g in grids(workbook(sheet(body)), kind="xlsx", chunk_rows=3)] == [
        [2, 3, 4],
        [5, 6, 7],
        [8],
    ]
    assert next(read(workbook(sheet(HEAD)), FileSpec("f", "xlsx"))).lines == []
