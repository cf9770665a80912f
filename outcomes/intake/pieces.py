"""The mapping as tables of the staging connection: one row a piece, its codes and its missing tokens."""

from __future__ import annotations

import re

import duckdb
import pyarrow as pa

from outcomes.intake.mapping import Column, Mapping, Piece, Sheet
from outcomes.intake.moment_pattern import moment_form, moment_layout

_CODED = ("code", "boolean")
_TIMED = ("moment", "moment_before", "birth_date", "year_of")

PIECE_COLUMNS = {
    "piece_no": pa.int32(), "sheet_no": pa.int32(), "header": pa.string(), "field": pa.string(),
    "target_table": pa.string(), "target_column": pa.string(), "kind": pa.string(), "quantity": pa.string(),
    "hard_low": pa.float64(), "hard_high": pa.float64(), "effect": pa.string(), "unit": pa.string(),
    "factor": pa.float64(), "shift": pa.float64(), "window_label": pa.string(), "site": pa.string(),
    "reading": pa.string(), "blank": pa.string(), "ignore_case": pa.bool_(), "is_coded": pa.bool_(),
    "is_timed": pa.bool_(), "is_counted": pa.bool_(), "number_form": pa.string(), "decimal_mark": pa.string(),
    "thousands_mark": pa.string(), "moment_form": pa.string(), "moment_rewrite": pa.string(),
    "moment_offset": pa.string(), "zone": pa.string(),
}  # fmt: skip


def sheets_of(mapping: Mapping) -> list[tuple[int, str, Sheet]]:
    """(sheet number, file key, sheet) of every sheet that is no code list, in the order of the mapping."""
    listed = [(f.key, s) for f in mapping.files for s in f.sheets if s.row_is != "code list"]
    return [(i, key, sheet) for i, (key, sheet) in enumerate(listed)]


def load_pieces(con: duckdb.DuckDBPyConnection, mapping: Mapping, lists: dict[str, dict[str, str]]) -> dict[int, list[tuple[Column, list[int]]]]:
    """Create staging.piece, staging.code and staging.missing_token; return per sheet its columns with piece numbers.

    lists: key of a code-list sheet -> code text -> meaning.
    """
    pieces: list[dict[str, object]] = []
    codes: list[tuple[int, str, str]] = []
    tokens: list[tuple[int, str]] = []
    columns: dict[int, list[tuple[Column, list[int]]]] = {}
    patterns: list[Column] = []
    for sheet_no, _, sheet in sheets_of(mapping):
        for column in sheet.columns:
            numbers = []
            for piece in column.pieces:
                number = len(pieces)
                numbers.append(number)
                patterns.append(column)
                pieces.append(_piece_row(number, sheet_no, column, piece, mapping.source.time_zone))
                codes += [(number, text, value) for text, value in _codes(column, lists)]
                tokens += [(number, token) for token in sorted(set(column.missing))]
            columns.setdefault(sheet_no, []).append((column, numbers))
        columns.setdefault(sheet_no, [])
    _create(con, "piece", pa.Table.from_pylist(pieces, schema=pa.schema(list(PIECE_COLUMNS.items()))))
    code_rows = [{"piece_no": n, "text": t, "value": v} for n, t, v in codes]
    _create(con, "code", pa.Table.from_pylist(code_rows, schema=pa.schema(
        [("piece_no", pa.int32()), ("text", pa.string()), ("value", pa.string())])))
    _create(con, "moment_layout", layout_table([(i, p.pattern) for i, p in enumerate(patterns)]))
    token_rows = [{"piece_no": n, "token": t} for n, t in tokens]
    _create(con, "missing_token", pa.Table.from_pylist(token_rows, schema=pa.schema(
        [("piece_no", pa.int32()), ("token", pa.string())])))
    return columns


LAYOUT_PARTS = ("year", "month", "day", "hour", "minute", "second", "half")


def layout_table(patterns: list[tuple[int, str]]) -> pa.Table:
    """Places of the parts for pieces whose pattern has a fixed width: piece_no, shape and one column a part."""
    rows = []
    for number, pattern in patterns:
        layout = moment_layout(pattern) if pattern else None
        if layout is not None:
            places = {f"{part}_at": at for part, at in zip(LAYOUT_PARTS, layout.starts, strict=True)}
            rows.append({"piece_no": number, "shape": layout.shape, **places})
    kinds = [("piece_no", pa.int32()), ("shape", pa.string()), *((f"{part}_at", pa.int32()) for part in LAYOUT_PARTS)]
    return pa.Table.from_pylist(rows, schema=pa.schema(kinds))


def _create(con: duckdb.DuckDBPyConnection, name: str, table: pa.Table) -> None:
    con.register("arrow_in", table)
    con.execute(f"create or replace table staging.{name} as select * from arrow_in")
    con.unregister("arrow_in")


def _codes(column: Column, lists: dict[str, dict[str, str]]) -> list[tuple[str, str]]:
    """Source text -> our code, through the code sheet if there is one; duplicates after folding are the same code."""
    pairs: dict[str, str] = {}
    if column.codes_from:
        folded = {_fold(k, column.ignore_case): v for k, v in column.codes.items()}
        for code, meaning in lists.get(column.codes_from, {}).items():
            target = folded.get(_fold(meaning, column.ignore_case))
            if target is not None:
                pairs[_fold(code, column.ignore_case)] = target
    else:
        for text, value in column.codes.items():
            pairs[_fold(text, column.ignore_case)] = value
    return sorted(pairs.items())


def _fold(text: str, ignore_case: bool) -> str:
    return text.strip().lower() if ignore_case else text.strip()


def _piece_row(number: int, sheet_no: int, column: Column, piece: Piece, zone: str) -> dict[str, object]:
    field = piece.field
    timed = field.kind in _TIMED
    form = moment_form(column.pattern) if timed and column.pattern else None
    return {
        "piece_no": number, "sheet_no": sheet_no, "header": column.header, "field": field.name,
        "target_table": field.table, "target_column": field.column, "kind": field.kind, "quantity": field.quantity,
        "hard_low": field.hard_low, "hard_high": field.hard_high, "effect": field.effect, "unit": piece.unit,
        "factor": piece.factor, "shift": piece.shift, "window_label": piece.window, "site": piece.site,
        "reading": piece.reading, "blank": column.blank, "ignore_case": column.ignore_case,
        "is_coded": field.kind in _CODED, "is_timed": timed,
        "is_counted": not timed and field.kind not in _CODED and field.kind != "word",
        "number_form": number_form(column.decimal_mark, column.thousands_mark),
        "decimal_mark": column.decimal_mark, "thousands_mark": column.thousands_mark or "_",
        "moment_form": form.form if form else "", "moment_rewrite": form.rewrite if form else "",
        "moment_offset": form.offset if form else "", "zone": zone,
    }  # fmt: skip


def number_form(decimal_mark: str, thousands_mark: str) -> str:
    """Regular expression of a whole number cell: ASCII digits, at most 15, no exponent."""
    whole = "[0-9]{1,15}"
    if thousands_mark:
        whole = f"(?:[0-9]{{1,15}}|[0-9]{{1,3}}(?:{re.escape(thousands_mark)}[0-9]{{3}}){{1,4}})"
    return f"-?{whole}(?:{re.escape(decimal_mark)}[0-9]{{1,15}})?"
