"""The strict reader: bytes of an export -> text cells with their place, or a refusal that names everything
wrong.

A file is surveyed whole before a cell of it is given out, so that defects of its structure come before
defects of its cells and no row of a broken file is ever used. A small file is held meanwhile; a large one is
read a second time.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from itertools import chain
from typing import BinaryIO

from outcomes.errors import UsageError
from outcomes.findings import Finding
from outcomes.intake.reading.columnar import Columnar
from outcomes.intake.reading.defects import Defects, Fatal
from outcomes.intake.reading.delimited import Delimited
from outcomes.intake.reading.grid import FileSpec, Grid, Row, SheetSpec
from outcomes.intake.reading.limits import CHUNK_CHARS, KEPT_CELLS
from outcomes.intake.reading.package import Package
from outcomes.intake.reading.rewind import rewindable
from outcomes.intake.reading.sniff import WORDS, kind_of
from outcomes.intake.reading.table import Source, Table
from outcomes.intake.reading.workbook import Workbook
from outcomes.intake.reading.worksheet import Worksheet

KINDS = ("csv", "xlsx", "parquet")
_BYTES_OF = {"csv": "text", "xlsx": "zip", "parquet": "parquet"}


@dataclass
class _Survey:
    """What one walk through a table found; rows is None if they were too many to hold."""

    sheet: SheetSpec
    source: Source
    table: Table
    notes: list[Finding]
    rows: list[Row] | None


def read(data: bytes | BinaryIO, spec: FileSpec, *, chunk_rows: int = 20_000) -> Iterator[Grid]:
    """Chunks of at most `chunk_rows` rows of every declared sheet, in the order of `spec.sheets`.

    data: the bytes, or an open binary stream; it is read to its end, possibly twice, and not closed. The
    first Grid of a sheet comes even if it has no rows. Raises DataRefused (code READ.…, findings with line
    and column, never a value or a file name) before the first Grid; UsageError if the declaration itself is
    not usable.

    >>> grid = next(read(b'run,kg\\n007,"81,5"\\n', FileSpec("demo", "csv")))
    >>> grid.header, grid.lines, grid.cells
    (('run', 'kg'), [2], [['007'], ['81,5']])
    """
    defects = Defects(spec.key)
    try:
        surveys = _survey(data, spec, defects)
    except Fatal:
        raise defects.refusal() from None
    defects.raise_if_any()
    for survey in surveys:
        yield from _grids(survey, spec, max(1, chunk_rows))


def headers(data: bytes | BinaryIO, spec: FileSpec) -> dict[str, tuple[str, ...]]:
    """Key of every declared sheet -> its headers, without looking at the rows. Raises as `read`."""
    defects = Defects(spec.key)
    found: dict[str, tuple[str, ...]] = {}
    try:
        for sheet, source in _sources(data, spec, defects):
            defects.sheet = sheet.key
            table = Table(source, sheet, spec.max_rows, defects)
            table.open()
            found[sheet.key] = tuple(table.names[i] for i in table.kept)
    except Fatal:
        raise defects.refusal() from None
    defects.raise_if_any()
    return found


def _sources(data: bytes | BinaryIO, spec: FileSpec, defects: Defects) -> list[tuple[SheetSpec, Source]]:
    """Check the container and give a source of rows for every declared sheet."""
    if spec.kind not in KINDS:
        raise UsageError(
            "MAPPING.KIND", "a kind of file that is not read", todo=f"use one of {', '.join(KINDS)}"
        )
    stream = rewindable(data, defects)
    kind = kind_of(stream)
    if kind == "empty":
        raise defects.fatal("READ.EMPTY")
    if kind == "encrypted":
        raise defects.fatal("READ.ENCRYPTED")
    if kind != _BYTES_OF[spec.kind]:
        raise defects.fatal("READ.KIND", detail=f"it is {WORDS[kind]}, declared is {spec.kind}")
    sheets = spec.sheets or (SheetSpec(),)
    if spec.kind == "xlsx":
        workbook = Workbook(Package(stream, defects), defects)
        return [(sheet, _worksheet(workbook, sheet, defects)) for sheet in sheets]
    if spec.kind == "parquet":
        return [(sheet, Columnar(stream, sheet, spec.max_rows, defects)) for sheet in sheets]
    return [(sheet, Delimited(stream, spec, sheet)) for sheet in sheets]


def _worksheet(workbook: Workbook, sheet: SheetSpec, defects: Defects) -> Source:
    defects.sheet = sheet.key
    return Worksheet(workbook, sheet, defects)


def _survey(data: bytes | BinaryIO, spec: FileSpec, defects: Defects) -> list[_Survey]:
    surveys = []
    room = KEPT_CELLS
    for sheet, source in _sources(data, spec, defects):
        defects.sheet, defects.notes = sheet.key, []
        table = Table(source, sheet, spec.max_rows, defects)
        table.open()
        rows = _walk(table, room)
        if rows is not None:
            room -= len(rows) * len(table.names)
        surveys.append(_Survey(sheet, source, table, defects.notes, rows))
    return surveys


def _walk(table: Table, room: int) -> list[Row] | None:
    """Exhaust the table; its rows if they are at most `room` cells and one chunk of text."""
    kept: list[Row] | None = []
    size = 0
    for row in table.walk():
        if kept is not None:
            kept.append(row)
            size += row.size
            if len(kept) * len(table.names) > room or size > CHUNK_CHARS:
                kept = None
    return kept


def _again(survey: _Survey, spec: FileSpec) -> Iterator[Row]:
    """The rows of a second walk. The survey found no defect, so a defect now means that the file was written
    to."""
    defects = Defects(spec.key)
    defects.sheet = survey.sheet.key
    table = Table(survey.source, survey.sheet, spec.max_rows, defects)
    try:
        table.open()
        for row in table.walk():
            if defects.any:
                break
            yield row
    except Fatal:
        pass
    if defects.any or (table.names, table.n_rows) != (survey.table.names, survey.table.n_rows):
        changed = Defects(spec.key)
        changed.add("READ.CHANGED")
        raise changed.refusal()


def _grids(survey: _Survey, spec: FileSpec, chunk_rows: int) -> Iterator[Grid]:
    kept = survey.table.kept
    header = tuple(survey.table.names[i] for i in kept)
    places = tuple(i + 1 for i in kept)
    notes = survey.notes
    rows = iter(survey.rows if survey.rows is not None else _again(survey, spec))
    first = next(rows, None)
    if first is None:
        yield Grid(survey.sheet.key, header, [], [[] for _ in kept], places, notes)
        return
    for chunk in _chunks(chain([first], rows), chunk_rows):
        columns = list(zip(*(row.cells for row in chunk), strict=True))
        lines = [row.line for row in chunk]
        yield Grid(survey.sheet.key, header, lines, [list(columns[i]) for i in kept], places, notes)
        notes = []


def _chunks(rows: Iterable[Row], chunk_rows: int) -> Iterator[list[Row]]:
    chunk: list[Row] = []
    size = 0
    for row in rows:
        chunk.append(row)
        size += row.size
        if len(chunk) >= chunk_rows or size >= CHUNK_CHARS:
            yield chunk
            chunk, size = [], 0
    if chunk:
        yield chunk
