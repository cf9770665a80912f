"""Check the files of one source against their mapping without storing anything.

Lists every finding with file, line, column and rule, and counts each rule's denominator. Exit code 3 if
anything would be refused.

example:
  outcomes check north.toml runs.csv --findings findings.csv
"""

from __future__ import annotations

import argparse

from outcomes.command import _shared as shared
from outcomes.command.import_files import as_json
from outcomes.errors import DataRefused
from outcomes.store.importing import Request, run_import


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("mapping", help="mapping file (TOML) of the source")
    parser.add_argument(
        "files", nargs="+", metavar="FILE", help="the source's files, in the order of the mapping"
    )
    shared.store_arguments(parser)
    parser.add_argument("--findings", metavar="FILE", help="write all findings as .csv or .json")
    parser.add_argument("--rules", action="store_true", help="also list every rule with its denominator")
    parser.add_argument("--json", action="store_true", help="print the result as JSON")


def run(args: argparse.Namespace) -> int:
    mapping = shared.load_mapping(args.mapping)
    progress = shared.Progress()
    request = Request(
        places=shared.places_of(args),
        mapping=mapping,
        paths=shared.paths_of(mapping, args.files),
        set_aside=True,
        replace=True,
        store_it=False,
        progress=progress,
    )
    try:
        done = run_import(request)
    except DataRefused as refused:
        shared.write_findings(args.findings, refused.findings)
        shared.print_findings(refused.findings)
        raise
    finally:
        progress.done()
    shared.write_findings(args.findings, done.findings)
    if args.json:
        shared.print_json(as_json(done))
    else:
        shared.print_findings(done.findings)
        if args.rules:
            for check in done.checks:
                said = (
                    f"{check['n_violating']} of {check['n_checked']}"
                    if check["applicable"]
                    else "not applicable to this source"
                )
                print(f"  {check['code']}: {said} ({check['of']})")
        c = done.counts
        print(
            f"Rows read {c.rows_read}: {c.rows_accepted} good, {c.rows_set_aside} would be set aside, "
            f"{c.rows_duplicate} duplicates"
        )
    return 3 if done.refusals else 0
