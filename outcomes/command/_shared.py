"""What several verbs need.

Places of the three files, mapping and files by order, findings on a terminal and as files.
"""

from __future__ import annotations

import argparse
import csv
import io
import json
import os
import re
import sys
import tempfile
from collections.abc import Iterable
from collections.abc import Mapping as Lookup
from pathlib import Path

from outcomes.errors import UsageError
from outcomes.findings import Finding
from outcomes.intake.mapping import Mapping
from outcomes.intake.mapping_file import read_mapping
from outcomes.store.recover import Places

LISTED = 1000
FEW = 5
SAFE_NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9._-]{0,63}")


def store_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--store", default="outcomes.duckdb", metavar="FILE", help="the store (default: outcomes.duckdb)"
    )
    parser.add_argument(
        "--link", metavar="FILE", help="link file, identifiers and surrogates (default: beside the store)"
    )
    parser.add_argument(
        "--calendar", metavar="FILE", help="calendar file, when each run began (default: beside the store)"
    )


def places_of(args: argparse.Namespace) -> Places:
    store = Path(args.store)
    if not store.parent.is_dir():
        raise UsageError("USAGE.FOLDER", "the folder of the store does not exist", todo="make it first")
    return Places.beside(
        store, Path(args.link) if args.link else None, Path(args.calendar) if args.calendar else None
    )


def load_mapping(name: str) -> Mapping:
    path = Path(name)
    if not path.is_file():
        raise UsageError("USAGE.FILE", "the mapping file is not there", where="argument 1")
    data = path.read_bytes()
    if len(data) > 4 << 20:
        raise UsageError("USAGE.FILE", "the mapping file is larger than 4 MiB", where="argument 1")
    try:
        return read_mapping(data.decode("utf-8"))
    except UnicodeDecodeError:
        raise UsageError("MAPPING.SYNTAX", "the mapping file is not UTF-8", todo="save it as UTF-8") from None


def paths_of(mapping: Mapping, names: list[str]) -> dict[str, Path]:
    """Files by the keys of the mapping, in its order. Messages name the position, never the file."""
    if len(names) != len(mapping.files):
        keys = ", ".join(f.key for f in mapping.files)
        raise UsageError(
            "USAGE.FILES",
            f"the mapping has {len(mapping.files)} files, {len(names)} were given",
            todo=f"give them in this order: {keys}",
        )
    paths = {}
    for number, (file, name) in enumerate(zip(mapping.files, names, strict=True), start=1):
        path = Path(name)
        if not path.is_file():
            raise UsageError("USAGE.FILE", "there is no such file", where=f"file {number} ({file.key})")
        paths[file.key] = path
    return paths


def print_findings(findings: Iterable[Finding], stream: io.TextIOBase | None = None) -> None:
    """Refusals first, each with its place; notes are counted by code and column."""
    out = stream or sys.stdout
    refusals = [f for f in findings if f.effect != "note"]
    for finding in refusals[:LISTED]:
        print("  " + finding.text(), file=out)
    if len(refusals) > LISTED:
        print(f"  and {len(refusals) - LISTED} more", file=out)
    notes: dict[tuple[str, str, str, str, str], list[int]] = {}
    for f in findings:
        if f.effect == "note":
            notes.setdefault((f.code, f.source, f.sheet, f.column, f.rule), []).append(f.line)
    for (code, source, sheet, column, rule), lines in sorted(notes.items()):
        where = f"line {', '.join(map(str, lines))}" if len(lines) <= FEW else f"{len(lines)} rows"
        place = f"{source}/{sheet}{', ' + column if column else ''}"
        print(f"  {code} (note) {place}: {rule} ({where})", file=out)


def findings_csv(findings: Iterable[Finding]) -> str:
    buffer = io.StringIO()
    names = ["code", "effect", "batch", "source", "sheet", "line", "column", "rule", "shape"]
    writer = csv.DictWriter(buffer, names, lineterminator="\r\n")
    writer.writeheader()
    for f in findings:
        writer.writerow({k: _no_formula(v) for k, v in f.as_row().items()})
    return buffer.getvalue()


def _no_formula(value: object) -> object:
    """A text that a spreadsheet would run as a formula gets an apostrophe."""
    return "'" + value if isinstance(value, str) and value[:1] in "=+-@\t\r\n＝＋－＠" and value else value


def findings_json(findings: Iterable[Finding]) -> str:
    return json.dumps([f.as_row() for f in findings], ensure_ascii=False, indent=1, sort_keys=True) + "\n"


def write_findings(name: str | None, findings: Iterable[Finding]) -> None:
    if name:
        text = findings_json(findings) if name.endswith(".json") else findings_csv(findings)
        write_output(Path(name), text.encode("utf-8"))


def write_output(path: Path, data: bytes) -> None:
    """A file of ours, for its owner only, written beside and renamed; a symbolic link is never followed."""
    if not path.parent.is_dir():
        raise UsageError("USAGE.FOLDER", "the folder for the output does not exist", todo="make it first")
    if path.is_symlink():
        raise UsageError("USAGE.LINK", "the output is a symbolic link", todo="name the file itself")
    handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=".outcomes-")
    try:
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
        os.replace(temporary, path)
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise


def print_json(body: Lookup[str, object]) -> None:
    print(json.dumps(body, ensure_ascii=False, indent=1, sort_keys=True))


class Progress:
    """Rows read so far, on a terminal only, and only once a second's worth of rows has passed."""

    def __init__(self) -> None:
        self.rows = 0
        self.shown = sys.stderr.isatty()

    def __call__(self, sheet: str, rows: int) -> None:
        self.rows += rows
        if self.shown and self.rows >= 20_000:
            print(f"\r{self.rows} rows read", end="", file=sys.stderr, flush=True)

    def done(self) -> None:
        if self.shown and self.rows >= 20_000:
            print(file=sys.stderr)
