"""What an audit looks at: the runs of its period, those of the period before, and how both are named in
print."""

from __future__ import annotations

from dataclasses import dataclass, replace

import pandas as pd

from outcomes.cohort.frames import Cohort, select_runs
from outcomes.errors import UsageError
from outcomes.scores.catalogue import Catalogue

UNKNOWN = "not recorded"


@dataclass(frozen=True)
class Audit:
    """current, before: cohorts of the two periods (before is None without a comparable one). label,
    label_before: years in print. whole: everything in the store from the chosen sources, for the course over
    the years. score_checks: declarations SCORE=DATE,ROLE. tables: score tables with the programme's own in
    place of or beside the shipped ones."""

    current: Cohort
    before: Cohort | None
    whole: Cohort
    label: str
    label_before: str
    score_checks: tuple[str, ...] = ()
    tables: Catalogue | None = None


def years_label(first: int, last: int) -> str:
    return str(first) if first == last else f"{first} to {last}"


def make_audit(
    cohort: Cohort,
    *,
    years: tuple[int, int] | None,
    sources: tuple[str, ...],
    score_checks: tuple[str, ...] = (),
    tables: Catalogue | None = None,
) -> Audit:
    """Select sources and period. The period before has the same number of years and counts only if every
    source covers all of it; otherwise there is no comparison.

    Raises UsageError for a source that is not in the store or a period without a run.
    """
    known = set(cohort.source["source_key"])
    unknown = [s for s in sources if s not in known]
    if unknown:
        raise UsageError("AUDIT.SOURCE", "a source is not in the store", todo="outcomes summary lists them")
    whole = _of_sources(cohort, sources or tuple(sorted(known)))
    covered = _coverage(whole)
    first, last = years or (int(covered["from"].min()), int(covered["to"].max()))
    current = _of_years(whole, first, last)
    if current.run.empty:
        raise UsageError(
            "AUDIT.EMPTY",
            "no run of the chosen sources began in this period",
            todo="outcomes summary shows the years",
        )
    length = last - first + 1
    before_first, before_last = first - length, first - 1
    comparable = bool((covered["from"] <= before_first).all() and (covered["to"] >= last).all())
    before = _of_years(whole, before_first, before_last) if comparable else None
    if before is not None and before.run.empty:
        before = None
    return Audit(
        current,
        before,
        whole,
        years_label(first, last),
        years_label(before_first, before_last),
        score_checks,
        tables,
    )


def _of_sources(cohort: Cohort, sources: tuple[str, ...]) -> Cohort:
    kept = select_runs(cohort, cohort.run.loc[cohort.run["source_key"].isin(sources), "run_key"])
    parts = {
        name: getattr(kept, name)[getattr(kept, name)["source_key"].isin(sources)].reset_index(drop=True)
        for name in ("flow", "set_aside", "carried", "source", "coverage", "batches")
    }
    return replace(kept, **parts)


def _coverage(cohort: Cohort) -> pd.DataFrame:
    """Years that each source covers whole, from its batches."""
    batches = cohort.batches.assign(
        start=pd.to_datetime(cohort.batches["period_from"]), end=pd.to_datetime(cohort.batches["period_to"])
    )
    spans = batches.groupby("source_key").agg({"start": "min", "end": "max"})
    return pd.DataFrame({"from": spans["start"].dt.year, "to": spans["end"].dt.year, "end": spans["end"]})


def _of_years(cohort: Cohort, first: int, last: int) -> Cohort:
    inside = cohort.run["run_year"].between(first, last)
    kept = select_runs(cohort, cohort.run.loc[inside, "run_key"])
    aside = cohort.set_aside
    within = aside["run_year"].isna() | aside["run_year"].between(first, last)
    return replace(kept, set_aside=aside[within].reset_index(drop=True))
