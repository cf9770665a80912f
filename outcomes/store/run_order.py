"""Which run of a person was first: settled in memory from the starts, before any row is set aside."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping

import duckdb
import pyarrow as pa

from outcomes.intake.take_in import Intake

_ORDER = """
with known as (
  select run_key, person_key, start_utc from arrow_new
  union all
  select run_key, person_key, start_utc from arrow_old
  where run_key not in (select run_key from arrow_new where run_key is not null)
    and person_key in (select person_key from arrow_new)
), judged as (
  select *, bool_or(start_utc is null) over (partition by person_key) as order_is_uncertain
  from known where person_key is not null
)
select run_key, person_key,
  case when not order_is_uncertain
    then row_number() over (partition by person_key order by start_utc, run_key) end::integer as nth_run,
  case when not order_is_uncertain then
    round((epoch_us(start_utc) - epoch_us(min(start_utc) over (partition by person_key))) / 60000000.0) / 60.0
  end as hours_from_first_run,
  order_is_uncertain
from judged
order by run_key
"""


def run_order(
    intake: Intake, stored: Mapping[str, str], starts: Mapping[str, dt.datetime], con: duckdb.DuckDBPyConnection
) -> pa.Table:
    """Order of all runs of every person whom the batch touches.

    stored: run key -> person key of runs in the store (set-aside ones included); starts: run key -> start in UTC from the
    calendar file. con is the staging connection: starts never leave it. Where one run of a person has no start, the
    order of all of them is uncertain: nth_run and hours_from_first_run say nothing. Attempts and runs that only a sheet without
    starts names are no runs of anybody, unless the store knows them.
    """
    numbers = intake.numbers
    unnamed = {
        n for (n,) in con.execute(
            """select run_no from staging.row group by run_no
            having bool_and(sheet_no not in (select sheet_no from staging.piece where target_column = 'start'))"""
        ).fetchall()
    }  # fmt: skip
    wanted = [i for i in range(len(numbers.run_keys)) if i not in unnamed or numbers.run_keys[i] in stored]
    found = dict(con.execute("select run_no, start_utc from staging.run_start").fetchall())
    new = {
        "run_key": pa.array([numbers.run_keys[i] for i in wanted], pa.string()),
        "person_key": pa.array([numbers.person_keys[i] for i in wanted], pa.string()),
        "start_utc": pa.array([found.get(i, starts.get(numbers.run_keys[i])) for i in wanted], pa.timestamp("us")),
    }
    old = {
        "run_key": pa.array(list(stored), pa.string()),
        "person_key": pa.array(list(stored.values()), pa.string()),
        "start_utc": pa.array([starts.get(k) for k in stored], pa.timestamp("us")),
    }
    con.register("arrow_new", pa.table(new))
    con.register("arrow_old", pa.table(old))
    try:
        return con.sql(_ORDER).to_arrow_table()
    finally:
        con.unregister("arrow_new")
        con.unregister("arrow_old")
