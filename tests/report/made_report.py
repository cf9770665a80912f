"""A small report made by hand: the section files in made/, and analyses that return finished results."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from made_results import ENDINGS, KAPLAN_MEIER, SHARE, TICKS, dot_rows, ending_curve, survival_curve

from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import NotEstimable
from outcomes.report.assemble import Options, assemble_files
from outcomes.report.model import Report
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, RunList, TableOf

COUNTED = Method("count of runs")
FILES = {path.name: path.read_text("utf-8") for path in (Path(__file__).parent / "made").iterdir()}

PROVENANCE: Mapping[str, Any] = {
    "Package": "outcomes 0.1.0, code SHA-256 0123abcd",
    "Libraries": ["Python 3.11", "pandas 2.3.3"],
    "Data fingerprint": "89ab" * 16,
    "Import batches": ["1: 60 rows read, 58 accepted, 2 set aside"],
}


def overview(cohort: str) -> Answer:
    rows = [{"group": "runs", "events": 60}, {"group": "people", "events": 58}]
    result = Result(tidy(rows, ["group", "events"]), COUNTED)
    labels = {"runs": "Support runs", "people": "People"}
    return Answer(
        {"counts": result},
        {"overview": TableOf("The period in numbers", "Counted", "counts",
                             tuple(RowOf(k, v, {"group": k}) for k, v in labels.items()),
                             (ColumnOf("count", "Number", "count", ("events",)),))},
    )  # fmt: skip


def who(cohort: str) -> Answer:
    columns = ["group", "events", "at_risk", "reason"]
    stages = [
        ("read", 0, 66, ""),
        ("adults", 4, 62, "younger than eighteen"),
        ("first", 2, 60, "counted before"),
    ]
    table = tidy([dict(zip(columns, stage, strict=True)) for stage in stages], columns).rename(
        columns={"reason": "why"}
    )
    rows = (RowOf("read", "records read", {"group": "read"}), RowOf("adults", "adults", {"group": "adults"}),
            RowOf("first", "first runs", {"group": "first"}))  # fmt: skip
    cells = (ColumnOf("left", "Left", "count", ("events",)), ColumnOf("reason", "Reason", "word", ("why",)),
             ColumnOf("remaining", "Remaining", "count", ("at_risk",)))  # fmt: skip
    return Answer(
        {"flow": Result(table, COUNTED)},
        {
            "who": TableOf(
                "Which runs are counted", "Stage", "flow", rows, cells, (), {("first", "remaining"): "all"}
            )
        },
        {"who_steps": FigureOf("steps", "Which runs are counted", "who")},
        lists={"all": RunList("Runs counted", ("R0001", "R0002", "R0003"))},
    )


def endings(cohort: str, horizon_days: float) -> Answer:
    curve = ending_curve()
    last = curve.table[curve.table["time"] == 29.5]
    rows: list[dict[str, Any]] = [
        {"group": c, "estimate": e, "lower": lo, "upper": u, "events": n, "at_risk": 60}
        for c, e, lo, u, n in last[["cause", "estimate", "lower", "upper", "events"]].itertuples(index=False)
    ]
    rows.append({"group": "all", "events": 60, "at_risk": 60, "reason": "not_applicable"})
    columns = ["group", "estimate", "lower", "upper", "events", "at_risk", "reason"]
    labels = {**ENDINGS, "all": cohort}
    shape = (
        ColumnOf("events", "Runs", "count", ("events",)),
        ColumnOf("share", "Share", "percent", ("estimate", "at_risk")),
        ColumnOf("interval", "", "percent_interval", ("lower", "upper", "at_risk")),
    )
    at = tuple(
        ColumnOf(f"{key}_{part}", heading, kind, fields, {"cause": key}, over=ENDINGS[key])
        for key in ("recovery", "death")
        for part, heading, kind, fields in (
            ("events", "Runs", "count", ("events",)),
            ("at_risk", "At risk", "count", ("at_risk",)),
        )
    )
    words = {"time": "Days since start of support", "value": "Share of runs", "rest": "Still supported"}
    shown: dict[str, Any] = {
        "results": {"curve": "curve", "ticks": "ticks"},
        "labels": ENDINGS,
        "words": words,
    }
    return Answer(
        {
            "shares": Result(tidy(rows, columns), SHARE, {"runs": 60}),
            "curve": curve,
            "ticks": Result(tidy([{"time": t} for t in TICKS], ["time"]), curve.method),
        },
        {
            "endings": TableOf("How support ended", "Ending", "shares",
                               tuple(RowOf(k, v, {"group": k}) for k, v in labels.items()), shape,
                               (f"All runs of {cohort}.",), {("recovery", "events"): "weaned"}),
            "endings_at": TableOf("Endings by day", "Day", "curve",
                                  tuple(RowOf(f"day_{t:g}", f"{t:g}", {"time": t}) for t in TICKS[1:-1]), at),
        },
        {
            "endings_stacked": FigureOf("endings_stacked", "How support ended", "endings",
                                        options={"end": horizon_days}, **shown),
            "endings_apart": FigureOf("endings_apart", "Each ending by itself", "endings",
                                      options={"end": horizon_days}, **shown),
        },
        {"any_open": True, "most": "weaned"},
        lists={"weaned": RunList("Weaned", ("R0001", cohort))},
    )  # fmt: skip


def survival(cohort: str) -> Answer:
    curve, risk = survival_curve({"": 90})
    many, many_risk = survival_curve({"a": 50, "b": 30, "c": 18})
    rows = [{"time": 10.0, "estimate": 0.78, "lower": 0.66, "upper": 0.87, "at_risk": 60},
            {"time": 30.0, "estimate": 0.55, "lower": 0.41, "upper": 0.67, "at_risk": 60},
            {"time": 90.0, "at_risk": 60, "reason": "too_few"}]  # fmt: skip
    at = Result(tidy(rows, ["time", "estimate", "lower", "upper", "at_risk", "reason"]), KAPLAN_MEIER, {},
                (Caution("FU", "Follow-up is shorter than the longest time asked for."),))  # fmt: skip
    columns = (
        ColumnOf("time", "Time", "time", ("time",), unit="days"),
        ColumnOf("survival", "Survival", "percent", ("estimate", "at_risk")),
        ColumnOf("interval", "", "percent_interval", ("lower", "upper", "at_risk")),
        ColumnOf("of_100", "In words", "of_100", ("estimate", "at_risk")),
    )
    rows_of_days = tuple(RowOf(f"day_{t}", f"Day {t}", {"time": float(t)}) for t in (10, 30, 90))
    words = {"time": "Days since start of support", "value": "Alive", "event": "Died"}
    parts = {"curve": "curve", "risk": "risk"}
    groups = {"a": "Infarction", "b": cohort, "c": "After surgery"}
    return Answer(
        {"at": at, "curve": curve, "risk": risk, "many": many, "many_risk": many_risk},
        {"survival_at": TableOf("Survival at fixed times", "Point", "at", rows_of_days, columns)},
        {"survival_curve": FigureOf("survival", "Survival after the start of support", "survival_at", parts,
                                    {"": "All runs"}, words),
         "survival_groups": FigureOf("survival", "Survival by group", "survival_at",
                                     {"curve": "many", "risk": "many_risk"}, groups, words)},
    )  # fmt: skip


def harm(cohort: str) -> Answer:
    labels = {"bleeding": "Major bleeding", "limb": "Limb ischaemia", "stroke": cohort}
    columns = (ColumnOf("rate", "Rate", "ratio", ("estimate",), unit="per 1,000 support-days"),
               ColumnOf("interval", "", "ratio_interval", ("estimate", "lower", "upper")),
               ColumnOf("change", "Change", "points", ("estimate", "lower"), unit="points"))  # fmt: skip
    return Answer(
        {"now": dot_rows(0.01)},
        {"harm": TableOf("Complications", "Complication", "now",
                         tuple(RowOf(k, v, {"group": k}) for k, v in labels.items()), columns)},
        {"harm_dots": FigureOf("dots", "Complications", "harm", {"now": "now"}, labels, {"value": "Events"})},
        cautions=(Caution("MULT", "Three intervals are shown, none adjusted."),),
    )  # fmt: skip


def centres(cohort: str) -> Answer:
    raise NotEstimable("too_few", "there are too few centres to compare")


ANALYSES = {f.__name__: f for f in (overview, who, endings, survival, harm, centres)}


def made(label: str = "Myocarditis", files: Mapping[str, str] = FILES, **options: Any) -> Report:
    """The report, with one label of the data of one's choice."""
    chosen = Options(**{"profile": "internal", "provenance": PROVENANCE, **options})
    return assemble_files("made", sorted(files.items()), ANALYSES, label, chosen)
