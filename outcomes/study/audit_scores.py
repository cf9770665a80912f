"""Published pre-support scores: section 6 of the audit. Totals, bounds and eligibility; expected survivors only from
tables that the programme has checked, or that need no check."""

from __future__ import annotations

import re

import pandas as pd

from outcomes.analysis.rates import standardised_ratio
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import NotEstimable, UsageError
from outcomes.scores.catalogue import find_score, list_scores
from outcomes.scores.engine import compute
from outcomes.scores.gate import DeclaredCheck, usable_for_expectation
from outcomes.study.answer import Answer, ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import COUNTED, counted, slug

_COUNTS = ["group", "runs", "eligible", "not_eligible", "not_judged", "complete", "bounded", "asked", "lacking", "lowest", "median", "highest"]


def score_answers(audit: Audit, keys: list[str]) -> dict[str, pd.DataFrame]:
    """Score key -> answers, one row a run of the period."""
    frame = score_frame(audit)
    return {key: compute(key, frame) for key in keys}


def score_frame(audit: Audit) -> pd.DataFrame:
    """mart.score_input under the canonical input names; an age from a birth year becomes an interval of two years."""
    frame = audit.current.score_input.set_index("run_key")
    frame["age_low"], frame["age_high"] = frame["age_low_years"], frame["age_years"]
    uncertain = frame["age_low_years"] != frame["age_years"]
    frame["age_years"] = frame["age_years"].mask(uncertain.fillna(False))
    return frame


def published_scores(audit: Audit, keys: list[str]) -> Answer:
    """For each score: eligible, not, cannot be judged; complete, bounded; the spread of totals; what is missing most."""
    if audit.current.score_input.empty:
        raise NotEstimable("no_runs", "No run is in this period.")
    answers = score_answers(audit, keys)
    counts = [_count_row(key, answers[key]) for key in keys]
    labels = {key: _title(key) for key in keys}
    lacking = _lacking(answers, labels)
    gate = [_gate_row(audit, key) for key in keys]
    expected = _expected(audit, answers)
    results = {
        "scores": counted(counts, _COUNTS), "lacking": lacking,
        "gate": counted(gate, ["group", "allowed", "why"], words=("allowed", "why")), "expected": expected,
    }  # fmt: skip
    rows = tuple(RowOf(slug(k), labels[k], {"group": k}) for k in keys)
    tables = {
        "scores": TableOf("In how many runs each score could be computed", "Score", "scores", rows, _columns()),
        "score_gate": TableOf("Whether expected survivors may be given", "Score", "gate", rows,
                              (ColumnOf("allowed", "Expected survivors", "word", ("allowed",)), ColumnOf("why", "Because", "word", ("why",)))),
    }  # fmt: skip
    if len(lacking.table):
        shown = tuple(RowOf(f"i{i}", str(g), {"group": str(g)}) for i, g in enumerate(lacking.table["group"]))
        tables["score_lacking"] = TableOf("Which inputs are missing most", "Score and input", "lacking", shown,
                                          (ColumnOf("runs", "Runs of those eligible or not judged", "x_of_n", ("events", "at_risk")),))  # fmt: skip
    if len(expected.table):
        shown = tuple(RowOf(slug(str(g)), labels[str(g)], {"group": str(g)}) for g in expected.table["group"])
        tables["score_expected"] = TableOf("Observed and expected", "Score", "expected", shown, _expected_columns())
    return Answer(
        results, tables, facts={"any_expected": bool(len(expected.table))},
        cautions=(Caution("SCORE", "Scores were made elsewhere and earlier, in other people; they inform audit and research and are no verdict on care "
                                   "and no bedside decision."),),
    )  # fmt: skip


def _title(key: str) -> str:
    listed = list_scores()
    row = listed[listed["key"] == key]
    return str(row.iloc[0]["name"])


def _count_row(key: str, answer: pd.DataFrame) -> dict[str, object]:
    eligible = answer["eligible"].astype("string")
    asked = answer[eligible != "no"]
    complete = asked["total"].notna()
    totals = asked.loc[complete, "total"].astype("Float64")
    row: dict[str, object] = {
        "group": key, "runs": len(answer), "eligible": int((eligible == "yes").sum()), "asked": len(asked), "not_eligible": int((eligible == "no").sum()),
        "not_judged": int((eligible == "unknown").sum()), "complete": int(complete.sum()),
        "bounded": int((~complete).sum()), "lacking": int((answer["missing"].astype("string").fillna("") != "").sum()),
    }  # fmt: skip
    if len(totals):
        low, middle, high = totals.astype(float).quantile([0.25, 0.5, 0.75])
        row |= {"lowest": low, "median": middle, "highest": high}
    return row


