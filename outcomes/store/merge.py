"""Comparing a settled batch with the store: what is new, what is unchanged, what conflicts; rows of a run as a set."""

from __future__ import annotations

from dataclasses import dataclass

import duckdb

from outcomes.errors import DataRefused
from outcomes.findings import Finding
from outcomes.intake.mapping import Mapping
from outcomes.intake.rules import RULES
from outcomes.store.schema import HORIZON, record_columns, tables_by_run, value_columns


@dataclass(frozen=True)
class Merge:
    """Runs of the batch by what happens to them. beside_runs: attempts and declarations of the source that are new
    or changed, and runs that could now be followed for longer."""

    new: int
    unchanged: int
    changed: int
    beside_runs: int = 0

    @property
    def nothing_new(self) -> bool:
        return self.new == 0 and self.changed == 0 and self.beside_runs == 0


def row_text(table: str) -> str:
    """Canonical text of a row without its numbering, for hashing and ordering: SQL expression."""
    parts = ", ".join(f"coalesce(\"{c}\"::varchar, '~')" for c in value_columns(table))
    return f"concat_ws(chr(31), {parts})"


def merged_tables() -> list[str]:
    return [t for t in tables_by_run() if t != "set_aside_run"]


def compare(con: duckdb.DuckDBPyConnection, mapping: Mapping, *, old: bool, replace: bool, batch: int) -> Merge:
    """Fill work.change(run_key, table_name, state) and refuse conflicts unless `replace`.

    state: new (nothing stored under this run and table), same, changed, or later (the same, but seen for longer). Raises DataRefused ROW.CONFLICT or
    SOURCE.CHANGED.
    """
    con.execute("create or replace table work.change (run_key varchar, table_name varchar, state varchar, earlier_hash varchar)")
    _carried(con, mapping)
    spoken = {t for (t,) in con.execute("select distinct table_name from work.carried").fetchall()}
    for table in merged_tables():
        if table in spoken:
            _compare_table(con, table, old)
    beside = 0
    if old:
        _compare_persons(con)
        beside = _compare_source(con, mapping, replace) + _compare_attempts(con, replace) + _later_horizons(con)
    merge = _count(con, beside)
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
    con.execute(
        """create or replace table work.spoken_field as
        select case when target_table = 'measurement' then field || '.' || window_label else field end as field
        from work.piece_info join work.sheet_info using (sheet_no) where row_is = 'run'
        union select field from candidate.missing_value where line is not null"""
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
        stored = (
            f"select run_key, {hashed} as h from old.record.missing_value where run_key in (select run_key from work.carried) "
            "and field in (select field from work.spoken_field) group by run_key"
        )
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


def _compare_persons(con: duckdb.DuckDBPyConnection) -> None:
    """Sex and height belong to the person; what a run other than the first says of them changes nothing."""
    con.execute(
        """insert into work.change
        select n.run_key, 'person',
          case when c.sex_recorded <> o.sex_recorded or c.height_cm <> o.height_cm then 'changed'
               when (o.sex_recorded is null and c.sex_recorded is not null) or (o.height_cm is null and c.height_cm is not null)
                 then 'new'
               else 'same' end,
          md5(concat_ws(chr(31), coalesce(o.sex_recorded, '~'), coalesce(o.height_cm::varchar, '~')))
        from candidate.person c join old.record.person o using (person_key) join work.run_name n using (person_key)
        where c.line is not null and c.decides and n.run_key = c.run_key and n.run_key not in (select run_key from work.set_aside)"""
    )


def _later_horizons(con: duckdb.DuckDBPyConnection) -> int:
    """Runs that say the same as before, but that this extract could follow for longer: they are stored anew."""
    columns = ", ".join(HORIZON)
    con.execute(
        f"""update work.change set state = 'later' where table_name = 'support_run' and state = 'same' and run_key in (
          select run_key from (select run_key, {columns} from candidate.support_run where line is not null
            except select run_key, {columns} from old.record.support_run))"""
    )
    row = con.execute("select count(*) from work.change where state = 'later'").fetchone()
    return int(row[0]) if row else 0


def _compare_attempts(con: duckdb.DuckDBPyConnection, replace: bool) -> int:
    """How many attempts are new or changed; changed ones are refused unless `replace`."""
    if not con.execute("select 1 from duckdb_tables() where schema_name = 'incoming' and table_name = 'cannulation_attempt'").fetchone():
        return 0
    row = con.execute(
        """select count(*) filter (where o.attempt_key is null),
          count(*) filter (where o.attempt_key is not null and (o.attempt_year is distinct from i.attempt_year or o.reason is distinct from i.reason))
        from incoming.cannulation_attempt i join work.run_name n using (run_no)
        left join old.record.cannulation_attempt o on o.attempt_key = n.run_key"""
    ).fetchone()
    new, changed = row or (0, 0)
    if changed and not replace:
        raise DataRefused(
            "ROW.CONFLICT",
            f"{changed} attempts are stored already, with other values",
            todo="if the new values are right, import again with --replace",
        )
    return int(new + changed)


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


def _compare_source(con: duckdb.DuckDBPyConnection, mapping: Mapping, replace: bool) -> int:
    """How many declarations of a known source are new or changed; changed ones are refused unless `replace`."""
    s = mapping.source
    row = con.execute(
        "select plan_written, vital_status_date, no_death_means, attempts from old.record.source where source_key = ?", [s.key]
    ).fetchone()
    if row is None:
        return 0
    given = {(k, e.valid_from_year): (e.events_kept, e.looked_until_h, e.definition) for e in s.coverage for k in e.kinds}
    known = {
        (kind, year): tuple(rest)
        for kind, year, *rest in con.execute(
            """select kind, valid_from_year, events_kept, looked_until_h, definition
            from old.record.complication_coverage where source_key = ?""",
            [s.key],
        ).fetchall()
    }
    changed = int(row != (s.plan_written, s.vital_status_date, s.no_death_means, s.attempts))
    changed += sum(known[key] != says for key, says in given.items() if key in known)
    if changed and not replace:
        raise DataRefused(
            "SOURCE.CHANGED",
            "the mapping now declares another meaning of this source than at the last import",
            where=f"source {s.key}",
            todo="if that is right, import again with --replace; it changes how stored runs are read",
        )
    return changed + len(given.keys() - known.keys())


def _count(con: duckdb.DuckDBPyConnection, beside_runs: int) -> Merge:
    row = con.execute(
        """select count(*) filter (where state = 'new'), count(*) filter (where state = 'same'), count(*) filter (where state = 'changed')
        from (select run_key, case when bool_or(state = 'changed') then 'changed' when bool_or(state = 'new') then 'new' else 'same' end as state
              from work.change group by run_key)"""
    ).fetchone()
    new, same, changed = row or (0, 0, 0)
    return Merge(int(new), int(same), int(changed), beside_runs)


def _conflicts(con: duckdb.DuckDBPyConnection, batch: int) -> list[Finding]:
    rows = con.execute(
        """select s.file_key, s.sheet_key, min(r.line), string_agg(distinct c.table_name, ', ' order by c.table_name)
        from work.change c join work.row r using (run_key) join work.sheet_info s using (sheet_no)
        where c.state = 'changed' and r.state = 'accepted'
        group by c.run_key, s.file_key, s.sheet_key order by all"""
    ).fetchall()
    return [
        Finding("ROW.CONFLICT", "run", batch, file_key, sheet_key, line, "", f"{RULES['ROW.CONFLICT']} ({tables})")
        for file_key, sheet_key, line, tables in rows
    ]


def columns_of(table: str) -> list[str]:
    return [c for c, _ in record_columns()[table]]
