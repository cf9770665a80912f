"""A delimited text file as rows. No detection of anything: separator and encoding are declared."""

from __future__ import annotations

from collections.abc import Iterator
from typing import BinaryIO

from outcomes.errors import UsageError
from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.grid import FileSpec, Row, SheetSpec
from outcomes.intake.reading.record import Splitter
from outcomes.intake.reading.text import Line, lines

SEPARATORS = (",", ";", "\t", "|")


class Delimited:
    """Rows of a text file, from the declared header line on; the first is the header. May be walked
    repeatedly."""

    has_widths = True

    def __init__(self, stream: BinaryIO, spec: FileSpec, sheet: SheetSpec) -> None:
        if spec.separator not in SEPARATORS:
            raise UsageError(
                "MAPPING.SEPARATOR", "a separator that is not read", todo="use one of , ; | or tab"
            )
        self.stream = stream
        self.spec = spec
        self.separator = spec.separator
        self.header_line = sheet.header_line
        self.position = sheet.position

    def rows(self, defects: Defects) -> Iterator[Row]:
        """Every record, blank lines as rows without cells. Lists defects of text and quoting on the way."""
        if self.position != 1:
            raise defects.fatal("READ.SHEET", detail="a text file holds one table")
        splitter = Splitter(self.separator, defects)
        ends = {"\n": 0, "\r\n": 0, "": 0}
        last: Line | None = None
        n_before = defects.n
        for line in lines(self.stream, self.spec.encoding, defects):
            last = line
            if line.number < self.header_line:
                n_before = defects.n
                continue
            was_open = splitter.is_open
            fields = splitter.feed(line)
            if fields is None:
                continue
            ends[line.end] += 1
            is_cut = not line.end and line.number > 1
            yield _row(splitter, fields, was_open, defects.n > n_before, is_cut=is_cut)
            n_before = defects.n
        splitter.finish()
        if last is None:
            raise defects.fatal("READ.EMPTY")
        self._note_ends(ends, last, defects)

    def _note_ends(self, ends: dict[str, int], last: Line, defects: Defects) -> None:
        if ends["\n"] and ends["\r\n"]:
            defects.note(
                "READ.LINE-ENDS-MIXED", detail=f"{ends[chr(10)]} LF and {ends[chr(13) + chr(10)]} CRLF"
            )
        if not last.end and last.number > 1:
            defects.note("READ.NO-FINAL-LINE-END", last.number)


def _row(splitter: Splitter, fields: list[str], was_open: bool, is_bad: bool, *, is_cut: bool) -> Row:
    """A row whose text or quoting is wrong has no width: what follows from the defect is not listed again."""
    is_line_blank = len(fields) == 1 and not fields[0].strip() and not was_open
    cells = [] if is_line_blank else [field or None for field in fields]
    width = 0 if is_bad or is_line_blank else len(fields)
    return Row(splitter.start, list(cells), width, is_cut, splitter.size)
