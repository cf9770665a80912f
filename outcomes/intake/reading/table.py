"""A table walked row by row: header, width of every row, rows that are not data. Same rules for text and
workbook."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Protocol

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.grid import Cell, Row, SheetSpec, is_blank, text_of
from outcomes.intake.reading.header import fold, judge_header
from outcomes.intake.reading.rowkind import is_header_again, is_totals, is_units

_TITLE_ROWS = 10  # so many rows below the declared header are looked at for a better one


class Source(Protocol):
    """Where rows come from. has_widths: a row with another number of cells than the header is a defect."""

    has_widths: bool
    separator: str

    def rows(self, defects: Defects) -> Iterator[Row]:
        """Rows from the declared header line on."""


class Table:
    """One walk through one table. After `open`, names and places are known; after `walk` is exhausted, the
    rest.

    names    header of every column of the file, '' if it has none
    n_rows   rows given so far
    """

    def __init__(self, source: Source, sheet: SheetSpec, max_rows: int, defects: Defects) -> None:
        self.source = source
        self.sheet = sheet
        self.max_rows = max_rows
        self.defects = defects
        self.names: tuple[str, ...] = ()
        self.n_rows = 0
        self._folded: list[str] = []
        self._nameless: set[int] = set()
        self._rows: Iterator[Row] = iter(())
        self._n_blank = self._n_empty = self._first_blank = self._first_empty = 0
        self._n_blank_noted = self._n_empty_noted = 0

    def open(self) -> None:
        """Read the header. Raises Fatal if there is none."""
        self._rows = self.source.rows(self.defects)
        line = self.sheet.header_line
        self.names = judge_header(next(self._rows, None), line, self.source.separator, self.defects)
        self._folded = [fold(name) for name in self.names]
        self._nameless = {i for i, name in enumerate(self.names) if not name}

    @property
    def kept(self) -> list[int]:
        """Indices of the columns that have a header."""
        return [i for i, name in enumerate(self.names) if name]

    def walk(self) -> Iterator[Row]:
        """Rows of data, each as wide as the header; defects are listed on the way."""
        for row in self._rows:
            if is_blank(row.cells):
                self._pass_over(row)
                continue
            self.n_rows += 1
            if self.n_rows > self.max_rows:
                raise self.defects.fatal("READ.ROWS", row.line, detail=f"{self.max_rows} are allowed")
            self._refuse_title(row)
            self._n_blank_noted, self._n_empty_noted = self._n_blank, self._n_empty
            if self._is_data(row):
                yield row
        self._note_gaps()

    def _pass_over(self, row: Row) -> None:
        """Counted; blank rows at the end of the table are not worth a note."""
        if row.cells or not self.source.has_widths:
            self._n_empty += 1
            self._first_empty = self._first_empty or row.line
        else:
            self._n_blank += 1
            self._first_blank = self._first_blank or row.line

    def _refuse_title(self, row: Row) -> None:
        if self.n_rows > _TITLE_ROWS or len(self.names) - len(self._nameless) > 1:
            return
        if sum(1 for cell in row.cells if text_of(cell).strip()) > 1:
            detail = f"it holds a single cell; line {row.line} is wider and may be the header"
            raise self.defects.fatal("READ.HEADER-LINE", self.sheet.header_line, detail=detail)

    def _is_data(self, row: Row) -> bool:
        """Check one row and bring it to the width of the header; False if it is listed as something else than
        data."""
        if self.source.has_widths and row.width and not self._has_right_width(row):
            return False
        if not self.source.has_widths:
            self._list_beyond(row)
        _fit(row.cells, len(self.names))
        for index in sorted(self._nameless):
            if text_of(row.cells[index]).strip():
                self._nameless.discard(index)
                self.defects.add("READ.HEADER-EMPTY", row.line, index + 1)
        code = self._not_data(row.cells)
        if code:
            self.defects.add(code, row.line)
        return not code

    def _has_right_width(self, row: Row) -> bool:
        n = len(self.names)
        if row.width == n:
            return True
        if is_totals([*row.cells, *[None] * (n - row.width)], words_alone=not row.is_cut):
            code = "READ.TOTALS-ROW"
        elif row.width > n:
            code = "READ.ROW-LONG"
        else:
            code = "READ.CUT-OFF" if row.is_cut else "READ.ROW-SHORT"
        self.defects.add(code, row.line, detail=f"{row.width} instead of {n}")
        return False

    def _not_data(self, cells: list[Cell]) -> str:
        if is_header_again(cells, self._folded):
            return "READ.HEADER-REPEATED"
        if self.n_rows == 1 and is_units(cells):
            return "READ.UNITS-ROW"
        return "READ.TOTALS-ROW" if is_totals(cells) else ""

    def _list_beyond(self, row: Row) -> None:
        """Content to the right of the last header of a workbook's table."""
        n = len(self.names)
        extra = next((i for i, cell in enumerate(row.cells[n:], n + 1) if text_of(cell).strip()), 0)
        if extra:
            self.defects.add("READ.HEADER-EMPTY", row.line, extra)

    def _note_gaps(self) -> None:
        note = self.defects.note
        if self._n_blank_noted:
            note(
                "READ.BLANK-LINES",
                self._first_blank,
                detail=f"{self._n_blank_noted} in all, this is the first",
            )
        if self._n_empty_noted:
            note(
                "READ.EMPTY-ROWS",
                self._first_empty,
                detail=f"{self._n_empty_noted} in all, this is the first",
            )
        if self._nameless:
            places = ", ".join(str(i + 1) for i in sorted(self._nameless))
            note("READ.EMPTY-COLUMNS", self.sheet.header_line, detail=f"column {places}")


def _fit(cells: list[Cell], width: int) -> None:
    del cells[width:]
    cells.extend([None] * (width - len(cells)))
