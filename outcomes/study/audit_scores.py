"""Published pre-support scores: section 6 of the audit. In how many runs each could be computed, for whom
it was made, what is missing, and observed beside expected where the table may be used for that."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import pandas as pd

from outcomes.analysis.result import Caution
from outcomes.errors import NotEstimable
from outcomes.scores.catalogue import Catalogue, chosen_options, our_catalogue
from outcomes.scores.engine import compute, weakest
from outcomes.scores.gate import Usable, usable_for_expectation
from outcomes.scores.model import Score, under
from outcomes.scores.sheet import CAUTION
from outcomes.study.answer import Answer, ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.audit_scores_expected import declared_checks, expected_parts, horizon_of
from outcomes.study.audit_scores_lists import classes_part, organ_part, published_part, reasons_part
from outcomes.study.audit_scores_missing import lacking_part, windows_part
from outcomes.study.shape import counted, slug

WHOSE = {"ours": "shipped", "site": "the programme's own"}
_COUNTS = [
    "group",
    "runs",
    "eligible",
    "not_eligible",
    "not_judged",
    "asked",
    "complete",
    "bounded",
    "not_computable",
    "class_known",
    "lower_quartile",
    "median",
    "upper_quartile",
    "reason",
]


@dataclass(frozen=True)
class Computed:
    """A score with its answer for every run of the period. nothing_known: the answer of a run without any
    value."""

    score: Score
    answer: pd.DataFrame
    nothing_known: pd.Series

    @property
    def active(self) -> Score:
        """The score under its default choices, as it was computed."""
        return under(self.score, chosen_options(self.score, None))

    @property
    def eligible(self) -> pd.Series:
        return self.answer["eligible"].astype("string")

    @property
    def asked(self) -> pd.DataFrame:
        """Answers of the runs that are eligible or cannot be judged."""
        return self.answer[self.eligible != "no"]


def score_frame(audit: Audit) -> pd.DataFrame:
    """mart.score_input under the canonical input names; an age from a birth year becomes an interval of two
    years."""
    frame = audit.current.score_input.set_index("run_key")
    frame["age_low"], frame["age_high"] = frame["age_low_years"], frame["age_years"]
    uncertain = frame["age_low_years"] != frame["age_years"]
    frame["age_years"] = frame["age_years"].mask(uncertain.fillna(False))
    return frame


def compute_on(score: Score, frame: pd.DataFrame) -> Computed:
    """The score on a frame of `score_frame`; an input that the store does not know is missing in every
    run."""
    whole = with_inputs(score, frame)
    empty = whole.iloc[:0].reindex([""])
    return Computed(score, compute(score, whole), compute(score, empty).iloc[0])


def with_inputs(score: Score, frame: pd.DataFrame) -> pd.DataFrame:
    """The frame with an empty column for every input that it does not have."""
    kinds = {"yes_no": "boolean", "choice": "string"}
    lacking = {
        x.field.name: kinds.get(x.field.kind, "Float64")
        for x in score.inputs
        if x.field.name not in frame.columns
    }
    return frame.assign(
        **{name: pd.Series(pd.NA, index=frame.index, dtype=kind) for name, kind in lacking.items()}
    )


def score_answers(audit: Audit, keys: Sequence[str] = ()) -> list[Computed]:
    """Every implemented score of the audit's tables (or those named), scores that predict first."""
    tables: Catalogue = audit.tables or our_catalogue()
    found = [tables.score(k) for k in keys] if keys else [s for s in tables.scores() if s.is_implemented]
    found.sort(key=lambda s: (s.purpose == "descriptor", s.name))
    frame = score_frame(audit)
    return [compute_on(score, frame) for score in found]


def published_scores(audit: Audit, keys: Sequence[str] = ()) -> Answer:
    """Section 6. keys: only these scores; all implemented ones if none is named."""
    if audit.current.score_input.empty:
        raise NotEstimable("no_runs", "No run is in this period.")
    checks = declared_checks(audit.score_checks, audit.tables or our_catalogue())
    found = score_answers(audit, keys)
    gate = {c.score.key: usable_for_expectation(c.score, checks) for c in found}
    rows = tuple(RowOf(slug(c.score.key), c.score.name, {"group": c.score.key}) for c in found)
    results = {
        "scores": counted([_count_row(c) for c in found], _COUNTS),
        "gate": counted(
            [_gate_row(c.score, gate[c.score.key]) for c in found], ["group", *_GATE], words=_GATE
        ),
    }
    tables = {
        "scores": TableOf(
            "In how many runs each score could be computed",
            "Score",
            "scores",
            rows,
            _columns(),
            (_COUNT_NOTE,),
        ),
        "score_gate": TableOf(_GATE_CAPTION, "Score", "gate", rows, _gate_columns()),
    }
    frame = score_frame(audit)
    for more_results, more_tables in (
        expected_parts(audit, [c for c in found if gate[c.score.key].is_usable], checks, frame),
        lacking_part(found),
        reasons_part(found),
        classes_part(found),
        organ_part(found, frame),
        windows_part(audit.current.score_window, audit.current.score_input),
        published_part(found),
    ):
        results |= more_results
        tables |= more_tables
    return Answer(results, tables, facts=_facts(audit, found, tables), cautions=(Caution("SCORE", CAUTION),))


