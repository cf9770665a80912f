"""Checks of input that every estimator shares. Input that no method accepts is refused; nothing is repaired."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from outcomes.errors import InputRefused, NotEstimable

Floats = npt.NDArray[np.float64]


def floats(values: Any, name: str) -> Floats:
    """A one-dimensional float array without NaN or infinity."""
    try:
        array = np.asarray(values, dtype=np.float64)
    except (TypeError, ValueError):
        raise InputRefused("not_numeric", f"{name} must be numbers") from None
    if array.ndim != 1:
        raise InputRefused("shape", f"{name} must be one-dimensional")
    if not np.isfinite(array).all():
        raise InputRefused("not_finite", f"{name} has a missing or infinite value")
    return array


def same_length(n: int, array: Floats, name: str) -> Floats:
    if len(array) != n:
        raise InputRefused("length", f"{name} has another length than the times")
    return array


def times(values: Any, name: str = "time") -> Floats:
    array = floats(values, name)
    if (array < 0).any():
        raise InputRefused("negative_time", f"{name} has a negative value")
    return array


def entries(values: Any, time: Floats) -> Floats:
    """Entry times; missing, zero or negative means seen from time zero and becomes minus infinity."""
    if values is None:
        return np.full(len(time), -np.inf)
    array = same_length(len(time), floats(values, "entry"), "entry")
    if ((array > 0) & (array >= time)).any():
        raise InputRefused("entry_after_exit", "entry is not before the end of observation")
    return np.where(array > 0, array, -np.inf)


def frequency_weights(values: Any, n: int) -> Floats:
    """Weights are counts: whole and not negative."""
    if values is None:
        return np.ones(n)
    array = same_length(n, floats(values, "weights"), "weights")
    if (array < 0).any() or (array != np.floor(array)).any():
        raise InputRefused("weights", "weights are counts: whole numbers, not negative")
    return array


def binary(values: Any, n: int | None = None, name: str = "event") -> npt.NDArray[np.bool_]:
    array = floats(values, name)
    if n is not None:
        same_length(n, array, name)
    if not np.isin(array, (0.0, 1.0)).all():
        raise InputRefused("event_code", f"{name} must be 0 or 1")
    return array.astype(bool)


def probability(value: float, name: str = "level") -> float:
    if not 0 < value < 1:
        raise InputRefused(name, f"{name} must lie between 0 and 1")
    return float(value)


def whole_count(value: Any, name: str) -> int:
    number = float(value)
    if not np.isfinite(number) or number < 0 or number != np.floor(number):
        raise InputRefused("count", f"{name} must be a whole number, not negative")
    return int(number)


def groups(values: Any, n: int) -> list[tuple[str, npt.NDArray[np.bool_]]]:
    """(label, members) of every group in order of label; one group '' if there is no grouping."""
    if values is None:
        return [("", np.ones(n, dtype=bool))]
    labels = np.asarray(values, dtype=object)
    if labels.ndim != 1 or len(labels) != n:
        raise InputRefused("length", "group has another length than the times")
    if any(v is None or v != v for v in labels):
        raise InputRefused("not_finite", "group has a missing value")
    words = np.array([str(v) for v in labels], dtype=object)
    return [(str(g), words == g) for g in sorted(set(words))]


def asked_times(values: Sequence[float] | None) -> Floats:
    return np.array([]) if values is None else np.unique(times(values, "times"))


def need_rows(n: int) -> None:
    if n == 0:
        raise NotEstimable("no_runs", "nothing is left to estimate from")
