"""What the reader takes and gives: declarations of a file, and bounded chunks of cells with their place."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from outcomes.findings import Finding


@dataclass(frozen=True)
class SheetSpec:
    """What the mapping declares of one table inside a file.

    key          '' for a file with one table
    position     1-based number of the sheet in a workbook; 1 otherwise
    header_line  1-based physical line or sheet row that holds the header; what stands above is skipped
    """

    key: str = ""
    position: int = 1
    header_line: int = 1


@dataclass(frozen=True)
class FileSpec:
    """What the mapping declares of a file.

    key        the only name of the file that a message uses
    kind       'csv', 'xlsx' or 'parquet'
    encoding   of a csv: 'utf-8', 'utf-8-sig', 'cp1252', 'latin-1', 'utf-16', 'utf-16-le', 'utf-16-be'
    separator  of a csv: one of , ; | and tab
    sheets     empty means one table with its header in the first line
    """

    key: str
    kind: str
    encoding: str = "utf-8"
    separator: str = ","
    max_rows: int = 1_000_000
    sheets: tuple[SheetSpec, ...] = ()


@dataclass(frozen=True, slots=True)
class Number:
    """A number that the file holds as such. text is its shortest exact form, so that an identifier stays
    '12'."""

    value: float
    text: str


@dataclass(frozen=True, slots=True)
class ErrorCell:
    """A cell without a usable value: a formula never computed, an error of the spreadsheet, part of a merged
    cell."""

    kind: Literal["formula", "error", "merged"]


Cell = str | Number | dt.datetime | dt.date | dt.time | bool | ErrorCell | None


@dataclass
class Grid:
    """A chunk of rows of one sheet, one list per column. The first of a sheet comes even without rows.

    header   as written, NFC, trimmed
    lines    physical line of a record's first line, sheet row, or (Parquet) row number, each from 1
    cells    column-major; None is an empty cell
    places   number of each column in the file, from 1; differs from the index when empty columns were skipped
    notes    what was accepted but should be known; on the first chunk of a sheet only
    """

    sheet: str
    header: tuple[str, ...]
    lines: list[int]
    cells: list[list[Cell]]
    places: tuple[int, ...] = ()
    notes: list[Finding] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class Row:
    """A record before it is checked.

    width   cells that a delimited record really has; 0 where that means nothing
    is_cut  the last line of a file, without a line end
    size    characters
    """

    line: int
    cells: list[Cell]
    width: int = 0
    is_cut: bool = False
    size: int = 0


def is_blank(cells: Iterable[Cell]) -> bool:
    """No cell holds anything but spaces."""
    for cell in cells:  # noqa: SIM110 (met by every row; a loop takes half the time)
        if cell is not None and (not isinstance(cell, str) or cell.strip()):
            return False
    return True


def text_of(cell: Cell) -> str:
    """A cell as text, for headers and comparisons.

    >>> text_of(Number(2019.0, '2019')), text_of(None)
    ('2019', '')
    """
    if cell is None or isinstance(cell, ErrorCell):
        return ""
    if isinstance(cell, Number):
        return cell.text
    if isinstance(cell, (dt.date, dt.time)):
        return cell.isoformat()
    return str(cell)
