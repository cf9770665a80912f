"""Over the years: section 8 of the audit. One row a calendar year of everything the chosen sources hold."""

from __future__ import annotations

import pandas as pd

from outcomes.analysis.rates import proportion
from outcomes.analysis.result import Result, tidy
from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import DAY, counted

_COLUMNS = [
    "group",
    "time",
    "runs",
    "people",
    "support_days",
    "weaned",
    "events",
    "at_risk",
    "estimate",
    "lower",
    "upper",
    "unknown",
    "reason",
]


def years(audit: Audit) -> Answer:
    """By year of the start: runs, support-days, weaned, left hospital alive of those known, its interval."""
    run = audit.whole.run
    if run.empty:
        raise NotEstimable("no_runs", "No run is in the store.")
    rows, method = [], None
    for year, part in run.groupby("run_year", sort=True):
        known = part["is_alive_at_discharge"].notna()
        x, n = int(part["is_alive_at_discharge"].fillna(False).sum()), int(known.sum())
        row: dict[str, object] = {
            "group": str(year),
            "time": float(year),
            "runs": len(part),
            "people": int(part["person_key"].nunique()),
            "support_days": float(part["support_h"].fillna(0).sum()) / DAY,
            "weaned": int((part["end_kind"] == "recovery").sum()),
            "events": x,
            "at_risk": n,
            "unknown": len(part) - n,
        }
        try:
            one = proportion(x, n)
            method = one.method
            row |= {c: one.table.iloc[0][c] for c in ("estimate", "lower", "upper")}
        except NotEstimable as reason:
            row["reason"] = reason.reason_code
        rows.append(row)
    result = Result(tidy(rows, _COLUMNS), method) if method else counted(rows, _COLUMNS)
    return Answer(
        {"years": result},
        {"years": _layout(result.table)},
        facts={"few_years": len(rows) < 12, "one_year": len(rows) < 2},
    )


def _layout(table: pd.DataFrame) -> TableOf:
    rows = tuple(RowOf(f"year_{g}", str(g), {"group": str(g)}) for g in table["group"])
    columns = (
        ColumnOf("runs", "Runs", "count", ("runs",)),
        ColumnOf("people", "People", "count", ("people",)),
        ColumnOf("days", "Support-days", "number_0", ("support_days",)),
        ColumnOf("weaned", "Weaned", "x_of_n", ("weaned", "runs")),
        ColumnOf("alive", "Left hospital alive, of those known", "x_of_n", ("events", "at_risk")),
        ColumnOf("share", "Share", "percent", ("estimate", "at_risk")),
        ColumnOf("interval", "", "percent_interval", ("lower", "upper", "at_risk")),
        ColumnOf("unknown", "Not known", "count", ("unknown",)),
    )
    return TableOf("Runs by the year in which support began", "Year", "years", rows, columns)


ANALYSES = {"years": years}
