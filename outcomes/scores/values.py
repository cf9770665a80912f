"""Values of one column as arrays: kinds are checked, words are never guessed, impossible values refused."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pandas as pd

from outcomes.errors import InputRefused
from outcomes.scores.fields import Field

Floats = npt.NDArray[np.float64]
Codes = npt.NDArray[np.int8]
Mask = npt.NDArray[np.bool_]


def floats(series: pd.Series, name: str) -> Floats:
    """Numbers as float64, NaN where unknown; truth values and texts are refused."""
    kind = series.dtype
    if pd.api.types.is_bool_dtype(kind) or not pd.api.types.is_numeric_dtype(kind):
        seen = pd.api.types.infer_dtype(series, skipna=True)
        if seen not in ("empty", "integer", "floating", "mixed-integer-float", "decimal"):
            raise InputRefused(
                "score_value_kind", f"the column {name} must hold numbers, it holds {seen} values"
            )
        series = pd.to_numeric(series)
    return np.asarray(series.to_numpy(dtype=np.float64, na_value=np.nan), dtype=np.float64)


def truth(series: pd.Series, name: str) -> Codes:
    """0 is True and 1 False (places in `words`), −1 unknown; words such as 'yes' are refused, not guessed."""
    kind = series.dtype
    if pd.api.types.is_bool_dtype(kind) or pd.api.types.is_numeric_dtype(kind):
        values = series.to_numpy(dtype=np.float64, na_value=np.nan)
    else:
        seen = pd.api.types.infer_dtype(series, skipna=True)
        if seen not in ("empty", "boolean", "integer", "floating"):
            raise InputRefused("score_value_kind", f"the column {name} must hold true/false, it holds {seen}")
        values = series.astype("Float64").to_numpy(dtype=np.float64, na_value=np.nan)
    no = values == 0.0
    unknown = np.isnan(values)
    if not bool((no | unknown | (values == 1.0)).all()):
        raise InputRefused("score_value_kind", f"the column {name} must hold true/false or 1/0 only")
    code: Codes = no.astype(np.int8)
    code[unknown] = -1
    return code


def choice(series: pd.Series, field: Field, name: str) -> Codes:
    """Place of each word in the field's list; 'unknown', 'other' and missing are −1, another word is refused.

    'other' is a recorded answer that no table gives points to, so the item stays open, as if unknown.
    """
    codes, uniques = pd.factorize(series.astype(object) if series.dtype != "category" else series)
    place = {word: n for n, word in enumerate(field.choices)} | {"unknown": -1, "other": -1}
    table = np.full(len(uniques) + 1, -1, dtype=np.int8)
    for n, word in enumerate(uniques):
        if word not in place:
            raise InputRefused(
                "score_value_kind", f"the column {name} may hold only: {', '.join(field.choices)}, unknown"
            )
        table[n] = place[word]
    out: Codes = table[codes]
    return out


def check_limits(values: Floats, field: Field, name: str) -> None:
    """InputRefused if a value lies outside the hard limits, or is no whole number where it must be."""
    assert field.low is not None and field.high is not None
    slack = 1e-9 * max(abs(field.low), abs(field.high))
    lowest, highest = (np.fmin.reduce(values), np.fmax.reduce(values)) if len(values) else (np.nan, np.nan)
    if lowest < field.low - slack or highest > field.high + slack:
        outside = (values < field.low - slack) | (values > field.high + slack)
        raise InputRefused(
            "score_hard_limit",
            f"the column {name} has {int(outside.sum())} value(s) outside {field.low:g} to {field.high:g} "
            f"{field.unit}: an impossible value or a wrong unit",
        )
    if field.kind == "whole" and bool((values[~np.isnan(values)] % 1.0 != 0.0).any()):
        raise InputRefused("score_value_kind", f"the column {name} must hold whole numbers")
