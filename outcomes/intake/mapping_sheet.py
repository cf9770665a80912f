"""The [[file.sheet]] tables of a mapping file: which columns there are and what each of them gives."""

from __future__ import annotations

import difflib
import re
from typing import Any

from outcomes.intake.mapping import BLANKS, CODE_MEANINGS, Column, Piece, Sheet, Source
from outcomes.intake.mapping_problem import Table
from outcomes.intake.moment_pattern import moment_form
from outcomes.intake.vocabulary import Field, vocabulary

_KEY = re.compile(r"[a-z][a-z0-9_]{0,23}")
_ROWS = ("run", "event", "detail", "attempt", "code list")
_CODED = ("code", "boolean")
_TIMED = ("moment", "moment_before", "birth_date", "year_of")
_COUNTED = ("number", "integer", "duration", "scale", "birth_year")
_WINDOWED = ("measurement", "vasoactive_dose")


def read_sheet(table: Table, defaults: dict[str, Any], source: Source) -> Sheet:
    """One sheet; `defaults` are the file's decimal_mark, thousands_mark, pattern and missing tokens."""
    row_is = table.choice("row_is", _ROWS)
    if row_is == "code list":
        return _read_code_list(table)
    blanks = _read_blanks(table)
    defaults = {**defaults, "window": table.text("window", "")}
    columns = tuple(_read_column(t, defaults, blanks) for t in table.tables("column"))
    sheet = Sheet(
        key=table.pattern("key", _KEY),
        position=table.integer("position", low=1, high=200),
        header_line=table.integer("header_line", low=1, high=1000),
        row_is=row_is,
        run=table.texts("run", ()) if row_is == "attempt" else table.texts("run"),
        person=table.texts("person", ()),
        leave_out=table.texts("leave_out", ()),
        columns=columns,
        one_run_each=table.choice("persons", ("", "one run each"), "") == "one run each",
    )
    _check_sheet(sheet, table, blanks, source)
    table.done()
    return sheet


def _read_code_list(table: Table) -> Sheet:
    rows = table.raw.get("rows")
    table.asked.add("rows")
    pair = None
    if rows is not None:
        if isinstance(rows, list) and len(rows) == 2 and all(type(r) is int for r in rows) and rows[0] <= rows[1]:
            pair = (rows[0], rows[1])
        else:
            table.problem("rows", "must be the first and last sheet row, [2, 12]")
    sheet = Sheet(
        key=table.pattern("key", _KEY),
        position=table.integer("position", low=1, high=200),
        header_line=table.integer("header_line", low=1, high=1000),
        row_is="code list",
        code=table.text("code"),
        meaning=table.text("meaning"),
        rows=pair,
        leave_out=table.texts("leave_out", ()),
    )
    table.done()
    return sheet


def _read_blanks(table: Table) -> dict[str, str]:
    """Header -> what an empty cell of it means, from the sheet's [[blank]] tables."""
    meanings: dict[str, str] = {}
    for entry in table.tables("blank"):
        means = entry.choice("means", BLANKS)
        for header in entry.texts("columns"):
            if header in meanings:
                entry.problem("columns", f"{header} is named twice")
            meanings[header] = means
        entry.done()
    return meanings


def _read_column(table: Table, defaults: dict[str, Any], blanks: dict[str, str]) -> Column:
    header = table.text("header")
    if table.has("blank"):
        blank = table.choice("blank", BLANKS)
    else:
        table.asked.add("blank")
        blank = blanks.get(header, "")
        if not blank:
            table.problem("blank", "what an empty cell means is not said: " + ", ".join(BLANKS))
    column = Column(
        header=header,
        pieces=_read_pieces(table, defaults["window"]),
        blank=blank,
        split=table.text("split", ""),
        join=table.texts("join", ()),
        decimal_mark=table.choice("decimal_mark", (".", ","), defaults["decimal_mark"]),
        thousands_mark=table.choice("thousands_mark", ("", ".", ",", "'", " "), defaults["thousands_mark"]),
        pattern=table.text("pattern", defaults["pattern"]),
        missing=(*defaults["missing"], *table.texts("missing", ())),
        codes=table.words("codes"),
        ignore_case=table.flag("ignore_case", False),
        codes_from=table.text("codes_from", ""),
    )
    _check_column(column, table)
    table.done()
    return column


