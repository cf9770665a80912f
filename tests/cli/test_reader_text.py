"""Bytes, encodings and characters."""

from __future__ import annotations

import gzip
import io
import zipfile

import pytest
from reader_made import grids, notes, places, refused, rows, spec

from outcomes.intake.reading import FileSpec, headers, read, reader, rewind
from outcomes.intake.reading.limits import LINE_BYTES
from outcomes.intake.reading.sniff import kind_of


def _zip() -> bytes:
    held = io.BytesIO()
    with zipfile.ZipFile(held, "w") as packed:
        packed.writestr("a.csv", "a,b\n")
    return held.getvalue()


OLE2 = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + b"\x00" * 600


@pytest.mark.parametrize(
    ("data", "kind"),
    [
        (_zip(), "zip"),
        (b"%PDF-1.7\n", "pdf"),
        (gzip.compress(b"a,b\n", mtime=0), "gzip"),
        (b"BZh91AY&SY\x00", "bzip2"),
        (OLE2, "ole2"),
        (OLE2 + "EncryptedPackage".encode("utf-16-le"), "encrypted"),
        (b"\x00" * 8 + b"DUCK" + b"\x00" * 9, "duckdb"),
        (b"PAR1\x15\x00 ... PAR1", "parquet"),
        (b"PAR1\x15\x00 cut off", "parquet"),
        (b"PAR1,b\n1,2\n", "text"),
        (b"\xef\xbb\xbf \n<TABLE><tr>", "html"),
        ("<!DOCTYPE html>".encode("utf-16"), "html"),
        (b"<?xml version='1.0'?>", "xml"),
        (b"BZh,b\n", "text"),
        (b"", "empty"),
    ],
)
def test_kind_by_bytes(data, kind):
    assert kind_of(io.BytesIO(data)) == kind


def test_kind_must_be_the_declared_one():
    assert refused(_zip()).code == "READ.KIND"
    assert refused("a,b\n", kind="xlsx").code == "READ.KIND"
    assert refused(b"<html><table>", kind="xlsx").code == "READ.KIND"
    assert refused(OLE2, kind="xlsx").code == "READ.KIND"
    assert refused(OLE2 + "EncryptedPackage".encode("utf-16-le"), kind="xlsx").code == "READ.ENCRYPTED"
    assert "ZIP" in refused(_zip(), kind="parquet").what
    with pytest.raises(Exception, match="KIND"):
        headers(b"%PDF-1.7", spec())


@pytest.mark.parametrize(
    ("encoding", "declared"),
    [
        ("utf-8", "utf-8"),
        ("utf-8-sig", "utf-8"),
        ("utf-8", "utf-8-sig"),
        ("utf-8-sig", "utf-8-sig"),
        ("cp1252", "cp1252"),
        ("latin-1", "latin-1"),
        ("utf-16", "utf-16"),
        ("utf-16-le", "utf-16"),
        ("utf-16-be", "utf-16"),
        ("utf-16-le", "utf-16-le"),
        ("utf-16-be", "utf-16-be"),
        ("utf-16", "utf-8"),
    ],
)
def test_encodings(encoding, declared):
    text = 'Gr\u00f6\u00dfe,b\r\n\u00b5\u00e9,"x\ny"\r\n'
    grid = grids(text.encode(encoding), encoding=declared)[0]
    assert grid.header == ("Gr\u00f6\u00dfe", "b")
    assert grid.cells == [["\u00b5\u00e9"], ["x\ny"]]


def test_utf16_beyond_a_block_and_with_the_byte_of_a_line_feed():
    text = "\u010a\u0a0a,b\n" + "\u010a\u0a0a\u4e00,x\n" * 20_000
    grid = grids(text.encode("utf-16"), encoding="utf-16")[0]
    assert grid.header == ("\u010a\u0a0a", "b")
    assert len(grid.lines) == 20_000 and set(grid.cells[0]) == {"\u010a\u0a0a\u4e00"}


def test_utf16_is_noted_when_only_the_mark_says_so():
    assert [n.code for n in notes("a,b\n1,2\n".encode("utf-16"))] == ["READ.UTF-16"]
    assert notes(b"\xef\xbb\xbfa,b\n1,2\n") == []


def test_utf16_line_bound():
    long = ("a\n" + "x" * LINE_BYTES + "\n").encode("utf-16")
    assert places(long, encoding="utf-16") == [("LINE-LONG", 2, "")]


def test_utf16_without_final_line_end():
    assert rows("a,b\n1,2".encode("utf-16"), encoding="utf-16") == [["1", "2"]]


@pytest.mark.parametrize("declared", ["utf-16", "utf-16-be"])
def test_what_is_not_utf16_is_not_read_as_chinese(declared):
    assert places(b"a,b\n1,22\n", encoding=declared) == [("ENCODING", 1, "")]
    assert places("a,b\n".encode("utf-16-le"), encoding="utf-16-be") == [("ENCODING", 1, "")]


def test_invalid_bytes_are_named_by_line_and_byte():
    found = refused(b"a,b\n1,2\n3,x\xe4y\n5,\xff\n")
    assert [(f.code, f.line) for f in found.findings] == [("READ.ENCODING", 3), ("READ.ENCODING", 4)]
    assert "byte 4 of the line" in found.findings[0].rule
    assert refused(b"a,b\n1,\x81\n", encoding="cp1252").code == "READ.ENCODING"
    assert refused("a,b\n".encode("utf-16") + b"\x00\xd8\x0a\x00", encoding="utf-16").code == "READ.ENCODING"


