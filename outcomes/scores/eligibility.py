"""Whether a run belongs to the population a score was made for: yes, no (with rule), unknown (with field)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from outcomes.scores.columns import Column
from outcomes.scores.logic import any_of
from outcomes.scores.model import Rule, Score

YES, NO, UNKNOWN = "yes", "no", "unknown"
LEVELS = (YES, NO, UNKNOWN)


@dataclass(frozen=True)
class Verdict:
    """code: place in LEVELS per row. pattern: 0 for yes, else the reason as a number `reason` can read."""

    code: npt.NDArray[np.int8]
    pattern: npt.NDArray[np.int64]


def judge(score: Score, columns: Mapping[str, Column], n: int) -> Verdict:
    """The first rule that surely fails makes 'no'; else a rule that cannot be judged makes 'unknown'."""
    failed = np.zeros(n, dtype=np.int64)
    doubt = np.zeros(n, dtype=np.int64)
    for place, rule in enumerate(score.population):
        sure, possible = any_of(rule.any_of, columns)
        failed[(failed == 0) & ~possible] = place + 1
        if not rule.unknown_is_met:
            doubt[possible & ~sure] += 1 << place
    code = np.where(failed > 0, LEVELS.index(NO), np.where(doubt > 0, LEVELS.index(UNKNOWN), 0)).astype(
        np.int8
    )
    return Verdict(code, np.where(failed > 0, -failed, doubt))


def reason(score: Score, pattern: int) -> str:
    """Words for a pattern of `judge`: the rule that fails, or the fields that would be needed."""
    if pattern == 0:
        return ""
    if pattern < 0:
        return f"outside the population: {score.population[-pattern - 1].text} does not hold"
    rules = [rule for place, rule in enumerate(score.population) if pattern >> place & 1]
    names = dict.fromkeys(name for rule in rules for name in _fields(score, rule))
    return f"cannot be judged: {', '.join(names)} unknown"


def _fields(score: Score, rule: Rule) -> list[str]:
    by_key = {entry.key: entry.field.name for entry in score.inputs}
    return [by_key[test.input] for test in rule.any_of]
