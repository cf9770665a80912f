"""The ledger says what the store must contain; every command compares before it computes anything."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import duckdb

from outcomes.errors import StoreProblem
from outcomes.store.schema import record_columns

_INCOMPLETE = StoreProblem(
    "STORE.INCOMPLETE",
    "the content of the store is not what its ledger says",
    todo="restore it from a backup, or import the sources again into a new store; nothing was computed",
)


@dataclass(frozen=True)
class TableState:
    table: str
    n_rows: int
    content_sha256: str


def table_states(con: duckdb.DuckDBPyConnection, catalog: str = "") -> list[TableState]:
    """Row count and order-independent SHA-256 of every record table.

    Each row becomes a canonical text and is hashed; the sorted hashes are hashed again in groups by their first two
    digits, so that no text of the size of the table is ever made.
    """
    prefix = f"{catalog}." if catalog else ""
    states = []
    for table, columns in sorted(record_columns().items()):
        text = "concat_ws(chr(31), " + ", ".join(f"coalesce(\"{c}\"::varchar, '~')" for c, _ in columns) + ")"
        rows = con.execute(
            f"""select bucket, count(*), sha256(string_agg(h, '' order by h)) from (
              select h, h[1:2] as bucket from (select sha256({text}) as h from {prefix}record.{table})
            ) group by bucket order by bucket"""
        ).fetchall()
        digest = hashlib.sha256("".join(h for _, _, h in rows).encode()).hexdigest()
        states.append(TableState(table, sum(n for _, n, _ in rows), digest))
    return states


def fingerprint(states: list[TableState]) -> str:
    """One SHA-256 of the whole content; the same content gives the same value, however it came in."""
    body = "\n".join(f"{s.table} {s.n_rows} {s.content_sha256}" for s in states)
    return hashlib.sha256(body.encode()).hexdigest()


def write_states(con: duckdb.DuckDBPyConnection, batch: int, schema_version: int, catalog: str) -> str:
    states = table_states(con, catalog)
    for s in states:
        con.execute(f"insert into {catalog}.ledger.table_state values (?, ?, ?)", [s.table, s.n_rows, s.content_sha256])
    mark = fingerprint(states)
    con.execute(f"insert into {catalog}.ledger.store values (?, ?, ?)", [schema_version, batch, mark])
    return mark


def verify(con: duckdb.DuckDBPyConnection) -> str:
    """Compare content and ledger; return the fingerprint. Raises StoreProblem STORE.INCOMPLETE."""
    try:
        stored = {t: TableState(t, n, h) for t, n, h in con.execute("select * from ledger.table_state").fetchall()}
        found = table_states(con)
        row = con.execute("select fingerprint from ledger.store").fetchone()
    except duckdb.Error:
        raise _INCOMPLETE from None
    mark = fingerprint(found)
    if {s.table: s for s in found} != stored or row is None or row[0] != mark:
        raise _INCOMPLETE
    return mark


def batch_number(con: duckdb.DuckDBPyConnection) -> int:
    row = con.execute("select batch_no from ledger.store").fetchone()
    return int(row[0]) if row else 0
