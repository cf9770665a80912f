"""Complications by kind, per 100 runs and per 1,000 support-days, and by ending: section 7 of the audit."""

from __future__ import annotations

import numpy as np
import pandas as pd

from outcomes.analysis.rates import incidence_rate, proportion
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.cohort.frames import Cohort
from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import DAY, ENDINGS, run_list, slug

PER = 1000.0
_COLUMNS = [
    "group",
    "affected",
    "runs",
    "share",
    "share_lower",
    "share_upper",
    "events",
    "exposure",
    "estimate",
    "lower",
    "upper",
    "after_end",
    "before",
    "not_at_risk",
    "looked",
    "counting",
    "reason",
]


def complications(audit: Audit) -> Answer:
    """Every kind that a source carries, zeros included; the most frequent first."""
    counts = audit.current.complication
    if counts.empty:
        raise NotEstimable("no_runs", "No source of this period carries complications.")
    now = rate_table(counts)
    order = now.table.sort_values(["estimate", "group"], ascending=[False, True], na_position="last")[
        "group"
    ].tolist()
    labels = _labels(audit.current, order)
    results = {"now": now}
    if audit.before is not None and not audit.before.complication.empty:
        results["before"] = rate_table(audit.before.complication)
    rows = tuple(RowOf(k, labels[k], {"group": k}) for k in order)
    lists = {
        f"had_{k}": run_list(labels[k], _affected(counts, k)) for k in order if len(_affected(counts, k))
    }
    dots = _dots(audit, [k for k in ("now", "before") if k in results], labels)
    tables = {
        "harm": TableOf(
            "Complications on support",
            "Kind",
            "now",
            rows,
            _columns(),
            _notes(counts),
            {(k.removeprefix("had_"), "affected"): k for k in lists},
        ),
        "harm_counted": TableOf("What is counted beside the rates", "Kind", "now", rows, _beside()),
    }
    by_ending = ending_table(audit.current)
    results["by_ending"] = by_ending
    tables["harm_by_ending"] = _by_ending_layout(rows, by_ending)
    return Answer(
        results,
        tables,
        {"harm_dots": dots},
        facts={"most": labels[order[0]], "any_first_only": bool((counts["events_kept"] == "first").any())},
        cautions=_cautions(audit, len(order)),
        lists=lists,
    )


def _dots(audit: Audit, periods: list[str], labels: dict[str, str]) -> FigureOf:
    words = {"value": "Events per 1,000 support-days", "now": audit.label, "before": audit.label_before}
    return FigureOf(
        "dots",
        "Complications per 1,000 support-days",
        "harm",
        {k: k for k in periods},
        labels,
        words,
        {"low": 0.0},
    )


def _labels(cohort: Cohort, order: list[str]) -> dict[str, str]:
    known = dict(zip(cohort.kinds["kind"], cohort.kinds["label"], strict=True))
    return {str(k): str(known[k]) for k in order}


def _affected(counts: pd.DataFrame, kind: str) -> pd.Series:
    mine = counts[(counts["kind"] == kind) & counts["is_at_risk"].astype(bool)]
    return mine.loc[(mine["n_events"] > 0) | (mine["n_after_end"] > 0), "run_key"]


def rate_table(counts: pd.DataFrame) -> Result:
    """One row a kind of mart.complication_count. Rates per 1,000 support-days.

    Where a source keeps only first events, time stops at the first one; else all episodes count, over all
    time at risk.
    """
    rows, methods = [], []
    for kind, mine in counts.groupby("kind", sort=True):
        row, method = _kind_row(str(kind), mine)
        rows.append(row)
        methods += method
    table = tidy(
        [{k: v for k, v in r.items() if k not in ("looked", "counting")} for r in rows],
        [c for c in _COLUMNS if c not in ("looked", "counting")],
    )
    for name in ("looked", "counting"):
        table[name] = pd.array([r[name] for r in rows], dtype="string")
    return Result(table, methods[0] if methods else Method("events / time at risk"), {"kinds": len(rows)})


def _kind_row(kind: str, mine: pd.DataFrame) -> tuple[dict[str, object], list[Method]]:
    at_risk = mine[mine["is_at_risk"].astype(bool)]
    first_only = bool((at_risk["events_kept"] == "first").any())
    events, days = events_and_days(at_risk, first_only)
    hit = (at_risk["n_events"] > 0) | (at_risk["n_after_end"] > 0)
    row: dict[str, object] = {
        "group": kind,
        "affected": int(hit.sum()),
        "runs": len(at_risk),
        "events": int(events.sum()),
        "exposure": float(np.sum(days)),
        "after_end": int(mine["n_after_end"].sum()),
        "before": int((mine["n_before"] > 0).sum()),
        "not_at_risk": int((~mine["is_at_risk"].astype(bool)).sum()),
        "looked": _looked(mine),
        "counting": "first events" if first_only else "all episodes",
    }
    methods: list[Method] = []
    try:
        share = proportion(int(hit.sum()), len(at_risk)).table.iloc[0]
        row |= {"share": share["estimate"], "share_lower": share["lower"], "share_upper": share["upper"]}
        rate = incidence_rate(events, days, per=PER, cluster=at_risk["person_key"].to_numpy(dtype=object))
        methods.append(rate.method)
        row |= {c: rate.table.iloc[0][c] for c in ("estimate", "lower", "upper")}
    except NotEstimable as reason:
        row["reason"] = reason.reason_code
    return row, methods