_COUNT_NOTE = (
    "Complete, bounded and not computable: of the runs that are eligible or cannot be judged. Bounded: an "
    "input is missing or known within limits only, so the total lies between two values."
)
_GATE_CAPTION = "What each score predicts, whose table was used, and whether expected numbers may be given"


def _facts(audit: Audit, found: list[Computed], tables: dict[str, TableOf]) -> dict[str, bool | str]:
    inputs = audit.current.score_input
    return {
        "any_expected": any(key.startswith("expected_") for key in tables),
        "any_own": any(c.score.whose == "site" for c in found),
        "any_checked": bool(audit.score_checks),
        "any_interval_age": bool((inputs["age_low_years"] != inputs["age_years"]).fillna(False).any()),
        "any_later_run": bool((inputs["nth_run"] > 1).fillna(False).any()),
        "has_save": any(c.score.key == "save" for c in found),
    }


def _count_row(found: Computed) -> dict[str, object]:
    asked, eligible = found.asked, found.eligible
    complete = asked["total"].notna()
    nothing = ~complete
    for end in ("total_low", "total_high"):
        nothing &= (asked[end] == found.nothing_known[end]).fillna(False).astype(bool)
    row: dict[str, object] = {
        "group": found.score.key,
        "runs": len(found.answer),
        "asked": len(asked),
        "reason": "not_applicable",
        "eligible": int((eligible == "yes").sum()),
        "not_eligible": int((eligible == "no").sum()),
        "not_judged": int((eligible == "unknown").sum()),
        "complete": int(complete.sum()),
        "not_computable": int(nothing.sum()),
        "bounded": int((~complete & ~nothing).sum()),
    }
    if found.score.classes:
        row["class_known"] = int(asked["class"].notna().sum())
    totals = asked.loc[complete, "total"].astype(float)
    if len(totals):
        low, middle, high = totals.quantile([0.25, 0.5, 0.75])
        row |= {"lower_quartile": low, "median": middle, "upper_quartile": high}
    return row


def _columns() -> tuple[ColumnOf, ...]:
    quartiles = ("median", "lower_quartile", "upper_quartile")
    return (
        ColumnOf("eligible", "Eligible", "x_of_n", ("eligible", "runs")),
        ColumnOf("not_eligible", "Not eligible", "count", ("not_eligible",)),
        ColumnOf("not_judged", "Cannot be judged", "count", ("not_judged",)),
        ColumnOf("complete", "Complete", "x_of_n", ("complete", "asked"), over="Total"),
        ColumnOf("bounded", "Bounded", "count", ("bounded",), over="Total"),
        ColumnOf("not_computable", "Not computable", "count", ("not_computable",), over="Total"),
        ColumnOf("total", "Median (25th to 75th percentile)", "quartiles_0", quartiles, over="Total"),
        ColumnOf("class_known", "Class known", "count", ("class_known",)),
    )


_GATE = ("predicts", "whose", "evidence", "allowed", "why")


def _gate_row(score: Score, usable: Usable) -> dict[str, object]:
    told = score.horizon in score.outcome or (
        score.horizon == "hospital discharge" and "hospital" in score.outcome
    )
    predicts = score.outcome if told else f"{score.outcome}; horizon {score.horizon}"
    given = usable.is_usable and bool(horizon_of(score))
    why = usable.reason if given or not usable.is_usable else f"outcome not in the store; {usable.reason}"
    return {
        "group": score.key,
        "predicts": predicts if score.outcome else "nothing, it describes",
        "whose": WHOSE[score.whose],
        "evidence": weakest(score),
        "allowed": "given" if given else "not given",
        "why": why,
    }


def _gate_columns() -> tuple[ColumnOf, ...]:
    heads = ("Predicts", "Table", "Weakest evidence in it", "Expected numbers", "Because")
    return tuple(ColumnOf(key, head, "word", (key,)) for key, head in zip(_GATE, heads, strict=True))


ANALYSES = {"published_scores": published_scores}
