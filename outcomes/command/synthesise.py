"""Write an invented messy export with its mapping file, for a demonstration or a test.

People, programme and numbers are invented. With --defects faults are planted; the list of them is written
beside the export, so that one can see whether every one is found.

example:
  outcomes synthesise --style north --runs 120 --seed 7 --out invented --defects
"""

from __future__ import annotations

import argparse
import json
from dataclasses import asdict
from pathlib import Path

from outcomes.command import _shared as shared
from outcomes.errors import UsageError
from synthetic_cohort import STYLES, generate, write_export
from synthetic_cohort.defects import DEFECT_KINDS


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--style", choices=STYLES, default="north", help="layout of the export")
    parser.add_argument("--runs", type=int, default=120, help="number of runs, 1 to 100000 (default 120)")
    parser.add_argument("--seed", type=int, default=1, help="the same seed gives the same files")
    parser.add_argument("--start-year", type=int, default=2021, help="first year (default 2021)")
    parser.add_argument("--years", type=int, default=3, help="number of years (default 3)")
    parser.add_argument(
        "--defects", action="store_true", help="plant one fault of every kind that the style can carry"
    )
    parser.add_argument("--out", default=".", metavar="FOLDER", help="folder for the files (default: here)")


def run(args: argparse.Namespace) -> int:
    folder = Path(args.out)
    if not folder.is_dir():
        raise UsageError("USAGE.FOLDER", "the folder does not exist", todo="make it first")
    if not 1 <= args.runs <= 100_000 or not 1 <= args.years <= 40 or not 1990 <= args.start_year <= 2100:
        raise UsageError("USAGE.ARGUMENTS", "1 to 100000 runs, 1 to 40 years, from 1990 on")
    cohort = generate(args.runs, args.seed, start_year=args.start_year, years=args.years)
    export = write_export(cohort, args.style, folder, args.seed, DEFECT_KINDS if args.defects else ())
    if args.defects:
        truth = [asdict(d) for d in export.defects]
        shared.write_output(
            folder / f"{args.style}-planted.json",
            (json.dumps(truth, indent=1, sort_keys=True, default=str) + "\n").encode(),
        )
    print(f"{args.runs} invented runs, style {args.style}, {len(export.defects)} planted faults")
    for path in (*export.paths, export.mapping):
        print(path)
    return 0
