"""One sheet of a workbook as rows. Cells are taken by their own place, so that a gap can never shift a
value."""

from __future__ import annotations

from collections.abc import Iterator

from outcomes.intake.reading.cell_value import CellValue
from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.grid import Cell, Row, SheetSpec
from outcomes.intake.reading.merged import Merged, merged_ranges, place_of
from outcomes.intake.reading.workbook import SheetPart, Workbook, whole
from outcomes.intake.reading.xml_part import Part

_LAST_ROW, _LAST_COLUMN = 1_048_576, 16_384
_TRUE = ("1", "true")


class Worksheet:
    """Rows of a sheet from its header row on; rows that the file leaves out come without cells."""

    has_widths = False
    separator = ""

    def __init__(self, workbook: Workbook, sheet: SheetSpec, defects: Defects) -> None:
        if not 1 <= sheet.position <= len(workbook.sheets):
            raise defects.fatal("READ.SHEET", detail=f"sheet {sheet.position} of {len(workbook.sheets)}")
        self.workbook = workbook
        self.sheet = sheet
        self.part: SheetPart = workbook.sheets[sheet.position - 1]
        if not self.part.part:
            raise defects.fatal("READ.SHEET", detail=f"sheet {sheet.position} is not a table")
        self._ranges = merged_ranges(workbook.package, self.part.part, defects)

    def rows(self, defects: Defects) -> Iterator[Row]:
        """Every row from the header row on; lists defects and notes of cells on the way."""
        header_line = self.sheet.header_line
        merged = Merged(self._ranges, header_line)
        for column in merged.in_header:
            defects.add("READ.HEADER-MERGED", header_line, column)
        content = _Content(self.workbook, defects, header_line)
        expected = header_line
        for _ in self.workbook.package.walk(self.part.part, content, defects):
            for row in content.take():
                yield from (Row(line, merged.empty(line)) for line in range(expected, row.line))
                merged.cover(row)
                yield row
                expected = row.line + 1
        self._note(content, merged, defects)

    def _note(self, content: _Content, merged: Merged, defects: Defects) -> None:
        first_of = "{} in all, this is the first"
        if self.part.is_hidden:
            defects.note("READ.HIDDEN-SHEET")
        if content.hidden_rows:
            n = len(content.hidden_rows)
            defects.note("READ.HIDDEN-ROWS", content.hidden_rows[0], detail=first_of.format(n))
        for first, last in content.hidden_columns:
            defects.note("READ.HIDDEN-COLUMNS", 0, first, detail=f"columns {first} to {last}")
        if merged.in_data:
            line, column = merged.in_data[0]
            defects.note("READ.MERGED", line, column, detail=first_of.format(len(merged.in_data)))
        if content.values.n_formulae:
            n = content.values.n_formulae
            defects.note("READ.FORMULA", content.values.first_formula, detail=first_of.format(n))


class _Content(Part):
    """Collects finished rows. A file whose rows or cells are out of order is damaged: values could be
    lost."""

    def __init__(self, workbook: Workbook, defects: Defects, header_line: int) -> None:
        self.defects = defects
        self.header_line = header_line
        self.values = CellValue(workbook, defects)
        self.hidden_rows: list[int] = []
        self.hidden_columns: list[tuple[int, int]] = []
        self._rows: list[Row] = []
        self._is_data = False
        self._line = 0
        self._column = 0
        self._cells: list[Cell] = []

    def take(self) -> list[Row]:
        """Rows finished since the last call."""
        rows, self._rows = self._rows, []
        return rows

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if not self._is_data:
            if name == "sheetData":
                self._is_data = True
            elif name == "col" and attributes.get("hidden") in _TRUE:
                self._hide_columns(attributes)
        elif name == "c":
            self._start_cell(attributes)
        elif name == "row":
            self._start_row(attributes)
        else:
            self.values.start_inner(name)

    def end(self, name: str) -> None:
        if not self._is_data:
            return
        if name == "c":
            self._end_cell()
        elif name == "row":
            if self._line >= self.header_line:
                size = sum(len(cell) for cell in self._cells if isinstance(cell, str))
                self._rows.append(Row(self._line, self._cells, size=size))
        elif name == "sheetData":
            self._is_data = False
        else:
            self.values.end_inner(name)

    def text(self, data: str) -> None:
        if self._is_data:
            self.values.text(data)

    def _hide_columns(self, attributes: dict[str, str]) -> None:
        first, last = whole(attributes.get("min", "")), whole(attributes.get("max", ""))
        if 0 < first <= last:
            self.hidden_columns.append((first, last))

    def _start_row(self, attributes: dict[str, str]) -> None:
        given = attributes.get("r")
        line = self._line + 1 if given is None else whole(given)
        if not self._line < line <= _LAST_ROW:
            raise self.defects.fatal("READ.WORKBOOK", self._line, detail="rows out of order")
        self._line, self._column, self._cells = line, 0, []
        if attributes.get("hidden") in _TRUE and line > self.header_line:
            self.hidden_rows.append(line)

    def _start_cell(self, attributes: dict[str, str]) -> None:
        given = attributes.get("r")
        line, column = (self._line, self._column + 1) if given is None else place_of(given)
        if line != self._line or not self._column < column <= _LAST_COLUMN:
            raise self.defects.fatal("READ.WORKBOOK", self._line, detail="cells out of order")
        self._column = column
        self.values.start(line, column, attributes)

    def _end_cell(self) -> None:
        if self._line < self.header_line:
            return
        cell = self.values.finish()
        if cell is not None:
            self._cells.extend([None] * (self._column - 1 - len(self._cells)))
            self._cells.append(cell)
