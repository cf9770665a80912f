"""From a messy invented export to an audit report, in one go.

Writes two invented exports of an invented programme, shows how the messy one is refused, sets the defective
rows aside, imports both into a new store and makes the annual audit (internal profile). Prints the path of
the report.

example:
  outcomes demo --out demo-output
"""

from __future__ import annotations

import argparse
import random
from collections.abc import Callable
from pathlib import Path

from outcomes.command import _shared as shared
from outcomes.command import report
from outcomes.command._parser import Parser
from outcomes.command.import_files import show
from outcomes.errors import DataRefused, UsageError
from outcomes.findings import Finding
from outcomes.store.importing import Request, run_import
from outcomes.store.recover import Places
from synthetic_cohort import generate, write_export
from synthetic_cohort.defects import DEFECT_KINDS

SEED = 20
LISTED = 6


def arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--out", default="demo-output", metavar="FOLDER", help="new or empty folder (default: demo-output)"
    )
    parser.add_argument("--runs", type=int, default=160, help="invented runs a source (default 160)")


def run(args: argparse.Namespace) -> int:
    folder = Path(args.out)
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise UsageError(
            "USAGE.FOLDER",
            "the folder of the demo exists and is not empty",
            todo="name another one: outcomes demo --out FOLDER",
        )
    if not 10 <= args.runs <= 5000:
        raise UsageError("USAGE.ARGUMENTS", "10 to 5000 runs")
    folder.mkdir(parents=True, exist_ok=True, mode=0o700)
    store = folder / "demo.duckdb"
    keys = _keys(SEED)
    for number, style in enumerate(("north", "south")):
        cohort = generate(args.runs, SEED + number, start_year=2021, years=4)
        export = write_export(cohort, style, folder, SEED + number, DEFECT_KINDS)
        _import(style, export.mapping, list(export.paths), store, keys)
    _report(folder, store)
    return 0


def _keys(seed: int) -> Callable[[], str]:
    """Surrogates from a seed, so that the demo always gives the same report; a real import never does."""
    source = random.Random(seed)
    return lambda: f"{source.getrandbits(128):032x}"


def _import(style: str, mapping_path: Path, files: list[Path], store: Path, keys: Callable[[], str]) -> None:
    mapping = shared.load_mapping(str(mapping_path))
    paths = shared.paths_of(mapping, [str(f) for f in files])
    print(f"\nImporting the invented export '{style}' ({files[0].name}) with its mapping {mapping_path.name}")
    request = Request(Places.beside(store), mapping, paths, new_key=keys)
    try:
        show(run_import(request))
        return
    except DataRefused as refused:
        print(f"{refused.code}: {refused.what}. The first of them:")
        for finding in _some(refused.findings):
            print("  " + finding.text())
    print("The defective rows are set aside, the good ones go in:")
    done = run_import(Request(Places.beside(store), mapping, paths, set_aside=True, new_key=keys))
    c = done.counts
    print(
        f"  rows read {c.rows_read} = accepted {c.rows_accepted} + set aside {c.rows_set_aside} "
        f"+ duplicates {c.rows_duplicate}; batch {done.batch}"
    )


def _some(findings: tuple[Finding, ...]) -> list[Finding]:
    return [f for f in findings if f.effect != "note"][:LISTED]


def _report(folder: Path, store: Path) -> None:
    parser = Parser(prog="outcomes report")
    report.arguments(parser)
    print("\nThe annual audit, internal profile:")
    report.run(
        parser.parse_args(["audit", "--store", str(store), "--profile", "internal", "--out", str(folder)])
    )
