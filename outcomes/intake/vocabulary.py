"""The closed lists of `sql/vocabulary`, loaded into a connection or read as Python values."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import duckdb
import pyarrow as pa

from outcomes.resources import sql_files


@dataclass(frozen=True)
class Field:
    """What a column can be mapped to. kind and effect as in sql/vocabulary/field.sql; limits in the canonical unit."""

    name: str
    table: str
    column: str
    kind: str
    quantity: str
    list_name: str
    hard_low: float | None
    hard_high: float | None
    effect: str


@dataclass(frozen=True)
class Conversion:
    """canonical = received * factor + shift."""

    unit: str
    factor: float
    shift: float


@dataclass(frozen=True)
class Vocabulary:
    fields: dict[str, Field]
    lists: dict[str, frozenset[str]]
    conversions: dict[tuple[str, str], Conversion]
    windows: frozenset[str]


def load_vocabulary(con: duckdb.DuckDBPyConnection) -> None:
    """Create schema `vocabulary` with one table a list."""
    con.execute("create schema if not exists vocabulary")
    for stem, rows in _lists().items():
        con.register("arrow_in", rows)
        con.execute(f'create or replace table vocabulary."{stem}" as select * from arrow_in')
        con.unregister("arrow_in")


@cache
def _lists() -> dict[str, pa.Table]:
    """Every list as rows: the files are read and parsed once a process, however many connections want them."""
    con = duckdb.connect(":memory:")
    lists = {stem: con.sql(text).to_arrow_table() for stem, text in sql_files("vocabulary")}
    con.close()
    return lists


@cache
def vocabulary() -> Vocabulary:
    """All lists as Python values."""
    con = duckdb.connect(":memory:")
    load_vocabulary(con)
    fields = {row[0]: Field(*row) for row in con.execute(_FIELDS).fetchall()}
    lists: dict[str, set[str]] = {}
    for name, value in con.execute(_LISTS).fetchall():
        lists.setdefault(name, set()).add(value)
    conversions = {
        (q, r): Conversion(u, f, s)
        for q, r, u, f, s in con.execute(
            "select quantity, received_unit, unit, factor::double, shift::double from vocabulary.unit_conversion"
        ).fetchall()
    }
    windows = frozenset(r[0] for r in con.execute("select window_label from vocabulary.window_label").fetchall())
    con.close()
    return Vocabulary(fields, {k: frozenset(v) for k, v in lists.items()}, conversions, windows)


# Measurements, doses and wide complication columns follow from their own lists.
_FIELDS = """
select field, target_table, target_column, kind, quantity, list, hard_low::double, hard_high::double, effect
from vocabulary.field
union all
select 'measurement.' || analyte, 'measurement', analyte, 'number', quantity, '', hard_low::double, hard_high::double, 'cell'
from vocabulary.analyte
union all
select 'vasoactive_dose.' || value, 'vasoactive_dose', value, 'number',
       case value when 'vasopressin' then 'dose_iu' else 'dose' end, '', 0.0,
       case value when 'vasopressin' then 0.01 when 'milrinone' then 3.0 when 'dopamine' then 60.0
                  when 'dobutamine' then 60.0 else 10.0 end, 'cell'
from vocabulary.code_value where list = 'drug'
union all
select 'complication.' || kind, 'complication_event', kind, 'moment', '', '', -8760.0, 17520.0, 'cell'
from vocabulary.complication_kind
order by all
"""

_LISTS = """
select list, value from vocabulary.code_value
union all select 'intended_pathway', intended_pathway from vocabulary.intended_pathway
union all select 'indication_group', indication_group from vocabulary.indication_group
union all select 'complication_kind', kind from vocabulary.complication_kind
union all select 'end_kind', end_kind from vocabulary.end_kind
union all select 'boolean', unnest(['true', 'false'])
"""
