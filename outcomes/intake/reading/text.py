"""Bytes -> decoded physical lines, bounded. Nothing is replaced, guessed or skipped on the way."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import BinaryIO

from outcomes.errors import UsageError
from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.limits import LINE_BYTES

ENCODINGS = ("utf-8", "utf-8-sig", "cp1252", "latin-1", "utf-16", "utf-16-le", "utf-16-be")
_SINGLE_BYTE = ("cp1252", "latin-1")
_MARKS = (
    (b"\xff\xfe\x00\x00", "utf-32"),
    (b"\x00\x00\xfe\xff", "utf-32"),
    (b"\xef\xbb\xbf", "utf-8"),
    (b"\xff\xfe", "utf-16-le"),
    (b"\xfe\xff", "utf-16-be"),
)
_BLOCK = 64 * 1024

# Tab, line feed and carriage return are left out: the first may stand in a cell, the others are judged as
# line ends.
_BAD = re.compile(
    "(?P<nul>\x00)"
    "|(?P<bidi>[\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069])"
    "|(?P<invisible>[\u200b\u2060-\u2064\ufeff\ufff9-\ufffb\U000e0000-\U000e007f])"
    "|(?P<control>[\x01-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u2028\u2029\ud800-\udfff\ufffe\uffff])"
    "|(?P<replaced>\ufffd)"
)
_CODE = {"nul": "READ.NUL", "bidi": "READ.BIDI", "invisible": "READ.INVISIBLE", "control": "READ.CONTROL"}


@dataclass(frozen=True, slots=True)
class Line:
    """A physical line without its end. end: a line feed, with or without carriage return, or '' at the end of
    file."""

    number: int
    text: str
    end: str


@dataclass(frozen=True, slots=True)
class Decoding:
    """How to decode: encoding of a line, bytes of the mark to skip, and how the encoding was found."""

    encoding: str
    skip: int
    by_mark: bool


def decoding(stream: BinaryIO, declared: str, defects: Defects) -> Decoding:
    """Encoding by byte-order mark, else as declared. Raises Fatal on a contradiction, UsageError on an
    unknown name."""
    if declared not in ENCODINGS:
        raise UsageError(
            "MAPPING.ENCODING", "an encoding that is not read", todo=f"use one of {', '.join(ENCODINGS)}"
        )
    stream.seek(0)
    head = stream.read(4)
    stream.seek(0)
    for mark, encoding in _MARKS:
        if head.startswith(mark):
            return _by_mark(encoding, len(mark), declared, defects)
    if declared.startswith("utf-16"):
        return Decoding(_without_mark(stream, declared, defects), 0, False)
    return Decoding("utf-8" if declared == "utf-8-sig" else declared, 0, False)


def _without_mark(stream: BinaryIO, declared: str, defects: Defects) -> str:
    """Order of the bytes of UTF-16: separators and line feeds leave a zero byte, which stands second in
    little-endian. Read in the wrong order, or from a file that is not UTF-16, everything would be Chinese
    characters in one line."""
    head = stream.read(_BLOCK)
    stream.seek(0)
    first, second = head[::2].count(0), head[1::2].count(0)
    found = "utf-16-le" if second > first else "utf-16-be"
    if first == second or not found.startswith(declared):
        raise defects.fatal("READ.ENCODING", 1, detail=f"the bytes do not lie as in {declared.upper()}")
    return found


def _by_mark(encoding: str, length: int, declared: str, defects: Defects) -> Decoding:
    if encoding == "utf-32":
        raise defects.fatal("READ.ENCODING", 1, detail="the byte-order mark is that of UTF-32")
    if declared in _SINGLE_BYTE or (declared.startswith("utf-16") and not encoding.startswith(declared)):
        raise defects.fatal(
            "READ.BOM", 1, detail=f"the mark is that of {encoding.upper()}, declared is {declared}"
        )
    return Decoding(encoding, length, True)


def lines(stream: BinaryIO, declared: str, defects: Defects) -> Iterator[Line]:
    """Every physical line of the file. Defects of encoding and of characters are listed, and reading goes on
    after them; a line without bound raises Fatal."""
    how = decoding(stream, declared, defects)
    stream.seek(how.skip)
    wide = how.encoding.startswith("utf-16")
    raw = _wide_lines(stream, how.encoding, defects) if wide else _byte_lines(stream, defects)
    maybe_utf8 = how.encoding in _SINGLE_BYTE
    n_beyond_ascii = 0
    for number, line in enumerate(raw, 1):
        text = _decoded(line, how.encoding, number, defects)
        if maybe_utf8 and not line.isascii():
            n_beyond_ascii += 1
            maybe_utf8 = _is_utf8(line)
        body, end = _without_end(text)
        if not body.isprintable() or "\ufffd" in body:
            scan(body, number, 0, defects)
            if "\r" in body:
                defects.add(
                    "READ.LINE-END", number, detail=f"character {body.index(chr(13)) + 1} of the line"
                )
        yield Line(number, body, end)
    if maybe_utf8 and n_beyond_ascii:
        defects.add("READ.ENCODING-OTHER", detail=f"{n_beyond_ascii} lines beyond ASCII")
    if how.by_mark and wide:
        defects.note("READ.UTF-16")


def _byte_lines(stream: BinaryIO, defects: Defects) -> Iterator[bytes]:
    number = 0
    while line := stream.readline(LINE_BYTES + 1):
        number += 1
        _check_length(line, b"\n", b"\r", number, defects)
        yield line


def _wide_lines(stream: BinaryIO, encoding: str, defects: Defects) -> Iterator[bytes]:
    """Lines of UTF-16: a line feed is two bytes at an even place; byte 0A alone is half of many other
    characters."""
    feed = "\n".encode(encoding)
    rest = b""
    number = 0
    while block := stream.read(_BLOCK):
        rest += block
        start = 0
        while (at := _aligned(rest, feed, start)) >= 0:
            number += 1
            line = rest[start : at + 2]
            _check_length(line, feed, b"\r", number, defects)
            yield line
            start = at + 2
        rest = rest[start:]
        _check_length(rest, feed, b"\r", number + 1, defects)
    if rest:
        yield rest


def _aligned(data: bytes, feed: bytes, start: int) -> int:
    at = data.find(feed, start)
    while at >= 0 and (at - start) % 2:
        at = data.find(feed, at + 1)
    return at


def _check_length(line: bytes, feed: bytes, carriage: bytes, number: int, defects: Defects) -> None:
    if len(line) > LINE_BYTES and not (line.endswith(feed) and len(line) - len(feed) <= LINE_BYTES):
        code = "READ.LINE-END" if line.count(carriage) > 1 else "READ.LINE-LONG"
        raise defects.fatal(code, number)


def _decoded(line: bytes, encoding: str, number: int, defects: Defects) -> str:
    try:
        return line.decode(encoding)
    except UnicodeDecodeError as error:
        defects.add(
            "READ.ENCODING", number, detail=f"byte {error.start + 1} of the line is not {encoding.upper()}"
        )
        return line.decode(encoding, errors="replace").replace("\ufffd", "?")


def _is_utf8(line: bytes) -> bool:
    try:
        line.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return True


def _without_end(text: str) -> tuple[str, str]:
    if text.endswith("\r\n"):
        return text[:-2], "\r\n"
    return (text[:-1], "\n") if text.endswith("\n") else (text, "")


def scan(text: str, line: int, column: int, defects: Defects) -> None:
    """List the first character of each forbidden kind, by its place in the text; note a replacement
    character."""
    seen: set[str] = set()
    for match in _BAD.finditer(text):
        kind = str(match.lastgroup)
        if kind in seen:
            continue
        seen.add(kind)
        where = f"character {match.start() + 1} of the {'cell' if column else 'line'}"
        if kind == "replaced":
            defects.note("READ.REPLACED", line, column, detail=where)
        else:
            defects.add(_CODE[kind], line, column, detail=where)
