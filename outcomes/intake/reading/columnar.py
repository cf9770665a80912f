"""A Parquet file as rows. Types are kept; what is neither text, number, truth value, date nor time is
refused."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, BinaryIO

import pyarrow as pa
import pyarrow.parquet as pq

from outcomes.intake.reading.arrow_cell import converter, is_text, to_cells
from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.grid import Cell, Row, SheetSpec
from outcomes.intake.reading.limits import COLUMNS, FIELD_CHARS, MIB, UNPACKED_BYTES
from outcomes.intake.reading.text import scan

_BATCH_ROWS = 4_096
_BROKEN = (pa.ArrowException, OSError, ValueError, LookupError, OverflowError, RuntimeError)


class Columnar:
    """The header of a Parquet file, then its rows; the line of a row is its number, from 1."""

    has_widths = False
    separator = ""

    def __init__(self, stream: BinaryIO, sheet: SheetSpec, max_rows: int, defects: Defects) -> None:
        if sheet.position != 1 or sheet.header_line != 1:
            raise defects.fatal("READ.SHEET", detail="a Parquet file holds one table and its header")
        stream.seek(0)
        if stream.read(4) != b"PAR1":
            raise defects.fatal("READ.ENCRYPTED")
        self.stream = stream
        schema = self._open(defects, []).schema_arrow
        self.names = schema.names
        if len(self.names) > COLUMNS:
            raise defects.fatal("READ.COLUMNS", detail=f"{len(self.names)} columns")
        self._refuse_types(schema, defects)
        self._texts = [field.name for field in schema if is_text(field.type)]
        self._check_sizes(max_rows, defects)

    def _refuse_types(self, schema: pa.Schema, defects: Defects) -> None:
        wrong = [place for place, field in enumerate(schema, 1) if converter(field.type) is None]
        for place in wrong:
            defects.add("READ.PARQUET-TYPE", 0, place)
        if wrong:
            raise defects.fatal_again()

    def _check_sizes(self, max_rows: int, defects: Defects) -> None:
        about = self._open(defects, []).metadata
        if about.num_rows > max_rows:
            raise defects.fatal("READ.ROWS", detail=f"{about.num_rows}, {max_rows} are allowed")
        sizes = [about.row_group(i).total_byte_size for i in range(about.num_row_groups)]
        if any(size > UNPACKED_BYTES for size in sizes):
            raise defects.fatal("READ.PACKED", detail="a group of rows")

    def _open(self, defects: Defects, texts: list[str]) -> pq.ParquetFile:
        self.stream.seek(0)
        try:
            return pq.ParquetFile(
                self.stream,
                read_dictionary=texts,
                thrift_string_size_limit=64 * MIB,
                thrift_container_size_limit=1_000_000,
                page_checksum_verification=True,
            )
        except _BROKEN:
            raise defects.fatal("READ.PARQUET") from None

    def rows(self, defects: Defects) -> Iterator[Row]:
        """The header, then every row; lists defects of texts on the way."""
        yield Row(1, list(self.names))
        number = 0
        file = self._open(defects, self._texts)
        batches = file.iter_batches(batch_size=_BATCH_ROWS, use_threads=False)
        while (batch := self._next(batches, defects)) is not None:
            columns = self._columns(batch, number, defects)
            for cells in zip(*columns, strict=True):
                number += 1
                size = sum(len(cell) for cell in cells if isinstance(cell, str))
                yield Row(number, list(cells), size=size)

    def _next(self, batches: Iterator[Any], defects: Defects) -> pa.RecordBatch | None:
        try:
            return next(batches, None)
        except _BROKEN:
            raise defects.fatal("READ.PARQUET") from None

    def _columns(self, batch: pa.RecordBatch, above: int, defects: Defects) -> list[list[Cell]]:
        columns: list[list[Cell]] = []
        for place, column in enumerate(batch.columns, 1):
            try:
                cells = to_cells(column)
            except UnicodeDecodeError:
                raise defects.fatal("READ.ENCODING", above + 1, place, detail="or soon after it") from None
            except _BROKEN:
                raise defects.fatal("READ.PARQUET", above + 1, place) from None
            if is_text(column.type):
                _check_texts(cells, above, place, defects)
            columns.append(cells)
        return columns


def _check_texts(cells: list[Cell], above: int, place: int, defects: Defects) -> None:
    for number, cell in enumerate(cells, above + 1):
        if isinstance(cell, str):
            if not cell.isprintable() or "\ufffd" in cell:
                scan(cell, number, place, defects)
            if len(cell) > FIELD_CHARS:
                defects.add("READ.FIELD-LONG", number, place)
