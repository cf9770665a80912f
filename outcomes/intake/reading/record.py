"""Physical lines -> records of a delimited file. Every departure from the quoting rules is named, none is
repaired."""

from __future__ import annotations

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.limits import COLUMNS, FIELD_CHARS, RECORD_CHARS
from outcomes.intake.reading.text import Line

_QUOTE = '"'


class Splitter:
    """Fed line by line; gives a record as soon as one is complete. A quoted cell may hold line ends.

    start    physical line of the record's first line
    is_bad   a quotation mark of the record stands wrong, so its number of cells means nothing
    size     characters of the record
    """

    def __init__(self, separator: str, defects: Defects) -> None:
        self.separator = separator
        self.defects = defects
        self.is_open = False
        self.start = 0
        self.is_bad = False
        self.size = 0
        self._fields: list[str] = []
        self._open: list[str] = []
        self._open_line = 0

    def feed(self, line: Line) -> list[str] | None:
        """Fields of a finished record, or None if a quoted cell goes on in the next line."""
        text = line.text
        if self.is_open:
            self.size += len(text) + 1
            if self.size > RECORD_CHARS:
                raise self.defects.fatal("READ.RECORD-LONG", self.start, len(self._fields) + 1)
            self._open.append("\n")
            at = self._quoted(text, 0, line.number)
        else:
            self.start, self.is_bad, self.size = line.number, False, len(text)
            if _QUOTE not in text:
                return self._checked(text.split(self.separator))
            self._fields = []
            at = 0
        while not self.is_open and at <= len(text):
            at = self._field(text, at, line.number)
        return None if self.is_open else self._checked(self._fields)

    def finish(self) -> None:
        """At the end of the file: list a quotation mark that is still open."""
        if self.is_open:
            self.defects.add("READ.QUOTE-OPEN", self._open_line, len(self._fields) + 1)

    def _field(self, text: str, at: int, line: int) -> int:
        """Take the field that begins at `at`; where the next one begins, or beyond the text."""
        if len(self._fields) > COLUMNS:
            raise self.defects.fatal("READ.COLUMNS", line)
        if text.startswith(_QUOTE, at):
            self.is_open, self._open, self._open_line = True, [], line
            return self._quoted(text, at + 1, line)
        end = text.find(self.separator, at)
        end = len(text) if end < 0 else end
        field = text[at:end]
        if _QUOTE in field:
            self.defects.add("READ.QUOTE-INSIDE", line, len(self._fields) + 1)
            self.is_bad = True
        self._fields.append(field)
        return end + 1

    def _quoted(self, text: str, at: int, line: int) -> int:
        """Go on in a quoted field; where the next one begins, or beyond the text with the field still
        open."""
        while True:
            quote = text.find(_QUOTE, at)
            if quote < 0:
                self._open.append(text[at:])
                return len(text) + 1
            self._open.append(text[at:quote])
            if not text.startswith(_QUOTE, quote + 1):
                return self._close(text, quote + 1, line)
            self._open.append(_QUOTE)
            at = quote + 2

    def _close(self, text: str, at: int, line: int) -> int:
        self.is_open = False
        self._fields.append("".join(self._open))
        if at == len(text) or text.startswith(self.separator, at):
            return at + 1
        begun = f"the cell was opened in line {self._open_line}" if self._open_line != line else ""
        self.defects.add("READ.QUOTE-AFTER", line, len(self._fields), detail=begun)
        self.is_bad = True
        end = text.find(self.separator, at)
        return len(text) + 1 if end < 0 else end + 1

    def _checked(self, fields: list[str]) -> list[str]:
        if len(fields) > COLUMNS:
            raise self.defects.fatal("READ.COLUMNS", self.start, detail=f"{len(fields)} cells in the row")
        if self.size > FIELD_CHARS:
            for number, field in enumerate(fields, 1):
                if len(field) > FIELD_CHARS:
                    self.defects.add("READ.FIELD-LONG", self.start, number)
        return fields
