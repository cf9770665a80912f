"""The reader on generated input: an answer or a coded refusal, nothing lost, no value in a message."""

from __future__ import annotations

import csv
import io
import zipfile
from xml.sax.saxutils import escape

import pyarrow as pa
import pyarrow.parquet as pq
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from outcomes.errors import DataRefused
from outcomes.intake.reading import FileSpec, Number, SheetSpec, headers, outline, read

ENCODINGS = ("utf-8", "utf-8-sig", "cp1252", "latin-1", "utf-16", "utf-16-le", "utf-16-be")
PLANTED = ("EddaFen1944", "4711-0815", "edda@fen.example")
fast = settings(max_examples=120, deadline=None, suppress_health_check=[HealthCheck.too_slow])
few = settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow])

pieces = st.sampled_from(
    [
        b",",
        b";",
        b"\t",
        b'"',
        b"\n",
        b"\r\n",
        b"\r",
        b"\x00",
        b"\xef\xbb\xbf",
        b"\xff\xfe",
        b"a",
        b"1.5",
        b" ",
        b"Total",
        b"\xe4",
        "ä‮".encode(),
        b"kg",
        b"PK\x03\x04",
        b"PAR1",
        b"<html>",
        *(p.encode() for p in PLANTED),
    ]
)
soups = st.one_of(st.binary(max_size=200), st.lists(pieces, max_size=40).map(b"".join))
# Nothing that the reader refuses: control, bidi and invisible characters, carriage returns.
texts = st.text(
    st.characters(blacklist_categories=("C", "Zl", "Zp"), blacklist_characters="\ufffd")
    | st.sampled_from('",;\n\t'),
    max_size=8,
)
names = st.lists(st.from_regex(r"[a-z]{3,9}", fullmatch=True), min_size=1, max_size=5, unique=True)


def answer(data: bytes, spec: FileSpec) -> DataRefused | None:
    """Read everything; a refusal must be complete and hold nothing of the file."""
    try:
        for grid in read(data, spec):
            assert len(grid.header) == len(grid.cells) == len(grid.places)
            assert all(len(column) == len(grid.lines) for column in grid.cells)
            assert grid.lines == sorted(set(grid.lines))
    except DataRefused as refusal:
        _check_message(refusal)
        return refusal
    return None


def _check_message(refusal: DataRefused) -> None:
    assert refusal.code.startswith("READ.") and refusal.findings and refusal.todo
    said = "\n".join([str(refusal), *(f.text() + f.rule for f in refusal.findings), repr(refusal.args)])
    assert not any(planted in said for planted in PLANTED)
    assert refusal.__cause__ is None


@fast
@given(soups, st.sampled_from(ENCODINGS), st.sampled_from(",;\t|"), st.integers(1, 4))
def test_any_bytes_as_text(data, encoding, separator, header_line):
    spec = FileSpec("f", "csv", encoding, separator, 50, (SheetSpec("", 1, header_line),))
    refusal = answer(data, spec)
    try:
        assert set(headers(data, spec)) == {""}
    except DataRefused as early:
        assert refusal is not None
        _check_message(early)


@fast
@given(soups)
def test_any_bytes_as_anything(data):
    answer(b"PK\x03\x04" + data, FileSpec("f", "xlsx"))
    answer(b"PAR1" + data + b"PAR1", FileSpec("f", "parquet"))
    try:
        for sheet in outline(data):
            assert len(list(sheet.columns())) == len(sheet.headers)
    except DataRefused as refusal:
        _check_message(refusal)


def _workbook(body: str, **parts: str) -> bytes:
    main = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
    doc = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
    link = '<Relationships><Relationship Id="r1" Type="{}/{}" Target="{}"/></Relationships>'
    made = {
        "[Content_Types].xml": "<Types/>",
        "_rels/.rels": link.format(doc, "officeDocument", "xl/workbook.xml"),
        "xl/workbook.xml": f'<workbook xmlns:r="{doc}"><sheets><sheet r:id="r1"/></sheets></workbook>',
        "xl/_rels/workbook.xml.rels": link.format(doc, "worksheet", "worksheets/sheet1.xml"),
        "xl/worksheets/sheet1.xml": f'<worksheet xmlns="{main}"><sheetData>{body}</sheetData></worksheet>',
        **parts,
    }
    held = io.BytesIO()
    with zipfile.ZipFile(held, "w") as archive:
        for name, text in made.items():
            archive.writestr(name, text)
    return held.getvalue()


