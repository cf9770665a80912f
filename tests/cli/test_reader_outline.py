"""The first look at a file for the draft of a mapping: every guess comes with its evidence."""

from __future__ import annotations

import io

import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from workbook_made import HEAD, packed, parts, relations, row, sheet, value, workbook

from outcomes.errors import DataRefused
from outcomes.intake.reading import Number, outline


def first(data: bytes | str, **given: str):
    return outline(data.encode() if isinstance(data, str) else data, **given)[0]


def test_a_text_file():
    found = first('Cobalt log;\n\nrun;kg;note\n1;"81,5";a\n2;80;"x;\ny"\n\n3;79;b\n')
    assert (found.header_line, found.headers, found.n_rows) == (3, ("run", "kg", "note"), 3)
    assert (found.spec.separator, found.spec.encoding, found.spec.kind) == (";", "utf-8", "csv")
    assert found.blocks == [(4, 5), (8, 8)]
    assert found.evidence["separator"] == "3 cells in 4 of 5 lines"
    assert found.is_guess == ("separator", "header_line")
    assert dict(found.columns()) == {
        "run": ["1", "2", "3"],
        "kg": ["81,5", "80", "79"],
        "note": ["a", "x;\ny", "b"],
    }
    assert next(found.columns(max_rows=2)) == ("run", ["1", "2"])


@pytest.mark.parametrize(
    ("encoding", "found", "is_sure"),
    [
        ("utf-8", "utf-8", True),
        ("utf-8-sig", "utf-8", True),
        ("cp1252", "cp1252", False),
        ("utf-16", "utf-16-le", True),
        ("utf-16-le", "utf-16-le", False),
        ("utf-16-be", "utf-16-be", False),
    ],
)
def test_encodings(encoding, found, is_sure):
    sheet_found = first("Größe,b\nä,2\n".encode(encoding))
    assert sheet_found.spec.encoding == found
    assert ("encoding" not in sheet_found.is_guess) == is_sure
    assert sheet_found.headers == ("Größe", "b")


def test_what_the_user_gives_is_not_guessed():
    found = first("Größe,b\n".encode("latin-1"), kind="csv", encoding="latin-1")
    assert found.spec.encoding == "latin-1" and found.evidence["encoding"] == "as given"


def test_separators():
    for separator in ",;\t|":
        assert first(f"a{separator}b\n1{separator}2\n").spec.separator == separator
    assert first("run\n1\n2\n").evidence["separator"] == "every line is a single cell"
    assert first('a;b\n"1,5";"2,5"\n"3,5";x\n').spec.separator == ";"


def test_headers():
    assert first("12,13\n14,15\nrun,kg\n1,2\n").header_line == 3
    with pytest.raises(DataRefused) as caught:
        outline(b"12,13\n14,15\n")
    assert caught.value.code == "READ.HEADER-DATA"
    with pytest.raises(DataRefused) as caught:
        outline(b"\n\n")
    assert caught.value.code == "READ.HEADER-LINE"


def test_a_workbook_with_code_lists_and_prose():
    runs = sheet(row(1, "Cobalt log") + row(3, "run", "kg") + row(4, "F-1", "80"))
    codes = [row(n, value(f"A{n}", str(n)), "word") for n in (2, 3, 5)]
    lists = sheet(row(1, "code", "meaning") + "".join(codes))
    prose = sheet(row(1, "How to use this book") + row(3, "a", "a", "b") + row(4, "c", "c", "d"))
    data = workbook(runs, lists, prose, states=("visible", "hidden", "visible"))
    one, two, three = outline(io.BytesIO(data))
    assert (one.position, one.header_line, one.headers, one.is_code_list) == (1, 3, ("run", "kg"), False)
    assert two.is_code_list and two.is_hidden and two.blocks == [(2, 3), (5, 5)]
    assert two.evidence["is_code_list"] and next(two.columns())[1][0] == Number(2.0, "2")
    assert two.spec.sheets[0].key == "sheet2"
    assert three.refusal is not None and three.headers == () and list(three.columns()) == []


@pytest.mark.parametrize(
    "body",
    [
        row(2, "1", "a") + row(3, "1", "b"),
        row(2, "1", "2"),
        row(2, "a long code", "a"),
        row(2, value("A2", "#N/A", "e"), "a"),
        "".join(row(n, str(n), "a") for n in range(2, 103)),
    ],
)
def test_not_a_code_list(body):
    assert not first(workbook(sheet(row(1, "code", "meaning") + body))).is_code_list


def test_sheets_that_are_no_tables():
    links = relations(("r1", "chartsheet", "c.xml"), ("r2", "worksheet", "worksheets/sheet2.xml"))
    made = {**parts(sheet(), sheet(HEAD)), "xl/_rels/workbook.xml.rels": links}
    chart, table = outline(packed(made))
    assert chart.refusal is not None and chart.refusal.code == "READ.SHEET"
    assert table.headers == ("run", "kg") and table.refusal is None


def test_parquet():
    held = io.BytesIO()
    pq.write_table(pa.table({"run": ["1"], "kg": [2.0]}), held)
    found = first(held.getvalue())
    assert (found.headers, found.n_rows, found.is_guess) == (("run", "kg"), 1, ())


@pytest.mark.parametrize(
    ("data", "code"),
    [
        (b"", "EMPTY"),
        (b"%PDF-1.4", "KIND"),
        (b"a,b\n1\n2,3\n4,5\n", "ROW-SHORT"),
        (b"PK\x03\x04broken", "WORKBOOK"),
        (b"\xff\xfe\x00\x00a", "ENCODING"),
        (b"x" * (2 << 20), "LINE-LONG"),
        (b"a,b\n" + b"x" * (2 << 20), "LINE-LONG"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + "EncryptedPackage".encode("utf-16-le"), "ENCRYPTED"),
    ],
)
def test_what_cannot_be_outlined(data, code):
    with pytest.raises(DataRefused) as caught:
        outline(data)
    assert caught.value.code == f"READ.{code}"
