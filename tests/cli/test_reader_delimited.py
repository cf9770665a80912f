"""Structure of delimited files: one test a rule, both sides of each limit."""

from __future__ import annotations

import io

import pytest
from reader_made import grids, notes, places, refused, rows, spec

from outcomes.errors import UsageError
from outcomes.intake.reading import FileSpec, SheetSpec, headers, read, record
from outcomes.intake.reading.limits import COLUMNS, FIELD_CHARS, LINE_BYTES


def test_cells_stay_text_and_empty_is_none():
    grid = grids('run,kg,note\n007,"81,5",\n12.0,NA, x \n')[0]
    assert grid.header == ("run", "kg", "note")
    assert grid.lines == [2, 3]
    assert grid.cells == [["007", "12.0"], ["81,5", "NA"], [None, " x "]]
    assert grid.places == (1, 2, 3)


@pytest.mark.parametrize("separator", [",", ";", "\t", "|"])
def test_declared_separator(separator):
    assert rows(f"a{separator}b\n1{separator}2\n", separator=separator) == [["1", "2"]]


def test_unknown_declarations_are_the_mappings_fault():
    for wrong in ({"separator": "~"}, {"encoding": "koi8-r"}, {"kind": "ods"}):
        with pytest.raises(UsageError):
            grids("a,b\n", **wrong)


def test_lines_are_physical_with_quoted_line_ends():
    data = 'a,b\r\n1,"x\r\ny\n\nz"\r\n2,"q""q"\r\n'
    grid = grids(data)[0]
    assert grid.lines == [2, 6]
    assert grid.cells[1] == ["x\ny\n\nz", 'q"q']


def test_header_only_gives_one_grid_without_rows():
    for data in ("a,b\n", "a,b"):
        assert [(g.header, g.lines, g.cells) for g in grids(data)] == [(("a", "b"), [], [[], []])]


@pytest.mark.parametrize("data", [b"", b"\xef\xbb\xbf", b"\xff\xfe"])
def test_empty_file(data):
    assert places(data) == [("EMPTY", 0, "")]


def test_chunks_are_bounded_and_complete():
    data = "a,b\n" + "".join(f"{i},x\n" for i in range(7))
    cut = grids(data, chunk_rows=3)
    assert [g.lines for g in cut] == [[2, 3, 4], [5, 6, 7], [8]]
    assert [c for g in cut for c in g.cells[0]] == [str(i) for i in range(7)]
    assert len(grids(data, chunk_rows=0)) == 7


def test_quote_inside_an_unquoted_cell():
    assert places('a,b\n1,x"y\n2, "z"\n') == [
        ("QUOTE-INSIDE", 2, "column 2"),
        ("QUOTE-INSIDE", 3, "column 2"),
    ]


def test_text_after_a_closing_quote():
    assert places('a,b,c\n1,"x"y,3\n') == [("QUOTE-AFTER", 2, "column 2")]
    assert places('a,b\n1,"x" \n') == [("QUOTE-AFTER", 2, "column 2")]
    late = refused('a,b\n1,"x\n2,"y\n')
    assert (late.code, late.findings[0].line) == ("READ.QUOTE-AFTER", 3)
    assert "opened in line 2" in late.findings[0].rule


def test_quote_never_closed_is_named_where_it_opens():
    assert places('a,b\n1,2\n3,"x\n4,5\n') == [("QUOTE-OPEN", 3, "column 2")]


def test_carriage_return_alone():
    assert places("a,b\r1,2\r")[0] == ("LINE-END", 1, "")
    assert places("a,b\r\r\n1,2\r\r\n")[0] == ("LINE-END", 1, "")
    assert places('a,b\n1,"x\ry"\n') == [("LINE-END", 2, "")]
    assert places(b"a,b\r" + b"1,2\r" * LINE_BYTES) == [("LINE-END", 1, "")]


def test_mixed_line_ends_are_accepted_and_noted():
    assert rows("a,b\r\n1,2\n3,4\r\n") == [["1", "2"], ["3", "4"]]
    assert [n.code for n in notes("a,b\r\n1,2\n3,4\r\n")] == ["READ.LINE-ENDS-MIXED"]
    assert notes('a,b\r\n1,"x\ny"\r\n') == []


