"""Standardised difference of two groups: how far apart they were, in units of their spread. Not a test."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis._input import (
    Floats,
    floats,
    groups,
    in_order,
    labels,
    one_of,
    probability,
    same_length,
)
from outcomes.analysis.intervals import z_of
from outcomes.analysis.result import Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = (
    "group", "reference", "kind", "estimate", "std_error", "lower", "upper", "mean", "mean_reference",
    "std_dev", "std_dev_reference", "variance_ratio", "n", "n_reference", "effective_n",
    "effective_n_reference", "reason",
)  # fmt: skip
KINDS = ("auto", "continuous", "binary", "categorical")
_CITE = ("Austin PC. Stat Med 2009;28:3083-3107.", "Yang D, Dalton JE. SAS Global Forum 2012:335.")
TINY = 1e-12


def standardised_difference(x: Any, group: Any, *, kind: str = "auto", weights: Any = None,
                            spread: str = "weighted", level: float = 0.95,
                            known_at: Any = None) -> Result:  # fmt: skip
    """Later group minus first group over the pooled spread √((s₁² + s₀²)/2).

    x, group, weights: shape (n,), two groups. kind: continuous, binary (0 or 1), categorical (labels:
    root of the quadratic form of the shares without the first level, never negative), or auto: binary for
    numbers that are all 0 or 1, continuous for other numbers, else categorical. weights: sampling weights
    above 0 (not counts); spread: whether the standard deviations are weighted too. Missing values are
    refused: describe them beside.

    Columns: estimate, std_error (≈ √(1/n₁ + 1/n₀ + d²/2(n₁ + n₀))), limits ± z SE, means (shares),
    standard deviations, variance_ratio, n and effective n of both. |d| above 0.1 is a custom and no test;
    with 30 runs a group |d| up to 0.5 is chance.

    Raises InputRefused; NotEstimable no_runs, one_group, one_run, constant_predictor (no spread, unequal
    means), grouping_from_the_future. Sources: Austin 2009; Yang & Dalton 2012.

    >>> r = standardised_difference([1.0, 3.0, 5.0, 7.0], [0, 0, 1, 1])
    >>> round(float(r.table["estimate"].iloc[0]), 4)
    2.8284
    """
    one_of(kind, "kind", KINDS)
    one_of(spread, "spread", ("weighted", "unweighted"))
    probability(level)
    values, kind = _values(x, kind)
    n = len(values)
    if n == 0:
        raise NotEstimable("no_runs", "nothing is left to compare")
    w = np.ones(n) if weights is None else same_length(n, floats(weights, "weights"), "weights", "x")
    if (w <= 0).any():
        raise InputRefused("weights", "weights must be above 0")
    members = [(g, m) for g, m in groups(group, n, known_at) if m.any()]
    if len(members) != 2:
        raise NotEstimable("one_group", "two groups with runs are needed")
    (name0, m0), (name1, m1) = members
    one, ref = _Group.of(values[m1], w[m1], spread), _Group.of(values[m0], w[m0], spread)
    row: dict[str, object] = {"group": name1, "reference": name0, "kind": kind}
    row |= {
        "n": one.n,
        "n_reference": ref.n,
        "effective_n": one.effective,
        "effective_n_reference": ref.effective,
    }
    d = _categorical(values, m1, m0, w) if kind == "categorical" else _numbers(one, ref, kind)
    if kind != "categorical":
        row |= {"mean": one.mean, "mean_reference": ref.mean} | _spreads(one, ref, kind)
    error = float(np.sqrt(1 / one.n + 1 / ref.n + d * d / (2 * (one.n + ref.n))))
    half = z_of(level) * error
    row |= {"estimate": d, "std_error": error, "lower": d - half, "upper": d + half}
    method = Method("standardised difference", "large-sample", "plain", level, citations=_CITE)
    return Result(tidy([row], COLUMNS, ("reference", "kind")), method, {"n": n})


def _values(x: Any, kind: str) -> tuple[Any, str]:
    """Numbers or labels, and which kind they are."""
    raw = (
        x.dtype
        if isinstance(x, pd.Series)
        else np.asarray(x, dtype=None if len(np.shape(x)) else object).dtype
    )
    is_number = pd.api.types.is_numeric_dtype(raw) or pd.api.types.is_bool_dtype(raw)
    if kind == "categorical" or (kind == "auto" and not is_number):
        return labels(x, None, "x"), "categorical"
    numbers = floats(x, "x")
    is_binary = bool(np.isin(numbers, (0.0, 1.0)).all())
    if kind == "binary" and not is_binary:
        raise InputRefused("binary", "x must be 0 or 1")
    return numbers, "binary" if is_binary and kind != "continuous" else "continuous"


@dataclass(frozen=True)
class _Group:
    n: int
    mean: float
    variance: float | None
    effective: float

    @classmethod
    def of(cls, values: Any, w: Floats, spread: str) -> _Group:
        total, squares = float(w.sum()), float(np.sum(w**2))
        effective = total**2 / squares
        if values.dtype == object:
            return cls(len(values), 0.0, None, effective)
        mean = float(np.sum(w * values) / total)
        if len(values) < 2:
            return cls(len(values), mean, None, effective)
        if spread == "unweighted":
            variance = float(values.var(ddof=1))
        else:
            variance = total / (total**2 - squares) * float(np.sum(w * (values - mean) ** 2))
        return cls(len(values), mean, variance, effective)


def _spread(group: _Group, kind: str) -> float:
    if kind == "binary":
        return group.mean * (1 - group.mean)
    if group.variance is None:
        raise NotEstimable("one_run", "a group of one run has no spread")
    return group.variance


def _spreads(one: _Group, ref: _Group, kind: str) -> dict[str, object]:
    v1, v0 = _spread(one, kind), _spread(ref, kind)
    row: dict[str, object] = {"std_dev": float(np.sqrt(v1)), "std_dev_reference": float(np.sqrt(v0))}
    return row | ({"variance_ratio": v1 / v0} if v0 > 0 else {})


def _numbers(one: _Group, ref: _Group, kind: str) -> float:
    pooled = (_spread(one, kind) + _spread(ref, kind)) / 2
    gap = one.mean - ref.mean
    if pooled <= TINY * max(1.0, one.mean**2, ref.mean**2):
        if abs(gap) <= TINY * max(1.0, abs(one.mean), abs(ref.mean)):
            return 0.0
        raise NotEstimable("constant_predictor", "neither group has any spread")
    return gap / float(np.sqrt(pooled))


def _categorical(values: Any, one: Any, ref: Any, w: Floats) -> float:
    levels = in_order({str(v) for v in values})
    shares = [np.array([w[m & (values == v)].sum() for v in levels]) / w[m].sum() for m in (one, ref)]
    p, q = (s[1:] for s in shares)
    spread = sum(np.diag(s) - np.outer(s, s) for s in (p, q)) / 2
    gap = p - q
    if not len(gap) or np.abs(gap).max() <= TINY:
        return 0.0
    solved = np.linalg.pinv(spread, hermitian=True) @ gap
    if np.abs(spread @ solved - gap).max() > 1e-8:
        raise NotEstimable("constant_predictor", "each group has one level only")
    return float(np.sqrt(max(float(gap @ solved), 0.0)))
