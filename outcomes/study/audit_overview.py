"""The first page of the audit.

What happened to the runs of the period, and whether the period before differs.
"""

from __future__ import annotations

import pandas as pd

from outcomes.analysis.rates import proportion, proportion_difference
from outcomes.analysis.result import Method, Result, tidy
from outcomes.cohort.frames import Cohort
from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.audit_survival import horizon_table
from outcomes.study.shape import CAUSES, COUNTED, counted, first_runs, run_list

_COLUMNS = ["group", "when", "events", "at_risk", "estimate", "lower", "upper", "unknown", "reason"]
LINES = {
    "end": "alive at the end of support, of runs that ended here",
    "discharge": "left hospital alive, of runs whose discharge is known",
    "day_30": "alive at day 30, people by their first run",
}


def overview(audit: Audit) -> Answer:
    """Counts and five lines of outcome for this period.

    If the period before is comparable, the same for it, with differences.
    """
    if audit.current.run.empty:
        raise NotEstimable("no_runs", "No run is in this period.")
    now = _outcomes(audit.current, "now")
    before = _outcomes(audit.before, "before") if audit.before is not None else []
    methods = [m for _, m in now if m is not None]
    outcome = tidy([row for row, _ in [*now, *before]], _COLUMNS_TIDY)
    outcome["when"] = pd.array([str(row["when"]) for row, _ in [*now, *before]], dtype="string")
    size = _size(audit)
    results = {
        "size": size,
        "outcome": Result(outcome, methods[0] if methods else Method("x of n")),
        "endings": _endings(audit.current),
    }
    tables = {
        "period": _size_layout(audit),
        "outcome": _outcome_layout(audit),
        "how_ended": _endings_layout(),
    }
    if before:
        results["difference"] = _differences(outcome)
    run = audit.current.run
    return Answer(
        results,
        tables,
        facts={
            "compared": bool(before),
            "change": _change(results.get("difference")),
            "open": bool((run["end_kind"] == "open").any()),
        },
        lists={"summary_runs": run_list("Runs of the period", run["run_key"])},
    )


_COLUMNS_TIDY = [c for c in _COLUMNS if c != "when"]
_ENDS = {
    "weaned": "weaned",
    "weaned_home": "weaned, of whom left hospital alive",
    "durable_lvad": "durable LVAD",
    "transplantation": "transplantation",
    "death_or_withdrawal": "death or withdrawal",
    "other_exit": "other exit",
    "transferred": "transferred out",
    "open": "still on support",
}


def _endings(cohort: Cohort) -> Result:
    run = cohort.run
    weaned = run[run["end_kind"] == "recovery"]
    n_of = {
        name: int((run["pathway"] == name).sum()) for name in (*CAUSES, "transfer out", "still on support")
    }
    home = int(weaned["is_alive_at_discharge"].fillna(False).sum())
    values = [
        n_of["recovery"],
        home,
        n_of["durable LVAD"],
        n_of["transplantation"],
        n_of["death or withdrawal"],
        n_of["other exit"],
        n_of["transfer out"],
        n_of["still on support"],
    ]
    sizes = [len(run), len(weaned), *[len(run)] * 6]
    rows = [{"group": k, "events": x, "at_risk": n} for k, x, n in zip(_ENDS, values, sizes, strict=True)]
    return counted(rows, ["group", "events", "at_risk"])


def _endings_layout() -> TableOf:
    return TableOf(
        "How the runs of the period ended",
        "Ending",
        "endings",
        tuple(RowOf(k, label, {"group": k}) for k, label in _ENDS.items()),
        (ColumnOf("runs", "Runs", "count", ("events",)), ColumnOf("of", "Of", "count", ("at_risk",))),
    )


def _outcomes(cohort: Cohort, when: str) -> list[tuple[dict[str, object], Method | None]]:
    run = cohort.run
    ended = run[~run["end_kind"].isin(["open", "transfer_out"]) & run["end_kind"].notna()]
    alive = ended[~ended["end_kind"].isin(["death", "withdrawal"])]
    known = run[run["is_alive_at_discharge"].notna()]
    home = int(known["is_alive_at_discharge"].astype(bool).sum())
    rows = [
        _share("end", when, len(alive), len(ended), len(run) - len(ended)),
        _share("discharge", when, home, len(known), len(run) - len(known)),
    ]
    people = first_runs(cohort)
    table, _ = horizon_table(cohort, people)
    point = table[table["time"] == 30.0].iloc[0]
    n = int(point["persons"])
    day_30: dict[str, object] = {
        "group": "day_30",
        "when": when,
        "at_risk": n,
        "unknown": int(point["not_yet"]),
        "events": None,
    }
    day_30 |= {c: point[c] for c in ("estimate", "lower", "upper")}
    if pd.notna(point["reason"]):
        day_30["reason"] = point["reason"]
    return [*rows, (day_30, None)]