def test_ragged_rows_are_each_named():
    assert places('a,b,c\n1,2\n1,2,3\n1,2,3,4\n"x\ny",2\n') == [
        ("ROW-SHORT", 2, ""),
        ("ROW-LONG", 4, ""),
        ("ROW-SHORT", 5, ""),
    ]
    assert "2 instead of 3" in refused("a,b,c\n1,2\n").what


def test_blank_lines_are_skipped_counted_and_noted():
    data = "a,b\n1,2\n\n  \n3,4\n,\n5,6\n\n"
    assert grids(data)[0].lines == [2, 5, 7]
    found = notes(data)
    assert [(n.code, n.line) for n in found] == [("READ.BLANK-LINES", 3), ("READ.EMPTY-ROWS", 6)]
    assert "2 in all" in found[0].rule and "1 in all" in found[1].rule
    assert notes("a,b\n1,2\n\n,\n") == []


def test_file_cut_off():
    assert places("a,b,c\n1,2,3\n4,5") == [("CUT-OFF", 3, "")]
    assert places("a,b,c\n1,2,3\nno rwegian") == [("CUT-OFF", 3, "")]
    assert [n.code for n in notes("a,b\n1,2\n3,4")] == ["READ.NO-FINAL-LINE-END"]
    assert notes("a,b\n1,2\n") == []


def test_line_bound():
    for extra, code in ((0, "FIELD-LONG"), (1, "LINE-LONG")):
        line = b"z" * (LINE_BYTES + extra)
        assert [p[:2] for p in places(b"a\n" + line + b"\n")] == [(code, 2)]


def test_a_huge_line_is_not_read_into_memory():
    class Endless(io.RawIOBase):
        given = 0

        def seekable(self):
            return True

        def seek(self, offset, whence=0):
            return 2**30 if whence == 2 else 0

        def readable(self):
            return True

        def readinto(self, buffer):
            self.given += len(buffer)
            buffer[:] = b"x" * len(buffer)
            return len(buffer)

    endless = Endless()
    with pytest.raises(Exception) as caught:
        next(read(io.BufferedReader(endless), FileSpec("f", "csv")))
    assert caught.value.code == "READ.LINE-LONG"
    assert endless.given < 3 * LINE_BYTES


def test_field_bound():
    assert rows("a,b\n1," + "x" * FIELD_CHARS + "\n") == [["1", "x" * FIELD_CHARS]]
    assert places("a,b\n1," + "x" * (FIELD_CHARS + 1) + "\n") == [("FIELD-LONG", 2, "column 2")]
    assert places('a,b\n1,"' + "x\n" * FIELD_CHARS + '"\n') == [("FIELD-LONG", 2, "column 2")]


def test_record_bound(monkeypatch):
    monkeypatch.setattr(record, "RECORD_CHARS", 1_000)
    assert rows('a,b\n1,"' + "x\n" * 495 + '"\n')[0][1] == "x\n" * 495
    assert places('a,b\n1,"' + "x\n" * 500) == [("RECORD-LONG", 2, "column 2")]


def test_column_bound():
    wide = ",".join(f"c{i}" for i in range(COLUMNS))
    assert len(headers(wide.encode() + b"\n", spec())[""]) == COLUMNS
    assert places(wide + ",one more\n") == [("COLUMNS", 1, "")]
    assert places('"a",' + wide + "\n") == [("COLUMNS", 1, "")]
    assert places('"a",' + "," * (2 * COLUMNS) + "\n") == [("COLUMNS", 1, "")]


def test_row_bound():
    assert len(rows("a\n1\n2\n", max_rows=2)) == 2
    assert places("a\n1\n2\n3\n", max_rows=2) == [("ROWS", 4, "")]


def test_defects_beyond_a_thousand_are_counted():
    found = refused("a,b\n" + "1\n" * 1_200)
    assert len(found.findings) == 1_000
    assert "1200 defects" in found.what
    assert len(found.lines()) == 3 and found.where.count("line") == 5


def test_a_text_file_holds_one_table():
    assert places("a\n", sheets=(SheetSpec("x", 2, 1),)) == [("SHEET", 0, "")]


def test_without_declared_sheets_the_first_line_is_the_header():
    assert next(read(b"a\n1\n", FileSpec("f", "csv"))).cells == [["1"]]


def test_refusal_names_key_line_and_column_only():
    message = str(refused('a,b\n1,"Edda Fen" 1944\n'))
    assert "f line 2, column 2" in message
    assert "Edda" not in message and "1944" not in message
