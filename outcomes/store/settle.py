"""What is kept and what is set aside: keys, twins, checks, and their effects on the candidates. All in SQL."""

from __future__ import annotations

from dataclasses import dataclass

import duckdb

from outcomes.findings import Finding, in_order
from outcomes.intake.rules import RULES, rule_text
from outcomes.store.checks import refresh_set_aside
from outcomes.store.schema import one_row_tables

# Record tables whose rows are told apart by one word; a wrong cell takes the row away.
_BY_WORD = {
    "measurement": "analyte",
    "vasoactive_dose": "drug",
    "complication_event": "kind",
    "neuro_outcome": "scale",
}


@dataclass(frozen=True)
class Counts:
    """rows_read = rows_accepted + rows_set_aside + rows_duplicate, always."""

    rows_read: int
    rows_accepted: int
    rows_set_aside: int
    rows_duplicate: int


def settle_keys(con: duckdb.DuckDBPyConnection) -> None:
    """Findings of cells, keys and twins; duplicates and refused rows leave `incoming` before candidates are made."""
    _cell_findings(con)
    _key_findings(con)
    _twins(con)
    refresh_set_aside(con)
    for (table,) in con.execute("select table_name from duckdb_tables() where schema_name = 'incoming'").fetchall():
        con.execute(
            f"""delete from incoming.{table} i where exists (
              select 1 from work.row r where r.sheet_no = i.sheet_no and r.line = i.line
                and (r.state = 'duplicate' or r.run_key is null))
            or exists (select 1 from work.finding f where f.effect = 'row' and f.sheet_no = i.sheet_no and f.line = i.line)"""
        )


def _cell_findings(con: duckdb.DuckDBPyConnection) -> None:
    con.execute(
        """insert into work.finding
        select f.code, f.effect, f.sheet_no, f.line, n.run_key, f.header, f.field, coalesce(f.plausible_as, ''), f.shape
        from work.staged_finding f left join work.run_name n using (run_no)"""
    )


def _key_findings(con: duckdb.DuckDBPyConnection) -> None:
    con.execute(
        """insert into work.finding
        select 'KEY.EMPTY', 'row', sheet_no, line, null, '', '', '', '' from work.row where run_key is null"""
    )
    con.execute(
        """insert into work.finding
        select 'KEY.NO-START', 'run', r.sheet_no, r.line, r.run_key, c.header, 'support_run.start', '', ''
        from work.row r join work.start_cell c using (sheet_no) join work.run_name n using (run_key)
        where n.run_no not in (select run_no from work.has_start)
          and not exists (select 1 from work.finding f where f.sheet_no = r.sheet_no and f.line = r.line and f.effect = 'run')"""
    )
    con.execute(
        """insert into work.finding
        select 'KEY.UNKNOWN-RUN', 'row', r.sheet_no, r.line, r.run_key, '', '', '', ''
        from work.row r join work.run_name n using (run_key) join work.sheet_info s using (sheet_no)
        where r.sheet_no not in (select sheet_no from work.start_cell) and s.row_is <> 'attempt'
          and n.run_no not in (select run_no from work.has_start)
          and r.run_key not in (select run_key from work.finding where effect = 'run' and run_key is not null)"""
    )


def _twins(con: duckdb.DuckDBPyConnection) -> None:
    """Identical rows: the first is kept. Rows of one run that differ, or name two persons: all are set aside."""
    con.execute(
        """insert into work.finding
        select 'KEY.PERSONS-DIFFER', 'run', r.sheet_no, r.line, r.run_key, '', '', '', ''
        from work.row r join work.run_name n using (run_key) where n.is_disputed"""
    )
    con.execute(
        """create or replace table work.twin as
        select sheet_no, line, run_key, signature, s.row_is,
          row_number() over (partition by sheet_no, run_key, signature order by line) as copy_no,
          count(distinct signature) over (partition by sheet_no, run_key) as n_versions
        from work.row join work.sheet_info s using (sheet_no)
        where run_key in (select run_key from work.run_name where not is_disputed)"""
    )
    con.execute(
        """update work.row r set state = 'duplicate' from work.twin t
        where t.sheet_no = r.sheet_no and t.line = r.line and t.copy_no > 1"""
    )
    con.execute("insert into work.finding select 'ROW.TWIN', 'note', sheet_no, line, run_key, '', '', '', '' from work.twin where copy_no > 1")
    con.execute(
        """insert into work.finding
        select 'ROW.TWINS-DIFFER', 'run', sheet_no, line, run_key, '', '', '', ''
        from work.twin where n_versions > 1
          and (row_is = 'run' or sheet_no in (select sheet_no from work.piece_info where target_table in (select unnest(?))))""",
        [list(one_row_tables())],
    )