def _read_pieces(table: Table, usual_window: str) -> tuple[Piece, ...]:
    names = table.texts("fields") if table.has("fields") else (table.text("field"),)
    table.asked.update(("field", "fields"))
    window, site, reading = table.text("window", usual_window), table.text("site", ""), table.text("reading", "")
    unit = table.text("unit", "")
    words = vocabulary()
    pieces = []
    for name in names:
        field = words.fields.get(name)
        if field is None:
            if name:
                table.problem("field", "names no field of the vocabulary" + _nearest(name, words.fields))
            continue
        conversion = words.conversions.get((field.quantity, unit))
        if field.quantity and field.quantity != "count" and conversion is None:
            allowed = sorted(r for q, r in words.conversions if q == field.quantity)
            table.problem("unit", f"is needed for {name}, one of: " + ", ".join(allowed))
        factor, shift = (conversion.factor, conversion.shift) if conversion else (1.0, 0.0)
        if field.table in _WINDOWED and window not in words.windows:
            table.problem("window", f"is needed for {name}, one of: " + ", ".join(sorted(words.windows)))
        pieces.append(Piece(field, unit or "1", factor, shift, window, site, reading))
    return tuple(pieces)


def _nearest(name: str, known: dict[str, Field]) -> str:
    close = difflib.get_close_matches(name, known, n=1)
    return f"; the nearest is {close[0]}" if close else ""


def _check_column(column: Column, table: Table) -> None:
    kinds = {p.field.kind for p in column.pieces}
    if len(column.pieces) > 1 and not column.split:
        table.problem("split", "is needed when a cell gives several fields")
    if column.split and len(column.pieces) < 2:
        table.problem("fields", "must name a field for each part of a split cell")
    if kinds & set(_TIMED) and column.pattern:
        try:
            moment_form(column.pattern)
        except ValueError:
            table.problem("pattern", "is no pattern of YYYY MM DD HH mm ss hh AM Z and separators")
    if kinds & set(_CODED):
        _check_codes(column, table)
    elif column.codes and not kinds & set(_COUNTED):
        table.problem("codes", "does not go with this field")


def _check_codes(column: Column, table: Table) -> None:
    if not column.codes:
        table.problem("codes", "is needed: source text = our code")
    for piece in column.pieces:
        list_name = "boolean" if piece.field.kind == "boolean" else piece.field.list_name
        allowed = vocabulary().lists[list_name] | set(CODE_MEANINGS)
        wrong = sum(1 for v in column.codes.values() if v not in allowed)
        if wrong:
            shown = ", ".join(sorted(allowed)[:40])
            table.problem("codes", f"{wrong} codes lead to nothing in the list {list_name}: {shown}")


def _check_sheet(sheet: Sheet, table: Table, blanks: dict[str, str], source: Source) -> None:
    seen: dict[str, str] = {}
    for role, names in (
        ("run", sheet.run),
        ("person", sheet.person),
        ("leave_out", sheet.leave_out),
        ("column", tuple(c.header for c in sheet.columns)),
        ("join", tuple(j for c in sheet.columns for j in c.join)),
    ):
        for name in names:
            if name in seen:
                table.problem(role, f"{name} is listed as {seen[name]} already")
            seen[name] = role
    headers = {c.header for c in sheet.columns}
    for name in blanks:
        if name not in headers:
            table.problem("blank", f"{name} is no mapped column")
    if not sheet.run and sheet.row_is != "attempt":
        table.problem("run", "must name at least one column")
    starts = any(p.field.name == "support_run.start" for c in sheet.columns for p in c.pieces)
    if starts and not sheet.person and not sheet.one_run_each:
        table.problem("person", 'names no column; if the source has no persons, say persons = "one run each"')
    if sheet.person and sheet.one_run_each:
        table.problem("persons", "does not go with columns that name a person")
    _check_fields(sheet, table, source)


def _check_fields(sheet: Sheet, table: Table, source: Source) -> None:
    targets: set[tuple[str, str, str]] = set()
    covered = {kind for entry in source.coverage for kind in entry.kinds}
    for column in sheet.columns:
        for piece in column.pieces:
            name = piece.field.name
            key = (piece.field.table, piece.field.column, piece.window + piece.site)
            if key in targets:
                table.problem("column", f"{column.header} gives {name}, which another column gives already")
            targets.add(key)
            if name.startswith("complication.") and piece.field.column not in covered:
                table.problem("column", f"{column.header}: [[source.complication]] says nothing of {piece.field.column}")
        for kind in column.codes.values() if any(p.field.name == "complication_event.kind" for p in column.pieces) else ():
            if kind not in covered and kind not in CODE_MEANINGS:
                table.problem("codes", f"[[source.complication]] says nothing of {kind}")
        if column.blank == "still on support" and {p.field.table for p in column.pieces} != {"support_end"}:
            table.problem("blank", f"{column.header}: only an end can be still on support")
