"""Checks of input that every estimator shares. Input that no method accepts is refused; nothing is repaired.

Every message names the argument and the rule, never a value of the data.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from outcomes.errors import InputRefused, NotEstimable

Floats = npt.NDArray[np.float64]
Codes = npt.NDArray[np.int64]
Members = list[tuple[str, npt.NDArray[np.bool_]]]


def floats(values: Any, name: str) -> Floats:
    """A one-dimensional float array without NaN or infinity; text is refused even if it spells a number."""
    array = floats_or_missing(values, name)
    if array.ndim != 1:
        raise InputRefused("shape", f"{name} must be one-dimensional")
    if not np.isfinite(array).all():
        raise InputRefused("not_finite", f"{name} has a missing or infinite value")
    return array


def floats_or_missing(values: Any, name: str) -> Floats:
    """A float array of any shape in which None and NA became NaN; text is refused."""
    if isinstance(values, pd.Series) and pd.api.types.is_extension_array_dtype(values.dtype):
        values = values.to_numpy(dtype=object, na_value=None)
    try:
        raw = np.asarray(values)
    except (TypeError, ValueError):
        raise InputRefused("shape", f"{name} must be one-dimensional") from None
    if raw.dtype.kind == "O":
        flat = raw.ravel()
        if any(isinstance(v, str | bytes | complex) for v in flat):
            raise InputRefused("not_numeric", f"{name} must be numbers")
        known = [np.nan if v is None or v is pd.NA else v for v in flat]
        raw = np.array(known, dtype=object).reshape(raw.shape)
    elif raw.dtype.kind not in "biuf":
        raise InputRefused("not_numeric", f"{name} must be numbers")
    try:
        return raw.astype(np.float64)
    except (TypeError, ValueError, OverflowError):
        raise InputRefused("not_numeric", f"{name} must be numbers") from None


def same_length(n: int, array: npt.NDArray[Any], name: str, of: str = "the times") -> Any:
    """The array itself; refused unless it has n values."""
    if len(array) != n:
        raise InputRefused("length", f"{name} has another length than {of}")
    return array


def times(values: Any, name: str = "time") -> Floats:
    """Finite and not negative."""
    array = floats(values, name)
    if (array < 0).any():
        raise InputRefused("negative_time", f"{name} has a negative value")
    return array


def entries(values: Any, time: Floats) -> Floats:
    """Entry times; zero or negative means seen from time zero and becomes minus infinity.

    None means that everyone was. An entry above 0 that is not before the end of observation is refused.
    """
    if values is None:
        return np.full(len(time), -np.inf)
    array: Floats = same_length(len(time), floats(values, "entry"), "entry")
    if ((array > 0) & (array >= time)).any():
        raise InputRefused("entry_after_exit", "entry is not before the end of observation")
    return np.where(array > 0, array, -np.inf)


def frequency_weights(values: Any, n: int) -> Floats:
    """Weights are counts: whole and not negative. None means one each."""
    if values is None:
        return np.ones(n)
    return counts(same_length(n, floats(values, "weights"), "weights"), "weights")


def counts(values: Any, name: str) -> Floats:
    """An array of whole numbers, not negative."""
    array = floats(values, name)
    if (array < 0).any() or (array != np.floor(array)).any():
        code = "weights" if name == "weights" else "count"
        raise InputRefused(code, f"{name} are whole numbers, not negative")
    return array


def binary(values: Any, n: int | None = None, name: str = "event") -> npt.NDArray[np.bool_]:
    """0 or 1 (or bool) as bool."""
    array = floats(values, name)
    if n is not None:
        same_length(n, array, name)
    if not np.isin(array, (0.0, 1.0)).all():
        raise InputRefused("event_code", f"{name} must be 0 or 1")
    return array.astype(bool)


def predictions(values: Any, n: int | None = None, name: str = "prediction") -> Floats:
    """Predicted probabilities, within [0, 1]."""
    array = floats(values, name)
    if n is not None:
        same_length(n, array, name, "the outcomes")
    if ((array < 0) | (array > 1)).any():
        raise InputRefused("prediction", f"{name} must lie in 0 to 1")
    return array


def number(value: Any, name: str, *, above: float = -math.inf, least: float = -math.inf) -> float:
    """One finite number > above and >= least."""
    array = floats_or_missing(value, name)
    if array.ndim != 0:
        raise InputRefused("shape", f"{name} must be one number")
    found = float(array)
    if not math.isfinite(found) or found <= above or found < least:
        raise InputRefused(name, f"{name} is missing, infinite or out of range")
    return found


def probability(value: Any, name: str = "level") -> float:
    """One number strictly between 0 and 1."""
    found = number(value, name)
    if not 0 < found < 1:
        raise InputRefused(name, f"{name} must lie between 0 and 1")
    return found


def whole_count(value: Any, name: str) -> int:
    """One whole number, not negative."""
    array = floats_or_missing(value, name)
    if array.ndim != 0 or not np.isfinite(array) or array < 0 or array != np.floor(array):
        raise InputRefused("count", f"{name} must be one whole number, not negative")
    return int(array)


def one_of(value: Any, name: str, choices: Sequence[str]) -> str:
    """One of the words of a closed list."""
    if not isinstance(value, str) or value not in choices:
        raise InputRefused(name, f"{name} must be one of " + ", ".join(choices))
    return value


def labels(values: Any, n: int | None = None, name: str = "group") -> npt.NDArray[np.object_]:
    """Labels as text, one a row; none may be missing. A whole number loses its '.0'."""
    array = np.asarray(values.to_numpy() if isinstance(values, pd.Series) else values, dtype=object)
    if array.ndim != 1:
        raise InputRefused("shape", f"{name} must be one-dimensional")
    if n is not None:
        same_length(n, array, name)
    if pd.isna(array).any():
        raise InputRefused("not_finite", f"{name} has a missing value")
    return np.array([word(v) for v in array], dtype=object)


def word(value: Any) -> str:
    """A label as text.

    >>> word(2.0), word(True), word("b")
    ('2', '1', 'b')
    """
    if isinstance(value, str):
        return value
    if isinstance(value, int | float | np.number | np.bool_):
        return f"{float(value):.15g}"
    return str(value)


def in_order(found: set[str]) -> list[str]:
    """Labels sorted as numbers if all are numbers, else as text.

    >>> in_order({"10", "2"}), in_order({"b", "10", "a"})
    (['2', '10'], ['10', 'a', 'b'])
    """
    try:
        numbers = {v: float(v) for v in found}
    except ValueError:
        return sorted(found)
    return (
        sorted(found, key=lambda v: (numbers[v], v))
        if np.isfinite([*numbers.values()]).all()
        else sorted(found)
    )


FUTURE = (
    "the groups were known only after the clock had started, so their members had to live until then; "
    "use the pathway intended at time zero, or a landmark, or an exposure that changes with time "
    "(Mantel-Byar, Simon-Makuch, a time-dependent Cox model), or start the clock at the ending"
)


def groups(values: Any, n: int, known_at: Any = None) -> Members:
    """(label, members) of every group in order of label; one group '' if there is no grouping.

    A pandas Categorical declares its levels and their order: a level without rows keeps its place. known_at:
    when the group was known (one number or one a row; missing means never). NotEstimable
    grouping_from_the_future if any of them lies after time zero.
    """
    if known_at is not None and not _known_at_start(known_at):
        raise NotEstimable("grouping_from_the_future", FUTURE)
    if values is None:
        return [("", np.ones(n, dtype=bool))]
    words = labels(values, n)
    dtype = getattr(values, "dtype", None)
    if isinstance(dtype, pd.CategoricalDtype):
        order = [word(v) for v in dtype.categories]
    else:
        order = in_order({str(v) for v in words})
    return [(g, np.asarray(words == g, dtype=bool)) for g in order]


def _known_at_start(known_at: Any) -> bool:
    return bool((floats_or_missing(np.atleast_1d(np.asarray(known_at, dtype=object)), "known_at") <= 0).all())


def cluster_codes(values: Any, n: int) -> Codes | None:
    """0 … persons−1 for every row, in order of label; None without a cluster."""
    return None if values is None else numbered(values, n, "cluster")


def numbered(values: Any, n: int, name: str) -> Codes:
    """0, 1, … for every row, in order of its label as text."""
    _, codes = np.unique(labels(values, n, name).astype(str), return_inverse=True)
    return np.asarray(codes, dtype=np.int64)


def asked_times(values: Sequence[float] | None) -> Floats:
    """The asked times, sorted, each once."""
    return np.array([]) if values is None else np.unique(times(values, "times"))


def need_rows(n: float) -> None:
    """NotEstimable no_runs if nothing is left."""
    if n <= 0:
        raise NotEstimable("no_runs", "nothing is left to estimate from")


def causes_of(values: Any, n: int, declared: Sequence[Any] | None) -> tuple[list[str], Codes]:
    """Labels of the causes in their order and the code 0 (censored), 1 … k of every row.

    Censored is 0 or an empty text. Without a declared order the causes that occur are sorted. A cause that
    occurs and is not declared is refused: dropping it silently would break the sum.

    >>> causes_of(["B", "", "A"], 3, None)
    (['A', 'B'], array([2, 0, 1]))
    """
    words = ["" if v == "0" else v for v in labels(values, n, "cause")]
    named = [word(v) for v in declared] if declared is not None else in_order(set(words) - {""})
    if len(set(named)) != len(named) or {"", "0"} & set(named):
        raise InputRefused("causes", "causes must be distinct and none of them may be the code of censoring")
    place = {"": 0, **{c: i for i, c in enumerate(named, start=1)}}
    unknown = set(words) - place.keys()
    if unknown:
        raise InputRefused("event_code", f"{len(unknown)} causes occur that are not declared")
    return named, np.array([place[v] for v in words], dtype=np.int64)
