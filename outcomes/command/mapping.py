"""Draft a mapping file from the files of a source, or check one.

`draft` writes what the headers and the distribution of the values suggest, with the evidence in comments, and marks
everything that nothing in the files can show with '?'. It shows no value of a cell, except the codes of short code
columns and rounded quartiles, and those only in the mapping file. `check` says what is still open or wrong.

examples:
  outcomes mapping draft runs.csv --out north.toml
  outcomes mapping check north.toml
"""

from __future__ import annotations

import argparse
from pathlib import Path

from outcomes.command import _shared as shared
from outcomes.errors import UsageError
from outcomes.intake.draft import draft_mapping


def arguments(parser: argparse.ArgumentParser) -> None:
    verbs = parser.add_subparsers(dest="what", required=True, metavar="draft|check")
    draft = verbs.add_parser("draft", help="write a first mapping file", allow_abbrev=False)
    draft.add_argument("files", nargs="+", metavar="FILE", help="the files of the source")
    draft.add_argument("--out", required=True, metavar="FILE", help="mapping file to write; never overwritten")
    draft.add_argument("--key", default="source", help="key of the source (default: source)")
    check = verbs.add_parser("check", help="say what is open or wrong in a mapping file", allow_abbrev=False)
    check.add_argument("mapping", help="mapping file")


def run(args: argparse.Namespace) -> int:
    if args.what == "check":
        mapping = shared.load_mapping(args.mapping)
        print(f"The mapping of source {mapping.source.key} is complete: {len(mapping.carried_fields)} fields.")
        return 0
    target = Path(args.out)
    if target.exists():
        raise UsageError("USAGE.EXISTS", "the mapping file exists already", todo="name another one; a draft never overwrites")
    datas = []
    for number, name in enumerate(args.files, start=1):
        path = Path(name)
        if not path.is_file():
            raise UsageError("USAGE.FILE", "there is no such file", where=f"file {number}")
        datas.append(path.read_bytes())
    text, open_questions = draft_mapping(datas, args.key)
    shared.write_output(target, text.encode("utf-8"))
    print(f"Draft written: {open_questions} questions are marked '?' and wait for your answer.")
    return 0