def _share(key: str, when: str, x: int, n: int, unknown: int) -> tuple[dict[str, object], Method | None]:
    row: dict[str, object] = {"group": key, "when": when, "events": x, "at_risk": n, "unknown": unknown}
    try:
        one = proportion(x, n)
        return row | {c: one.table.iloc[0][c] for c in ("estimate", "lower", "upper")}, one.method
    except NotEstimable as reason:
        return row | {"reason": reason.reason_code}, None


def _size(audit: Audit) -> Result:
    rows = []
    for when, cohort in (("now", audit.current), ("before", audit.before)):
        if cohort is None:
            continue
        days = float(cohort.run["support_h"].fillna(0).sum()) / 24.0
        for key, value in (
            ("runs", len(cohort.run)),
            ("people", int(cohort.run["person_key"].nunique())),
            ("days", days),
        ):
            rows.append({"group": key, "cause": when, "estimate": float(value)})
    return Result(tidy(rows, ["group", "cause", "estimate"]), COUNTED)


def _size_layout(audit: Audit) -> TableOf:
    rows = (
        RowOf("runs", "runs", {"group": "runs"}),
        RowOf("people", "people", {"group": "people"}),
        RowOf("days", "support-days", {"group": "days"}),
    )
    columns = [ColumnOf("now", audit.label, "number_0", ("estimate",), {"cause": "now"})]
    if audit.before is not None:
        columns.append(ColumnOf("before", audit.label_before, "number_0", ("estimate",), {"cause": "before"}))
    return TableOf("The period in numbers", "Counted", "size", rows, tuple(columns))


def _outcome_layout(audit: Audit) -> TableOf:
    rows = tuple(RowOf(k, label, {"group": k}) for k, label in LINES.items())
    columns = [
        ColumnOf("of", "Of", "count", ("at_risk",), {"when": "now"}, over=audit.label),
        ColumnOf("share", "Share", "percent", ("estimate", "at_risk"), {"when": "now"}, over=audit.label),
        ColumnOf(
            "interval",
            "",
            "percent_interval",
            ("lower", "upper", "at_risk"),
            {"when": "now"},
            over=audit.label,
        ),
        ColumnOf("of_100", "In words", "of_100", ("estimate", "at_risk"), {"when": "now"}, over=audit.label),
        ColumnOf(
            "unknown",
            "Not known or not so long ago",
            "count",
            ("unknown",),
            {"when": "now"},
            over=audit.label,
        ),
    ]
    if audit.before is not None:
        columns += [
            ColumnOf(
                "before",
                "Share",
                "percent",
                ("estimate", "at_risk"),
                {"when": "before"},
                over=audit.label_before,
            ),
            ColumnOf("difference", "Difference", "points", ("estimate", "at_risk"), {}, "difference"),
            ColumnOf("difference_ci", "", "points_interval", ("lower", "upper", "at_risk"), {}, "difference"),
        ]
    return TableOf("What became of them", "Outcome", "outcome", rows, tuple(columns))


def _differences(outcome: pd.DataFrame) -> Result:
    """This period minus the period before, Newcombe; for day 30 there is no simple difference of counts."""
    rows, method = [], Method("difference of proportions")
    for key in LINES:
        now, before = (
            outcome[(outcome["group"] == key) & (outcome["when"] == w)].iloc[0] for w in ("now", "before")
        )
        row: dict[str, object] = {"group": key, "at_risk": min(int(now["at_risk"]), int(before["at_risk"]))}
        if pd.isna(now["events"]) or pd.isna(before["events"]) or not now["at_risk"] or not before["at_risk"]:
            row["reason"] = "not_applicable"
        else:
            one = proportion_difference(
                int(now["events"]), int(now["at_risk"]), int(before["events"]), int(before["at_risk"])
            )
            method = one.method
            row |= {c: one.table.iloc[0][c] for c in ("estimate", "lower", "upper")}
        rows.append(row)
    return Result(tidy(rows, ["group", "estimate", "lower", "upper", "at_risk", "reason"]), method)


def _change(difference: Result | None) -> str:
    """In words: whether the interval of the difference of survival to discharge includes no change."""
    if difference is None:
        return ""
    row = difference.table[difference.table["group"] == "discharge"].iloc[0]
    if pd.isna(row["lower"]):
        return ""
    return (
        "compatible with no change"
        if row["lower"] <= 0 <= row["upper"]
        else "larger than chance alone would usually give"
    )


ANALYSES = {"overview": overview}