def test_marks_that_contradict_the_declaration():
    assert places(b"\xef\xbb\xbfa,b\n", encoding="cp1252") == [("BOM", 1, "")]
    assert places(b"\xef\xbb\xbfa,b\n", encoding="utf-16") == [("BOM", 1, "")]
    assert places("\ufeffa".encode("utf-16-le"), encoding="utf-16-be") == [("BOM", 1, "")]
    assert places("a,b\n".encode("utf-32")) == [("ENCODING", 1, "")]


def test_utf8_declared_as_a_single_byte_encoding():
    assert places("a,b\n1,\u00e4\n".encode(), encoding="cp1252") == [("ENCODING-OTHER", 0, "")]
    assert rows(b"a,b\n1,\xe4\n2,\xc3\xa4\n", encoding="cp1252") == [["1", "\u00e4"], ["2", "\u00c3\u00a4"]]
    assert rows(b"a,b\n1,2\n", encoding="cp1252") == [["1", "2"]]


@pytest.mark.parametrize(
    ("character", "code"),
    [
        ("\x00", "NUL"),
        ("\x01", "CONTROL"),
        ("\x0b", "CONTROL"),
        ("\x1b", "CONTROL"),
        ("\x7f", "CONTROL"),
        ("\x85", "CONTROL"),
        ("\u2028", "CONTROL"),
        ("\uffff", "CONTROL"),
        ("\u202e", "BIDI"),
        ("\u2066", "BIDI"),
        ("\u200f", "BIDI"),
        ("\u200b", "INVISIBLE"),
        ("\ufeff", "INVISIBLE"),
        ("\U000e0041", "INVISIBLE"),
    ],
)
def test_forbidden_characters(character, code):
    data = f"a,b\n1,x{character}y{character}\n"
    assert places(data) == [(code, 2, "")]
    assert "character 4 of the line" in refused(data).what
    assert places(f"a{character},b\n")[0] == (code, 1, "")
    assert places(f"title{character}\na,b\n", header_line=2) == [(code, 1, "")]


def test_allowed_characters():
    cells = [
        "a\tb",
        "x\u00a0y",
        "\u00ad",
        "\u200d",
        "\U0001f600",
        "=1+1",
        "<b>",
        "'; drop table x --",
        "{{ 7*7 }}",
    ]
    data = "n,t\n" + "".join(f'{i},"{c}"\n' for i, c in enumerate(cells))
    assert [row[1] for row in rows(data)] == cells


def test_damage_before_us_is_noted():
    found = notes("a,b\n1,x\ufffdy\n")
    assert [(n.code, n.line) for n in found] == [("READ.REPLACED", 2)]


def test_notes_are_bounded():
    assert len(notes("a\n" + "\ufffd\n" * 1_200)) == 1_000


def test_utf16_without_mark_declared_utf8_is_called_nul():
    assert places("a,b\n1,2\n".encode("utf-16-le"))[0] == ("NUL", 1, "")


def test_a_tail_of_nul_bytes():
    assert places(b"a,b\n1,2\n" + b"\x00" * 500) == [("NUL", 3, "")]


class Pipe(io.BytesIO):
    def seekable(self):
        return False


def test_a_stream_that_cannot_be_rewound(monkeypatch):
    assert next(read(Pipe(b"a\n1\n"), FileSpec("f", "csv"))).cells == [["1"]]
    monkeypatch.setattr(rewind, "UNSEEKABLE_BYTES", 3)
    with pytest.raises(Exception, match="FILE-LONG"):
        next(read(Pipe(b"a\n1\n"), FileSpec("f", "csv")))


def test_file_bound(monkeypatch):
    monkeypatch.setattr(rewind, "FILE_BYTES", 4)
    assert rows(b"a\n1\n") == [["1"]]
    assert places(b"a\n12\n") == [("FILE-LONG", 0, "")]


def test_large_files_are_read_twice_and_give_the_same(monkeypatch):
    data = "a,b\n" + "".join(f'{i},"x\n{i}"\n' for i in range(9))
    held = grids(data, chunk_rows=4)
    monkeypatch.setattr(reader, "KEPT_CELLS", 5)
    assert grids(data, chunk_rows=4) == held
    assert [g.lines for g in grids("a\n")] == [[]]
    monkeypatch.setattr(reader, "CHUNK_CHARS", 10)
    cut = grids(data)
    assert [c for g in cut for c in g.cells[1]] == [c for g in held for c in g.cells[1]]
    assert len(cut) > 3


@pytest.mark.parametrize("later", [b"a,b\n1,2\n3,4\n", b"a,b\n1\n3,4\n5,6\n", b"", b"a,c\n1,2\n3,4\n5,6\n"])
def test_a_file_that_changes_meanwhile(monkeypatch, later):
    monkeypatch.setattr(reader, "KEPT_CELLS", 1)
    stream = io.BytesIO(b"a,b\n1,2\n3,4\n5,6\n")
    chunks = read(stream, FileSpec("f", "csv"), chunk_rows=1)
    real = reader._again

    def changed(*given):
        stream.seek(0)
        stream.truncate()
        stream.write(later)
        return real(*given)

    monkeypatch.setattr(reader, "_again", changed)
    with pytest.raises(Exception, match="CHANGED"):
        list(chunks)
