"""Import the files of one source into the store.

The mapping file says what every column means. By default nothing is stored if anything must be refused; with
--set-aside the good rows are stored and the others are listed, each with file, line, column and rule.

examples:
  outcomes import north.toml runs.csv --store unit.duckdb
  outcomes import south.toml log.xlsx --store unit.duckdb --set-aside --findings findings.csv
"""

from __future__ import annotations

import argparse
import sys

from outcomes.command import _shared as shared
from outcomes.errors import DataRefused
from outcomes.store.importing import Imported, Request, run_import


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("mapping", help="mapping file (TOML) of the source")
    parser.add_argument(
        "files", nargs="+", metavar="FILE", help="the source's files, in the order of the mapping"
    )
    shared.store_arguments(parser)
    parser.add_argument("--set-aside", action="store_true", help="store the good rows, list the others")
    parser.add_argument("--replace", action="store_true", help="runs stored already get the new values")
    parser.add_argument("--findings", metavar="FILE", help="write all findings as .csv or .json")
    parser.add_argument("--json", action="store_true", help="print the result as JSON")


def run(args: argparse.Namespace) -> int:
    mapping = shared.load_mapping(args.mapping)
    progress = shared.Progress()
    request = Request(
        places=shared.places_of(args),
        mapping=mapping,
        paths=shared.paths_of(mapping, args.files),
        set_aside=args.set_aside,
        replace=args.replace,
        progress=progress,
    )
    try:
        done = run_import(request)
    except DataRefused as refused:
        shared.write_findings(args.findings, refused.findings)
        if args.json:
            shared.print_json(
                {"stored": False, "code": refused.code, "findings": [f.as_row() for f in refused.findings]}
            )
        else:
            shared.print_findings(refused.findings)
        raise
    finally:
        progress.done()
    shared.write_findings(args.findings, done.findings)
    if args.json:
        shared.print_json(as_json(done))
    else:
        show(done)
    return 0


def as_json(done: Imported) -> dict[str, object]:
    return {
        "batch": done.batch,
        "stored": done.stored,
        "already_imported_as": done.already or None,
        "rows": vars(done.counts),
        "runs": vars(done.merge),
        "findings": [f.as_row() for f in done.findings],
        "checks": list(done.checks),
    }


def show(done: Imported) -> None:
    if done.already:
        print(f"Already imported as batch {done.already}; nothing was changed.")
        return
    shared.print_findings(done.findings)
    c = done.counts
    print(
        f"Rows read {c.rows_read} = accepted {c.rows_accepted} + set aside {c.rows_set_aside} "
        f"+ duplicates {c.rows_duplicate}"
    )
    print(f"Runs: {done.merge.new} new, {done.merge.unchanged} unchanged, {done.merge.changed} replaced")
    print(
        f"Stored as batch {done.batch}." if done.stored else "Nothing new; the store was not changed.",
        file=sys.stdout,
    )
