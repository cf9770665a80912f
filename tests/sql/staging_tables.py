"""The staging schema for tests of its steps: pieces with what a test says nothing of filled in."""

from __future__ import annotations

import duckdb
from text_table import fill, rows_of, staging_step, table_text

from outcomes.intake.moment_pattern import moment_form
from outcomes.intake.pieces import layout_table, number_form
from outcomes.intake.stage import connect_in_memory
from outcomes.intake.vocabulary import load_vocabulary, vocabulary

_TABLES = """
create schema staging;
create table staging.cell (sheet_no integer, line integer, run_no integer, piece_no integer, text varchar, number double,
  moment timestamp, problem varchar);
create table staging.piece (piece_no integer, sheet_no integer, header varchar, field varchar, target_table varchar,
  target_column varchar, kind varchar, quantity varchar, hard_low double, hard_high double, effect varchar, unit varchar,
  factor double, shift double, window_label varchar, site varchar, reading varchar, blank varchar, ignore_case boolean,
  is_coded boolean, is_timed boolean, is_counted boolean, number_form varchar, decimal_mark varchar,
  thousands_mark varchar, moment_form varchar, moment_rewrite varchar, moment_offset varchar, zone varchar, row_is varchar);
create table staging.code (piece_no integer, text varchar, value varchar);
create table staging.missing_token (piece_no integer, token varchar);
create table staging.run_start (run_no integer, start_utc timestamp, start_local timestamp, sheet_no integer, line integer);
"""
_CODED = ("code", "boolean")
_TIMED = ("moment", "moment_before", "birth_date", "year_of")
_ORDER = ("text", "typed", "moment", "value", "finding")


def staged(upto: str, *, pieces: str, cells: str, codes: str = "", tokens: str = "", starts: str = "") -> duckdb.DuckDBPyConnection:
    """A connection in which the steps up to `upto` have run, each as table staging.<step>.

    pieces: piece_no, field and any of unit, blank, pattern, decimal_mark, thousands_mark, zone, ignore_case, row_is.
    cells: piece_no and any of line, run_no, text, number, moment, problem; a text in quotation marks keeps its spaces.
    """
    con = connect_in_memory()
    load_vocabulary(con)
    con.execute(_TABLES)
    for row in rows_of(pieces):
        fill(con, "staging.piece", table_text([_piece(row)]))
    layouts = layout_table([(int(str(r["piece_no"])), str(r.get("pattern") or "")) for r in rows_of(pieces)])
    con.register("layouts", layouts)
    con.execute("create table staging.moment_layout as select * from layouts")
    for number, row in enumerate(rows_of(cells), start=1):
        _put_cell(con, {"sheet_no": "0", "line": str(number), "run_no": "1", **row})
    for table, text in (("code", codes), ("missing_token", tokens), ("run_start", starts)):
        if text:
            fill(con, f"staging.{table}", text)
    for step in _ORDER[: _ORDER.index(upto) + 1]:
        con.execute(f"create table staging.{step} as {staging_step(step)}")
    return con


def _put_cell(con: duckdb.DuckDBPyConnection, row: dict[str, str | None]) -> None:
    if row.get("text") and str(row["text"]).startswith('"'):
        row["text"] = str(row["text"])[1:-1]
    con.execute(f"insert into staging.cell ({', '.join(row)}) values ({', '.join('?' * len(row))})", list(row.values()))


def _piece(given: dict[str, str | None]) -> dict[str, str | None]:
    field = vocabulary().fields[str(given["field"])]
    unit = given.get("unit") or ""
    conversion = vocabulary().conversions.get((field.quantity, unit))
    form = moment_form(str(given["pattern"])) if given.get("pattern") else None
    decimal, thousands = given.get("decimal_mark") or ".", given.get("thousands_mark") or ""
    made: dict[str, str | None] = {
        "piece_no": given["piece_no"], "sheet_no": "0", "header": f"column {given['piece_no']}", "field": field.name,
        "target_table": field.table, "target_column": field.column, "kind": field.kind, "quantity": field.quantity,
        "hard_low": None if field.hard_low is None else str(field.hard_low),
        "hard_high": None if field.hard_high is None else str(field.hard_high),
        "effect": field.effect, "unit": unit, "factor": str(conversion.factor if conversion else 1.0),
        "shift": str(conversion.shift if conversion else 0.0), "window_label": "pre_last", "site": "", "reading": "",
        "blank": given.get("blank") or "not recorded", "ignore_case": given.get("ignore_case") or "false",
        "is_coded": str(field.kind in _CODED), "is_timed": str(field.kind in _TIMED),
        "is_counted": str(field.kind not in (*_CODED, *_TIMED, "word")),
        "decimal_mark": decimal, "thousands_mark": thousands or "_",
        "zone": given.get("zone") or "Europe/Vienna", "row_is": given.get("row_is") or "run",
    }  # fmt: skip
    con_only = {
        "number_form": number_form(decimal, thousands),
        "moment_form": form.form if form else "",
        "moment_rewrite": form.rewrite if form else "",
        "moment_offset": form.offset if form else "",
    }
    return {**made, **{k: _escaped(v) for k, v in con_only.items()}}


def _escaped(expression: str) -> str:
    """A regular expression holds the bar that separates cells; text tables read {bar} as one."""
    return expression.replace("|", "{bar}")
