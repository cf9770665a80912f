"""Survival of persons from their first run: section 5 of the audit. Each horizon has its own cohort."""

from __future__ import annotations

import numpy as np
import pandas as pd

from outcomes.analysis.rates import proportion
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.survival import kaplan_meier, median_time, survival_at
from outcomes.cohort.frames import Cohort
from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import DAY, counted, first_runs, run_list

HORIZONS = (30, 90, 180, 365)
_COLUMNS = [
    "time",
    "estimate",
    "lower",
    "upper",
    "at_risk",
    "events",
    "persons",
    "not_yet",
    "low_news",
    "high_news",
    "worst",
    "best",
    "reason",
]


def survival(audit: Audit, days: list[float]) -> Answer:
    """Kaplan–Meier from the start of support; survival at discharge and at 30, 90, 180 and 365 days."""
    people = first_runs(audit.current)
    if people.empty:
        raise NotEstimable("no_runs", "No first run is in this period.")
    people = people[~people["has_unknown_entry"].fillna(False).astype(bool)].reset_index(drop=True)
    if people.empty:
        raise NotEstimable("no_runs", "Every first run was transferred in at an unknown time.")
    curve = curve_of(people)
    at, notes = horizon_table(audit.current, people)
    discharge = discharge_table(audit.current, people)
    ticks = [0.0, *days]
    risk = risk_table(people, ticks)
    rows = tuple(RowOf(f"day_{d}", f"day {d}", {"time": float(d)}) for d in HORIZONS)
    died = people.loc[people["died"].astype(bool), "run_key"]
    return Answer(
        {
            "at": Result(at, curve.method, {"persons": len(people)}, notes),
            "curve": curve,
            "risk": risk,
            "discharge": discharge,
        },
        {
            "survival_at": TableOf(
                "Survival at fixed times",
                "Until",
                "at",
                rows,
                _at_columns(bool(people["is_news"].any())),
                links={("day_365", "deaths"): "died"} if len(died) else {},
            ),
            "discharge": _discharge_layout(),
        },
        {
            "survival_curve": FigureOf(
                "survival",
                "Survival after the start of support",
                "survival_at",
                {"curve": "curve", "risk": "risk"},
                {"": "all"},
                {"time": "Days since start of support", "value": "Alive", "event": "Died"},
            )
        },
        facts={"any_news": bool(people["is_news"].any()), "any_left_out": _left_out(audit.current) > 0},
        lists={"died": run_list("Died, first runs", died)} if len(died) else {},
    )


def curve_of(people: pd.DataFrame, column: str = "time_h", days: list[float] | None = None) -> Result:
    """Kaplan–Meier in days over rows of mart.survival; column: time_h, time_low_h or time_high_h."""
    time, entry = people[column].to_numpy(dtype=float) / DAY, people["entry_h"].to_numpy(dtype=float) / DAY
    keep = (time > entry) | ((entry <= 0) & (time >= 0))
    return kaplan_meier(time[keep], people["died"].to_numpy(dtype=bool)[keep], entry=entry[keep], times=days)


def horizon_table(cohort: Cohort, people: pd.DataFrame) -> tuple[pd.DataFrame, tuple[Caution, ...]]:
    """One row a horizon, among those whom the source could have followed to it.

    A point past the follow-up is withheld.
    """
    rows, notes = [], []
    aside = _left_out(cohort)
    for day in HORIZONS:
        could = people[people[f"observable_to_day_{day}"].astype(bool)]
        row: dict[str, object] = {
            "time": float(day),
            "persons": len(could),
            "not_yet": len(people) - len(could),
        }
        try:
            row |= _at(could, float(day), aside)
        except NotEstimable as reason:
            row["reason"] = reason.reason_code
        if row.get("reason") == "beyond_follow_up":
            notes.append(Caution("FU", f"Follow-up does not reach day {day}: no estimate is given there."))
        rows.append(row)
    return tidy(rows, _COLUMNS), tuple(notes)


def _at(could: pd.DataFrame, day: float, aside: int) -> dict[str, object]:
    if could.empty:
        raise NotEstimable("no_runs", "Nobody could have been followed so far.")
    point = survival_at(curve_of(could, days=[day]), day)
    row = {k: point.table.iloc[0][k] for k in ("estimate", "lower", "upper", "at_risk", "reason")}
    if pd.isna(row["reason"]) or row["reason"] == "":
        row.pop("reason")
    time = could["time_h"].to_numpy(dtype=float)
    row["events"] = int((could["died"].to_numpy(dtype=bool) & (time <= day * DAY)).sum())
    if pd.notna(row["estimate"]):
        low = survival_at(curve_of(could, "time_low_h", [day]), day).table.iloc[0]["estimate"]
        n = len(could)
        row |= {
            "low_news": low,
            "high_news": row["estimate"],
            "worst": row["estimate"] * n / (n + aside),
            "best": (row["estimate"] * n + aside) / (n + aside),
        }
    return row


