"""Say what is in the store: sources, runs, endings, batches, what was set aside.

example:
  outcomes summary --store unit.duckdb
"""

from __future__ import annotations

import argparse

import pandas as pd

from outcomes.cohort.frames import Cohort, load_cohort
from outcomes.cohort.marts import open_marts
from outcomes.command import _shared as shared


def arguments(parser: argparse.ArgumentParser) -> None:
    shared.store_arguments(parser)
    parser.add_argument("--json", action="store_true", help="print as JSON")


def run(args: argparse.Namespace) -> int:
    con = open_marts(shared.places_of(args).store)
    try:
        cohort = load_cohort(con)
    finally:
        con.close()
    body = _body(cohort)
    if args.json:
        shared.print_json(body)
    else:
        _show(cohort)
    return 0


def _body(cohort: Cohort) -> dict[str, object]:
    endings = cohort.run.groupby(["source_key", "end_kind"], dropna=False).size()
    return {
        "fingerprint": cohort.fingerprint,
        "flow": cohort.flow.astype(object).where(cohort.flow.notna(), None).to_dict("records"),
        "endings": {f"{s}/{k}": int(n) for (s, k), n in sorted(endings.items(), key=str)},
        "batches": [int(n) for n in cohort.batches["batch_no"]],
    }


def _show(cohort: Cohort) -> None:
    for source, rows in cohort.flow.groupby("source_key", sort=True):
        print(f"Source {source}")
        for stage, n in zip(rows["stage"], rows["n"], strict=True):
            print(f"  {stage}: {'not in this source' if pd.isna(n) else n}")
        kinds = cohort.run[cohort.run["source_key"] == source].groupby("end_kind").size()
        for kind, n in sorted(kinds.items()):
            print(f"  ended {kind}: {n}")
    for row in cohort.batches.itertuples():
        print(
            f"Batch {row.batch_no} ({row.source_key}, {row.policy}): rows read {row.rows_read} "
            f"= accepted {row.rows_accepted} + set aside {row.rows_set_aside} "
            f"+ duplicates {row.rows_duplicate}"
        )
    print(f"Content {cohort.fingerprint[:16]}")
