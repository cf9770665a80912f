"""Which inputs the published scores lack most, and which values come from another time than the score asks
for."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Protocol

import pandas as pd

from outcomes.analysis.result import Result
from outcomes.scores.model import Score
from outcomes.study.answer import ColumnOf, RowOf, TableOf
from outcomes.study.shape import counted

Part = tuple[dict[str, Result], dict[str, TableOf]]

WINDOW_WORDS = {
    "admission": "at admission",
    "hospital_arrival": "at arrival",
    "pre_worst_6h": "worst of the 6 h before support",
    "pre_worst_24h": "worst of the 24 h before support",
    "pre_last": "last before support",
    "before_sedation": "before sedation",
    "at_cannulation": "at cannulation",
    "after_pci": "after the intervention",
    "icu_first_24h": "worst of the first 24 h in intensive care",
}
_UNITS = re.compile(
    r"_(?:ug_kg_min|u_kg_min|ml_min_1_73m2|kg_m2|umol_l|mmol_l|u_l|10_9_l|percent|mmhg|cmh2o|ml_day|years|hours|min|kg|cm)$"
)
_LEAD = re.compile(r"^(?:is|has|had|was)_")
_WITHIN = " (known only within limits)"
_OPEN = re.compile(r"cannot be judged: (.*) unknown")
SHOWN = 15

# Abbreviated names of fields and of measured quantities, spelt out.
_SPELT = {
    "sbp": "systolic pressure",
    "dbp": "diastolic pressure",
    "map": "mean arterial pressure",
    "lvef": "LV ejection fraction",
    "egfr": "estimated filtration rate",
    "gcs total": "Glasgow coma score",
    "pao2 fio2": "PaO2/FiO2",
    "ph": "pH",
    "ph arterial": "pH",
    "alt": "ALT",
    "ast": "AST",
    "bmi": "body mass index",
    "spo2": "oxygen saturation",
    "urine": "urine output",
    "urine day": "urine output",
    "pci": "coronary intervention",
    "timi flow after pci": "coronary flow",
    "lv function": "LV function",
    "prior mi or cabg": "prior infarction or bypass surgery",
    "extracorporeal cpr": "start during resuscitation",
    "refractory vt vf": "refractory ventricular arrhythmia",
    "bilirubin total": "bilirubin",
    "nth run": "number of the run",
}


class HasAnswer(Protocol):
    """A score with its answers, as the section computes them."""

    @property
    def score(self) -> Score: ...
    @property
    def active(self) -> Score: ...
    @property
    def answer(self) -> pd.DataFrame: ...
    @property
    def asked(self) -> pd.DataFrame: ...


def words_of(name: str) -> str:
    """A field name as words, without its unit.

    >>> words_of("lactate_mmol_l"), words_of("has_liver_failure"), words_of("pao2_fio2_mmhg")
    ('lactate', 'liver failure', 'PaO2/FiO2')
    """
    words = _LEAD.sub("", _UNITS.sub("", name)).replace("_", " ")
    return _SPELT.get(words, words)


def input_label(score: Score, name: str) -> str:
    """A missing input of an answer as words, with the time at which the score wants it."""
    bare = name.removesuffix(_WITHIN)
    window = next((x.window for x in score.inputs if x.field.name == bare), "run")
    words = words_of(bare) + (f", {WINDOW_WORDS[window]}" if window in WINDOW_WORDS else "")
    return words + (", known only within limits" if name.endswith(_WITHIN) else "")


@dataclass
class _Lack:
    """One input: runs that a score asks for it, runs in which it leaves a total or the eligibility open."""

    asked: set[str] = field(default_factory=set)
    total: set[str] = field(default_factory=set)
    rule: set[str] = field(default_factory=set)
    alone: int = 0
    scores: set[str] = field(default_factory=set)


def lacking_part(found: Sequence[HasAnswer]) -> Part:
    """One row an input: in how many runs it leaves a total or the eligibility open, and how often it alone
    does so."""
    lacks: dict[str, _Lack] = defaultdict(_Lack)
    for one in found:
        _add(lacks, one)
    rows: list[dict[str, object]] = [
        {
            "group": label,
            "events": len(x.total),
            "rule": len(x.rule),
            "at_risk": len(x.asked),
            "alone": x.alone,
            "scores": ", ".join(sorted(x.scores)),
        }
        for label, x in sorted(lacks.items(), key=lambda pair: (*_rank(pair[1]), pair[0]))
        if x.total or x.rule
    ]
    return _lacking_layout(rows) if rows else ({}, {})


def _rank(lack: _Lack) -> tuple[int, int]:
    return -max(len(lack.total), len(lack.rule)), -lack.alone


def _add(lacks: dict[str, _Lack], one: HasAnswer) -> None:
    runs = {str(run) for run in one.asked.index}
    for entry in one.active.inputs:
        for name in (entry.field.name, entry.field.name + _WITHIN):
            lack = lacks[input_label(one.active, name)]
            lack.asked |= runs
            lack.scores.add(one.score.name)
    for run, text in one.asked["missing"].astype("string").items():
        labels = [input_label(one.active, name) for name in str(text).split("; ") if name]
        for label in labels:
            lacks[label].total.add(str(run))
        if len(labels) == 1:
            lacks[labels[0]].alone += 1
    for run, text in one.asked["eligibility_reason"].astype("string").items():
        match = _OPEN.match(str(text))
        for name in match[1].split(", ") if match else ():
            lacks[input_label(one.active, name)].rule.add(str(run))


def _lacking_layout(rows: list[dict[str, object]]) -> Part:
    columns = (
        ColumnOf(
            "runs", "Leaves a total open, of runs eligible or not judged", "x_of_n", ("events", "at_risk")
        ),
        ColumnOf("alone", "Totals that it alone keeps open", "count", ("alone",)),
        ColumnOf("rule", "Runs in which eligibility cannot be judged for it", "count", ("rule",)),
        ColumnOf("scores", "Scores that ask for it", "word", ("scores",)),
    )
    more = len(rows) - SHOWN
    notes = (
        (f"The {SHOWN} inputs missing in most runs; {more} more are missing somewhere.",) if more > 0 else ()
    )
    shown = tuple(
        RowOf(f"i{n}", str(r["group"]), {"group": str(r["group"])}) for n, r in enumerate(rows[:SHOWN])
    )
    result = counted(rows, ["group", "events", "rule", "at_risk", "alone", "scores"], words=("scores",))
    caption = "What to record next year: inputs missing most"
    return {"lacking": result}, {"score_lacking": TableOf(caption, "Input", "lacking", shown, columns, notes)}


def windows_part(other: pd.DataFrame, inputs: pd.DataFrame) -> Part:
    """Values of another time than a score asks for. other: (run, quantity, window asked for, fit), fit
    undated or other."""
    if other.empty:
        return {}, {}
    rows: list[dict[str, object]] = []
    for (asked, quantity), part in other.groupby(["asked", "quantity"], sort=True):
        label = f"{words_of(str(quantity))}, {WINDOW_WORDS[str(asked)]}"
        fit = part["fit"].value_counts()
        rows.append(
            {"group": label, "runs": len(inputs), **{k: int(fit.get(k, 0)) for k in ("undated", "other")}}
        )
    columns = (
        ColumnOf(
            "undated",
            "Runs with a value before support whose time is not recorded",
            "x_of_n",
            ("undated", "runs"),
        ),
        ColumnOf("other", "Runs with a value of another time before support", "count", ("other",)),
    )
    shown = tuple(RowOf(f"w{n}", str(r["group"]), {"group": str(r["group"])}) for n, r in enumerate(rows))
    caption = "Values that come from another time than the score asks for"
    table = TableOf(caption, "Input and the time asked for", "windows", shown, columns)
    return {"windows": counted(rows, ["group", "undated", "other", "runs"])}, {"score_windows": table}
