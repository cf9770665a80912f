"""Made-up runs for the properties of estimators: few distinct times, so ties of every kind are common."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from hypothesis import settings
from hypothesis import strategies as st

FEW = settings(derandomize=True, max_examples=30, deadline=None)


@dataclass(frozen=True)
class Runs:
    time: np.ndarray
    cause: np.ndarray
    entry: np.ndarray
    weight: np.ndarray

    @property
    def event(self) -> np.ndarray:
        return (self.cause > 0).astype(int)

    def __len__(self) -> int:
        return len(self.time)

    def without_events_at_zero(self) -> np.ndarray:
        return np.where((self.time == 0) & (self.cause > 0), 1.0, self.time)

    def taken(self, order: Any) -> Runs:
        return Runs(self.time[order], self.cause[order], self.entry[order], self.weight[order])


@st.composite
def runs(draw: st.DrawFn, *, least: int = 1, late: bool = True, causes: int = 2) -> Runs:
    """1 to 25 runs with times 0 … 8, cause 0 (censored) … causes, entry before the time, weight 0 to 3."""
    n = draw(st.integers(least, 25))
    time = np.array(draw(st.lists(st.integers(0, 8), min_size=n, max_size=n)), dtype=float)
    cause = np.array(draw(st.lists(st.integers(0, causes), min_size=n, max_size=n)))
    share = np.array(draw(st.lists(st.sampled_from([0.0, 0.0, 0.25, 0.5]), min_size=n, max_size=n)))
    weight = np.array(draw(st.lists(st.integers(0, 3), min_size=n, max_size=n)), dtype=float)
    weight[0] = max(weight[0], 1.0)
    return Runs(time, cause, np.floor(share * time) if late else np.zeros(n), weight)


def same(left: pd.DataFrame, right: pd.DataFrame, but: tuple[str, ...] = ()) -> None:
    """Equal tables, numbers within 1e-10."""
    pd.testing.assert_frame_equal(
        left.drop(columns=list(but)), right.drop(columns=list(but)), rtol=1e-10, atol=1e-10
    )


def floats(column: pd.Series) -> np.ndarray:
    return np.asarray(column.to_numpy(dtype=float, na_value=np.nan))


def has_no_nan(table: pd.DataFrame) -> None:
    """Missing numbers are pandas NA with a code beside them; nothing is NaN or infinite."""
    for name in table.columns:
        if table[name].dtype == "Float64":
            known = table[name].dropna().to_numpy(dtype=float)
            assert np.isfinite(known).all(), name
    coded = table["reason"].notna()
    assert (table["estimate"].notna() | coded).all()
    if "upper" in table.columns:
        assert (table["upper"].notna() | coded).all()
        assert (table["lower"].notna() | coded).all()
