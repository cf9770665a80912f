"""The choices a source leaves open, so that a result can be printed under each."""

from __future__ import annotations

import pandas as pd

from outcomes.scores.catalogue import Catalogue, find_score
from outcomes.scores.consistency import defaults
from outcomes.scores.model import Score

COLUMNS = ("convention", "question", "option", "meaning", "is_default", "why")


def open_conventions(score: str | Score, tables: Catalogue | None = None) -> pd.DataFrame:
    """One row an option of every convention of the score that has an alternative.

    Columns convention, question, option, meaning, is_default, why.

    >>> frame = open_conventions("save")
    >>> list(frame.loc[frame["convention"] == "total_five", "option"])
    ['class_ii', 'class_i']
    """
    rows = [
        (c.key, c.question, option, meaning, option == c.default, c.why)
        for c in find_score(score, tables).conventions
        if len(c.options) > 1
        for option, meaning in c.options.items()
    ]
    return pd.DataFrame(rows, columns=list(COLUMNS))


def option_sets(score: str | Score, tables: Catalogue | None = None) -> list[tuple[str, dict[str, str]]]:
    """(label, options) for `compute`: the defaults first, then each alternative alone.

    >>> [label for label, _ in option_sets("be_alive")]
    ['defaults', 'arrest_points=one']
    """
    found = find_score(score, tables)
    base = defaults(found)
    out = [("defaults", dict(base))]
    for convention in found.conventions:
        for option in convention.options:
            if option != convention.default:
                out.append((f"{convention.key}={option}", {**base, convention.key: option}))
    return out
