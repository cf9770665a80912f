"""Make a report from the store: one HTML file and the numbers behind it as JSON.

The profile must be named. Only `internal` can be made: exact numbers and individual runs, for the care team under its
own rules.

examples:
  outcomes report audit --profile internal --store unit.duckdb --out audit
  outcomes report audit --profile internal --years 2023-2024 --source north --out audit
"""

from __future__ import annotations

import argparse
import re
from pathlib import Path

from outcomes.cohort.frames import load_cohort
from outcomes.cohort.marts import open_marts
from outcomes.command import _shared as shared
from outcomes.command._provenance import provenance
from outcomes.command._scores import score_tables
from outcomes.errors import UsageError
from outcomes.report.assemble import Options, assemble
from outcomes.report.codec import results_json
from outcomes.report.model import Report
from outcomes.report.render import render_json
from outcomes.report.stamp import stamp
from outcomes.study.audit_data import Audit, make_audit
from outcomes.study.catalogue import analyses

REPORTS = {"audit": "annual_audit"}


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("kind", choices=sorted(REPORTS), help="which report")
    shared.store_arguments(parser)
    parser.add_argument("--profile", default="shareable", help="internal; shareable is not available yet and is refused")
    parser.add_argument("--out", default=".", metavar="FOLDER", help="folder for the files (default: here)")
    parser.add_argument("--years", metavar="YEAR[-YEAR]", help="period by the year in which support began (default: all)")
    parser.add_argument("--source", action="append", default=[], metavar="KEY", help="only this source (may be repeated)")
    parser.add_argument("--score-checked", action="append", default=[], metavar="SCORE=DATE,ROLE",
                        help="the programme has checked this score's table against the paper")  # fmt: skip
    parser.add_argument("--score-tables", metavar="FOLDER",
                        help="folder with score tables of your own, which replace or add to ours")  # fmt: skip
    parser.add_argument("--date", metavar="YYYY-MM-DD", help="date to print on the report (none by default)")
    parser.add_argument("--force", action="store_true", help="overwrite an earlier report of the same name")


def run(args: argparse.Namespace) -> int:
    stamp(args.profile)
    folder = Path(args.out)
    if not folder.is_dir():
        raise UsageError("USAGE.FOLDER", "the folder for the report does not exist", todo="make it first")
    report = make_report(args)
    text = results_json(report)
    name = f"{REPORTS[args.kind].replace('_', '-')}-{args.profile}"
    page, numbers = folder / f"{name}.html", folder / f"{name}.json"
    if not args.force and (page.exists() or numbers.exists()):
        raise UsageError("USAGE.EXISTS", "a report of this name is there already", todo="add --force, or choose another folder")
    shared.write_output(numbers, text.encode("utf-8"))
    shared.write_output(page, render_json(text).encode("utf-8"))
    print(page)
    return 0


def make_report(args: argparse.Namespace) -> Report:
    tables = score_tables(args.score_tables)
    con = open_marts(shared.places_of(args).store)
    try:
        cohort = load_cohort(con)
    finally:
        con.close()
    audit = make_audit(
        cohort,
        years=_years(args.years),
        sources=tuple(args.source),
        score_checks=tuple(args.score_checked),
        tables=tables,
    )
    given = provenance(audit.whole, kind=f"{args.kind}, profile {args.profile}", options=_options(args, audit), made_on=_date(args.date))
    return assemble(REPORTS[args.kind], analyses(), audit, Options(profile=args.profile, title=f"Annual audit of veno-arterial ECMO support runs begun {audit.label}", provenance=given))


def _options(args: argparse.Namespace, audit: Audit) -> list[str]:
    lines = [f"period {audit.label}"]
    lines += [f"source {key}" for key in sorted(args.source)]
    lines += [f"score table checked: {entry}" for entry in sorted(args.score_checked)]
    own = [s for s in audit.tables.scores() if s.whose == "site"] if audit.tables else []
    lines += [f"score table of the programme's own: {s.key}, SHA-256 {s.text_hash}" for s in own]
    return lines


def _years(text: str | None) -> tuple[int, int] | None:
    if text is None:
        return None
    found = re.fullmatch(r"([0-9]{4})(?:-([0-9]{4}))?", text)
    if not found:
        raise UsageError("USAGE.YEARS", "a year or two years are needed", todo="--years 2023 or --years 2021-2023")
    first, last = int(found[1]), int(found[2] or found[1])
    if first > last:
        raise UsageError("USAGE.YEARS", "the period ends before it begins")
    return first, last


def _date(text: str | None) -> str:
    """A date is printed only if it is given: the clock is never read."""
    if text is not None and not re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", text):
        raise UsageError("USAGE.DATE", "a date such as 2024-03-31 is needed")
    return text or ""
