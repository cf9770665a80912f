"""Text tables for the tests of the SQL: what goes in and what comes out, as a reader sees it.

    run_key | end_h | end_kind
    a       | 48    | recovery
    b       |       | open

An empty cell is null; {bar} stands for a bar inside a cell. Values stay text and DuckDB casts them to the type of the column they are put into.
"""

from __future__ import annotations

import hashlib
from collections.abc import Sequence

import duckdb

from outcomes.cohort.marts import empty_record, make_marts
from outcomes.intake.vocabulary import load_vocabulary
from outcomes.resources import sql_files

RUN_DEFAULTS = {
    "person_key": "p_{run_key}",
    "source_key": "north",
    "nth_run": "1",
    "hours_from_first_run": "0",
    "run_year": "2021",
    "age_years": "60",
    "age_is_uncertain": "false",
    "age_topcoded": "false",
    "plan_is_from_start": "true",
    "observable_to_day_30": "true",
    "observable_to_day_90": "false",
    "observable_to_day_180": "false",
    "observable_to_day_365": "false",
}
SOURCE = """
source_key | plan_written | vital_status_date | no_death_means | attempts | period_from_year | period_to_year
north      | at start     | day of death      | unknown        | included | 2021             | 2023
"""


def rows_of(text: str) -> list[dict[str, str | None]]:
    """Rows of a text table; an empty cell is None."""
    lines = [line for line in text.strip().splitlines() if line.strip()]
    header = [name.strip() for name in lines[0].split("|")]
    rows = []
    for line in lines[1:]:
        cells = [cell.strip().replace("{bar}", "|") or None for cell in line.split("|")]
        assert len(cells) == len(header), f"{len(cells)} cells under {len(header)} headers: {line}"
        rows.append(dict(zip(header, cells, strict=True)))
    return rows


def fill(con: duckdb.DuckDBPyConnection, table: str, text: str) -> None:
    """Append the rows of a text table to a table of the connection."""
    for row in rows_of(text):
        names = ", ".join(f'"{name}"' for name in row)
        con.execute(f"insert into {table} ({names}) values ({', '.join('?' * len(row))})", list(row.values()))


def shown(con: duckdb.DuckDBPyConnection, query: str) -> list[list[str]]:
    """What a query gives, each cell as text: null empty, whole numbers without a point, booleans true and false."""
    return [[_cell(value) for value in row] for row in con.execute(query).fetchall()]


def expected(text: str) -> tuple[list[str], list[list[str]]]:
    rows = rows_of(text)
    return list(rows[0]), [[cell or "" for cell in row.values()] for row in rows]


def same(con: duckdb.DuckDBPyConnection, relation: str, text: str, order: str = "all") -> None:
    """The named columns of a relation, in order, are those of the text table."""
    names, rows = expected(text)
    columns = ", ".join(f'"{name}"' for name in names)
    found = shown(con, f"select {columns} from {relation} order by {order}")
    assert found == rows, "\n".join(["", *(" | ".join(r) for r in found), "instead of", *(" | ".join(r) for r in rows)])


def _cell(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, float):
        return f"{value:.6g}"
    return str(value)


def surrogate(name: str) -> str:
    """A key of the shape of ours from a short name, so that tables stay readable."""
    return hashlib.md5(name.encode(), usedforsecurity=False).hexdigest()


def marts(source: str = SOURCE, **tables: str) -> duckdb.DuckDBPyConnection:
    """Marts of hand-made record tables. Runs need only the columns they are about; persons are made for them."""
    con = duckdb.connect(":memory:")
    load_vocabulary(con)
    empty_record(con)
    fill(con, "record.source", source)
    for table, text in tables.items():
        fill(con, f"record.{table}", with_defaults(text) if table == "support_run" else text)
    con.execute(
        """insert into record.person (person_key, order_is_uncertain)
        select distinct person_key, false from record.support_run
        where person_key not in (select person_key from record.person)"""
    )
    make_marts(con)
    return con


def with_defaults(text: str) -> str:
    """Support runs with what a test says nothing of filled in."""
    rows = rows_of(text)
    missing = [name for name in RUN_DEFAULTS if name not in rows[0]]
    return table_text([{**row, **{m: RUN_DEFAULTS[m].format(**row) for m in missing}} for row in rows])


def table_text(rows: Sequence[dict[str, str | None]]) -> str:
    return "\n".join([" | ".join(rows[0]), *(" | ".join(cell or "" for cell in row.values()) for row in rows)])


def staging_step(name: str) -> str:
    """Text of one staging step by its name without the number."""
    return {stem[3:]: text for stem, text in sql_files("staging")}[name]