def apply_effects(con: duckdb.DuckDBPyConnection) -> None:
    """Take away what the checks set aside: cells become missing with a reason, rows and runs leave the candidates."""
    con.execute(
        """update work.finding f set effect = 'cell' from work.sheet_info s
        where s.sheet_no = f.sheet_no and s.row_is = 'run' and f.effect = 'row' and f.code like 'CHECK.%'"""
    )
    found = con.execute(
        """select distinct f.field, coalesce(p.target_table, split_part(f.field, '.', 1)), coalesce(p.target_column, split_part(f.field, '.', 2))
        from work.finding f left join work.piece_info p on p.field = f.field
        where f.effect in ('cell', 'row') and f.code like 'CHECK.%' order by all"""
    ).fetchall()
    for field, table, column in found:
        _take_away(con, field, table, column)
    refresh_set_aside(con)
    for (table,) in con.execute("select table_name from duckdb_tables() where schema_name = 'candidate'").fetchall():
        if table != "person":
            con.execute(f"delete from candidate.{table} where run_key in (select run_key from work.set_aside) and line is not null")


def _take_away(con: duckdb.DuckDBPyConnection, field: str, table: str, column: str) -> None:
    hit = "select run_key, sheet_no, line from work.finding where field = ? and effect in ('cell', 'row') and code like 'CHECK.%'"
    table = "complication_event" if table == "complication" else table
    word = _BY_WORD.get(table)
    if word and column not in ("resolved_h", "grade", "consequence"):
        con.execute(
            f"delete from candidate.{table} where (run_key, sheet_no, line) in ({hit}) and {word} = ?", [field, column]
        )
    elif table in ("weaning_step", "circuit_configuration"):
        con.execute(f"delete from candidate.{table} where (run_key, sheet_no, line) in ({hit})", [field])
        return
    else:
        con.execute(f'update candidate.{table} set "{column}" = null where (run_key, sheet_no, line) in ({hit})', [field])
    con.execute(
        f"""insert into candidate.missing_value
        select h.run_key, h.f, 'set_aside', min(h.sheet_no), min(h.line) from (
          select distinct h.run_key, h.sheet_no, h.line,
            case when p.target_table = 'measurement' then ? || '.' || p.window_label else ? end as f
          from ({hit}) h join work.piece_info p on p.field = ?
        ) h where not exists (select 1 from candidate.missing_value c where c.run_key = h.run_key and c.field = h.f)
        group by h.run_key, h.f""",
        [field, field, field, field],
    )


def settle_rows(con: duckdb.DuckDBPyConnection) -> Counts:
    """Give every row its state and count them."""
    con.execute(
        """update work.row r set state = 'set aside'
        where state = 'accepted' and (run_key is null or run_key in (select run_key from work.set_aside)
          or exists (select 1 from work.finding f where f.effect = 'row' and f.sheet_no = r.sheet_no and f.line = r.line))"""
    )
    found = dict(con.execute("select state, count(*) from work.row group by state").fetchall())
    parts = [int(found.get(s, 0)) for s in ("accepted", "set aside", "duplicate")]
    return Counts(sum(parts), *parts)


def list_findings(con: duckdb.DuckDBPyConnection, batch: int) -> list[Finding]:
    """Findings in order of place. A header is the one that the mapping lists; none is a place."""
    rows = con.execute(
        """select f.code, f.effect, s.file_key, s.sheet_key, f.line, coalesce(nullif(f.header, ''), h.header, o.header, t.header, ''), f.rule, f.shape
        from work.finding f join work.sheet_info s using (sheet_no)
        left join (select sheet_no, field, min(header) as header from work.piece_info group by all) h
          on h.sheet_no = f.sheet_no and h.field = f.field
        left join (select sheet_no, min(header) as header from work.piece_info where field = 'complication_event.onset' group by all) o
          on o.sheet_no = f.sheet_no and f.field like 'complication.%'
        left join vocabulary.field v on v.field = f.field
        left join (select sheet_no, target_table, target_column, min(header) as header from work.piece_info group by all) t
          on t.sheet_no = f.sheet_no and t.target_table = v.target_table and t.target_column = v.target_column
        order by s.sheet_no, f.line, f.code, f.header, f.field"""
    ).fetchall()
    findings = []
    for code, effect, file_key, sheet_key, line, header, rule, shape in rows:
        text = rule_text(code, rule or None) if code in RULES else rule
        findings.append(Finding(code, effect, batch, file_key, sheet_key, line, header, text, shape))
    return in_order(findings)
