"""Tiny files for the tests of the reader, and what the reader says of them."""

from __future__ import annotations

import io
from typing import Any

import pytest

from outcomes.errors import DataRefused
from outcomes.findings import Finding
from outcomes.intake.reading import Cell, FileSpec, Grid, SheetSpec, read


def spec(kind: str = "csv", header_line: int = 1, **declared: Any) -> FileSpec:
    """A declaration of one table in the file with the key 'f'."""
    declared.setdefault("sheets", (SheetSpec("", 1, header_line),))
    return FileSpec("f", kind, **declared)


def grids(data: bytes | str, chunk_rows: int = 20_000, **declared: Any) -> list[Grid]:
    raw = data.encode() if isinstance(data, str) else data
    return list(read(io.BytesIO(raw), spec(**declared), chunk_rows=chunk_rows))


def rows(data: bytes | str, **declared: Any) -> list[list[Cell]]:
    """All rows of all chunks, row by row."""
    return [list(row) for grid in grids(data, **declared) for row in zip(*grid.cells, strict=True)]


def notes(data: bytes | str, **declared: Any) -> list[Finding]:
    found = [note for grid in grids(data, **declared) for note in grid.notes]
    assert all(note.effect == "note" for note in found)
    return found


def refused(data: bytes | str, **declared: Any) -> DataRefused:
    with pytest.raises(DataRefused) as caught:
        grids(data, **declared)
    assert caught.value.findings[0].code == caught.value.code
    assert all(f.effect == "file" and f.source == "f" for f in caught.value.findings)
    return caught.value


def places(data: bytes | str, **declared: Any) -> list[tuple[str, int, str]]:
    """(code without READ., line, column) of every defect."""
    found = refused(data, **declared).findings
    return [(f.code.removeprefix("READ."), f.line, f.column) for f in found]
