"""A score as a sheet for printing: what it is for, what it reads, what it gives, how far to trust it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import pandas as pd

from outcomes.scores.catalogue import Catalogue, find_score
from outcomes.scores.conventions import open_conventions
from outcomes.scores.engine import weakest
from outcomes.scores.gate import Usable, usable_for_expectation
from outcomes.scores.model import Condition, Item, Score

CAUTION = (
    "Scores inform audit and research; they do not decide about support at the bedside. They were made "
    "elsewhere and earlier, in patients who were already given support."
)

INPUT_COLUMNS = (
    "input",
    "field",
    "kind",
    "unit",
    "low",
    "high",
    "choices",
    "window",
    "worst",
    "note",
    "only_with",
)

Line = Mapping[str, Any]


@dataclass(frozen=True)
class ScoreSheet:
    """Everything about one score, as text and plain rows; nothing here is computed from patients."""

    key: str
    name: str
    long_name: str
    status: str
    purpose: str
    direction: str
    outcome: str
    horizon: str
    table: str
    text_hash: str
    weakest_evidence: str
    expectation: Usable
    published_range: tuple[float, float] | None
    constant: float
    citation: Line
    derivation: Line
    population_text: str
    population: tuple[Line, ...]
    inputs: tuple[Line, ...]
    points: tuple[Line, ...]
    classes: tuple[Line, ...]
    conventions: tuple[Line, ...]
    performance: tuple[Line, ...]
    definitions: tuple[str, ...]
    distrust: tuple[str, ...]
    known: tuple[str, ...]
    missing: tuple[str, ...]
    where_printed: str
    caution: str = CAUTION


def describe_score(key: str | Score, tables: Catalogue | None = None) -> ScoreSheet:
    """The sheet of a score, reserved ones included. UsageError SCORE.UNKNOWN for a name that is not there.

    >>> describe_score("tips65").outcome
    'alive at one month with favourable neurology (CPC 1-2)'
    """
    score = find_score(key, tables)
    text = score.sheet
    return ScoreSheet(
        key=score.key,
        name=score.name,
        long_name=score.long_name,
        status=score.status,
        purpose=score.purpose,
        direction=score.direction,
        outcome=score.outcome,
        horizon=score.horizon,
        table=score.whose,
        text_hash=score.text_hash,
        weakest_evidence=weakest(score) if score.is_implemented else "from memory",
        expectation=usable_for_expectation(score),
        published_range=score.published_range,
        constant=score.constant,
        citation=text["citation"],
        derivation=text["derivation"],
        population_text=text["population_text"],
        population=tuple(_population(score)),
        inputs=tuple(input_table(score).to_dict("records")),
        points=tuple(line for item in score.items for line in _points(item)),
        classes=tuple(_classes(score)),
        conventions=tuple(open_conventions(score).to_dict("records")),
        performance=tuple(text["performance"]),
        definitions=text["definitions"],
        distrust=text["distrust"],
        known=text["known"],
        missing=text["missing"],
        where_printed=text["where_printed"],
    )


def input_table(score: str | Score, tables: Catalogue | None = None) -> pd.DataFrame:
    """What a score reads, one row an input, columns INPUT_COLUMNS.

    low and high are the hard limits in `unit`; window says when the value is taken, worst which of several.
    """
    rows = [
        {
            "input": x.key,
            "field": x.field.name,
            "kind": x.field.kind,
            "unit": x.field.unit,
            "low": x.field.low,
            "high": x.field.high,
            "choices": ", ".join(x.field.choices),
            "window": x.window,
            "worst": x.worst,
            "note": x.note,
            "only_with": " or ".join(x.only_with),
        }
        for x in find_score(score, tables).inputs
    ]
    return pd.DataFrame(rows, columns=list(INPUT_COLUMNS)).astype({"low": "Float64", "high": "Float64"})


def _words(test: Condition) -> str:
    return f"{test.input} {test.printed}".strip()


def _population(score: Score) -> list[Line]:
    return [
        {
            "rule": rule.text,
            "test": " or ".join(_words(test) for test in rule.any_of),
            "silence": "met" if rule.unknown_is_met else "cannot be judged",
            "evidence": rule.evidence,
            "only_with": " or ".join(rule.only_with),
        }
        for rule in score.population
    ]


def _points(item: Item) -> list[Line]:
    def line(when: str, points: object, evidence: str, only_with: tuple[str, ...]) -> Line:
        return {
            "item": item.label,
            "when": when,
            "points": points,
            "evidence": evidence,
            "only_with": " or ".join(only_with or item.only_with),
        }

    if item.per_unit is not None:
        return [line(item.inputs[0], f"× {item.per_unit:g}", item.evidence, ())]
    out = [
        line(" and ".join(_words(test) for test in row.when), row.points, row.evidence, row.only_with)
        for row in item.rows
    ]
    if item.otherwise is not None:
        out.append(line("otherwise", item.otherwise, item.evidence, ()))
    for gate in item.not_applicable:
        points = "left open" if gate.points is None else gate.points
        when = "not applicable: " + " and ".join(_words(test) for test in gate.when)
        out.append(line(when, points, gate.evidence, gate.only_with))
    return out


def _classes(score: Score) -> list[Line]:
    return [
        {
            "class": c.key,
            "total": c.interval.words(),
            "probability": c.probability,
            "printed_low": c.printed_low,
            "printed_high": c.printed_high,
            "of": score.outcome,
            "horizon": score.horizon,
            "evidence": c.evidence,
            "only_with": " or ".join(c.only_with),
        }
        for c in score.classes
    ]