def _left_out(cohort: Cohort) -> int:
    """Persons who have no usable first run: set aside, or of unknown order."""
    counted_people = set(cohort.run.loc[cohort.run["is_first_run"], "person_key"])
    first_aside = cohort.set_aside[(cohort.set_aside["nth_run"].fillna(1) == 1)]
    unsure = cohort.run[~cohort.run["is_first_run"] & (cohort.run["nth_run"].fillna(1) == 1)]
    return len((set(first_aside["person_key"]) | set(unsure["person_key"])) - counted_people)


def _at_columns(news: bool) -> tuple[ColumnOf, ...]:
    columns = [
        ColumnOf("day", "Day", "time", ("time",)),
        ColumnOf("persons", "People", "count", ("persons",)),
        ColumnOf("deaths", "Died", "count", ("events",)),
        ColumnOf("at_risk", "At risk then", "count", ("at_risk",)),
        ColumnOf("survival", "Survival", "percent", ("estimate", "persons")),
        ColumnOf("interval", "", "percent_interval", ("lower", "upper", "persons")),
        ColumnOf("of_100", "In words", "of_100", ("estimate", "persons")),
        ColumnOf(
            "bounds", "Had all set aside died, or lived", "percent_interval", ("worst", "best", "persons")
        ),
        ColumnOf("not_yet", "Not yet so long ago", "count", ("not_yet",)),
    ]
    if news:
        columns.insert(
            7,
            ColumnOf(
                "news",
                "Deaths at the last day known alive, or at the news",
                "percent_interval",
                ("low_news", "high_news", "persons"),
            ),
        )
    return tuple(columns)


def risk_table(people: pd.DataFrame, ticks: list[float]) -> Result:
    """At risk, died so far and censored so far at fixed days.

    Without late entry the three add up to everyone.
    """
    time = people["time_h"].to_numpy(dtype=float) / DAY
    entry = people["entry_h"].to_numpy(dtype=float) / DAY
    died = people["died"].to_numpy(dtype=bool)
    rows = []
    for tick in ticks:
        gone = time < tick
        inside = (time >= tick) & ((entry < tick) | (entry <= 0))
        rows.append(
            {
                "group": "",
                "time": tick,
                "at_risk": int(inside.sum()),
                "events": int((gone & died).sum()),
                "censored": int((gone & ~died).sum()),
            }
        )
    return Result(
        tidy(rows, ["group", "time", "at_risk", "events", "censored"]),
        Method("counts of persons", time_unit="days"),
    )


def discharge_table(cohort: Cohort, people: pd.DataFrame) -> Result:
    """x of N for persons (first runs) and for runs: known, unknown, both bounds; still in hospital apart."""
    rows = []
    method = None
    for key, frame in (("people", people), ("runs", cohort.survival)):
        alive = frame["is_alive_at_discharge"]
        inpatient = frame["is_still_inpatient"].fillna(False).astype(bool)
        x, n, total = int(alive.fillna(False).sum()), int(alive.notna().sum()), len(frame)
        unknown = total - n
        row: dict[str, object] = {
            "group": key,
            "events": x,
            "at_risk": n,
            "total": total,
            "unknown": unknown,
            "inpatient": int(inpatient.sum()),
            "worst": x / total if total else None,
            "best": (x + unknown) / total if total else None,
        }
        try:
            one = proportion(x, n)
            method = one.method
            row |= {c: one.table.iloc[0][c] for c in ("estimate", "lower", "upper")}
        except NotEstimable as reason:
            row["reason"] = reason.reason_code
        rows.append(row)
    columns = [
        "group",
        "events",
        "at_risk",
        "total",
        "unknown",
        "inpatient",
        "estimate",
        "lower",
        "upper",
        "worst",
        "best",
        "reason",
    ]
    return Result(tidy(rows, columns), method) if method else counted(rows, columns)


def _discharge_layout() -> TableOf:
    rows = (
        RowOf("people", "people, by their first run", {"group": "people"}),
        RowOf("runs", "all runs", {"group": "runs"}),
    )
    columns = (
        ColumnOf("alive", "Left hospital alive, of those known", "x_of_n", ("events", "at_risk")),
        ColumnOf("share", "Share", "percent", ("estimate", "at_risk")),
        ColumnOf("interval", "", "percent_interval", ("lower", "upper", "at_risk")),
        ColumnOf("unknown", "Not known", "count", ("unknown",)),
        ColumnOf("inpatient", "Of these still in hospital", "count", ("inpatient",)),
        ColumnOf(
            "bounds", "Had all not known died, or lived", "percent_interval", ("worst", "best", "total")
        ),
    )
    return TableOf("Alive at hospital discharge", "Counted", "discharge", rows, columns)


def median_survival(people: pd.DataFrame) -> Result:
    return median_time(curve_of(people))


def quantiles(values: np.ndarray) -> tuple[float, float, float]:
    """25th, 50th and 75th percentile, type 7."""
    low, middle, high = np.quantile(values, [0.25, 0.5, 0.75])
    return float(low), float(middle), float(high)


ANALYSES = {"survival": survival}
