"""Sheets as CSV text, and the physical line on which each row begins."""

from __future__ import annotations

import csv
import io
from pathlib import Path

from synthetic_cohort.sheets import Row, Sheet


def csv_text(sheet: Sheet, separator: str) -> tuple[str, list[int]]:
    """The text and, for each row, the line (from 1) on which it begins; a quoted line break makes a row longer."""
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer, delimiter=separator, lineterminator="\r\n")
    for title in sheet.titles:
        writer.writerow(title)
    writer.writerow(sheet.header)
    line = len(sheet.titles) + 2
    lines = []
    for row in sheet.rows:
        lines.append(line)
        writer.writerow(["" if c is None else c for c in row.cells])
        line += 1 + _breaks(row)
    return buffer.getvalue(), lines


def _breaks(row: Row) -> int:
    return sum(c.count("\n") for c in row.cells if isinstance(c, str))


def write_csv(sheet: Sheet, path: Path, separator: str, encoding: str) -> list[int]:
    """Write one sheet; return the first physical line of each row."""
    text, lines = csv_text(sheet, separator)
    path.write_bytes(text.encode(encoding))
    return lines
