"""What stands beside the counts of published scores: why runs are not eligible, classes, organ failure by
two sources, and how the scores did elsewhere."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import pandas as pd

from outcomes.analysis.result import Result
from outcomes.scores.engine import item_table
from outcomes.scores.model import Item, Score
from outcomes.study.answer import ColumnOf, RowOf, TableOf
from outcomes.study.audit_scores_missing import HasAnswer, Part
from outcomes.study.shape import counted

Row = dict[str, object]
MINUS = "\N{MINUS SIGN}"


def _layout(
    key: str,
    caption: str,
    stub: str,
    rows: list[Row],
    columns: tuple[ColumnOf, ...],
    words: tuple[str, ...] = (),
    notes: tuple[str, ...] = (),
) -> Part:
    """A table with one row a result row; a result row is found by its number, its label stands in `label`."""
    if not rows:
        return {}, {}
    names = [c for c in dict.fromkeys(n for r in rows for n in r) if c != "label"]
    numbered = [{"group": f"{key} {n}", **row} for n, row in enumerate(rows)]
    result: Result = counted(numbered, ["group", *names], words=words)
    shown = tuple(RowOf(f"r{n}", str(row["label"]), {"group": f"{key} {n}"}) for n, row in enumerate(rows))
    return {key: result}, {f"score_{key}": TableOf(caption, stub, key, shown, columns, notes)}


def reasons_part(found: Sequence[HasAnswer]) -> Part:
    """Why runs are not eligible or cannot be judged, score by score."""
    rows: list[Row] = []
    for one in found:
        why = one.answer["eligibility_reason"].astype("string")
        counts = why[why.fillna("") != ""].value_counts()
        for text in sorted(counts.index, key=lambda t: (-int(counts[t]), str(t))):
            label = f"{one.score.name}: {_plain(str(text))}"
            rows.append({"label": label, "events": int(counts[text]), "at_risk": len(one.answer)})
    column = ColumnOf("runs", "Runs", "x_of_n", ("events", "at_risk"))
    caption = "Why runs are not eligible or cannot be judged"
    return _layout(
        "reasons",
        caption,
        "Score and reason",
        rows,
        (column,),
        notes=("The first rule that fails is counted.",),
    )


def _plain(reason: str) -> str:
    text = reason.removeprefix("outside the population: ").removesuffix(" does not hold")
    return f"rule not met: {text}" if text != reason else text.replace("_", " ")


def classes_part(found: Sequence[HasAnswer]) -> Part:
    """Classes of the runs that are eligible and complete. No outcome stands here: it differs between
    scores."""
    rows: list[Row] = []
    for one in found:
        whole = one.answer[(one.answer["eligible"].astype("string") == "yes") & one.answer["total"].notna()]
        counts = whole["class"].astype("string").value_counts()
        for level in one.active.classes if len(whole) else ():
            label = class_label(one.score, level.key, level.interval.words())
            rows.append({"label": label, "events": int(counts.get(level.key, 0)), "at_risk": len(whole)})
    column = ColumnOf("runs", "Runs, of those eligible and complete", "x_of_n", ("events", "at_risk"))
    return _layout("classes", "Classes of the scores", "Score and class", rows, (column,))


def class_label(score: Score, key: str, total: str) -> str:
    return f"{score.name}, class {key}: total {total.replace('-', MINUS)}"


def organ_part(found: Sequence[HasAnswer], frame: pd.DataFrame) -> Part:
    """Organ failure as recorded by the centre beside the laboratory definition, for scores whose table has
    both."""
    rows = [row for one in found for row in _organ_rows(one.score, frame)]
    columns = (
        ColumnOf("known", "Both sources can say", "x_of_n", ("known", "runs")),
        ColumnOf("differ", "Disagree", "x_of_n", ("differ", "known")),
        ColumnOf("only_recorded", "Recorded, not by laboratory values", "count", ("only_recorded",)),
        ColumnOf("only_measured", "By laboratory values, not recorded", "count", ("only_measured",)),
        ColumnOf("no_recorded", "Not recorded", "count", ("no_recorded",)),
        ColumnOf("no_measured", "Laboratory values cannot say", "count", ("no_measured",)),
    )
    caption = "Organ failure: the centre's record beside the laboratory definition"
    notes = ("Points are given from the record.",)
    return _layout("organ", caption, "Score and organ failure", rows, columns, notes=notes)


def _organ_rows(score: Score, frame: pd.DataFrame) -> list[Row]:
    rows: list[Row] = []
    for choice in score.conventions:
        if not {"recorded", "measured"} <= set(choice.options):
            continue
        for item in _recorded_items(score, choice.key):
            recorded = _failing(score, item.key, {choice.key: "recorded"}, frame)
            measured = _failing(score, item.key, {choice.key: "measured"}, frame)
            rows.append({"label": f"{score.name}: {item.label}", **_compared(recorded, measured)})
    return rows


def _recorded_items(score: Score, convention: str) -> list[Item]:
    """Items that belong to the record and not to the laboratory."""
    recorded, measured = f"{convention}=recorded", f"{convention}=measured"
    return [item for item in score.items if recorded in item.only_with and measured not in item.only_with]


def _failing(score: Score, item: str, options: Mapping[str, str], frame: pd.DataFrame) -> pd.Series:
    """Whether the item counts, NA where its source leaves it open."""
    points = item_table(score, frame, options=options)
    points = points[points["item"] == item]
    return (points["points_low"] != 0).astype("boolean").mask(points["points_low"] != points["points_high"])


def _compared(recorded: pd.Series, measured: pd.Series) -> Row:
    known = recorded.notna() & measured.notna()
    said, seen = recorded[known].astype(bool), measured[known].astype(bool)
    return {
        "runs": len(recorded),
        "known": int(known.sum()),
        "differ": int((said != seen).sum()),
        "only_recorded": int((said & ~seen).sum()),
        "only_measured": int((seen & ~said).sum()),
        "no_recorded": int(recorded.isna().sum()),
        "no_measured": int(measured.isna().sum()),
    }


def published_part(found: Sequence[HasAnswer]) -> Part:
    """How each score that predicts did where it was made and elsewhere, as its sheet has it."""
    rows = [r for one in found if one.score.purpose != "descriptor" for r in _published_rows(one.score)]
    columns = (
        ColumnOf("where", "Cohort", "word", ("where",)),
        ColumnOf("people", "People", "count", ("people",)),
        ColumnOf("auroc", "AUROC", "number_2", ("auroc",)),
        ColumnOf("auroc_ci", "95% CI", "number_interval_2", ("lower", "upper")),
        ColumnOf("remark", "Outcome, calibration, remarks", "word", ("remark",)),
        ColumnOf("evidence", "Evidence", "word", ("evidence",)),
    )
    words, caption = ("where", "remark", "evidence"), "How the scores did where they were made and elsewhere"
    note = (
        "Areas under the curve belong to different outcomes and people: they do not rank the scores. [x] here: "
        "not printed or not read."
    )
    return _layout("published", caption, "Score", rows, columns, words, (note,))


def _published_rows(score: Score) -> list[Row]:
    rows: list[Row] = []
    made = score.sheet["derivation"]
    if made["n"]:
        events = f"{made['event']} {made['n_events']:,.0f}" if made["n_events"] else made["event"]
        where = ", ".join(filter(None, (made["text"], made["years"])))
        rows.append(
            {
                "label": f"{score.name}: made from",
                "people": made["n"],
                "where": where,
                "remark": events or "–",
                "evidence": made["evidence"],
                "reason": "not_applicable",
            }
        )
    for line in score.sheet["performance"]:
        rows.append(
            {
                "label": score.name,
                "people": line["n"],
                "auroc": line["auroc"],
                "lower": line["auroc_low"],
                "upper": line["auroc_high"],
                "where": line["cohort"],
                "remark": line["remark"] or "–",
                "evidence": line["evidence"],
            }
        )
    return rows
