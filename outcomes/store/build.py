"""Writing the new store: every table in surrogate order, so that no order of arrival remains."""

from __future__ import annotations

from collections.abc import Sequence

import duckdb

from outcomes.findings import Finding
from outcomes.intake.mapping import Mapping
from outcomes.store.merge import columns_of, merged_tables, row_text
from outcomes.store.schema import NUMBERED, NUMBERED_WITHIN


def fill_store(con: duckdb.DuckDBPyConnection, mapping: Mapping, *, old: bool) -> None:
    """Fill the attached database `new` from the candidates and, where there is one, the store `old`."""
    given = {t for (t,) in con.execute("select distinct table_name from work.change").fetchall()}
    for table in merged_tables():
        if old or table in given:
            _fill_table(con, table, old)
    _fill_person(con, old)
    _fill_set_aside(con, mapping, old)
    _fill_attempts(con, mapping, old)
    _fill_source(con, mapping, old)


def _fill_table(con: duckdb.DuckDBPyConnection, table: str, old: bool) -> None:
    number = NUMBERED.get(table)
    names = [c for c in columns_of(table) if c != number]
    picks = ", ".join(f'"{c}"' for c in names)
    taken = f"select run_key from work.change where table_name = '{table}' and state in ('new', 'changed', 'later')"
    parts = [f"select {picks} from candidate.{table} where line is not null and run_key in ({taken})"]
    if old:
        if table == "missing_value":
            keep = f"not (run_key in ({taken}) and field in (select field from work.spoken_field))"
        else:
            keep = f"run_key not in ({taken})"
        parts.append(f"select {picks} from old.record.{table} where {keep}")
    rows = " union all ".join(parts)
    if table == "support_run":
        rows = f"""select r.* replace (coalesce(o.nth_run, r.nth_run) as nth_run,
              coalesce(o.hours_from_first_run, r.hours_from_first_run) as hours_from_first_run)
            from ({rows}) r left join work.run_order o using (run_key)"""
    if number:
        within = ", ".join(NUMBERED_WITHIN.get(table, ("run_key",)))
        rows = f'select *, row_number() over (partition by {within} order by {_content_order(table)}) as "{number}" from ({rows})'
    con.execute(f"insert into new.record.{table} by name select * from ({rows}) order by run_key, {_content_order(table)}")


def _content_order(table: str) -> str:
    """Times first, then everything else: numbers follow the course of the run, never the order of the file."""
    times = [c for c in columns_of(table) if c.endswith("_h")]
    return ", ".join([*(f'"{c}" nulls last' for c in times), row_text(table)])


def _fill_person(con: duckdb.DuckDBPyConnection, old: bool) -> None:
    """What the first run of a person says of her stands before what is stored, and that before what later runs say.

    Whether the order of her runs is known is asked anew when a run is added; otherwise it can only become known, so that
    a later batch without the calendar file takes nothing away.
    """
    known = "select run_key from old.record.support_run union all select run_key from old.record.set_aside_run"
    adds = f"run_key not in ({known})" if old else "true"
    rows = f"""select person_key, sex_recorded, height_cm, order_is_uncertain, case when decides then 0 else 2 end as age,
          person_key in (select person_key from work.run_order where {adds}) as adds_run
        from candidate.person where run_key is not null"""
    if old:
        rows += " union all select person_key, sex_recorded, height_cm, order_is_uncertain, 1, false from old.record.person"
    con.execute(
        f"""insert into new.record.person by name
        select person_key, arg_min(sex_recorded, age) as sex_recorded, arg_min(height_cm, age) as height_cm,
          case when bool_or(adds_run) then bool_or(order_is_uncertain) filter (where age <> 1)
               else bool_and(order_is_uncertain) end as order_is_uncertain
        from ({rows}) where person_key in (select person_key from new.record.support_run)
        group by person_key order by person_key"""
    )


def _fill_set_aside(con: duckdb.DuckDBPyConnection, mapping: Mapping, old: bool) -> None:
    """Runs that were refused and are not stored: they stay countable."""
    has_runs = con.execute("select 1 from duckdb_tables() where schema_name = 'incoming' and table_name = 'support_run'").fetchone()
    year = "(select any_value(i.run_year) from incoming.support_run i where i.run_no = n.run_no)" if has_runs else "null"
    given = f"""select s.run_key, n.person_key, '{mapping.source.key}' as source_key,
          case when o.order_is_uncertain then null else o.nth_run end as nth_run, {year} as run_year
        from work.set_aside s join work.run_name n using (run_key) left join work.run_order o using (run_key)
        where n.person_key is not null"""
    stored = "union all select run_key, person_key, source_key, nth_run, run_year from old.record.set_aside_run where run_key not in (select run_key from work.set_aside)" if old else ""
    con.execute(
        f"""insert into new.record.set_aside_run by name
        select * from ({given} {stored}) where run_key not in (select run_key from new.record.support_run) order by run_key"""
    )


