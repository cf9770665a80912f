"""Published pre-support scores: list them, show a sheet, compute one on the store, check a table of your own.

Scores inform audit and research; they do not decide about support at the bedside.

examples:
  outcomes score list
  outcomes score show save
  outcomes score compute save --store unit.duckdb --out save.csv
  outcomes score check our_tables/save.toml
  outcomes score check --tables our_tables
"""

from __future__ import annotations

import argparse
from pathlib import Path

import pandas as pd

from outcomes.cohort.frames import load_cohort
from outcomes.cohort.marts import open_marts
from outcomes.command import _shared as shared
from outcomes.command._scores import score_tables
from outcomes.errors import DataRefused, UsageError
from outcomes.scores.catalogue import Catalogue, implemented_score, list_scores
from outcomes.scores.checking import check_table
from outcomes.scores.page import sheet_lines
from outcomes.scores.sheet import describe_score
from outcomes.study.audit_data import make_audit
from outcomes.study.audit_scores import compute_on, score_frame


def arguments(parser: argparse.ArgumentParser) -> None:
    verbs = parser.add_subparsers(dest="what", required=True, metavar="list|show|compute|check")
    for name, about in (("list", "all scores"), ("show", "the sheet of one score"), ("compute", "totals, bounds and eligibility of every run")):
        verb = verbs.add_parser(name, help=about, allow_abbrev=False)
        verb.add_argument("--tables", metavar="FOLDER", help="folder with tables of your own, which replace or add to ours")
        verb.add_argument("--json", action="store_true", help="print as JSON")
        if name != "list":
            verb.add_argument("score", help="key of the score")
        if name == "compute":
            shared.store_arguments(verb)
            verb.add_argument("--out", metavar="FILE", help="write one line a run as CSV (internal)")
    check = verbs.add_parser("check", help="validate a table of your own and run its vectors", allow_abbrev=False)
    check.add_argument("file", nargs="?", help="score table (TOML)")
    check.add_argument("--tables", metavar="FOLDER", help="check every table of this folder")


def run(args: argparse.Namespace) -> int:
    if args.what == "check":
        return _check(args)
    tables = score_tables(args.tables)
    if args.what == "list":
        listed = list_scores(tables)
        if args.json:
            shared.print_json({"scores": listed.to_dict("records")})
        else:
            for row in listed.itertuples():
                print(f"{row.key:<22} {row.status:<12} {row.table:<5} {row.name}: {row.outcome}")
        return 0
    if args.what == "show":
        lines = sheet_lines(describe_score(args.score, tables))
        if args.json:
            shared.print_json({"lines": lines})
        else:
            print("\n".join(lines))
        return 0
    return _compute(args, tables)


def _check(args: argparse.Namespace) -> int:
    if (args.file is None) == (args.tables is None):
        raise UsageError("USAGE.ARGUMENTS", "give one score table, or --tables with a folder")
    paths = [Path(args.file)] if args.file else sorted(Path(args.tables).glob("*.toml"))
    if not paths or not all(path.is_file() for path in paths):
        raise UsageError("USAGE.FILE", "the score table is not there", where="argument 1")
    good = [_check_one(path) for path in paths]
    return 0 if all(good) else 3


def _check_one(path: Path) -> bool:
    try:
        found = check_table(path.read_bytes().decode("utf-8"))
    except UnicodeDecodeError:
        raise DataRefused("SCORE.ENCODING", "the score table is not UTF-8") from None
    print("\n".join(found.lines()))
    return found.is_good


def _compute(args: argparse.Namespace, tables: Catalogue | None) -> int:
    score = implemented_score(args.score, tables)
    con = open_marts(shared.places_of(args).store)
    try:
        cohort = load_cohort(con)
    finally:
        con.close()
    answer = compute_on(score, score_frame(make_audit(cohort, years=None, sources=()))).answer
    if args.out:
        text = answer.reset_index().to_csv(index=False, lineterminator="\r\n")
        shared.write_output(Path(args.out), text.encode("utf-8"))
    body = _counts(answer)
    if args.json:
        shared.print_json(body)
    else:
        for key, value in body.items():
            print(f"{key}: {value}")
        print("A bounded run has missing inputs: its total lies between two values. " + describe_score(score).caution)
    return 0


def _counts(answer: pd.DataFrame) -> dict[str, object]:
    eligible = answer["eligible"].astype("string")
    asked = answer[eligible != "no"]
    return {
        "runs": len(answer), "eligible": int((eligible == "yes").sum()), "not eligible": int((eligible == "no").sum()),
        "cannot be judged": int((eligible == "unknown").sum()), "complete, of those eligible or not judged": int(asked["total"].notna().sum()),
        "bounded, of those eligible or not judged": int(asked["total"].isna().sum()), "table": ", ".join(sorted(set(answer["table"].astype(str)))),
    }  # fmt: skip
