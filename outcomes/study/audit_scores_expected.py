"""Observed beside expected for published scores whose table may be used for it. Each outcome and horizon
has its own tables: events of different kinds never stand in one column. Every open choice of a table gives
its own line, and a range."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

import pandas as pd

from outcomes.analysis.ratio import standardised_ratio
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import NotEstimable, UsageError
from outcomes.scores.catalogue import Catalogue, find_score
from outcomes.scores.conventions import option_sets
from outcomes.scores.engine import compute
from outcomes.scores.gate import DeclaredCheck, usable_for_expectation
from outcomes.scores.model import Score
from outcomes.study.answer import ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.audit_scores_lists import class_label
from outcomes.study.audit_scores_missing import HasAnswer, Part
from outcomes.study.shape import DAY

DAYS = (30, 90, 180, 365)
_MONTHS = {1: 30, 3: 90, 6: 180, 12: 365}
_HORIZON = re.compile(r"(\d+) (day|month|year)s?")
_CHECK = re.compile(r"([^=]+)=([0-9]{4}-[0-9]{2}-[0-9]{2}),(.{1,60})")
CERTAIN = 100
_FIELDS = [
    "group",
    "at_risk",
    "published",
    "expected",
    "events",
    "estimate",
    "lower",
    "upper",
    "lowest",
    "highest",
    "outside",
    "outside_events",
    "outside_known",
    "reason",
]


@dataclass(frozen=True)
class _Line:
    """A line of a table: its label and its numbers."""

    label: str
    numbers: dict[str, object]


@dataclass(frozen=True)
class _Lines:
    """A score as a whole, then by class and under each choice that its source leaves open."""

    total: _Line
    parts: list[_Line]
    method: Method | None


def declared_checks(entries: Sequence[str], tables: Catalogue) -> list[DeclaredCheck]:
    """SCORE=DATE,ROLE as declarations of the gate. UsageError: another form, or a score or date that does
    not exist."""
    found = []
    for entry in entries:
        parts = _CHECK.fullmatch(entry)
        if parts is None:
            raise UsageError(
                "USAGE.SCORE-CHECKED",
                "write the score, the date and the role of who checked it",
                todo="--score-checked save=2024-03-01,statistician",
            )
        score = find_score(parts[1], tables)
        found.append(DeclaredCheck(score.key, parts[2], parts[3], score.text_hash))
    return found


def horizon_of(score: Score) -> str:
    """'discharge', 'day_30', 'day_90', 'day_180' or 'day_365', where the store can know the score's own
    outcome; else ''.

    >>> from outcomes.scores.catalogue import find_score
    >>> horizon_of(find_score("save")), horizon_of(find_score("encourage")), horizon_of(find_score("tips65"))
    ('discharge', 'day_180', '')
    """
    if score.event not in ("survival", "death"):
        return ""
    if score.horizon == "hospital discharge":
        return "discharge"
    parts = _HORIZON.fullmatch(score.horizon)
    if parts is None:
        return ""
    number = int(parts[1])
    days = number if parts[2] == "day" else _MONTHS.get(number if parts[2] == "month" else 12 * number, 0)
    return f"day_{days}" if days in DAYS else ""


def events(audit: Audit, score: Score) -> pd.Series:
    """Whether the score's own event happened, by run; NA where it is not known or could not have been
    observed."""
    horizon, runs = horizon_of(score), audit.current.survival.set_index("run_key")
    at_discharge = horizon == "discharge"
    alive = _alive_at_discharge(runs) if at_discharge else _alive_at(runs, int(horizon.removeprefix("day_")))
    return alive if score.event == "survival" else ~alive


def _alive_at_discharge(runs: pd.DataFrame) -> pd.Series:
    """A death on support is a death in hospital, whether or not the discharge was written down."""
    alive = runs["is_alive_at_discharge"].astype("boolean")
    return alive.mask(alive.isna() & (runs["end_kind"] == "death").fillna(False), False)


def _alive_at(runs: pd.DataFrame, day: int) -> pd.Series:
    """Only runs that the source could have followed so far: early deaths of later runs would come without
    their survivors."""
    hours = day * DAY
    died = runs["died"].fillna(False).astype(bool) & (runs["time_high_h"] <= hours).fillna(False).astype(bool)
    lived = (runs["time_low_h"] >= hours).fillna(False).astype(bool) & ~died
    could = runs[f"observable_to_day_{day}"].fillna(False).astype(bool)
    return lived.astype("boolean").mask(~could | ~(died | lived))


def expected_parts(
    audit: Audit, found: Sequence[HasAnswer], checks: Sequence[DeclaredCheck], frame: pd.DataFrame
) -> Part:
    """Two tables an outcome and horizon, for scores that passed the gate (found) and whose outcome the
    store holds.

    A score with no eligible, complete run of known outcome has a line without a ratio.
    """
    groups: dict[tuple[str, str], list[_Lines]] = {}
    for one in found:
        if horizon := horizon_of(one.score):
            groups.setdefault((horizon, one.score.event), []).append(_score_lines(audit, one, checks, frame))
    results: dict[str, Result] = {}
    tables: dict[str, TableOf] = {}
    for (horizon, event), scores in sorted(groups.items()):
        method = next((s.method for s in scores if s.method is not None), Method("observed / expected"))
        key, words = f"{horizon}_{event}", _words(horizon, event)
        whole, parts = [s.total for s in scores], [line for s in scores for line in s.parts]
        for name, lines, caption, columns, note in (
            (f"expected_{key}", whole, f"Observed and expected: {words}", _total_columns(event), _TOTAL_NOTE),
            (
                f"expected_parts_{key}",
                parts,
                f"By class and by choice: {words}",
                _part_columns(event),
                _PART_NOTE,
            ),
        ):
            if lines:
                results[name] = _result(name, lines, method)
                rows = tuple(RowOf(f"r{n}", x.label, {"group": f"{name} {n}"}) for n, x in enumerate(lines))
                tables[name] = TableOf(caption, "Score", name, rows, columns, notes=(note,))
    return results, tables


def _result(name: str, lines: Sequence[_Line], method: Method) -> Result:
    numbered = [{"group": f"{name} {n}", **line.numbers} for n, line in enumerate(lines)]
    return Result(tidy(numbered, _FIELDS), method, {}, _cautions(lines))


def _words(horizon: str, event: str) -> str:
    when = "hospital discharge" if horizon == "discharge" else f"day {horizon.removeprefix('day_')}"
    if event == "survival":
        return f"alive at {when}"
    return "died in hospital" if horizon == "discharge" else f"died by {when}"


_TOTAL_NOTE = (
    "Inside: eligible runs with a complete total whose outcome is known and could have been observed. The range "
    "is over the choices that the score's source leaves open, one at a time; choices under which no run is left "
    "are not in it."
)
_PART_NOTE = "A choice may leave other runs complete, so its runs need not be those of the score's own line."


def _score_lines(
    audit: Audit, one: HasAnswer, checks: Sequence[DeclaredCheck], frame: pd.DataFrame
) -> _Lines:
    happened = events(audit, one.score).reindex(one.answer.index)
    total, method = _ratio(one.answer, happened)
    choices = []
    for label, options in option_sets(one.score)[1:]:
        if usable_for_expectation(one.score, checks, options=options).is_usable:
            other, _ = _ratio(compute(one.score, frame, options=options), happened)
            choices.append(_Line(_choice_label(one.score, label), other))
    ratios = [v for n in (total, *(c.numbers for c in choices)) if isinstance(v := n.get("estimate"), float)]
    if ratios:
        total |= {"lowest": min(ratios), "highest": max(ratios)}
    inside = one.answer["predicted"].notna() & happened.notna()
    known = happened[~inside & happened.notna()].astype(bool)
    total |= {
        "outside": int((~inside).sum()),
        "outside_events": int(known.sum()),
        "outside_known": len(known),
    }
    return _Lines(_Line(one.score.name, total), [*_class_lines(one, happened), *choices], method)


def _ratio(answer: pd.DataFrame, happened: pd.Series) -> tuple[dict[str, object], Method | None]:
    inside = answer["predicted"].notna() & happened.notna()
    expected = float(answer.loc[inside, "predicted"].astype(float).sort_values().sum())
    observed, n = int(happened[inside].astype(bool).sum()), int(inside.sum())
    row: dict[str, object] = {
        "at_risk": n,
        "expected": expected,
        "events": observed,
        "reason": "not_applicable",
    }
    try:
        ratio = standardised_ratio(observed, expected)
    except NotEstimable:
        return row, None
    return row | {c: float(ratio.table.iloc[0][c]) for c in ("estimate", "lower", "upper")}, ratio.method


def _class_lines(one: HasAnswer, happened: pd.Series) -> list[_Line]:
    lines = []
    for level in one.active.classes:
        part = one.answer[(one.answer["class"] == level.key) & one.answer["predicted"].notna()]
        numbers, _ = _ratio(part, happened.reindex(part.index))
        published = None if level.probability is None else 100 * level.probability
        label = class_label(one.score, level.key, level.interval.words())
        lines.append(_Line(label, numbers | {"published": published}))
    return lines


def _choice_label(score: Score, label: str) -> str:
    """A choice in the words of the table: which question, which answer."""
    key, _, option = label.partition("=")
    choice = next(c for c in score.conventions if c.key == key)
    return f"{score.name}. {choice.question} Here: {choice.options[option]}"


def _cautions(lines: Sequence[_Line]) -> tuple[Caution, ...]:
    notes = [Caution("MULT", "Intervals of several scores and classes are shown; none is adjusted for that.")]
    for line in lines:
        n, seen = (int(str(line.numbers[c])) for c in ("at_risk", "events"))
        if "outside" in line.numbers and min(seen, n - seen) < CERTAIN:
            few = f"{line.label}: fewer than {CERTAIN} runs with or without the event"
            notes.append(Caution("EV-CAL", f"{few}, so agreement with the score is very uncertain."))
    return tuple(notes)


_COMMON = (
    ColumnOf("observed", "Observed", "count", ("events",)),
    ColumnOf("expected", "Expected", "number_1", ("expected",)),
    ColumnOf("ratio", "Observed / expected", "ratio", ("estimate",)),
    ColumnOf("ratio_ci", "", "ratio_interval", ("estimate", "lower", "upper")),
)


def _total_columns(event: str) -> tuple[ColumnOf, ...]:
    what = "Survivors" if event == "survival" else "Deaths"
    outside, ends = ("outside_events", "outside_known"), ("estimate", "lowest", "highest")
    return (
        ColumnOf("runs", "Runs inside", "count", ("at_risk",)),
        *_COMMON,
        ColumnOf("range", "Observed / expected, range over open choices", "ratio_interval", ends),
        ColumnOf("outside", "Runs outside", "count", ("outside",)),
        ColumnOf("outside_events", f"{what} outside, of those known", "x_of_n", outside),
    )


def _part_columns(event: str) -> tuple[ColumnOf, ...]:
    what = "survivors" if event == "survival" else "deaths"
    return (
        ColumnOf("runs", "Runs inside", "count", ("at_risk",)),
        ColumnOf("published", f"Published {what} per 100", "number_1", ("published",)),
        *_COMMON,
    )
