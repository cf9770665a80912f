"""Sheets as one workbook whose bytes depend on nothing but the cells."""

from __future__ import annotations

import io
import re
import zipfile
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path

from openpyxl import Workbook
from openpyxl.cell import Cell as BookCell

from synthetic_cohort.sheets import Cell, Sheet

_STAMP = datetime(2000, 1, 1)
_STAMP_TEXT = "2000-01-01T00:00:00Z"
_MOMENT = "yyyy-mm-dd hh:mm"


def workbook_bytes(sheets: Sequence[Sheet]) -> bytes:
    """The workbook: typed dates, #-words as spreadsheet errors, and text that never is a formula."""
    book = Workbook()
    book.remove(book.active)
    book.properties.created = book.properties.modified = _STAMP
    for sheet in sheets:
        page = book.create_sheet(sheet.name)
        rows: list[list[Cell]] = [*sheet.titles, [*sheet.header], *(r.cells for r in sheet.rows)]
        for i, cells in enumerate(rows, start=1):
            for j, value in enumerate(cells, start=1):
                if value is not None and value != "":
                    _set(page.cell(i, j), value)
    buffer = io.BytesIO()
    book.save(buffer)
    return _with_fixed_dates(buffer.getvalue())


def _set(cell: BookCell, value: Cell) -> None:
    cell.value = value
    if isinstance(value, datetime):
        cell.number_format = _MOMENT
    elif isinstance(value, str):
        cell.data_type = "e" if re.fullmatch(r"#[A-Z/0-9]+[!?]|#N/A", value) else "s"


def _with_fixed_dates(data: bytes) -> bytes:
    """The same archive with fixed times of its members and in its properties."""
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
        for name in sorted(old.namelist(), key=lambda n: (n != "[Content_Types].xml", n)):
            content = old.read(name)
            if name == "docProps/core.xml":
                content = re.sub(
                    rb"(<dcterms:(?:created|modified)[^>]*>)[^<]*", rb"\g<1>" + _STAMP_TEXT.encode(), content
                )
            info = zipfile.ZipInfo(name, date_time=(2000, 1, 1, 0, 0, 0))
            info.compress_type = zipfile.ZIP_DEFLATED
            new.writestr(info, content)
    return out.getvalue()


def write_workbook(sheets: Sequence[Sheet], path: Path) -> None:
    """Write all sheets into one file."""
    path.write_bytes(workbook_bytes(sheets))
