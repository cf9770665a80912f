"""Say what a table, field, unit, code, check or complication kind means.

examples:
  outcomes describe                      all tables, one line each
  outcomes describe support_end          columns of a table, with units
  outcomes describe measurement.lactate  a field: unit, limits, units it can be given in
  outcomes describe limb_ischaemia       a code of any list
  outcomes describe CELL.LIMIT           a finding
"""

from __future__ import annotations

import argparse
import difflib

import duckdb

from outcomes.command import _shared as shared
from outcomes.errors import UsageError
from outcomes.intake.rules import RULES
from outcomes.intake.vocabulary import vocabulary
from outcomes.store.checks import all_checks
from outcomes.store.schema import create_store


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("word", nargs="?", help="table, field, code, list or finding")
    parser.add_argument("--json", action="store_true", help="print as JSON")


def run(args: argparse.Namespace) -> int:
    con = duckdb.connect(":memory:")
    create_store(con)
    lines = _overview(con) if args.word is None else _find(con, args.word)
    con.close()
    if not lines:
        near = difflib.get_close_matches(args.word, _words(), n=3)
        raise UsageError(
            "DESCRIBE.UNKNOWN",
            "nothing here has that name",
            todo="the nearest: " + ", ".join(near) if near else "outcomes describe",
        )
    if args.json:
        shared.print_json({"lines": lines})
    else:
        print("\n".join(lines))
    return 0


def _words() -> list[str]:
    words = vocabulary()
    codes = [value for values in words.lists.values() for value in values]
    return sorted({*words.fields, *words.lists, *codes, *RULES, *(c.code for c in all_checks())})


def _overview(con: duckdb.DuckDBPyConnection) -> list[str]:
    rows = con.execute(
        "select table_name, comment from duckdb_tables() where schema_name = 'record' order by table_name"
    ).fetchall()
    lists = ", ".join(sorted(vocabulary().lists))
    return [*(f"{name}: {comment}" for name, comment in rows), "", f"lists of codes: {lists}"]


def _find(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    return [*_table(con, word), *_field(con, word), *_list(con, word), *_code(con, word), *_finding(word)]


def _table(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    rows = con.execute(
        "select column_name, data_type, comment from duckdb_columns()"
        " where schema_name = 'record' and table_name = ? order by column_index",
        [word],
    ).fetchall()
    if not rows:
        return []
    about = con.execute(
        "select comment from duckdb_tables() where schema_name = 'record' and table_name = ?", [word]
    ).fetchone()
    fields = sorted(f.name for f in vocabulary().fields.values() if f.table == word)
    return [
        f"table {word}: {about[0] if about else ''}",
        *(f"  {name} ({kind.lower()}): {comment}" for name, kind, comment in rows),
        "fields that a mapping can name: " + (", ".join(fields) or "none"),
    ]


def _field(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    field = vocabulary().fields.get(word)
    if field is None:
        return []
    comment = con.execute(
        "select comment from duckdb_columns()"
        " where schema_name = 'record' and table_name = ? and column_name = ?",
        [field.table, field.column],
    ).fetchone()
    lines = [
        f"field {word}: {comment[0] if comment else _label(con, field.column)}",
        f"  kind: {field.kind}; a wrong cell sets aside the {field.effect}",
    ]
    if field.hard_low is not None or field.hard_high is not None:
        lines.append(f"  possible: {_number(field.hard_low)} to {_number(field.hard_high)} (canonical unit)")
    units = sorted(
        (r, c) for (q, r), c in vocabulary().conversions.items() if q == field.quantity and field.quantity
    )
    for received, c in units:
        shift = f" + {c.shift:.10g}" if c.shift else ""
        lines.append(f"  unit {received}: times {c.factor:.10g}{shift} gives {c.unit}")
    if field.list_name:
        lines.append("  codes: " + ", ".join(sorted(vocabulary().lists[field.list_name])))
    if field.kind == "boolean":
        lines.append("  codes: true, false")
    return lines


def _number(value: float | None) -> str:
    return "any" if value is None else f"{value:g}"


def _label(con: duckdb.DuckDBPyConnection, word: str) -> str:
    row = con.execute(
        "select label || ', ' || unit from vocabulary.analyte where analyte = ?"
        " union all select label from vocabulary.complication_kind where kind = ?",
        [word, word],
    ).fetchone()
    return str(row[0]) if row else word


def _list(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    values = vocabulary().lists.get(word)
    return [f"list {word}: " + ", ".join(sorted(values))] if values else []


def _code(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    in_lists = con.execute(
        "select list, label from vocabulary.code_value where value = ? order by list", [word]
    ).fetchall()
    return [
        *(f"code {word} of the list {name}: {label}" for name, label in in_lists),
        *_complication(con, word),
        *_own_list(con, word),
        *_analyte(con, word),
    ]


def _complication(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    rows = con.execute(
        "select label, gap_h, window_h, from_h, at_risk, source"
        " from vocabulary.complication_kind where kind = ?",
        [word],
    ).fetchall()
    return [
        f"complication {word}: {label}. A new record within {gap:g} h is the same episode; "
        f"counted up to {window:g} h after the end; at risk from {start:g} h, {at_risk}. Definition: {source}"
        for label, gap, window, start, at_risk, source in rows
    ]


def _own_list(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    """Codes of the lists that have a table of their own."""
    lines = []
    for table, column in (
        ("end_kind", "end_kind"),
        ("indication_group", "indication_group"),
        ("intended_pathway", "intended_pathway"),
        ("window_label", "window_label"),
    ):
        meaning = "label" if table == "indication_group" else "meaning"
        row = con.execute(f"select {meaning} from vocabulary.{table} where {column} = ?", [word]).fetchone()
        if row:
            lines.append(f"code {word} of the list {table}: {row[0]}")
    return lines


def _analyte(con: duckdb.DuckDBPyConnection, word: str) -> list[str]:
    rows = con.execute(
        "select label, unit, plausible_low, plausible_high, hard_low, hard_high"
        " from vocabulary.analyte where analyte = ?",
        [word],
    ).fetchall()
    return [
        f"analyte {word}: {label}, {unit}; usual {low:g} to {high:g}, possible {hard_low:g} to {hard_high:g}"
        for label, unit, low, high, hard_low, hard_high in rows
    ]


def _finding(word: str) -> list[str]:
    lines = [f"finding {word}: {RULES[word]}"] if word in RULES else []
    for check in all_checks():
        if check.code == word:
            lines.append(
                f"check {word} ({check.topic}): {check.rule}; sets aside: {check.effect}; "
                f"denominator: rows of {check.of}"
            )
    return lines
