"""Hops 1 and 2: the files of one source become typed, de-identified rows and findings; nothing else leaves here."""

from __future__ import annotations

import datetime as dt
import unicodedata
from collections.abc import Callable, Iterable
from collections.abc import Mapping as Lookup
from dataclasses import dataclass, field
from typing import BinaryIO

from outcomes.errors import DataRefused
from outcomes.findings import Finding, shape_of
from outcomes.intake.cells import cell_table, key_text, run_numbers
from outcomes.intake.identify import Identities, RunNumbers
from outcomes.intake.mapping import File, Mapping, Sheet
from outcomes.intake.pieces import sheets_of
from outcomes.intake.reading import FileSpec, SheetSpec, read
from outcomes.intake.reading.grid import Grid
from outcomes.intake.stage import Sink, Staging


@dataclass
class Intake:
    """What one batch gave, still in memory. staging holds rows, findings and run starts until `close`."""

    mapping: Mapping
    staging: Staging
    numbers: RunNumbers
    notes: list[Finding] = field(default_factory=list)

    def close(self) -> None:
        self.staging.con.close()


# Small enough that a chunk of a wide sheet and its typed copies stay below a few hundred megabytes.
CHUNK_ROWS = 4_000

Opener = Callable[[], BinaryIO]


def take_in(
    mapping: Mapping,
    openers: dict[str, Opener],
    identities: Identities,
    starts: Lookup[str, dt.datetime],
    sink: Sink,
    progress: Callable[[str, int], None] = lambda sheet, rows: None,
) -> Intake:
    """Read every file of the mapping and give its rows to `sink(record table, rows)`.

    openers: file key -> function that opens its bytes. starts: run key -> start of support in UTC, from the calendar
    file. Raises DataRefused for anything that concerns a whole file, before a row of it is given out.
    """
    lists = _read_lists(mapping, openers)
    staging = Staging(mapping, lists)
    numbers = RunNumbers(identities, mapping.source.identifiers, mapping.source.key)
    intake = Intake(mapping, staging, numbers)
    given: set[int] = set()
    for file, sheet_no, sheet in _in_order(mapping):
        with openers[file.key]() as stream:
            for grid in read(stream, _spec(file, [sheet]), chunk_rows=CHUNK_ROWS):
                places = _places(grid, file, sheet)
                run_no = run_numbers(grid, sheet, places, numbers)
                cells = cell_table(grid, sheet_no, staging.columns[sheet_no], places, run_no)
                staging.take(sheet_no, cells, _new_starts(numbers, starts, given, sheet), sink)
                intake.notes += grid.notes
                progress(sheet.key, len(grid.lines))
    return intake


def _in_order(mapping: Mapping) -> list[tuple[File, int, Sheet]]:
    """Sheets that hold the start of support come first: everything else is measured from it."""
    of_file = {(f.key, s.key): f for f in mapping.files for s in f.sheets}
    listed = [(of_file[key, sheet.key], no, sheet) for no, key, sheet in sheets_of(mapping)]
    return sorted(listed, key=lambda item: (not _has_start(item[2]), item[1]))


def _has_start(sheet: Sheet) -> bool:
    return any(p.field.name == "support_run.start" for c in sheet.columns for p in c.pieces)


def _new_starts(
    numbers: RunNumbers, starts: Lookup[str, dt.datetime], given: set[int], sheet: Sheet
) -> Iterable[tuple[int, dt.datetime]]:
    """Starts from the calendar file for runs met for the first time outside a sheet that has a start of its own."""
    if _has_start(sheet):
        return []
    fresh = [n for n in range(len(numbers.run_keys)) if n not in given and numbers.run_keys[n] in starts]
    given.update(fresh)
    return [(n, starts[numbers.run_keys[n]]) for n in fresh]


def _spec(file: File, sheets: list[Sheet]) -> FileSpec:
    return FileSpec(
        key=file.key,
        kind=file.kind,
        encoding=file.encoding or "utf-8",
        separator=file.separator or ",",
        max_rows=file.max_rows,
        sheets=tuple(SheetSpec(s.key, s.position, s.header_line) for s in sheets),
    )


def _fold(header: str) -> str:
    return unicodedata.normalize("NFC", header).strip().casefold()


def _places(grid: Grid, file: File, sheet: Sheet) -> dict[str, int]:
    """Header as the mapping writes it -> column number. Refuses headers that the mapping does not list, by place."""
    at = {_fold(h): i for i, h in enumerate(grid.header)}
    listed = {_fold(h): h for h in sheet.listed}
    findings = [
        Finding("HEADER.UNLISTED", "file", 0, file.key, sheet.key, sheet.header_line, f"column {i + 1}",
                "the mapping says nothing of this column", shape_of(h))
        for i, h in enumerate(grid.header) if _fold(h) not in listed
    ]  # fmt: skip
    findings += [
        Finding("HEADER.ABSENT", "file", 0, file.key, sheet.key, sheet.header_line, h, "the mapping lists a column that is not here")
        for folded, h in sorted(listed.items()) if folded not in at
    ]
    if findings:
        raise DataRefused(
            "HEADER.MISMATCH",
            f"{len(findings)} columns of the file and of the mapping do not fit together",
            where="; ".join(f.text() for f in findings[:5]),
            todo="list every column of the sheet in the mapping, under leave_out if it is not wanted",
            findings=findings,
        )
    return {h: at[folded] for folded, h in listed.items()}


def _read_lists(mapping: Mapping, openers: dict[str, Opener]) -> dict[str, dict[str, str]]:
    """Code-list sheets: key of the sheet -> code -> meaning."""
    lists: dict[str, dict[str, str]] = {}
    for file in mapping.files:
        for sheet in (s for s in file.sheets if s.row_is == "code list"):
            with openers[file.key]() as stream:
                pairs: dict[str, str] = {}
                for grid in read(stream, _spec(file, [sheet])):
                    places = _places(grid, file, sheet)
                    for line, code, meaning in zip(grid.lines, grid.cells[places[sheet.code]], grid.cells[places[sheet.meaning]], strict=True):
                        if sheet.rows is None or sheet.rows[0] <= line <= sheet.rows[1]:
                            if key_text(code):
                                pairs[key_text(code)] = key_text(meaning)
                lists[sheet.key] = pairs
    return lists
