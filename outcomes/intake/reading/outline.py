"""A first look at a file of which nothing is declared: what tables it holds, for the draft of a mapping file.

Nothing here is used for an import: the draft is read by a person, and the import goes by the mapping alone.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import islice
from typing import BinaryIO

from outcomes.errors import DataRefused
from outcomes.intake.reading.defects import Defects, Fatal
from outcomes.intake.reading.grid import Cell, FileSpec, Row, SheetSpec
from outcomes.intake.reading.guess import (
    LOOKED_AT,
    Guess,
    guess_encoding,
    guess_header,
    guess_separator,
    is_code_list,
    top_rows,
)
from outcomes.intake.reading.package import Package
from outcomes.intake.reading.reader import read
from outcomes.intake.reading.rewind import rewindable
from outcomes.intake.reading.sniff import WORDS, kind_of
from outcomes.intake.reading.workbook import Workbook
from outcomes.intake.reading.worksheet import Worksheet

_KIND_OF_BYTES = {"text": "csv", "zip": "xlsx", "parquet": "parquet"}
_ROWS_HELD = 200_000


@dataclass
class SheetOutline:
    """One table of a file.

    spec          what `read` needs for this table, its encoding and separator as guessed
    position      1-based number of the sheet; its name is not shown
    headers       () if the table was refused
    blocks        first and last line of every run of rows without a gap (two code lists in one sheet)
    is_code_list  codes beside their meaning, as a guess
    is_hidden     the sheet is hidden in the workbook
    evidence      'kind', 'encoding', 'separator', 'header_line' -> why
    is_guess      names of those that were guessed, not read
    refusal       why the table cannot be read as it is
    """

    spec: FileSpec
    position: int
    header_line: int
    evidence: dict[str, str]
    is_guess: tuple[str, ...]
    is_hidden: bool = False
    headers: tuple[str, ...] = ()
    n_rows: int = 0
    blocks: list[tuple[int, int]] = field(default_factory=list)
    is_code_list: bool = False
    refusal: DataRefused | None = None
    _data: BinaryIO | None = field(default=None, repr=False)

    def columns(self, max_rows: int = _ROWS_HELD) -> Iterator[tuple[str, list[Cell]]]:
        """(header, cells of the first `max_rows` rows) of every column."""
        held: list[list[Cell]] = [[] for _ in self.headers]
        n = 0
        for grid in read(self._data, self.spec) if self._data is not None and self.headers else ():
            for column, cells in zip(held, grid.cells, strict=True):
                column.extend(cells[: max_rows - n])
            n += len(grid.lines)
            if n >= max_rows:
                break
        yield from zip(self.headers, held, strict=True)


def outline(
    data: bytes | BinaryIO, kind: str | None = None, encoding: str | None = None, key: str = "file"
) -> list[SheetOutline]:
    """Every table of a file, with the evidence of each guess.

    kind, encoding: given by the user, instead of a guess. Raises DataRefused if the file cannot be opened at
    all, or if none of its tables can be read; a table of several that cannot be read comes with its
    `refusal`.
    """
    defects = Defects(key)
    try:
        stream = rewindable(data, defects)
        found = kind or _guess_kind(stream, defects)
        given = _tables(stream, FileSpec(key, found), encoding, defects)
    except Fatal:
        raise defects.refusal() from None
    for sheet in given:
        _fill(sheet, stream)
    refusals = [sheet.refusal for sheet in given if sheet.refusal is not None]
    if refusals and len(refusals) == len(given):
        raise refusals[0]
    return given


def _guess_kind(stream: BinaryIO, defects: Defects) -> str:
    bytes_are = kind_of(stream)
    if bytes_are == "empty":
        raise defects.fatal("READ.EMPTY")
    if bytes_are == "encrypted":
        raise defects.fatal("READ.ENCRYPTED")
    if bytes_are not in _KIND_OF_BYTES:
        raise defects.fatal("READ.KIND", detail=f"it is {WORDS[bytes_are]}, which is not read")
    return _KIND_OF_BYTES[bytes_are]


def _tables(stream: BinaryIO, spec: FileSpec, encoding: str | None, defects: Defects) -> list[SheetOutline]:
    evidence = {"kind": "first bytes of the file"}
    if spec.kind == "parquet":
        here = FileSpec(spec.key, "parquet", sheets=(SheetSpec(),))
        return [SheetOutline(here, 1, 1, evidence, ())]
    if spec.kind == "xlsx":
        return _workbook_tables(stream, spec, evidence, defects)
    return [_text_table(stream, spec, encoding, evidence)]


def _text_table(
    stream: BinaryIO, spec: FileSpec, encoding: str | None, evidence: dict[str, str]
) -> SheetOutline:
    letters = Guess(encoding, "as given", True) if encoding else guess_encoding(stream)
    separator = guess_separator(stream, letters.value)
    here = FileSpec(spec.key, "csv", letters.value, separator.value)
    line, why = guess_header(top_rows(stream, here))
    evidence = {**evidence, "encoding": letters.evidence, "separator": separator.evidence, "header_line": why}
    guesses = ("separator", "header_line") if letters.is_sure else ("encoding", "separator", "header_line")
    here = FileSpec(spec.key, "csv", letters.value, separator.value, sheets=(SheetSpec("", 1, line),))
    return SheetOutline(here, 1, line, evidence, guesses)


def _workbook_tables(
    stream: BinaryIO, spec: FileSpec, evidence: dict[str, str], defects: Defects
) -> list[SheetOutline]:
    workbook = Workbook(Package(stream, defects), defects)
    tables = []
    for position, part in enumerate(workbook.sheets, 1):
        line, why = guess_header(_sheet_top(workbook, position, defects.source))
        sheet = SheetSpec(f"sheet{position}", position, line)
        here = FileSpec(spec.key, "xlsx", sheets=(sheet,))
        found = {**evidence, "header_line": why}
        tables.append(SheetOutline(here, position, line, found, ("header_line",), part.is_hidden))
    return tables


def _sheet_top(workbook: Workbook, position: int, key: str) -> list[Row]:
    rows: list[Row] = []
    unjudged = Defects(key)
    try:
        sheet = Worksheet(workbook, SheetSpec("", position, 1), unjudged)
        rows.extend(islice(sheet.rows(unjudged), LOOKED_AT))
    except Fatal:
        pass
    return rows


def _fill(sheet: SheetOutline, stream: BinaryIO) -> None:
    sheet._data = stream
    first: list[list[Cell]] = []
    block_of: list[int] = []
    try:
        for grid in read(stream, sheet.spec):
            sheet.headers = grid.header
            first = first or grid.cells
            sheet.n_rows += len(grid.lines)
            for line in grid.lines:
                if sheet.blocks and sheet.blocks[-1][1] == line - 1:
                    sheet.blocks[-1] = (sheet.blocks[-1][0], line)
                else:
                    sheet.blocks.append((line, line))
                block_of.append(len(sheet.blocks))
    except DataRefused as refusal:
        sheet.refusal = refusal
        return
    sheet.is_code_list = is_code_list(first, block_of)
    if sheet.is_code_list:
        sheet.evidence["is_code_list"] = "two columns, short distinct codes beside words"
