"""What a figure is made from: finished results and words. Nothing is estimated while drawing."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import pandas as pd

from outcomes.analysis.result import Result
from outcomes.tables.table import Table, plain_words


@dataclass(frozen=True)
class Drawing:
    """key: unique in a report. title: what it is; description: one sentence that says what it shows.

    results: the finished results, by the part they play in this kind of figure. table: the table that stands
    with the figure. labels: group, cause or row key → words, in drawing order. words: of axes and such.
    """

    key: str
    title: str
    description: str
    table: Table
    results: Mapping[str, Result] = field(default_factory=dict)
    labels: Mapping[str, str] = field(default_factory=dict)
    words: Mapping[str, str] = field(default_factory=dict)
    options: Mapping[str, float] = field(default_factory=dict)

    def frame(self, part: str) -> pd.DataFrame:
        return self.results[part].table

    def label(self, key: str) -> str:
        return plain_words(self.labels[key])

    def word(self, key: str, otherwise: str = "") -> str:
        return plain_words(self.words.get(key, otherwise))


def series(frame: pd.DataFrame, column: str, key: str) -> pd.DataFrame:
    """The rows of one group or cause in order of time, as plain float columns (NaN where nothing stands)."""
    chosen = frame[frame[column].fillna("") == key] if column in frame else frame
    numbers = {
        name: chosen[name].astype("Float64").to_numpy(dtype=float, na_value=float("nan"))
        for name in ("time", "estimate", "lower", "upper", "at_risk", "events", "censored")
        if name in chosen
    }
    return pd.DataFrame(numbers).sort_values("time", kind="stable", ignore_index=True)
