"""Building an empty store, and what its tables look like."""

from __future__ import annotations

from functools import cache

import duckdb

from outcomes.intake.vocabulary import load_vocabulary
from outcomes.resources import sql_files

# Tables with several rows a run: this column numbers them, by content and not by order of arrival.
NUMBERED = {
    "arrest_episode": "episode_no",
    "measurement": "measurement_no",
    "vasoactive_dose": "dose_no",
    "circuit_configuration": "interval_no",
    "cannula": "cannula_no",
    "limb_perfusion": "limb_no",
    "monitoring_site": "site_no",
    "support_setting": "setting_no",
    "lv_unloading_episode": "episode_no",
    "complication_event": "event_no",
    "complication_action": "action_no",
    "weaning_step": "step_no",
}
# Numbering starts anew within these columns, the run first.
NUMBERED_WITHIN = {"measurement": ("run_key", "analyte", "window_label"), "vasoactive_dose": ("run_key", "drug", "window_label")}
# Not keyed by run.
NOT_BY_RUN = ("person", "source", "complication_coverage", "cannulation_attempt")
# Position among the runs of a person; it may change when an earlier run arrives, which is no conflict.
POSITION = ("nth_run", "hours_from_first_run")
# What the source could have seen of a run: it grows with every later extract, which is no conflict either.
HORIZON = ("observable_to_day_30", "observable_to_day_90", "observable_to_day_180", "observable_to_day_365")

_LEDGER = """
create schema ledger;
create table ledger.store (schema_version integer not null, batch_no integer not null, fingerprint text not null);
create table ledger.batch (
  batch_no integer primary key, source_key text not null, mapping_sha256 text not null, policy text not null,
  extent text not null, period_from date not null, period_to date not null, extract_date date not null,
  vital_status_checked date not null, rows_read integer not null, rows_accepted integer not null,
  rows_set_aside integer not null, rows_duplicate integer not null, runs_new integer not null,
  runs_unchanged integer not null, runs_replaced integer not null, link_sha256 text not null,
  calendar_sha256 text,
  check (rows_read = rows_accepted + rows_set_aside + rows_duplicate)
);
create table ledger.batch_file (batch_no integer not null, file_key text not null, sha256 text not null, bytes bigint not null,
  primary key (batch_no, file_key));
create table ledger.finding (batch_no integer not null, code text not null, effect text not null, file_key text not null,
  sheet_key text not null, line integer not null, header text not null, rule text not null, shape text not null);
create table ledger.replaced (batch_no integer not null, run_key text not null, table_name text not null, earlier_hash text not null);
create table ledger.table_state (table_name text primary key, n_rows bigint not null, content_sha256 text not null);
create table ledger.run_batch (run_key text primary key, batch_no integer not null);
create table ledger.carried (source_key text not null, field text not null, primary key (source_key, field));
create table ledger.source_column (source_key text not null, batch_no integer not null, file_key text not null, sheet_key text not null,
  header text not null, field text not null, unit text not null);
"""


def create_store(con: duckdb.DuckDBPyConnection, catalog: str = "") -> None:
    """Create schemas record, vocabulary and ledger in the current (or named) database of the connection."""
    if catalog:
        con.execute(f"use {catalog}")
    con.execute("create schema record")
    for _, text in sql_files("record"):
        con.execute(text)
    load_vocabulary(con)
    con.execute(_LEDGER)


@cache
def record_columns() -> dict[str, tuple[tuple[str, str], ...]]:
    """Record table -> its columns as (name, type), in order."""
    con = duckdb.connect(":memory:")
    create_store(con)
    rows = con.execute(
        "select table_name, column_name, data_type from duckdb_columns() where schema_name = 'record' order by table_name, column_index"
    ).fetchall()
    con.close()
    tables: dict[str, list[tuple[str, str]]] = {}
    for table, column, kind in rows:
        tables.setdefault(table, []).append((column, kind))
    return {t: tuple(c) for t, c in tables.items()}


def value_columns(table: str) -> list[str]:
    """Columns that hold what was recorded: neither the run, nor the numbering, nor its position, nor its horizon."""
    without = {"run_key", NUMBERED.get(table, ""), *POSITION, *HORIZON}
    return [c for c, _ in record_columns()[table] if c not in without]


@cache
def one_row_tables() -> tuple[str, ...]:
    """Record tables with one row a run: rows of several sheets that fill them become one."""
    con = duckdb.connect(":memory:")
    create_store(con)
    rows = con.execute(
        """select table_name from duckdb_constraints()
        where schema_name = 'record' and constraint_type = 'PRIMARY KEY' and constraint_column_names = ['run_key'] order by 1"""
    ).fetchall()
    con.close()
    return tuple(t for (t,) in rows if t != "set_aside_run")


def tables_by_run() -> list[str]:
    """Record tables whose rows belong to a run, in name order."""
    return [t for t in record_columns() if t not in NOT_BY_RUN]
