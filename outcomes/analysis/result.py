"""What every result is: a tidy table, the method that made it, its denominators and its cautions."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

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
    NaN becomes NA.
    """
    frame = pd.DataFrame.from_records(list(rows), columns=list(columns))
    return _typed(frame, words)


def tidy_columns(
    values: Mapping[str, object], columns: Sequence[str], words: Sequence[str] = ()
) -> pd.DataFrame:
    """The same from whole columns; a column that is not given is missing throughout."""
    return _typed(pd.DataFrame(dict(values)).reindex(columns=list(columns)), words)


def joined(parts: Sequence[pd.DataFrame], columns: Sequence[str], words: Sequence[str] = ()) -> pd.DataFrame:
    """Frames of one shape below each other; an empty frame of that shape if there are none."""
    return pd.concat(parts, ignore_index=True) if parts else tidy([], columns, words)


def _typed(frame: pd.DataFrame, words: Sequence[str]) -> pd.DataFrame:
    for name in frame.columns:
        is_text = name in TEXT or name in words
        frame[name] = frame[name].astype("string" if is_text else "Float64")
    return frame
