"""Follow one run through every hop: from its line in the export to the lines of the audit it stands in.

For internal use. The key is the run's random key or its first eight or more characters, as the internal
report lists it. Batch, sheet and line come from the calendar file; without it that hop says "not kept".

example:
  outcomes trace 4f1c09ab --store unit.duckdb
"""

from __future__ import annotations

import argparse
import re
from collections.abc import Iterator

import duckdb

from outcomes.cohort.frames import Cohort, load_cohort
from outcomes.cohort.marts import open_marts
from outcomes.command import _shared as shared
from outcomes.errors import UsageError
from outcomes.report.assemble import Options, assemble
from outcomes.store.ledger import batch_number
from outcomes.store.linkfile import CALENDAR, CalendarEntry, generation_at, read_calendar
from outcomes.store.recover import Places
from outcomes.store.schema import record_columns, tables_by_run
from outcomes.study.audit_data import make_audit
from outcomes.study.catalogue import analyses

_MARTS = ("run", "ending", "survival", "complication_count", "state_interval", "score_input")


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("key", help="random key of the run, or its beginning (8 characters or more)")
    shared.store_arguments(parser)


def run(args: argparse.Namespace) -> int:
    places = shared.places_of(args)
    con = open_marts(places.store)
    try:
        key = _find(con, args.key)
        for line in _lines(con, places, key):
            print(line)
    finally:
        con.close()
    return 0


def _find(con: duckdb.DuckDBPyConnection, given: str) -> str:
    if not re.fullmatch(r"[0-9a-f]{8,32}", given):
        raise UsageError(
            "TRACE.KEY",
            "a key has 8 to 32 of the characters 0-9 and a-f",
            todo="the internal report lists the keys",
        )
    rows = con.execute(
        "select run_key from record.support_run where starts_with(run_key, ?)"
        " union select run_key from record.set_aside_run where starts_with(run_key, ?)",
        [given, given],
    ).fetchall()
    if len(rows) != 1:
        raise UsageError(
            "TRACE.KEY",
            f"{len(rows)} runs have this key",
            todo="give more characters" if rows else "the internal report lists the keys",
        )
    return str(rows[0][0])


def _lines(con: duckdb.DuckDBPyConnection, places: Places, key: str) -> Iterator[str]:
    yield f"Run {key}"
    yield from _origin(con, places, key)
    aside = con.execute("select 1 from record.set_aside_run where run_key = ?", [key]).fetchone()
    if aside:
        yield "hop 3  set aside whole: no data of it is in the store; the findings of its batch say why"
        return
    yield from _records(con, key)
    yield from _marts(con, key)
    yield from _report_lines(load_cohort(con), key)


def _origin(con: duckdb.DuckDBPyConnection, places: Places, key: str) -> Iterator[str]:
    entry = _calendar_entry(con, places, key)
    if entry is None:
        yield "hop 1  batch, sheet and line: not kept"
        return
    yield f"hop 1  batch {entry.batch}, file {entry.file_key}, sheet {entry.sheet_key}, line {entry.line}"
    columns = con.execute(
        "select sheet_key, header, field, unit from ledger.source_column"
        " where batch_no = ? and file_key = ? order by sheet_key, field, header",
        [entry.batch, entry.file_key],
    ).fetchall()
    for sheet, header, field, unit in columns:
        if sheet == entry.sheet_key:
            yield f"hop 2  column {header!r} gives {field}" + (f" in {unit}" if unit != "1" else "")
    findings = con.execute(
        "select code, effect, header, rule from ledger.finding"
        " where batch_no = ? and file_key = ? and sheet_key = ? and line = ? order by all",
        [entry.batch, entry.file_key, entry.sheet_key, entry.line],
    ).fetchall()
    for code, effect, header, rule in findings:
        yield f"hop 2  finding {code} ({effect}) {header}: {rule}"


def _calendar_entry(con: duckdb.DuckDBPyConnection, places: Places, key: str) -> CalendarEntry | None:
    path = generation_at(places.calendar, CALENDAR, batch_number(con))
    return read_calendar(path).get(key) if path else None


def _records(con: duckdb.DuckDBPyConnection, key: str) -> Iterator[str]:
    for table in sorted(tables_by_run()):
        names = [c for c, _ in record_columns()[table] if c not in ("run_key", "person_key")]
        listed = ", ".join(f'"{n}"' for n in names)
        rows = con.execute(
            f"select {listed} from record.{table} where run_key = ? order by all", [key]
        ).fetchall()
        for row in rows:
            yield f"hop 3  record.{table}: " + _pairs(names, row)


def _marts(con: duckdb.DuckDBPyConnection, key: str) -> Iterator[str]:
    for mart in _MARTS:
        left_out = "run_key" if mart == "score_input" else "run_key, person_key"
        found = con.execute(
            f"select * exclude ({left_out}) from mart.{mart} where run_key = ? order by all", [key]
        )
        names = [d[0] for d in found.description]
        for row in found.fetchall():
            yield f"hop 4  mart.{mart}: " + _pairs(names, row)


def _pairs(names: list[str], row: tuple[object, ...]) -> str:
    return ", ".join(
        f"{n} {v:.10g}" if isinstance(v, float) else f"{n} {v}"
        for n, v in zip(names, row, strict=True)
        if v is not None
    )


def _report_lines(cohort: Cohort, key: str) -> Iterator[str]:
    """Lines of the audit of everything in the store whose counts this run is part of, by their lists."""
    audit = make_audit(cohort, years=None, sources=())
    report = assemble("annual_audit", analyses(), audit, Options(profile="internal"))
    links = {
        cell.link: f"table {number} ({table.caption}), line {row.label!r}, column {column.heading!r}"
        for number, table in enumerate(report.tables(), start=1)
        for row in table.rows
        for column, cell in zip(table.columns, row.cells, strict=True)
        if cell.link
    }
    for name, runs in report.lists.items():
        if any(key.startswith(k) for k in runs.run_keys):
            yield "hop 5-7  " + links.get(name, f"list {runs.label!r}")
