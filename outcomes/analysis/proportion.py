"""Proportions: one, and the difference of two independent ones. Intervals that never collapse at 0 or n."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.optimize import brentq
from scipy.stats import beta, binom

from outcomes.analysis._input import probability, whole_count
from outcomes.analysis.intervals import z_of
from outcomes.analysis.result import Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = ("estimate", "std_error", "lower", "upper", "events", "at_risk", "reason")
INTERVALS = {
    "wilson": ("Wilson", "Wilson EB. J Am Stat Assoc 1927;22:209-212."),
    "exact": ("Clopper-Pearson", "Clopper CJ, Pearson ES. Biometrika 1934;26:404-413."),
    "jeffreys": ("Jeffreys", "Brown LD, Cai TT, DasGupta A. Stat Sci 2001;16:101-133."),
    "mid_p": ("mid-P", "Newcombe RG. Stat Med 1998;17:857-872."),
}


def proportion(x: Any, n: Any, *, interval: str = "wilson", level: float = 0.95) -> Result:
    """x of n with its interval. Unknown status is never in n: give it beside.

    interval: wilson (default), exact, jeffreys, mid_p. std_error is missing at 0 and n.
    Raises InputRefused (not whole, x > n); NotEstimable no_runs for n = 0.

    >>> r = proportion(3, 20).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("lower", "upper")]
    [0.052369, 0.360419]
    """
    hits, size = whole_count(x, "x"), whole_count(n, "n")
    if hits > size:
        raise InputRefused("count", "x is larger than n")
    if size == 0:
        raise NotEstimable("no_runs", "0 of 0: there is nobody")
    if interval not in INTERVALS:
        raise InputRefused("interval", "interval must be one of " + ", ".join(INTERVALS))
    low, high = limits(hits, size, interval, probability(level))
    p = hits / size
    row: dict[str, object] = {"estimate": p, "lower": low, "upper": high, "events": hits, "at_risk": size}
    if 0 < hits < size:
        row["std_error"] = float(np.sqrt(p * (1 - p) / size))
    words, source = INTERVALS[interval]
    return Result(tidy([row], COLUMNS), Method("x of n", "", words, level, citations=(source,)), {"n": size, "events": hits})


def limits(x: int, n: int, interval: str, level: float) -> tuple[float, float]:
    tail = (1 - level) / 2
    if interval == "wilson":
        return wilson(x, n, level)
    if interval == "exact":
        low, high = float(beta.ppf(tail, x, n - x + 1)) if x else 0.0, float(beta.ppf(1 - tail, x + 1, n - x)) if x < n else 1.0
    elif interval == "jeffreys":
        low, high = float(beta.ppf(tail, x + 0.5, n - x + 0.5)), float(beta.ppf(1 - tail, x + 0.5, n - x + 0.5))
    else:
        low = brentq(lambda p: binom.sf(x, n, p) + 0.5 * binom.pmf(x, n, p) - tail, 0, 1, xtol=1e-15, rtol=1e-14) if x else 0.0
        high = brentq(lambda p: binom.cdf(x - 1, n, p) + 0.5 * binom.pmf(x, n, p) - tail, 0, 1, xtol=1e-15, rtol=1e-14) if x < n else 1.0
    return (0.0 if x == 0 else float(low)), (1.0 if x == n else float(high))


def wilson(x: float, n: float, level: float) -> tuple[float, float]:
    z = z_of(level)
    p, z2 = x / n, z * z
    centre, spread = (p + z2 / (2 * n)) / (1 + z2 / n), z * np.sqrt(p * (1 - p) / n + z2 / (4 * n * n)) / (1 + z2 / n)
    return (0.0 if x == 0 else float(centre - spread)), (1.0 if x == n else float(centre + spread))


def proportion_difference(x1: Any, n1: Any, x2: Any, n2: Any, *, level: float = 0.95) -> Result:
    """p1 − p2 of independent groups with Newcombe's square-and-add interval from Wilson limits.

    Raises InputRefused; NotEstimable empty_group if a group has nobody.

    >>> r = proportion_difference(56, 70, 48, 80).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper")]
    [0.2, 0.052431, 0.333873]
    """
    counts = [whole_count(v, name) for v, name in ((x1, "x1"), (n1, "n1"), (x2, "x2"), (n2, "n2"))]
    a, m, b, k = counts
    if a > m or b > k:
        raise InputRefused("count", "a numerator is larger than its denominator")
    if m == 0 or k == 0:
        raise NotEstimable("empty_group", "one of the two groups is empty")
    (l1, u1), (l2, u2) = wilson(a, m, probability(level)), wilson(b, k, level)
    p, q = a / m, b / k
    row = {
        "estimate": p - q, "lower": p - q - float(np.hypot(p - l1, u2 - q)), "upper": p - q + float(np.hypot(u1 - p, q - l2)),
        "events": a + b, "at_risk": m + k,
    }  # fmt: skip
    method = Method("p1 - p2", "square-and-add", "Newcombe", level, citations=("Newcombe RG. Stat Med 1998;17:873-890.",))
    return Result(tidy([row], COLUMNS), method, {"n1": m, "n2": k})
