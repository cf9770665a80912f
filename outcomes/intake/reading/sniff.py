"""What a file is by its first bytes, whatever its name says. Byte signatures are facts of the trade (common
practice)."""

from __future__ import annotations

from typing import BinaryIO

_HEAD_BYTES = 4096

_SIGNATURES: tuple[tuple[bytes, str], ...] = (
    (b"PK\x03\x04", "zip"),
    (b"PK\x05\x06", "zip"),
    (b"PK\x07\x08", "zip"),
    (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "ole2"),
    (b"%PDF-", "pdf"),
    (b"\x1f\x8b", "gzip"),
    (b"\xfd7zXZ\x00", "xz"),
    (b"\x28\xb5\x2f\xfd", "zstd"),
    (b"7z\xbc\xaf\x27\x1c", "7z"),
    (b"Rar!\x1a\x07", "rar"),
    (b"\x89PNG\r\n\x1a\n", "png"),
    (b"\xff\xd8\xff", "jpeg"),
    (b"SQLite format 3\x00", "sqlite"),
    (b"ARROW1\x00", "arrow"),
    (b"{\\rtf", "rtf"),
)

WORDS = {
    "zip": "a ZIP archive",
    "ole2": "an old .xls workbook or another OLE2 file",
    "pdf": "a PDF document",
    "gzip": "a gzip archive",
    "bzip2": "a bzip2 archive",
    "xz": "an xz archive",
    "zstd": "a zstd archive",
    "7z": "a 7z archive",
    "rar": "a RAR archive",
    "png": "a picture",
    "jpeg": "a picture",
    "sqlite": "an SQLite database",
    "duckdb": "a DuckDB database",
    "arrow": "an Arrow file",
    "rtf": "an RTF document",
    "html": "an HTML page",
    "xml": "an XML document",
    "parquet": "a Parquet file",
    "text": "plain text",
    "encrypted": "a workbook protected by a password",
    "empty": "an empty file",
}

_MARKUP = (
    (b"<!doctype", "html"),
    (b"<html", "html"),
    (b"<table", "html"),
    (b"<meta", "html"),
    (b"<?xml", "xml"),
)


def kind_of(stream: BinaryIO) -> str:
    """Key of WORDS; the stream stays at its beginning.

    >>> import io
    >>> kind_of(io.BytesIO(b"%PDF-1.7 ...")), kind_of(io.BytesIO(b"a,b"))
    ('pdf', 'text')
    """
    stream.seek(0)
    head = stream.read(_HEAD_BYTES)
    stream.seek(0)
    if not head:
        return "empty"
    for signature, kind in _SIGNATURES:
        if head.startswith(signature):
            return _which_ole2(stream) if kind == "ole2" else kind
    if head.startswith(b"BZh") and head[4:10] == b"1AY&SY":
        return "bzip2"
    if head[8:12] == b"DUCK":
        return "duckdb"
    if head[:4] in (b"PAR1", b"PARE") and (_tail(stream) == head[:4] or b"\x00" in head):
        return "parquet"
    return _which_text(head)


def _which_text(head: bytes) -> str:
    start = (
        head.removeprefix(b"\xef\xbb\xbf")
        .replace(b"\x00", b"")
        .removeprefix(b"\xff\xfe")
        .removeprefix(b"\xfe\xff")
    )
    start = start.lstrip()[:16].lower()
    return next((kind for mark, kind in _MARKUP if start.startswith(mark)), "text")


def _tail(stream: BinaryIO) -> bytes:
    size = stream.seek(0, 2)
    stream.seek(max(0, size - 4))
    tail = stream.read(4)
    stream.seek(0)
    return tail


def _which_ole2(stream: BinaryIO) -> str:
    """A workbook with a password is an OLE2 file with a stream of this name."""
    head = stream.read(64 * _HEAD_BYTES)
    stream.seek(0)
    return "encrypted" if "EncryptedPackage".encode("utf-16-le") in head else "ole2"