def _columns() -> tuple[ColumnOf, ...]:
    return (
        ColumnOf("eligible", "Eligible", "x_of_n", ("eligible", "runs")),
        ColumnOf("not_eligible", "Not eligible", "count", ("not_eligible",)),
        ColumnOf("not_judged", "Cannot be judged", "count", ("not_judged",)),
        ColumnOf("complete", "Complete, of those eligible or not judged", "x_of_n", ("complete", "asked")),
        ColumnOf("bounded", "Bounded only", "count", ("bounded",)),
        ColumnOf("total", "Total, median (25th to 75th percentile)", "quartiles_0", ("median", "lowest", "highest")),
    )


def _lacking(answers: dict[str, pd.DataFrame], labels: dict[str, str]) -> Result:
    """The three inputs of each score that most runs lack, among runs that are eligible or cannot be judged."""
    rows: list[dict[str, object]] = []
    for key, answer in answers.items():
        asked = answer[answer["eligible"].astype("string") != "no"]
        names = asked["missing"].astype("string").fillna("").str.split(r"[;,]\s*", regex=True).explode()
        found = names[names != ""].value_counts()
        for name in sorted(found.index, key=lambda n: (-int(found[n]), n))[:3]:
            rows.append({"group": f"{labels[key]}: {str(name).replace('_', ' ')}", "events": int(found[name]), "at_risk": len(asked)})
    return Result(tidy(rows, ["group", "events", "at_risk"]), COUNTED)


def _checks(audit: Audit) -> dict[str, DeclaredCheck]:
    """--score-checked SCORE=DATE,ROLE as declarations of the gate."""
    found = {}
    for entry in audit.score_checks:
        parts = re.fullmatch(r"([a-z0-9_]+)=([0-9]{4}-[0-9]{2}-[0-9]{2}),(.{1,60})", entry)
        if parts is None:
            raise UsageError("USAGE.SCORE-CHECKED", "write the score, the date and the role of who checked it", todo="--score-checked save=2024-03-01,statistician")
        found[parts[1]] = DeclaredCheck(parts[1], parts[2], parts[3])
    return found


def _gate_row(audit: Audit, key: str) -> dict[str, object]:
    usable = usable_for_expectation(key, list(_checks(audit).values()))
    return {"group": key, "allowed": "given" if usable.is_usable else "not given", "why": usable.reason}


def _expected(audit: Audit, answers: dict[str, pd.DataFrame]) -> Result:
    """Observed and expected survivors to discharge, for scores of that outcome that may be used."""
    rows, method = [], Method("observed / expected")
    alive = audit.current.run.set_index("run_key")["is_alive_at_discharge"]
    checks = list(_checks(audit).values())
    for key, answer in answers.items():
        if not usable_for_expectation(key, checks).is_usable or not _predicts_discharge(key):
            continue
        known = answer["predicted"].notna() & alive.reindex(answer.index).notna()
        if not known.any():
            continue
        predicted = answer.loc[known, "predicted"].astype(float)
        higher_is_death = "death" in str(answer.loc[known, "predicted_outcome"].astype("string").iloc[0]).lower()
        expected = float((1 - predicted).sum() if higher_is_death else predicted.sum())
        observed = int(alive.reindex(answer.index)[known].astype(bool).sum())
        row: dict[str, object] = {"group": key, "events": observed, "expected": expected, "at_risk": int(known.sum()), "outside": int((~known).sum())}
        try:
            ratio = standardised_ratio(observed, expected)
            method = ratio.method
            row |= {c: ratio.table.iloc[0][c] for c in ("estimate", "lower", "upper")}
        except NotEstimable as reason:
            row["reason"] = reason.reason_code
        rows.append(row)
    return Result(tidy(rows, ["group", "events", "expected", "at_risk", "outside", "estimate", "lower", "upper", "reason"]), method)


def _predicts_discharge(key: str) -> bool:
    words = str(find_score(key).outcome).lower()
    return "hospital" in words and "30" not in words


def _expected_columns() -> tuple[ColumnOf, ...]:
    return (
        ColumnOf("runs", "Runs", "count", ("at_risk",)),
        ColumnOf("observed", "Observed survivors", "count", ("events",)),
        ColumnOf("expected", "Expected survivors", "number_1", ("expected",)),
        ColumnOf("ratio", "Observed / expected", "ratio_interval", ("estimate", "lower", "upper")),
        ColumnOf("outside", "Runs outside", "count", ("outside",)),
    )


ANALYSES = {"published_scores": published_scores}
