"""How support ended, as competing endings; and what became of the weaned: section 4 of the audit."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis.competing import cumulative_incidence
from outcomes.analysis.rates import proportion
from outcomes.analysis.result import Result, tidy
from outcomes.cohort.frames import Cohort
from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, RunList, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import CAUSES, DAY, ENDINGS, cause_codes, counted, rows_of, run_list, slug

WORDS = {"time": "Days since start of support", "value": "Share of runs", "rest": "still supported"}


def ending_incidence(ending: pd.DataFrame, days: list[float], *, transfer_competes: bool = False) -> Result:
    """Aalen–Johansen over the five endings; times in days.

    Still supported at the extract is censored; transfer out is censored, or with transfer_competes counted as
    an ending of its own.
    """
    causes = [*CAUSES, "transfer out"] if transfer_competes else list(CAUSES)
    cause = cause_codes(ending)
    if transfer_competes:
        cause = cause.mask(ending["is_transferred_out"].astype(bool), "transfer out")
    time = ending["time_h"].to_numpy(dtype=float) / DAY
    entry = ending["entry_h"].to_numpy(dtype=float) / DAY
    return cumulative_incidence(time, cause.to_numpy(dtype=object), entry=entry, causes=causes, times=days)


def endings(audit: Audit, days: list[float], end: float) -> Answer:
    """Counts of each ending, cumulative incidence at fixed days, whole curves, sensitivity to transfers."""
    cohort = audit.current
    if cohort.ending.empty:
        raise NotEstimable("no_runs", "No run of the period was observed on support.")
    curve = ending_incidence(cohort.ending, days)
    apart = ending_incidence(cohort.ending, days, transfer_competes=True)
    counts, lists = _counts(cohort)
    labels = {k: v for k, v in ENDINGS.items()}
    shown: dict[str, Any] = {
        "results": {"curve": "curve", "ticks": "ticks"},
        "labels": labels,
        "words": WORDS,
        "options": {"end": end},
    }
    ticks = Result(tidy([{"time": t} for t in [0.0, *days]], ["time"]), curve.method)
    return Answer(
        {"counts": counts, "curve": curve, "apart": apart, "ticks": ticks, "after": _after_weaning(cohort)},
        {
            "endings": _count_table(counts, lists),
            "endings_at": _at_table("curve", "Cumulative incidence of each ending by day", days),
            "endings_risk": _risk_layout(days),
            "endings_transfer": _at_table(
                "apart", "The same with transfer out as an ending of its own", days
            ),
            "weaned": _weaned_table(),
        },
        {
            "endings_stacked": FigureOf("endings_stacked", "How support ended", "endings_at", **shown),
            "endings_apart": FigureOf(
                "endings_apart", "Each ending by itself, with its interval", "endings_at", **shown
            ),
        },
        facts={
            "any_open": bool(cohort.ending["is_open"].any()),
            "any_transfer": bool(cohort.ending["is_transferred_out"].any()),
            "any_weaned": bool((cohort.run["end_kind"] == "recovery").any()),
        },
        lists=lists,
    )


_LINES = (*CAUSES, "transfer out", "still on support")


def _counts(cohort: Cohort) -> tuple[Result, dict[str, RunList]]:
    run = cohort.run
    rows: list[dict[str, object]] = []
    lists: dict[str, RunList] = {}
    for name in _LINES:
        inside = run[run["pathway"] == name]
        known = inside["is_alive_at_discharge"].notna()
        hours = inside["support_h"].dropna().to_numpy(dtype=float)
        row: dict[str, object] = {
            "group": name,
            "events": len(inside),
            "at_risk": len(run),
            "alive": int(inside["is_alive_at_discharge"].fillna(False).sum()),
            "known": int(known.sum()),
            "unknown": int((~known).sum()),
        }
        if len(hours) and name != "still on support":
            row |= dict(
                zip(("median", "lower", "upper"), np.quantile(hours, [0.5, 0.25, 0.75]).tolist(), strict=True)
            )
        else:
            row["reason"] = "not_applicable"
        rows.append(row)
        if len(inside):
            lists[f"end_{slug(name)}"] = run_list(f"Ended: {name}", inside["run_key"])
    died, withdrawn = run[run["end_kind"] == "death"], run[run["end_kind"] == "withdrawal"]
    for key, part in (("death on support", died), ("support withdrawn", withdrawn)):
        rows.append({"group": key, "events": len(part), "at_risk": len(run)} | _fate(part))
    return counted(
        rows,
        ["group", "events", "at_risk", "alive", "known", "unknown", "median", "lower", "upper", "reason"],
    ), lists


def _fate(part: pd.DataFrame) -> dict[str, object]:
    known = part["is_alive_at_discharge"].notna()
    hours = part["support_h"].dropna().to_numpy(dtype=float)
    row: dict[str, object] = {
        "alive": int(part["is_alive_at_discharge"].fillna(False).sum()),
        "known": int(known.sum()),
        "unknown": int((~known).sum()),
    }
    if not len(hours):
        return row | {"reason": "not_applicable"}
    return row | dict(
        zip(("median", "lower", "upper"), np.quantile(hours, [0.5, 0.25, 0.75]).tolist(), strict=True)
    )


def _count_table(counts: Result, lists: dict[str, RunList]) -> TableOf:
    labels = {
        **ENDINGS,
        "transfer out": "transferred out",
        "still on support": "still on support",
        "death on support": "of these: died on support",
        "support withdrawn": "of these: support withdrawn",
    }
    order = [
        "recovery",
        "durable LVAD",
        "transplantation",
        "death or withdrawal",
        "death on support",
        "support withdrawn",
        "other exit",
        "transfer out",
        "still on support",
    ]
    rows = rows_of({key: labels[key] for key in order})
    columns = (
        ColumnOf("runs", "Runs", "x_of_n", ("events", "at_risk")),
        ColumnOf(
            "hours",
            "Time on support, median (25th to 75th percentile)",
            "duration_quartiles",
            ("median", "lower", "upper"),
        ),
        ColumnOf("alive", "Left hospital alive, of those known", "x_of_n", ("alive", "known")),
        ColumnOf("unknown", "Not known", "count", ("unknown",)),
    )
    links = {(slug(k.removeprefix("end_")), "runs"): k for k in lists}
    return TableOf(
        "How support ended",
        "Ending",
        "counts",
        rows,
        columns,
        links={k: v for k, v in links.items() if k[0] in {r.key for r in rows}},
    )


def _at_table(result: str, caption: str, days: list[float]) -> TableOf:
    """A row an ending, two columns a day."""
    names = (
        dict(ENDINGS)
        | ({"transfer out": "transferred out"} if result == "apart" else {})
        | {"still supported": "still supported"}
    )
    columns = []
    for d in days:
        columns.append(
            ColumnOf(f"day_{d:g}", "Share", "percent", ("estimate", "n"), {"time": d}, over=f"by day {d:g}")
        )
        columns.append(
            ColumnOf(
                f"day_{d:g}_ci",
                "",
                "percent_interval",
                ("lower", "upper", "n"),
                {"time": d},
                over=f"by day {d:g}",
            )
        )
    return TableOf(caption, "Ending", result, rows_of(names, "cause"), tuple(columns))


def _risk_layout(days: list[float]) -> TableOf:
    """How many runs were on support and observed just before each day: what its shares stand on."""
    rows = tuple(RowOf(f"day_{d:g}", f"day {d:g}", {"time": d, "cause": "still supported"}) for d in days)
    columns = (
        ColumnOf("day", "Day", "time", ("time",)),
        ColumnOf("at_risk", "Runs at risk", "count", ("at_risk",)),
    )
    return TableOf("Runs at risk, by day", "Just before", "curve", rows, columns)


def _after_weaning(cohort: Cohort) -> Result:
    """What became of the weaned: supported again within 48 h and 30 d, left hospital alive."""
    weaned = cohort.run[cohort.run["end_kind"] == "recovery"]
    again = weaned["supported_again_after_h"]
    known = weaned["is_alive_at_discharge"].notna()
    parts = [
        ("again_48h", int((again <= 48).fillna(False).sum()), len(weaned)),
        ("again_30d", int((again <= 720).fillna(False).sum()), len(weaned)),
        ("home", int(weaned["is_alive_at_discharge"].fillna(False).sum()), int(known.sum())),
    ]
    rows = []
    method = None
    for key, x, n in parts:
        row: dict[str, object] = {"group": key, "events": x, "at_risk": n, "unknown": len(weaned) - n}
        try:
            one = proportion(x, n)
            method = one.method
            first = one.table.iloc[0]
            row |= {c: first[c] for c in ("estimate", "lower", "upper")}
        except NotEstimable as reason:
            row["reason"] = reason.reason_code
        rows.append(row)
    table = tidy(rows, ["group", "events", "at_risk", "unknown", "estimate", "lower", "upper", "reason"])
    return Result(table, method) if method else counted(rows, list(table.columns))


def _weaned_table() -> TableOf:
    labels = {
        "again_48h": "supported again within 48 hours",
        "again_30d": "supported again within 30 days",
        "home": "left hospital alive",
    }
    columns = (
        ColumnOf("runs", "Runs", "x_of_n", ("events", "at_risk")),
        ColumnOf("share", "Share", "percent", ("estimate", "at_risk")),
        ColumnOf("interval", "", "percent_interval", ("lower", "upper", "at_risk")),
        ColumnOf("unknown", "Not known", "count", ("unknown",)),
    )
    return TableOf("What became of the weaned", "Afterwards", "after", rows_of(labels), columns)


ANALYSES = {"endings": endings}