def _fill_attempts(con: duckdb.DuckDBPyConnection, mapping: Mapping, old: bool) -> None:
    made = con.execute("select 1 from duckdb_tables() where schema_name = 'incoming' and table_name = 'cannulation_attempt'").fetchone()
    parts = []
    if made:
        parts.append(
            f"""select n.run_key as attempt_key, n.person_key, '{mapping.source.key}' as source_key, i.attempt_year, i.reason, 0 as age
            from incoming.cannulation_attempt i join work.run_name n using (run_no)"""
        )
    if old:
        parts.append("select attempt_key, person_key, source_key, attempt_year, reason, 1 as age from old.record.cannulation_attempt")
    if parts:
        con.execute(
            f"""insert into new.record.cannulation_attempt by name
            select attempt_key, arg_min(person_key, age) as person_key, arg_min(source_key, age) as source_key,
              arg_min(attempt_year, age) as attempt_year, arg_min(reason, age) as reason
            from ({" union all ".join(parts)}) group by attempt_key order by attempt_key"""
        )


def _fill_source(con: duckdb.DuckDBPyConnection, mapping: Mapping, old: bool) -> None:
    s = mapping.source
    con.execute(
        "insert into new.record.source values (?, ?, ?, ?, ?, ?, ?)",
        [s.key, s.plan_written, s.vital_status_date, s.no_death_means, s.attempts, s.period[0].year, s.period[1].year],
    )
    for entry in s.coverage:
        for kind in entry.kinds:
            con.execute(
                "insert into new.record.complication_coverage values (?, ?, ?, ?, ?, ?)",
                [s.key, kind, entry.events_kept, entry.looked_until_h, entry.definition, entry.valid_from_year],
            )
    if old:
        con.execute("insert into new.record.source select * from old.record.source where source_key <> ?", [s.key])
        con.execute("insert into new.record.complication_coverage select * from old.record.complication_coverage on conflict do nothing")
        con.execute(
            """update new.record.source n set period_from_year = least(n.period_from_year, o.period_from_year),
              period_to_year = greatest(n.period_to_year, o.period_to_year)
            from old.record.source o where o.source_key = n.source_key"""
        )


def fill_ledger(con: duckdb.DuckDBPyConnection, values: dict[str, object], files: Sequence[tuple[str, str, int]],
                findings: Sequence[Finding], mapping: Mapping, *, old: bool) -> None:  # fmt: skip
    """Copy the earlier ledger and add this batch: what was read, what it made of it, what it replaced."""
    batch = values["batch_no"]
    if old:
        for table in ("batch", "batch_file", "finding", "replaced", "run_batch", "carried", "source_column"):
            con.execute(f"insert into new.ledger.{table} select * from old.ledger.{table}")
    names = ", ".join(values)
    con.execute(f"insert into new.ledger.batch ({names}) values ({', '.join('?' * len(values))})", list(values.values()))
    con.executemany("insert into new.ledger.batch_file values (?, ?, ?, ?)", [[batch, *f] for f in files])
    if findings:
        con.executemany(
            "insert into new.ledger.finding values (?, ?, ?, ?, ?, ?, ?, ?, ?)",
            [[batch, f.code, f.effect, f.source, f.sheet, f.line, f.column, f.rule, f.shape] for f in findings],
        )
    con.execute(
        """insert into new.ledger.replaced select ?, run_key, table_name, coalesce(earlier_hash, '')
        from work.change where state = 'changed' order by run_key, table_name""",
        [batch],
    )
    con.execute("delete from new.ledger.run_batch where run_key in (select run_key from work.change where state in ('new', 'changed'))")
    con.execute(
        """insert into new.ledger.run_batch select distinct run_key, ?::integer from work.change
        where state in ('new', 'changed') order by run_key""",
        [batch],
    )
    _note_columns(con, mapping, int(str(batch)))
    for field in sorted(mapping.carried_fields):
        con.execute("insert into new.ledger.carried values (?, ?) on conflict do nothing", [mapping.source.key, field])


def _note_columns(con: duckdb.DuckDBPyConnection, mapping: Mapping, batch: int) -> None:
    """Which column gave which field in this batch: headers as the mapping lists them, so that a run can be traced."""
    rows = [
        [mapping.source.key, batch, file.key, sheet.key, column.header, piece.field.name, piece.unit]
        for file in mapping.files
        for sheet in file.sheets
        for column in sheet.columns
        for piece in column.pieces
    ]
    con.executemany("insert into new.ledger.source_column values (?, ?, ?, ?, ?, ?, ?)", rows)
