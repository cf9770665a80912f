"""Where a batch is settled: a database in a private folder beside the store, holding de-identified rows only."""

from __future__ import annotations

import duckdb
import pyarrow as pa

from outcomes.intake.stage import Staging
from outcomes.intake.take_in import Intake
from outcomes.intake.vocabulary import load_vocabulary
from outcomes.store.schema import POSITION, one_row_tables, record_columns

_TABLES = """
create schema incoming; create schema candidate; create schema work; create schema sheet;
create table work.finding (code varchar, effect varchar, sheet_no integer, line integer, run_key varchar, header varchar,
  field varchar, rule varchar, shape varchar);
create table work.row (sheet_no integer, line integer, run_key varchar, signature varchar, state varchar);
"""
# Staged columns that are no record columns, and the record columns they stand in for.
_EXTRA = {
    "support_run": {"from_birth_year": "BOOLEAN"},
    "support_end": {"is_open": "BOOLEAN"},
}


class Workbench:
    """Takes staged rows, then holds candidates: rows as they would be stored, with sheet and line beside them."""

    def __init__(self, con: duckdb.DuckDBPyConnection) -> None:
        self.con = con
        con.execute(_TABLES)
        load_vocabulary(con)
        self._made: set[str] = set()

    def sink(self, table: str, rows: pa.Table) -> None:
        """Append staged rows; texts are cast to the column's type, which they fit by construction."""
        if table not in self._made:
            columns = dict(record_columns()[table]) | _EXTRA.get(table, {})
            columns = {c: t for c, t in columns.items() if c != "run_key"}
            body = ", ".join(f'"{c}" {t}' for c, t in columns.items())
            self.con.execute(f"create table incoming.{table} (run_no integer, sheet_no integer, line integer, {body})")
            self._made.add(table)
        self.con.register("arrow_in", rows)
        self.con.execute(f"insert into incoming.{table} by name select * from arrow_in")
        self.con.unregister("arrow_in")

    def receive(self, intake: Intake) -> None:
        """Take over keys, rows and findings of the staging connection, without any date."""
        numbers = intake.numbers
        self._table("work.run_name", pa.table({
            "run_no": pa.array(range(len(numbers.run_keys)), pa.int32()),
            "run_key": pa.array(numbers.run_keys, pa.string()),
            "person_key": pa.array(numbers.person_keys, pa.string()),
            "is_disputed": pa.array([n in numbers.disputed for n in range(len(numbers.run_keys))], pa.bool_()),
        }))  # fmt: skip
        staging = intake.staging
        self._copy(staging, "sheet_info", "select * from staging.sheet order by sheet_no")
        self._copy(staging, "piece_info", "select sheet_no, header, field, target_table, target_column, effect, piece_no, window_label from staging.piece")
        self._copy(staging, "staged_row", "select * from staging.row")
        self._copy(staging, "staged_finding", "select * from staging.finding")
        self._copy(staging, "has_start", "select run_no from staging.run_start")
        self._copy(staging, "start_cell", "select distinct sheet_no, header from staging.piece where target_column = 'start'")
        self.con.execute("insert into work.row select r.sheet_no, r.line, n.run_key, r.signature, 'accepted' from work.staged_row r left join work.run_name n using (run_no)")

    def copy_order(self, rows: pa.Table) -> None:
        """run_key, nth_run, hours_from_first_run, order_is_uncertain of every run of every person in the batch."""
        self._table("work.run_order", rows)

    def _copy(self, staging: Staging, name: str, query: str) -> None:
        self._table(f"work.{name}", staging.con.sql(query).to_arrow_table())

    def _table(self, name: str, rows: pa.Table) -> None:
        self.con.register("arrow_in", rows)
        self.con.execute(f"create or replace table {name} as select * from arrow_in")
        self.con.unregister("arrow_in")

    def make_candidates(self, source_key: str, plan_is_from_start: bool, old: bool) -> None:
        """candidate.<table>: what would be stored, from this batch and, where a person is known, from the store (`old`)."""
        for table, columns in record_columns().items():
            if table in ("source", "complication_coverage", "set_aside_run", "cannulation_attempt"):
                continue
            self.con.execute(f"create table candidate.{table} as {self._candidate(table, source_key, plan_is_from_start)}")
            if old:
                names = ", ".join(f'"{c}"' for c, _ in columns)
                self.con.execute(
                    f"insert into candidate.{table} by name select {names}, null::integer as sheet_no, null::integer as line "
                    f"from old.record.{table} o where {_WANTED[table == 'person']} and not ({self._present(table)})"
                )

    def _present(self, table: str) -> str:
        """True for an old row whose run this batch gives anew in the same table."""
        if table == "person":
            return "o.person_key in (select person_key from candidate.person)"
        if table == "missing_value":
            return "exists (select 1 from candidate.missing_value c where c.run_key = o.run_key and c.field = o.field)"
        return f"o.run_key in (select run_key from candidate.{table})"

    def _candidate(self, table: str, source_key: str, plan_is_from_start: bool) -> str:
        """Query for candidate.<table>. Rows of one run from several sheets become one where the table has one row a run."""
        if table == "person":
            return self._person()
        rows = self._rows(table, source_key, plan_is_from_start)
        if table not in one_row_tables():
            return rows
        place = "(sheet_no, line)"
        merged = ", ".join(_MERGES.get(c, 'arg_min("{c}", {p})').format(c=c, p=place) + f' as "{c}"' for c, _ in record_columns()[table] if c != "run_key")
        return f"select run_key, {merged}, min(sheet_no) as sheet_no, arg_min(line, {place}) as line from ({rows}) group by run_key"

    def _rows(self, table: str, source_key: str, plan_is_from_start: bool) -> str:
        columns = record_columns()[table]
        if table not in self._made:
            body = ", ".join(f'null::{t} as "{c}"' for c, t in columns)
            return f"select {body}, null::integer as sheet_no, null::integer as line limit 0"
        if table == "support_run":
            return self._support_run(source_key, plan_is_from_start)
        names = [c for c, _ in columns if c != "run_key"]
        picks = ", ".join(_PICKS.get((table, c), f'i."{c}"') + f' as "{c}"' for c in names)
        there = " or ".join(f'i."{c}" is not null' for c in names + sorted(_EXTRA.get(table, {})) if c != "is_open") + (
            " or i.is_open" if table == "support_end" else ""
        )
        return f"select n.run_key, {picks}, i.sheet_no, i.line from incoming.{table} i join work.run_name n using (run_no) where {there}"

    def _person(self) -> str:
        """One row a person: what the earliest run of the batch says. decides: that run is the first of all."""
        said = "incoming.person" if "person" in self._made else (
            "(select null::integer as run_no, null::varchar as sex_recorded, null::double as height_cm, "
            "null::integer as sheet_no, null::integer as line)"
        )  # fmt: skip
        order = "(coalesce(o.hours_from_first_run, 1e12), n.run_key)"
        return f"""select n.person_key, arg_min(n.run_key, {order}) as run_key,
            arg_min(i.sex_recorded, {order}) as sex_recorded, arg_min(i.height_cm, {order}) as height_cm,
            min(i.sheet_no) as sheet_no, min(i.line) as line,
            coalesce(bool_or(o.order_is_uncertain), false) as order_is_uncertain,
            coalesce(min(o.hours_from_first_run), 1) = 0 as decides
          from work.run_name n left join {said} i using (run_no) left join work.run_order o using (run_key)
          where n.person_key is not null group by n.person_key"""

    def _support_run(self, source_key: str, plan_is_from_start: bool) -> str:
        names = [c for c, _ in record_columns()["support_run"] if c not in ("run_key", *_SPECIAL_RUN)]
        picks = ", ".join(f'i."{c}"' for c in names)
        key = source_key.replace("'", "''")
        return f"""select n.run_key, n.person_key, '{key}' as source_key, o.nth_run, o.hours_from_first_run,
            least(i.age_years, 90) as age_years, i.age_years is not null and i.from_birth_year as age_is_uncertain,
            coalesce(i.age_years >= 90, false) as age_topcoded,
            i.intended_pathway is not null and {str(plan_is_from_start).lower()} as plan_is_from_start,
            {picks}, i.sheet_no, i.line
          from incoming.support_run i join work.run_name n using (run_no)
          left join work.run_order o using (run_key)"""


_SPECIAL_RUN = ("person_key", "source_key", "age_years", "age_is_uncertain", "age_topcoded", "plan_is_from_start", *POSITION)
_PICKS = {
    ("indication", "is_primary"): "coalesce(i.is_primary, true)",
    ("support_end", "end_kind"): "case when i.is_open and i.end_kind is null then 'open' else i.end_kind end",
    ("hospital_outcome", "is_still_inpatient"): "coalesce(i.is_still_inpatient, false) or coalesce(i.discharge_to = 'still_inpatient', false)",
    ("hospital_outcome", "discharge_to"): "nullif(i.discharge_to, 'still_inpatient')",
    ("hospital_outcome", "is_alive_at_discharge"): "coalesce(i.is_alive_at_discharge, nullif(i.discharge_to, 'still_inpatient') <> 'died')",
}
_MERGES = {c: 'bool_or("{c}")' for c in ("is_still_inpatient", "age_is_uncertain", "age_topcoded", "plan_is_from_start")}
_PERSONS = "(select person_key from work.run_name where person_key is not null)"
_WANTED = {
    True: f"o.person_key in {_PERSONS}",
    False: f"o.run_key in (select run_key from old.record.support_run where person_key in {_PERSONS})",
}
