"""Merged cells of a sheet: only one of them has a value, and which rows it is meant for is anybody's
guess."""

from __future__ import annotations

import re
from dataclasses import dataclass

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.grid import Cell, ErrorCell, Row
from outcomes.intake.reading.limits import COLUMNS, MERGED_RANGES
from outcomes.intake.reading.package import Package
from outcomes.intake.reading.xml_part import Part

_MERGED = ErrorCell("merged")
_PLACE = re.compile("([A-Z]{1,3})([1-9][0-9]{0,6})")


def place_of(reference: str) -> tuple[int, int]:
    """Row and column number of a reference such as AB12; (0, 0) if it is none.

    >>> place_of("AB12"), place_of("12")
    ((12, 28), (0, 0))
    """
    match = _PLACE.fullmatch(reference)
    if not match:
        return 0, 0
    column = 0
    for letter in match[1]:
        column = column * 26 + ord(letter) - 64
    return int(match[2]), column


@dataclass(frozen=True, order=True)
class Range:
    """First and last row and column of a merged cell, all included."""

    first_row: int
    last_row: int
    first_column: int
    last_column: int


def merged_ranges(package: Package, part: str, defects: Defects) -> list[Range]:
    """All merged cells, by place. They are listed behind the rows, so they need a look at the file of their
    own; a sheet in which the word does not occur is not parsed for it."""
    tail = b""
    for block in package.blocks(part, defects):
        # A part in UTF-16 has a zero byte in every second place, so the word must be looked for by parsing.
        if b"mergeCell" in tail + block or b"\x00" in block:
            found = _Ranges(defects)
            for _ in package.walk(part, found, defects):
                pass
            return sorted(found.ranges)
        tail = block[-16:]
    return []


class Merged:
    """The merged cells below the header, met row by row in ascending order."""

    def __init__(self, ranges: list[Range], header_line: int) -> None:
        self.in_header = [r.first_column for r in ranges if r.first_row <= header_line <= r.last_row]
        below = [r for r in ranges if r.first_row > header_line]
        self.in_data = [(r.first_row, r.first_column) for r in below]
        self._waiting = below[::-1]
        self._open: list[Range] = []

    def empty(self, line: int) -> list[Cell]:
        """Cells of a row that the file leaves out."""
        row = Row(line, [])
        self.cover(row)
        return row.cells

    def cover(self, row: Row) -> None:
        """Put a mark into every merged cell of the row, within the columns that a table may have."""
        while self._waiting and self._waiting[-1].first_row <= row.line:
            self._open.append(self._waiting.pop())
        if self._open:
            self._open = [r for r in self._open if r.last_row >= row.line]
        for merged in self._open:
            last = min(merged.last_column, COLUMNS)
            row.cells.extend([None] * (last - len(row.cells)))
            for column in range(merged.first_column, last + 1):
                row.cells[column - 1] = _MERGED


class _Ranges(Part):
    def __init__(self, defects: Defects) -> None:
        self.defects = defects
        self.ranges: list[Range] = []

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if name != "mergeCell":
            return
        first, _, last = attributes.get("ref", "").partition(":")
        (top, left), (bottom, right) = place_of(first), place_of(last or first)
        if not (0 < top <= bottom and 0 < left <= right):
            raise self.defects.fatal("READ.WORKBOOK", detail="a merged cell without a place")
        if len(self.ranges) >= MERGED_RANGES:
            raise self.defects.fatal("READ.WORKBOOK", detail="too many merged cells")
        self.ranges.append(Range(top, bottom, left, right))
