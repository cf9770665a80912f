"""What every result is: a tidy table, the method that made it, its denominators and its cautions."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pandas as pd

# Columns in this order; a result holds those that apply, and always the same ones for one function.
COLUMNS = (
    "group",
    "cause",
    "state",
    "time",
    "estimate",
    "std_error",
    "lower",
    "upper",
    "at_risk",
    "events",
    "censored",
    "exposure",
    "reason",
)


@dataclass(frozen=True)
class Method:
    """How a number was made, in words that let a reader repeat it."""

    estimator: str
    variance: str = ""
    interval: str = ""
    level: float = 0.95
    ties: str = ""
    time_unit: str = ""
    citations: tuple[str, ...] = ()


@dataclass(frozen=True)
class Caution:
    """A caution that goes with a number. `code` is one of terms.CAUTIONS (FU, OPEN, EV-LOW …)."""

    code: str
    text: str


@dataclass(frozen=True)
class Result:
    """table: one row per group × time (× cause or state); missing numbers are pandas NA with a code in
    `reason`, never NaN in an object meant for print. counts: named denominators. notes: cautions."""

    table: pd.DataFrame
    method: Method
    counts: Mapping[str, int] = field(default_factory=dict)
    notes: tuple[Caution, ...] = ()


TEXT = ("group", "cause", "state", "reason")


def tidy(
    rows: Sequence[Mapping[str, object]], columns: Sequence[str], words: Sequence[str] = ()
) -> pd.DataFrame:
    """A frame with exactly these columns and nullable types, whether or not there are rows.

    Text columns (group, cause, state, reason and those of `words`) become string, every other one Float64;
    None and NaN become NA.
    """
    return tidy_columns({name: [row.get(name) for row in rows] for name in columns}, columns, words)


def tidy_columns(
    values: Mapping[str, object], columns: Sequence[str], words: Sequence[str] = ()
) -> pd.DataFrame:
    """The same from whole columns. A single value stands in every row; a column not given is missing."""
    found = {name: np.asarray(v) if isinstance(v, pd.Series) else v for name, v in values.items()}
    found = {name: found.get(name) for name in columns}
    sizes = [len(v) for v in found.values() if isinstance(v, list | np.ndarray)]
    size = sizes[0] if sizes else 0
    return pd.DataFrame(
        {name: _column(v, size, name in TEXT or name in words) for name, v in found.items()},
        columns=list(columns),
    )


def joined(parts: Sequence[pd.DataFrame], columns: Sequence[str], words: Sequence[str] = ()) -> pd.DataFrame:
    """Frames of one shape below each other; an empty frame of that shape if there are none."""
    return pd.concat(parts, ignore_index=True) if parts else tidy([], columns, words)


def _column(value: Any, size: int, is_text: bool) -> Any:
    if not isinstance(value, list | np.ndarray):
        value = [value] * size
    if is_text:
        known = [pd.NA if v is None or v is pd.NA or v != v else str(v) for v in value]
        return pd.array(known, dtype="string")
    if isinstance(value, list):
        value = [np.nan if v is None or v is pd.NA else v for v in value]
    numbers = np.array(value, dtype=np.float64)
    return pd.arrays.FloatingArray(numbers, np.isnan(numbers))
