"""Reading a mapping file (TOML): every mistake is named by its place in the file, all at once."""

from __future__ import annotations

import hashlib
import re
import tomllib
from collections.abc import Callable
from typing import Any

from outcomes.errors import UsageError
from outcomes.intake.mapping import File, Mapping, Sheet, Source
from outcomes.intake.mapping_problem import Problems, Table
from outcomes.intake.mapping_sheet import read_sheet
from outcomes.intake.mapping_source import read_source

UNSETTLED = "?"
_OWN_WORDS = re.compile(r"\.header$|\.(missing|leave_out|columns|join)\[\d+\]$")
KEY = re.compile(r"[a-z][a-z0-9_]{0,23}")
_ENCODINGS = ("utf-8", "utf-8-sig", "cp1252", "latin-1", "utf-16")
_SEPARATORS = (",", ";", "\t", "|")


def read_mapping(text: str) -> Mapping:
    """Parse and check a mapping file.

    Raises UsageError MAPPING.SYNTAX (not TOML), MAPPING.UNSETTLED (marks of the draft are left) or
    MAPPING.INVALID (with one line a problem). Messages name keys of the mapping file, never values of the data.
    """
    try:
        raw = tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError) as error:
        place = re.search(r"at line \d+, column \d+", str(error))
        raise UsageError(
            "MAPPING.SYNTAX", "the mapping file is not valid TOML", where=place.group(0) if place else "", todo="correct it"
        ) from None
    _refuse_unsettled(raw)
    problems = Problems()
    top = Table(raw, "mapping", problems)
    if top.integer("format", 1) != 1:
        problems.add("format", "only format = 1 is known")
    source = read_source(top.table("source"))
    files = tuple(_read_file(t, source) for t in top.tables("file"))
    if not files:
        problems.add("file", "at least one [[file]] is needed")
    _check_whole(files, problems)
    top.done()
    problems.raise_if_any()
    return Mapping(source, files, hashlib.sha256(text.encode("utf-8")).hexdigest())


def unsettled(raw: dict[str, Any]) -> list[str]:
    """Dotted places of the marks of a draft. A header, or a word for a missing value, may itself be a question mark."""
    return sorted(p for p in _places(raw, "", lambda v: v == UNSETTLED) if not _OWN_WORDS.search(p))


def _refuse_unsettled(raw: dict[str, Any]) -> None:
    places = unsettled(raw)
    if places:
        shown = ", ".join(places[:20]) + (f" and {len(places) - 20} more" if len(places) > 20 else "")
        raise UsageError(
            "MAPPING.UNSETTLED",
            f"{len(places)} questions of the draft are not answered",
            where=shown,
            todo="replace each '?' by what the source means; the comment beside it says what was seen",
        )


def _places(node: Any, path: str, test: Callable[[Any], bool]) -> list[str]:
    """Dotted paths of every leaf or key for which test holds; entries of a list are numbered from 1."""
    found: list[str] = []
    if isinstance(node, dict):
        for key, value in node.items():
            found += _places(value, f"{path}.{key}" if path else key, test)
    elif isinstance(node, list):
        for i, value in enumerate(node, start=1):
            label = value.get("header") or value.get("key") if isinstance(value, dict) else None
            found += _places(value, f"{path}[{label or i}]", test)
    elif test(node):
        found.append(path)
    return found


def _read_file(table: Table, source: Source) -> File:
    kind = table.choice("kind", ("csv", "xlsx", "parquet"))
    file = File(
        key=table.pattern("key", KEY),
        kind=kind,
        encoding=table.choice("encoding", _ENCODINGS) if kind == "csv" else "",
        separator=table.choice("separator", _SEPARATORS) if kind == "csv" else "",
        max_rows=table.integer("max_rows", 1_000_000, low=1, high=50_000_000),
        sheets=(),
    )
    defaults = {
        "decimal_mark": table.choice("decimal_mark", (".", ","), "."),
        "thousands_mark": table.choice("thousands_mark", ("", ".", ",", "'", " "), ""),
        "pattern": table.text("pattern", ""),
        "missing": table.texts("missing", ()),
    }
    sheets = tuple(read_sheet(t, defaults, source) for t in table.tables("sheet"))
    if not sheets:
        table.problem("sheet", "at least one [[file.sheet]] is needed")
    table.done()
    return File(file.key, file.kind, file.encoding, file.separator, file.max_rows, sheets)


def _check_whole(files: tuple[File, ...], problems: Problems) -> None:
    """Rules that need more than one table: unique keys, code lists that exist, one sheet of runs."""
    keys = [f.key for f in files]
    if len(set(keys)) != len(keys):
        problems.add("file", "two files have the same key")
    sheets: list[Sheet] = [s for f in files for s in f.sheets]
    names = [(f.key, s.key) for f in files for s in f.sheets]
    if len(set(names)) != len(names):
        problems.add("file.sheet", "two sheets of one file have the same key")
    lists = {s.key for s in sheets if s.row_is == "code list"}
    for sheet in sheets:
        for column in sheet.columns:
            if column.codes_from and column.codes_from not in lists:
                problems.add(f"column {column.header}", "codes_from names no sheet with row_is = \"code list\"")
    _check_shared(sheets, problems)
    fields = {p.field.name for s in sheets if s.row_is == "run" for c in s.columns for p in c.pieces}
    if any(s.row_is == "run" for s in sheets) and "support_run.start" not in fields:
        problems.warn_start_missing()


def _check_shared(sheets: list[Sheet], problems: Problems) -> None:
    """Two sheets with one row a run may fill the same record table, but not the same field of it."""
    given: dict[tuple[str, str, str], Sheet] = {}
    for sheet in (s for s in sheets if s.row_is == "run"):
        for piece in (p for c in sheet.columns for p in c.pieces):
            key = (piece.field.table, piece.field.column, piece.window + piece.site)
            if given.setdefault(key, sheet) is not sheet:
                problems.add(f"sheet {sheet.key}", f"gives {piece.field.name}, which the sheet {given[key].key} gives already")
