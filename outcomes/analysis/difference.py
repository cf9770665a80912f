"""Difference of two proportions: of independent groups, and of two verdicts on the same runs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from scipy.optimize import brentq
from scipy.stats import binom, fisher_exact, hypergeom

from outcomes.analysis._input import one_of, probability, whole_count
from outcomes.analysis.intervals import z_of
from outcomes.analysis.proportion import wilson
from outcomes.analysis.result import Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = (
    "estimate", "std_error", "lower", "upper", "ratio", "ratio_lower", "ratio_upper", "p_value", "events",
    "at_risk", "reason",
)  # fmt: skip
PAIRED_COLUMNS = ("estimate", "lower", "upper", "p_value", "p_exact", "events", "at_risk", "reason")
INTERVALS = {
    "newcombe": ("Newcombe", "square-and-add", "Newcombe RG. Stat Med 1998;17:873-890."),
    "miettinen-nurminen": (
        "Miettinen-Nurminen", "score, constrained maximum likelihood",
        "Miettinen O, Nurminen M. Stat Med 1985;4:213-226.",
    ),
}  # fmt: skip
AWAY = 1e-13
TESTS = ("none", "fisher", "fisher-midp")
_PAIRED = ("Newcombe RG. Stat Med 1998;17:2635-2650.", "Fagerland MW et al. BMC Med Res Methodol 2013;13:91.")


def proportion_difference(x1: Any, n1: Any, x2: Any, n2: Any, *, interval: str = "newcombe",
                          test: str = "none", level: float = 0.95) -> Result:  # fmt: skip
    """p1 − p2 of independent groups, and the ratio p1/p2 with Katz's log limits.

    interval: newcombe (square-and-add of Wilson limits) or miettinen-nurminen. test: none; fisher (two-sided
    by the smaller probabilities); fisher-midp (twice the smaller tail less half the observed, at most 1).

    Columns: estimate, std_error (unpooled; missing when both variances are 0), lower, upper, ratio,
    ratio_lower, ratio_upper, p_value, events (x1 + x2), at_risk (n1 + n2), reason: no_events if a zero
    numerator leaves no ratio.

    Raises InputRefused; NotEstimable empty_group if a group has nobody.

    >>> r = proportion_difference(56, 70, 48, 80).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper")]
    [0.2, 0.052431, 0.333873]
    """
    probability(level)
    one_of(interval, "interval", tuple(INTERVALS))
    one_of(test, "test", TESTS)
    named = ((x1, "x1"), (n1, "n1"), (x2, "x2"), (n2, "n2"))
    a, m, b, k = (whole_count(value, name) for value, name in named)
    if a > m or b > k:
        raise InputRefused("count", "a numerator is larger than its denominator")
    if m == 0 or k == 0:
        raise NotEstimable("empty_group", "one of the two groups is empty")
    p, q = a / m, b / k
    low, high = (_newcombe if interval == "newcombe" else _score)(a, m, b, k, level)
    row: dict[str, object] = {
        "estimate": p - q,
        "lower": low,
        "upper": high,
        "events": a + b,
        "at_risk": m + k,
    }
    variance = p * (1 - p) / m + q * (1 - q) / k
    if variance > 0:
        row["std_error"] = float(np.sqrt(variance))
    row |= _ratio(a, m, b, k, level) | {"p_value": _p_value(a, m, b, k, test)}
    words, error, source = INTERVALS[interval]
    method = Method("p1 − p2", error, words, level, citations=(source,))
    return Result(tidy([row], COLUMNS), method, {"n1": m, "n2": k})


def _newcombe(a: int, m: int, b: int, k: int, level: float) -> tuple[float, float]:
    (l1, u1), (l2, u2) = wilson(a, m, level), wilson(b, k, level)
    p, q = a / m, b / k
    low, high = p - q - float(np.hypot(p - l1, u2 - q)), p - q + float(np.hypot(u1 - p, q - l2))
    return max(-1.0, low), min(1.0, high)


def _score(a: int, m: int, b: int, k: int, level: float) -> tuple[float, float]:
    """δ at which (D − δ)/√V(δ) is ±z, V from the fit constrained to p1 − p2 = δ, times N/(N−1)."""
    d, z = a / m - b / k, z_of(level)

    def gap(delta: float, side: float) -> float:
        q = _constrained(a, m, b, k, delta)
        p = min(max(q + delta, 0.0), 1.0)
        variance = (p * (1 - p) / m + q * (1 - q) / k) * (m + k) / (m + k - 1)
        return (d - delta) - side * z * float(np.sqrt(variance))

    # At d itself the variance may be 0 and the gap with it; the limit is the other root.
    low = -1.0 if d <= -1 else _between(lambda v: gap(v, 1.0), -1.0, d - AWAY)
    high = 1.0 if d >= 1 else _between(lambda v: gap(v, -1.0), d + AWAY, 1.0)
    return low, high


def _between(function: Callable[[float], float], left: float, right: float) -> float:
    """The root; the outer end if the function does not change its sign before it."""
    if function(left) * function(right) > 0:
        return left if left <= -1 else right
    return float(brentq(function, left, right, xtol=1e-15, rtol=1e-14, maxiter=300))


def _constrained(a: int, m: int, b: int, k: int, delta: float) -> float:
    """Maximum-likelihood p2 under p1 − p2 = delta: a root of a cubic, by its trigonometric solution."""
    total = m + k
    l2 = (m + 2 * k) * delta - total - (a + b)
    l1 = (k * delta - total - 2 * b) * delta + (a + b)
    l0 = b * delta * (1 - delta)
    shift = l2 / (3 * total)
    q = shift**3 - l1 * l2 / (6 * total**2) + l0 / (2 * total)
    size = max(shift**2 - l1 / (3 * total), 0.0) ** 0.5
    if size == 0:
        return float(min(max(-shift, 0.0, -delta), 1.0, 1 - delta))
    p = size if q >= 0 else -size
    angle = (np.pi + np.arccos(min(max(q / p**3, -1.0), 1.0))) / 3
    root = 2 * p * np.cos(angle) - shift
    return float(min(max(root, 0.0, -delta), 1.0, 1 - delta))


def _ratio(a: int, m: int, b: int, k: int, level: float) -> dict[str, object]:
    if a == 0 or b == 0:
        return {"reason": "no_events"}
    ratio = (a / m) / (b / k)
    error = float(np.sqrt(1 / a - 1 / m + 1 / b - 1 / k))
    factor = float(np.exp(z_of(level) * error))
    return {"ratio": ratio, "ratio_lower": ratio / factor, "ratio_upper": ratio * factor}


def _p_value(a: int, m: int, b: int, k: int, test: str) -> float | None:
    if test == "none":
        return None
    if test == "fisher":
        return min(1.0, float(fisher_exact([[a, m - a], [b, k - b]])[1]))
    spread = hypergeom(m + k, a + b, m)
    smaller = min(float(spread.cdf(a)), float(spread.sf(a - 1)))
    return min(1.0, 2 * (smaller - 0.5 * float(spread.pmf(a))))


def paired_difference(both: Any, first_only: Any, second_only: Any, neither: Any, *,
                      level: float = 0.95) -> Result:  # fmt: skip
    """p1 − p2 of two verdicts on the same runs, with McNemar's test.

    The interval is Newcombe's for pairs (method 10). The four counts cross the two verdicts. Columns:
    estimate, lower, upper, p_value (mid-P), p_exact, events (on which they differ), at_risk (all),
    reason.

    Raises InputRefused; NotEstimable no_runs. Sources: Newcombe 1998 (paired); Fagerland et al. 2013 (mid-P).

    >>> r = paired_difference(1, 1, 7, 12).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper", "p_value")]
    [-0.285714, -0.50692, -0.025559, 0.039063]
    """
    probability(level)
    named = ((both, "both"), (first_only, "first_only"), (second_only, "second_only"), (neither, "neither"))
    a, b, c, d = (whole_count(value, name) for value, name in named)
    n = a + b + c + d
    if n == 0:
        raise NotEstimable("no_runs", "there is no pair")
    p, q = (a + b) / n, (a + c) / n
    (l1, u1), (l2, u2) = wilson(a + b, n, level), wilson(a + c, n, level)
    phi = _phi(a, b, c, d)
    difference = (b - c) / n
    low = difference - _added(p - l1, u2 - q, phi)
    high = difference + _added(u1 - p, q - l2, phi)
    exact, mid = _mcnemar(b, c)
    row = {"estimate": difference, "lower": max(-1.0, low), "upper": min(1.0, high), "p_value": mid,
           "p_exact": exact, "events": b + c, "at_risk": n}  # fmt: skip
    method = Method("p1 − p2 of pairs", "square-and-add", "Newcombe, paired", level, citations=_PAIRED)
    return Result(tidy([row], PAIRED_COLUMNS), method, {"n": n})


def _added(x: float, y: float, phi: float) -> float:
    return float(np.sqrt(max(x * x - 2 * phi * x * y + y * y, 0.0)))


def _phi(a: int, b: int, c: int, d: int) -> float:
    """Correlation of the two verdicts, with Newcombe's correction where it is positive."""
    margins = (a + b) * (c + d) * (a + c) * (b + d)
    if margins == 0:
        return 0.0
    cross, n = a * d - b * c, a + b + c + d
    corrected = cross - n / 2 if cross > n / 2 else min(cross, 0)
    return float(corrected / np.sqrt(float(margins)))


def _mcnemar(b: int, c: int) -> tuple[float, float]:
    """Exact and mid-P of the discordant pairs; both 1 if there are none."""
    m, total = min(b, c), b + c
    if total == 0:
        return 1.0, 1.0
    at = float(binom.pmf(m, total, 0.5))
    exact = min(1.0, 2 * float(binom.cdf(m, total, 0.5)))
    return exact, 1 - at / 2 if b == c else exact - at
