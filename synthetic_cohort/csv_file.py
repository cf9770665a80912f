"""Sheets as CSV text."""

from __future__ import annotations

import csv
import io
from pathlib import Path

from synthetic_cohort.sheets import Sheet


def csv_text(sheet: Sheet, separator: str) -> str:
    """The whole file; cells with separators, quotes or line breaks are quoted."""
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer, delimiter=separator, lineterminator="\r\n")
    for title in sheet.titles:
        writer.writerow(title)
    writer.writerow(sheet.header)
    for row in sheet.rows:
        writer.writerow(["" if c is None else c for c in row.cells])
    return buffer.getvalue()


def write_csv(sheet: Sheet, path: Path, separator: str, encoding: str) -> None:
    """Write one sheet."""
    path.write_bytes(csv_text(sheet, separator).encode(encoding))