def _parquet() -> bytes:
    held = io.BytesIO()
    table = pa.table({"run": [PLANTED[0], "b"] * 20, "kg": [1.5, None] * 20, "n": list(range(40))})
    pq.write_table(table, held, row_group_size=15)
    return held.getvalue()


GOOD_BOOK = _workbook(
    '<row r="1"><c t="inlineStr"><is><t>run</t></is></c></row>'
    f'<row r="2"><c t="inlineStr"><is><t>{PLANTED[0]}</t></is></c></row>'
)
GOOD_PARQUET = _parquet()


@fast
@given(st.lists(st.tuples(st.integers(0, 4_000), st.integers(0, 255)), min_size=1, max_size=4), st.booleans())
def test_damaged_bytes(changes, is_cut):
    for good, kind in ((GOOD_BOOK, "xlsx"), (GOOD_PARQUET, "parquet")):
        data = bytearray(good)
        for place, byte in changes:
            data[place % len(data)] = byte
        answer(bytes(data[: changes[0][0]] if is_cut else data), FileSpec("f", kind))


markup = st.lists(
    st.sampled_from(
        [
            '<row r="2">',
            "<row>",
            "</row>",
            '<c r="A2" t="s">',
            "<c>",
            '<c t="inlineStr">',
            '<c t="b">',
            '<c t="d">',
            "</c>",
            "<v>",
            "</v>",
            "<v>1</v>",
            "<v/>",
            "<f>A1</f>",
            "<is><t>x</t></is>",
            "<t>",
            "</t>",
            "1",
            "#N/A",
            PLANTED[0],
            '<mergeCell ref="A2:B3"/>',
            "</sheetData>",
            '<col min="1" max="2" hidden="1"/>',
            "<!--x-->",
            "<![CDATA[x]]>",
        ]
    ),
    max_size=14,
)


@fast
@given(markup)
def test_any_markup_as_a_sheet(parts):
    head = '<row r="1"><c t="inlineStr"><is><t>run</t></is></c></row>'
    answer(_workbook(head + "".join(parts)), FileSpec("f", "xlsx"))
    answer(_workbook(head + '<row r="2">' + "".join(parts) + "</row>"), FileSpec("f", "xlsx"))


@few
@given(
    names,
    st.data(),
    st.sampled_from(",;\t|"),
    st.sampled_from(["\n", "\r\n"]),
    st.integers(1, 4),
    st.booleans(),
)
def test_tables_survive_a_round_trip(header, data, separator, end, chunk_rows, quote_all):
    row = st.lists(texts, min_size=len(header), max_size=len(header))
    body = data.draw(st.lists(row, max_size=8))
    body = [[f"F-{i}", *cells] for i, cells in enumerate(body)]
    held = io.StringIO(newline="")
    quoting = csv.QUOTE_ALL if quote_all else csv.QUOTE_MINIMAL
    writer = csv.writer(held, delimiter=separator, lineterminator=end, quoting=quoting)
    starts = []
    for cells in [["key", *header], *body]:
        starts.append(held.getvalue().count("\n") + 1)
        writer.writerow(cells)
    spec = FileSpec("f", "csv", "utf-8", separator)
    grids = list(read(held.getvalue().encode(), spec, chunk_rows=chunk_rows))
    assert grids[0].header == ("key", *header)
    assert [line for grid in grids for line in grid.lines] == starts[1:]
    found = [list(cells) for grid in grids for cells in zip(*grid.cells, strict=True)]
    assert found == [[cell or None for cell in cells] for cells in body]
    assert max((len(grid.lines) for grid in grids), default=0) <= chunk_rows


@few
@given(
    st.lists(st.tuples(texts.filter(str.strip), st.floats(allow_nan=False, allow_infinity=False)), max_size=6)
)
def test_workbooks_survive_a_round_trip(pairs):
    def text(value: str) -> str:
        return f'<c t="inlineStr"><is><t xml:space="preserve">{escape(value)}</t></is></c>'

    body = "".join(
        f"<row>{text(f'F-{i}')}{text(word.replace('_x', '_'))}<c><v>{number!r}</v></c></row>"
        for i, (word, number) in enumerate(pairs)
    )
    grid = next(
        read(_workbook(f"<row>{text('key')}{text('word')}{text('n')}</row>" + body), FileSpec("f", "xlsx"))
    )
    assert grid.cells[1] == [word.replace("_x", "_") for word, _ in pairs]
    numbers = [cell for cell in grid.cells[2] if isinstance(cell, Number)]
    assert [cell.value for cell in numbers] == [number for _, number in pairs]
    assert [float(cell.text) for cell in numbers] == [number for _, number in pairs]
