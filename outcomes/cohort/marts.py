"""Hop 4, first half: the marts of a verified store, made in memory beside it."""

from __future__ import annotations

from pathlib import Path

import duckdb

from outcomes.errors import OutcomesError
from outcomes.resources import sql_files
from outcomes.store.connect import check_file, harden, open_for_reading, translate
from outcomes.store.ledger import verify
from outcomes.store.schema import record_columns


def open_marts(store: Path) -> duckdb.DuckDBPyConnection:
    """An in-memory connection with views record.*, vocabulary.* and ledger.* on the store and tables mart.*.

    The store is verified against its ledger first and is only read. Raises StoreProblem or StoreBusy.
    """
    check_file(store)
    checked = open_for_reading(store)
    try:
        verify(checked)
    finally:
        checked.close()
    con = duckdb.connect(
        ":memory:",
        config={
            "autoinstall_known_extensions": "false",
            "autoload_known_extensions": "false",
            "allow_community_extensions": "false",
            "python_enable_replacements": "false",
        },
    )
    try:
        con.execute("set TimeZone = 'UTC'")
        con.execute("set threads = 1")
        con.execute("set temp_directory = ''")
        con.execute("attach '" + str(store).replace("'", "''") + "' as store (read_only)")
        harden(con)
        _views(con)
        make_marts(con)
    except duckdb.Error as error:
        con.close()
        raise translate(error) from error
    except OutcomesError:
        con.close()
        raise
    return con


def _views(con: duckdb.DuckDBPyConnection) -> None:
    for schema in ("record", "vocabulary", "ledger"):
        con.execute(f"create schema {schema}")
        names = con.execute(
            "select table_name from duckdb_tables()"
            " where database_name = 'store' and schema_name = ? order by table_name",
            [schema],
        ).fetchall()
        for (name,) in names:
            con.execute(f'create view {schema}."{name}" as select * from store.{schema}."{name}"')


def make_marts(con: duckdb.DuckDBPyConnection) -> None:
    """Create mart.<name> from every file of sql/marts, in the order of their numbers.

    Needs schemas record, vocabulary.
    """
    con.execute("create schema mart")
    for stem, text in sql_files("marts"):
        con.execute(f'create table mart."{stem[3:]}" as {text}')


def empty_record(con: duckdb.DuckDBPyConnection) -> None:
    """For tests and for building cohorts by hand: unconstrained empty tables record.*."""
    con.execute("create schema record")
    for table, columns in record_columns().items():
        body = ", ".join(f'"{c}" {t}' for c, t in columns)
        con.execute(f"create table record.{table} ({body})")
