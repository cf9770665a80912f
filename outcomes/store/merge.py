"""Comparing a settled batch with the store: what is new, what is unchanged, what conflicts; rows of a run as a set."""

from __future__ import annotations

from dataclasses import dataclass

import duckdb

from outcomes.errors import DataRefused
from outcomes.findings import Finding
from outcomes.intake.mapping import Mapping
from outcomes.intake.rules import RULES
from outcomes.store.schema import record_columns, tables_by_run, value_columns


@dataclass(frozen=True)
class Merge:
    """Runs of the batch by what happens to them."""

    new: int
    unchanged: int
    changed: int

    @property
    def nothing_new(self) -> bool:
        return self.new == 0 and self.changed == 0


def row_text(table: str) -> str:
    """Canonical text of a row without its numbering, for hashing and ordering: SQL expression."""
    parts = ", ".join(f"coalesce(\"{c}\"::varchar, '~')" for c in value_columns(table))
    return f"concat_ws(chr(31), {parts})"


def merged_tables() -> list[str]:
    return [t for t in tables_by_run() if t != "set_aside_run"]


def compare(con: duckdb.DuckDBPyConnection, mapping: Mapping, *, old: bool, replace: bool, batch: int) -> Merge:
    """Fill work.change(run_key, table_name, state) and refuse conflicts unless `replace`.

    state: new (nothing stored under this run and table), same, changed. Raises DataRefused ROW.CONFLICT or
    SOURCE.CHANGED.
    """
    con.execute("create or replace table work.change (run_key varchar, table_name varchar, state varchar, earlier_hash varchar)")
    _carried(con, mapping)
    for table in merged_tables():
        _compare_table(con, table, old)
    if old:
        _compare_source(con, mapping, replace)
    merge = _count(con)
    if merge.changed and not replace:
        findings = _conflicts(con, batch)
        raise DataRefused(
            "ROW.CONFLICT",
            f"{merge.changed} runs are stored already, with other values",
            where="; ".join(f.text() for f in findings[:5]),
            todo="if the new values are right, import again with --replace",
            findings=findings,
        )
    return merge


def _carried(con: duckdb.DuckDBPyConnection, mapping: Mapping) -> None:
    """work.carried(run_key, table_name): runs and tables about which this batch speaks."""
    accepted = "(select distinct run_key, sheet_no from work.row where state = 'accepted' and run_key is not null)"
    con.execute(
        f"""create or replace table work.carried as
        select distinct r.run_key, t.table_name
        from {accepted} r join (
          select sheet_no, target_table as table_name from work.piece_info
          union select sheet_no, 'missing_value' from work.sheet_info where row_is = 'run'
        ) t using (sheet_no) where t.table_name not in ('person', 'cannulation_attempt')"""
    )
    if mapping.source.extent == "whole":
        con.execute(
            """insert into work.carried
            select r.run_key, t.table_name
            from (select distinct run_key from work.carried) r
            cross join (select distinct table_name from work.carried) t
            where not exists (select 1 from work.carried c where c.run_key = r.run_key and c.table_name = t.table_name)"""
        )


def _compare_table(con: duckdb.DuckDBPyConnection, table: str, old: bool) -> None:
    text = row_text(table)
    hashed = f"md5(string_agg(md5({text}), '' order by md5({text})))"
    stored = (
        f"select run_key, {hashed} as h from old.record.{table} where run_key in (select run_key from work.carried) group by run_key"
        if old
        else "select null::varchar as run_key, null::varchar as h limit 0"
    )
    if table == "missing_value" and old:
        fields = "(select distinct c.field from candidate.missing_value c where c.line is not null)"
        stored = f"select run_key, {hashed} as h from old.record.missing_value where run_key in (select run_key from work.carried) and field in {fields} group by run_key"
    known = "select run_key from old.record.support_run" if old else "select null::varchar as run_key limit 0"
    con.execute(
        f"""insert into work.change
        with given as (select run_key, {hashed} as h from candidate.{table} where line is not null group by run_key),
        stored as ({stored}), known as ({known})
        select c.run_key, '{table}',
          case when k.run_key is null or (s.h is null and g.h is not null and '{table}' <> 'support_run'
                 and not exists (select 1 from work.carried_before b where b.table_name = '{table}')) then 'new'
               when s.h is not distinct from g.h then 'same'
               else 'changed' end,
          s.h
        from work.carried c left join given g using (run_key) left join stored s using (run_key) left join known k using (run_key)
        where c.table_name = '{table}'"""
    )


def note_carried_before(con: duckdb.DuckDBPyConnection, source_key: str, old: bool) -> None:
    """work.carried_before(table_name): tables that earlier batches of this source carried."""
    query = (
        "select distinct f.target_table as table_name from old.ledger.carried c join vocabulary.field f using (field) where c.source_key = ? "
        "union select distinct case split_part(field, '.', 1) when 'complication' then 'complication_event' else split_part(field, '.', 1) end "
        "from old.ledger.carried where source_key = ?"
    )
    if old:
        con.execute(f"create or replace table work.carried_before as {query}", [source_key, source_key])
        con.execute("insert into work.carried_before select 'missing_value' from work.carried_before limit 1")
    else:
        con.execute("create or replace table work.carried_before (table_name varchar)")


def _compare_source(con: duckdb.DuckDBPyConnection, mapping: Mapping, replace: bool) -> None:
    s = mapping.source
    row = con.execute(
        "select plan_written, vital_status_date, no_death_means, attempts from old.record.source where source_key = ?", [s.key]
    ).fetchone()
    if row is not None and row != (s.plan_written, s.vital_status_date, s.no_death_means, s.attempts) and not replace:
        raise DataRefused(
            "SOURCE.CHANGED",
            "the mapping now declares another meaning of this source than at the last import",
            where=f"source {s.key}",
            todo="if that is right, import again with --replace; it changes how stored runs are read",
        )


def _count(con: duckdb.DuckDBPyConnection) -> Merge:
    row = con.execute(
        """select count(*) filter (where state = 'new'), count(*) filter (where state = 'same'), count(*) filter (where state = 'changed')
        from (select run_key, case when bool_or(state = 'changed') then 'changed' when bool_or(state = 'new') then 'new' else 'same' end as state
              from work.change group by run_key)"""
    ).fetchone()
    return Merge(*(int(v) for v in row)) if row else Merge(0, 0, 0)


def _conflicts(con: duckdb.DuckDBPyConnection, batch: int) -> list[Finding]:
    rows = con.execute(
        """select s.file_key, s.sheet_key, min(r.line), string_agg(distinct c.table_name, ', ' order by c.table_name)
        from work.change c join work.row r using (run_key) join work.sheet_info s using (sheet_no)
        where c.state = 'changed' and r.state = 'accepted' and s.row_is = 'run'
        group by c.run_key, s.file_key, s.sheet_key order by all"""
    ).fetchall()
    return [
        Finding("ROW.CONFLICT", "run", batch, file_key, sheet_key, line, "", f"{RULES['ROW.CONFLICT']} ({tables})")
        for file_key, sheet_key, line, tables in rows
    ]


def columns_of(table: str) -> list[str]:
    return [c for c, _ in record_columns()[table]]
