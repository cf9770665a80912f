"""A chunk of a sheet becomes a long table of cells without identifiers: line, run number, piece, text or typed value."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from typing import Any

import pyarrow as pa

from outcomes.intake.identify import SEPARATOR, RunNumbers
from outcomes.intake.mapping import Column, Sheet
from outcomes.intake.reading.grid import Cell, ErrorCell, Grid, Number

SCHEMA = pa.schema(
    [
        ("sheet_no", pa.int32()),
        ("line", pa.int32()),
        ("run_no", pa.int32()),
        ("piece_no", pa.int32()),
        ("text", pa.string()),
        ("number", pa.float64()),
        ("moment", pa.timestamp("us")),
        ("problem", pa.string()),
    ]
)


class WrongParts(str):
    """Text of a cell that does not have the declared number of parts."""


def key_text(cell: Cell) -> str:
    """An identifier is text: a number typed by a spreadsheet gives its shortest text."""
    if cell is None or isinstance(cell, ErrorCell):
        return ""
    if isinstance(cell, Number):
        return cell.text
    if isinstance(cell, (dt.datetime, dt.date, dt.time)):
        return cell.isoformat()
    return str(cell).strip()


def run_numbers(grid: Grid, sheet: Sheet, places: dict[str, int], numbers: RunNumbers) -> list[int | None]:
    """Run number of every row; None where the key is empty or damaged."""
    persons = _joined(grid, sheet.person, places) if sheet.person else [None] * len(grid.lines)
    runs = _joined(grid, sheet.run, places) if sheet.run else _attempts(persons, numbers)
    if sheet.one_run_each:
        persons = [None if run is None else SEPARATOR.join(("run", run)) for run in runs]
    found: list[int | None] = []
    for run, person in zip(runs, persons, strict=True):
        if run is None or (sheet.person and person is None):
            found.append(None)
        else:
            found.append(numbers.number(run, person))
    return found


def _attempts(persons: Sequence[str | None], numbers: RunNumbers) -> list[str | None]:
    """Keys of attempts that have no number of their own: the person and which of their attempts it is."""
    found: list[str | None] = []
    for person in persons:
        if person is None:
            found.append(None)
            continue
        number = numbers.attempts.get(person, 0) + 1
        numbers.attempts[person] = number
        found.append(SEPARATOR.join(("attempt", person, str(number))))
    return found


def _joined(grid: Grid, headers: Sequence[str], places: dict[str, int]) -> list[str | None]:
    parts = [[key_text(cell) for cell in grid.cells[places[h]]] for h in headers]
    return [SEPARATOR.join(values) if all(values) else None for values in zip(*parts, strict=True)]


def cell_table(
    grid: Grid,
    sheet_no: int,
    columns: Sequence[tuple[Column, Sequence[int]]],
    places: dict[str, int],
    run_no: Sequence[int | None],
) -> pa.Table:
    """Long table of one chunk (schema SCHEMA). columns: each mapped column with the numbers of its pieces."""
    tables = []
    n = len(grid.lines)
    line = pa.array(grid.lines, pa.int32())
    runs = pa.array(run_no, pa.int32())
    sheets = pa.array([sheet_no] * n, pa.int32())
    for column, piece_numbers in columns:
        raw = grid.cells[places[column.header]]
        if column.join:
            raw = _join_cells(raw, [grid.cells[places[j]] for j in column.join])
        for part, piece_no in enumerate(piece_numbers):
            cells = _split_cells(raw, column, part) if column.split else raw
            arrays = [sheets, line, runs, pa.array([piece_no] * n, pa.int32()), *_typed(cells)]
            tables.append(pa.Table.from_arrays(arrays, schema=SCHEMA))
    return pa.concat_tables(tables) if tables else SCHEMA.empty_table()


def _typed(cells: Sequence[Cell]) -> list[pa.Array]:
    """Four arrays: text (also of numbers), number, moment, problem."""
    text: list[str | None] = []
    number: list[float | None] = []
    moment: list[Any] = []
    problem: list[str | None] = []
    for cell in cells:
        value, as_number, as_moment, wrong = _one(cell)
        text.append(value)
        number.append(as_number)
        moment.append(as_moment)
        problem.append(wrong)
    return [
        pa.array(text, pa.string()),
        pa.array(number, pa.float64()),
        pa.array(moment, pa.timestamp("us")),
        pa.array(problem, pa.string()),
    ]


def _one(cell: Cell) -> tuple[str | None, float | None, dt.datetime | None, str | None]:
    if isinstance(cell, WrongParts):
        return str(cell), None, None, "parts"
    if cell is None or isinstance(cell, str):
        return cell, None, None, None
    if isinstance(cell, Number):
        return cell.text, cell.value, None, None
    if isinstance(cell, bool):
        return ("TRUE" if cell else "FALSE"), None, None, None
    if isinstance(cell, dt.datetime):
        return cell.isoformat(" "), None, cell, None
    if isinstance(cell, dt.date):
        return cell.isoformat(), None, dt.datetime(cell.year, cell.month, cell.day), None
    if isinstance(cell, ErrorCell):
        return None, None, None, cell.kind
    return str(cell), None, None, None


def _join_cells(first: Sequence[Cell], others: Sequence[Sequence[Cell]]) -> list[Cell]:
    """One text of several cells, a space between; a date cell and a time cell join to one moment."""
    out: list[Cell] = []
    for parts in zip(first, *others, strict=True):
        error = next((p for p in parts if isinstance(p, ErrorCell)), None)
        if error is not None:
            out.append(error)
        elif len(parts) == 2 and isinstance(parts[0], dt.date) and isinstance(parts[1], dt.time):
            out.append(dt.datetime(parts[0].year, parts[0].month, parts[0].day, parts[1].hour, parts[1].minute, parts[1].second))
        elif len(parts) == 2 and isinstance(parts[0], dt.datetime) and parts[1] is None:
            out.append(parts[0])
        else:
            words = [key_text(p) for p in parts]
            out.append(" ".join(w for w in words if w) or None)
    return out


def _split_cells(cells: Sequence[Cell], column: Column, part: int) -> list[Cell]:
    """Part number `part` of cells such as 92/54. A cell with another number of parts is marked as such, unless it is
    a word of the mapping: a single 92 must not become both pressures."""
    words = {*column.missing, *column.codes}
    out: list[Cell] = []
    for cell in cells:
        text = key_text(cell) if isinstance(cell, (str, Number)) else ""
        if not text or text in words:
            out.append(cell)
            continue
        pieces = text.split(column.split)
        out.append(pieces[part].strip() if len(pieces) == len(column.pieces) else WrongParts(text))
    return out
