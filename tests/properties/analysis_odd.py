"""Odd situations every estimator must answer, the closed list of its answers, and what a sound table is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis.result import Result

CODES = {
    "no_runs", "one_run", "no_events", "no_nonevents", "too_few_events", "one_group", "empty_group",
    "not_reached", "beyond_follow_up", "empty_risk_set", "zero_exposure", "zero_expected",
    "constant_predictor", "constant_outcome", "collinear", "separation", "not_converged", "no_overlap",
    "too_few_points", "zero_gap", "invalid_probability", "grouping_from_the_future", "below_sample_size",
    "too_few_persons", "search_not_repeated", "unobserved_by_selection", "withheld",
}  # fmt: skip


@dataclass(frozen=True)
class Made:
    """Runs; cause 0, 1 or 2; group a or b, of which b may be empty."""

    time: Any
    cause: Any
    entry: Any
    group: Any

    @property
    def event(self) -> Any:
        return (self.cause > 0).astype(int)


def made(time: Any, cause: Any, entry: Any = 0, group: Any = None) -> Made:
    t = np.atleast_1d(np.asarray(time, dtype=float))
    labels = np.resize(["a", "b"], len(t)) if group is None else np.resize(group, len(t))
    start = np.broadcast_to(np.asarray(entry, dtype=float), t.shape)
    return Made(t, np.resize(cause, len(t)).astype(int), start, pd.Categorical(labels, categories=["a", "b"]))


SIX = [1, 2, 2, 3, 4, 5]
SITUATIONS = {
    "no rows": made([], [0]),
    "one row, an event": made([3], [1]),
    "one row, censored": made([3], [0]),
    "one row, an event at 0": made([0], [1]),
    "one row, censored at 0": made([0], [0]),
    "two rows": made([1, 2], [1, 0]),
    "two rows, both events": made([1, 1], [1, 2]),
    "two rows of one group": made([1, 2], [1, 0], group=["a"]),
    "nobody has an event": made(SIX, [0]),
    "everybody has the event": made(SIX, [1]),
    "everybody has the other event": made(SIX, [2]),
    "all at one time": made([4] * 6, [1, 2, 1]),
    "all at one time, some censored": made([4] * 6, [1, 0, 2]),
    "all censored at one time": made([4] * 6, [0]),
    "one group empty": made(SIX, [1, 2, 0], group=["a"]),
    "events only in one group": made(SIX, [1, 0], group=["a", "b"]),
    "all at 0": made([0] * 6, [1, 2, 0]),
    "some at 0": made([0, 0, 0, 1, 2, 3], [1, 2, 0]),
    "a billion hours": made(np.array(SIX) * 1e9, [1, 2, 0]),
    "a billionth": made(np.array(SIX) * 1e-9, [1, 2, 0]),
    "seconds beside years": made([1e-6, 1, 1e9, 1e9, 1e9], [1, 2, 0]),
    "late entry": made(SIX, [1, 2, 0], entry=[0, 1, 0, 2, 3, 0]),
    "all enter late": made(SIX, [1, 2, 0], entry=np.array(SIX) - 0.5),
    "nobody is watched for a while, after an event": made([1, 2, 6, 7], [1, 1, 1, 0], entry=[0, 0, 4, 4]),
    "nobody is watched for a while, after censoring": made([1, 2, 6, 7], [1, 0, 1, 0], entry=[0, 0, 4, 4]),
    "groups that never meet": made([1, 2, 6, 7], [1, 1, 1, 1], [0, 0, 4, 4], ["a", "a", "b", "b"]),
}


def sound(result: Result) -> None:
    """No NaN and no infinity; whatever is missing has a code of the closed list; bounds hold the estimate."""
    table = result.table
    assert len(table)
    assert set(table["reason"].dropna()) <= CODES
    for name in table.columns:
        if table[name].dtype == "Float64":
            assert np.isfinite(table[name].dropna().to_numpy(dtype=float)).all(), name
        else:
            assert table[name].dtype == "string", name
    for name in ("estimate", "lower", "upper"):
        if name in table.columns:
            assert (table[name].notna() | table["reason"].notna()).all(), name
    if "lower" in table.columns:
        known = table[["estimate", "lower", "upper"]].dropna().to_numpy(dtype=float)
        assert (known[:, 1] <= known[:, 0] * (1 + 1e-12) + 1e-12).all()
        assert (known[:, 0] <= known[:, 2] * (1 + 1e-12) + 1e-12).all()