def events_and_days(at_risk: pd.DataFrame, first_only: bool) -> tuple[np.ndarray, np.ndarray]:
    """Events and support-days of each run, by what the source keeps."""
    n = at_risk["n_events"].to_numpy(dtype=float)
    if first_only:
        return np.minimum(n, 1.0), at_risk["hours_to_first"].to_numpy(dtype=float) / DAY
    return n, at_risk["hours_at_risk"].to_numpy(dtype=float) / DAY


def _looked(mine: pd.DataFrame) -> str:
    looked, window = float(mine["looked_until_h"].min()), float(mine["window_h"].max())
    if window <= 0:
        return "until the end of support"
    return (
        "after the end as well"
        if looked >= window
        else "not looked for after the end"
        if looked <= 0
        else "for part of the window after the end"
    )


def _columns() -> tuple[ColumnOf, ...]:
    return (
        ColumnOf("affected", "Runs affected, of those at risk", "x_of_n", ("affected", "runs")),
        ColumnOf("share", "Per 100 runs", "percent", ("share", "runs")),
        ColumnOf("share_ci", "", "percent_interval", ("share_lower", "share_upper", "runs")),
        ColumnOf("events", "Events", "count", ("events",)),
        ColumnOf("days", "Support-days at risk", "number_0", ("exposure",)),
        ColumnOf("rate", "Per 1,000 support-days", "number_1", ("estimate",)),
        ColumnOf("rate_ci", "", "number_interval_1", ("lower", "upper")),
    )


def _beside() -> tuple[ColumnOf, ...]:
    return (
        ColumnOf("counting", "Counted", "word", ("counting",)),
        ColumnOf("after", "Events after the end, in no rate", "count", ("after_end",)),
        ColumnOf("before", "Runs with it before support", "count", ("before",)),
        ColumnOf("not_at_risk", "Runs not at risk or not recorded", "count", ("not_at_risk",)),
        ColumnOf("looked", "Looked for", "word", ("looked",)),
    )


def _notes(counts: pd.DataFrame) -> tuple[str, ...]:
    return (
        "A run is affected if it had an event on support or within the kind's window after it; "
        "rates count events on support only.",
    )


def ending_table(cohort: Cohort) -> Result:
    """Rates per 1,000 support-days by kind and ending.

    A description: endings are known only afterwards, and the rates are no effect of them.
    """
    rows, methods = [], []
    for kind, mine in cohort.complication.groupby("kind", sort=True):
        for ending in ENDINGS:
            part = mine[(mine["pathway"] == ending) & mine["is_at_risk"].astype(bool)]
            row: dict[str, object] = {"cause": str(kind), "group": ending, "at_risk": len(part)}
            events, days = events_and_days(part, bool((part["events_kept"] == "first").any()))
            row |= {"events": int(events.sum()), "exposure": float(np.sum(days))}
            try:
                rate = incidence_rate(int(events.sum()), float(np.sum(days)), per=PER)
                methods.append(rate.method)
                row |= {c: rate.table.iloc[0][c] for c in ("estimate", "lower", "upper")}
            except NotEstimable as reason:
                row["reason"] = reason.reason_code
            rows.append(row)
    table = tidy(
        rows, ["cause", "group", "estimate", "lower", "upper", "events", "exposure", "at_risk", "reason"]
    )
    return Result(table, methods[0] if methods else Method("events / time at risk"))


def _by_ending_layout(rows: tuple[RowOf, ...], result: Result) -> TableOf:
    columns = []
    for ending, label in ENDINGS.items():
        columns.append(
            ColumnOf(f"{slug(ending)}_events", "Events", "count", ("events",), {"group": ending}, over=label)
        )
        columns.append(
            ColumnOf(f"{slug(ending)}_rate", "Rate", "number_1", ("estimate",), {"group": ending}, over=label)
        )
        columns.append(
            ColumnOf(
                f"{slug(ending)}_ci",
                "",
                "number_interval_1",
                ("lower", "upper"),
                {"group": ending},
                over=label,
            )
        )
    by_kind = tuple(RowOf(r.key, r.label, {"cause": str(r.where["group"])}) for r in rows)
    return TableOf(
        "Events per 1,000 support-days by way support ended", "Kind", "by_ending", by_kind, tuple(columns)
    )


def _cautions(audit: Audit, kinds: int) -> tuple[Caution, ...]:
    return (
        Caution(
            "IMM",
            "How support ends is known only afterwards, and longer support leaves more time for "
            "complications: differences between endings are no effects of the ending.",
        ),
        Caution("MULT", f"{kinds} kinds are shown side by side; no interval is adjusted for that."),
    )


ANALYSES = {"complications": complications}
