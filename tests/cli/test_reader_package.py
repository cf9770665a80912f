"""Workbooks that are refused for what they are: locked, packed beyond belief, with macros, linked,
damaged."""

from __future__ import annotations

import io
import zipfile

import pytest
from reader_made import places, refused, rows
from workbook_made import HEAD, MAIN, packed, parts, relations, row, sheet, styles, value, workbook

from outcomes.intake.reading import package
from outcomes.intake.reading import workbook as book_module
from outcomes.intake.reading.limits import MIB, XML_DEPTH

GOOD = parts(sheet(HEAD + row(2, "1", "2")))


def code(made: dict[str, str | bytes] | bytes, **more: object) -> str:
    data = made if isinstance(made, bytes) else packed(made)
    return refused(data, kind="xlsx", **more).code.removeprefix("READ.")


def changed(name: str, text: str | bytes) -> dict[str, str | bytes]:
    return {**GOOD, name: text}


def without(*names: str) -> dict[str, str | bytes]:
    return {name: text for name, text in GOOD.items() if name not in names}


def test_the_plain_workbook_is_read():
    assert rows(packed(GOOD), kind="xlsx") == [["1", "2"]]
    assert rows(packed(GOOD, zipfile.ZIP_STORED), kind="xlsx") == [["1", "2"]]


@pytest.mark.parametrize("name", ["xl/vbaProject.bin", "xl/macrosheets/sheet1.xml"])
def test_macros(name):
    assert code(changed(name, b"x")) == "MACROS"


def test_macros_by_content_type_or_relation():
    kind = "application/vnd.ms-excel.sheet.macroEnabled.main+xml"
    assert (
        code(changed("[Content_Types].xml", f'<Types><Override ContentType="{kind}"/></Types>')) == "MACROS"
    )
    links = relations(("r1", "worksheet", "worksheets/sheet1.xml"), ("r2", "xlMacrosheet", "m.xml"))
    assert code(changed("xl/_rels/workbook.xml.rels", links)) == "MACROS"


def test_external_links():
    assert code(changed("xl/externalLinks/externalLink1.xml", "<x/>")) == "EXTERNAL-LINKS"
    links = relations(("r1", "worksheet", "worksheets/sheet1.xml"), ("r2", "externalLink", "links/l.xml"))
    assert code(changed("xl/_rels/workbook.xml.rels", links)) == "EXTERNAL-LINKS"
    web = relations(("h1", "hyperlink", "https://example.org"), mode="External")
    assert rows(packed(changed("xl/worksheets/_rels/sheet1.xml.rels", web)), kind="xlsx") == [["1", "2"]]


def test_external_relations_are_not_followed():
    outside = relations(("r1", "worksheet", "worksheets/sheet1.xml"), mode="External")
    assert code(changed("xl/_rels/workbook.xml.rels", outside)) == "SHEET"


def test_password_inside_the_archive():
    data = bytearray(packed(GOOD, zipfile.ZIP_STORED))
    entry = data.index(b"PK\x01\x02")
    data[entry + 8] |= 1
    assert code(bytes(data)) == "ENCRYPTED"


def test_other_archives():
    assert code(packed({"a.csv": "a,b"})) == "KIND"
    word = {**GOOD, "_rels/.rels": relations(("r1", "officeDocument", "word/document.xml"))}
    assert code(word) == "KIND"
    binary = {**GOOD, "_rels/.rels": relations(("r1", "officeDocument", "xl/workbook.bin"))}
    assert code(binary) == "KIND"


def test_size_of_the_archive(monkeypatch):
    data = packed(GOOD)
    monkeypatch.setattr(package, "PACKAGE_BYTES", len(data))
    assert rows(data, kind="xlsx") == [["1", "2"]]
    monkeypatch.setattr(package, "PACKAGE_BYTES", len(data) - 1)
    assert code(data) == "FILE-LONG"


def test_unpacked_size_and_number_of_parts(monkeypatch):
    total = sum(len(text) for text in GOOD.values())
    monkeypatch.setattr(package, "UNPACKED_BYTES", total)
    monkeypatch.setattr(package, "PARTS", len(GOOD))
    assert rows(packed(GOOD), kind="xlsx") == [["1", "2"]]
    assert code(changed("more.xml", "")) == "PACKED"
    monkeypatch.setattr(package, "UNPACKED_BYTES", total - 1)
    assert code(GOOD) == "PACKED"


def test_a_bomb_is_not_unpacked():
    assert code(changed("xl/media/picture.bin", b"\x00" * (5 * MIB))) == "PACKED"
    assert rows(packed(changed("xl/media/picture.bin", b"\x00" * (3 * MIB))), kind="xlsx") == [["1", "2"]]


def test_amount_of_shared_text(monkeypatch):
    made = parts(sheet(HEAD), shared="<si><t>abc</t></si>")
    monkeypatch.setattr(book_module, "SHARED_TEXT_CHARS", 3)
    assert rows(packed(made), kind="xlsx") == []
    monkeypatch.setattr(book_module, "SHARED_TEXT_CHARS", 2)
    assert code(made) == "PACKED"


LAUGHS = '<!DOCTYPE x [<!ENTITY a "ha"><!ENTITY b "' + "&a;" * 99 + '">]>'


@pytest.mark.parametrize("name", sorted(GOOD))
def test_entities_are_refused_in_every_part(name):
    assert code(changed(name, LAUGHS + str(GOOD[name]))) == "DOCTYPE"
    outside = '<!DOCTYPE x SYSTEM "file:///etc/hostname">'
    assert code(changed(name, outside + str(GOOD[name]))) == "DOCTYPE"


@pytest.mark.parametrize("name", sorted(GOOD))
def test_parts_missing_or_not_well_formed(name):
    assert code(changed(name, "<open>")) == "WORKBOOK"
    assert code(changed(name, b"<a>\xff</a>")) == "WORKBOOK"
    assert code(changed(name, b'<?xml version="1.0" encoding="klingon"?><a/>')) == "WORKBOOK"
    assert code(without(name)) == ("KIND" if name.startswith("[") else "WORKBOOK")


def test_tags_and_depth_are_bounded():
    assert code(changed("xl/worksheets/sheet1.xml", f'<a b="{"x" * (2 * MIB)}"/>')) == "WORKBOOK"
    for depth, is_deep in ((XML_DEPTH, False), (XML_DEPTH + 1, True)):
        nested = "<a>" * (depth - 1) + "</a>" * (depth - 1)
        made = changed("xl/worksheets/sheet1.xml", sheet(HEAD, after=nested)[:-12] + "</worksheet>")
        assert (code(made) == "WORKBOOK") if is_deep else (rows(packed(made), kind="xlsx") == [])


def test_prefixes_do_not_matter():
    text = (
        str(GOOD["xl/worksheets/sheet1.xml"])
        .replace("</", "</x:")
        .replace("<", "<x:")
        .replace("<x:/x:", "</x:")
    )
    made = changed("xl/worksheets/sheet1.xml", text.replace("xmlns=", "xmlns:x="))
    assert rows(packed(made), kind="xlsx") == [["1", "2"]]


def test_no_table_of_contents():
    assert code(changed("_rels/.rels", relations(("r1", "thumbnail", "x.png")))) == "WORKBOOK"


def test_space_between_elements():
    spaced = sheet(HEAD + row(2, "1"), before="\n <sheetPr/>\n").replace("<row", "\n  <row")
    assert rows(packed(changed("xl/worksheets/sheet1.xml", spaced)), kind="xlsx") == [["1", None]]


def test_a_chart_is_not_a_table():
    links = relations(("r1", "chartsheet", "chartsheets/sheet1.xml"))
    assert code(changed("xl/_rels/workbook.xml.rels", links)) == "SHEET"
    assert code(changed("xl/_rels/workbook.xml.rels", relations())) == "SHEET"


def test_two_parts_of_one_name():
    held = io.BytesIO(packed(GOOD))
    with pytest.warns(UserWarning), zipfile.ZipFile(held, "a") as archive:
        archive.writestr("xl/worksheets/sheet1.xml", sheet(HEAD + row(2, "9", "9")))
    assert code(held.getvalue()) == "WORKBOOK"


def test_packed_in_another_way():
    assert code(packed(GOOD, zipfile.ZIP_BZIP2)) == "WORKBOOK"


def test_archive_cut_off_or_damaged():
    data = packed(GOOD)
    assert code(data[:-30]) == "WORKBOOK"
    start = data.index(b"sheet1.xml") + 20
    assert code(data[:start] + b"\xff" * 60 + data[start + 60 :]) == "WORKBOOK"


def test_formats_without_numbers():
    odd = '<numFmt numFmtId="x" formatCode="dd"/><numFmt/><cellXfs><xf/><xf numFmtId="x"/></cellXfs>'
    data = workbook(sheet(row(1, "h") + row(2, value("A2", "5", style=1))), styles=odd)
    assert len(rows(data, kind="xlsx")) == 1
    assert styles() and MAIN


def test_the_place_of_a_defect_inside_a_workbook():
    data = workbook(sheet(row(1, "h") + row(2, value("A2", "Edda", "n"))))
    assert places(data, kind="xlsx") == [("WORKBOOK", 2, "column 1")]
    assert "Edda" not in str(refused(data, kind="xlsx"))
