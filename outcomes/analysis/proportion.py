"""One proportion, with intervals that never collapse at 0 or n. Differences of two are in difference.py."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.optimize import brentq
from scipy.stats import beta, binom

from outcomes.analysis._input import binary, cluster_codes, one_of, probability, whole_count
from outcomes.analysis._person import FEW_PERSONS, few_repeats, person_variance, persons, too_few
from outcomes.analysis.intervals import z_of
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = (
    "estimate", "std_error", "lower", "upper", "events", "at_risk", "unknown", "worst", "best", "reason",
)  # fmt: skip
INTERVALS = {
    "wilson": ("Wilson", "Wilson EB. J Am Stat Assoc 1927;22:209-212."),
    "exact": ("Clopper-Pearson", "Clopper CJ, Pearson ES. Biometrika 1934;26:404-413."),
    "midp": ("mid-P", "Newcombe RG. Stat Med 1998;17:857-872."),
    "jeffreys": ("Jeffreys", "Brown LD, Cai TT, DasGupta A. Stat Sci 2001;16:101-133."),
}


def proportion(x: Any, n: Any = None, *, interval: str = "wilson", level: float = 0.95, cluster: Any = None,
               unknown: Any = 0) -> Result:  # fmt: skip
    """x of n with its interval. Unknown status is never in n: `unknown` gives it beside.

    x, n: two counts; or x alone with 0 or 1 for each run, shape (n,), and then `cluster` may name the
    person of each run: Wilson from the effective number n/deff, deff the clustered over the binomial
    variance, at least 1 (fewer than ten people: runs are treated as independent, with a caution).
    interval: wilson, exact, midp, jeffreys.

    Columns: estimate, std_error (missing at 0 and n), lower, upper, events (x), at_risk (n), unknown, and
    worst and best if all unknown had not or had the outcome.

    Raises InputRefused (not whole, x > n); NotEstimable no_runs for n = 0.

    >>> r = proportion(3, 20).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("lower", "upper")]
    [0.052369, 0.360419]
    """
    probability(level)
    one_of(interval, "interval", tuple(INTERVALS))
    missing = whole_count(unknown, "unknown")
    if n is None:
        return _of_runs(x, interval, level, cluster, missing)
    if cluster is not None:
        raise InputRefused("cluster", "persons need one value for each run")
    hits, size = whole_count(x, "x"), whole_count(n, "n")
    if hits > size:
        raise InputRefused("count", "x is larger than n")
    return _answer(
        hits, size, limits(hits, size, interval, level) if size else None, interval, level, missing
    )


def _of_runs(x: Any, interval: str, level: float, cluster: Any, missing: int) -> Result:
    hit = binary(x, None, "x")
    size, hits = len(hit), int(hit.sum())
    who = cluster_codes(cluster, size)
    if who is None or size == 0 or persons(who, 0) < FEW_PERSONS:
        notes = (too_few(),) if who is not None and size else ()
        found = limits(hits, size, interval, level) if size else None
        return _answer(hits, size, found, interval, level, missing, notes=notes)
    if interval != "wilson":
        raise InputRefused("interval", "with persons only the Wilson interval is offered")
    p = hits / size
    variance = person_variance((hit - p) / size, who)
    deff = max(1.0, variance / (p * (1 - p) / size)) if 0 < hits < size else 1.0
    error = float(np.sqrt(deff * p * (1 - p) / size))
    found = wilson(hits / deff, size / deff, level)
    return _answer(hits, size, found, interval, level, missing, error=error, notes=few_repeats(who))


def _answer(x: int, n: int, found: tuple[float, float] | None, interval: str, level: float, missing: int, *,
            error: float | None = None, notes: tuple[Caution, ...] = ()) -> Result:  # fmt: skip
    if found is None:
        raise NotEstimable("no_runs", "0 of 0: there is nobody")
    row: dict[str, object] = {
        "estimate": x / n, "lower": found[0], "upper": found[1], "events": x, "at_risk": n,
        "unknown": missing, "worst": x / (n + missing), "best": (x + missing) / (n + missing),
    }  # fmt: skip
    if 0 < x < n:
        row["std_error"] = float(np.sqrt(x / n * (1 - x / n) / n)) if error is None else error
    words, source = INTERVALS[interval]
    variance = "" if error is None else "robust by person"
    method = Method("x of n", variance, words, level, citations=(source,))
    return Result(tidy([row], COLUMNS), method, {"n": n, "events": x, "unknown": missing}, notes)


def limits(x: int, n: int, interval: str, level: float) -> tuple[float, float]:
    """Limits of x of n; exactly 0 at x = 0 and exactly 1 at x = n, on the side that cannot move."""
    tail = (1 - level) / 2
    if interval == "wilson":
        return wilson(x, n, level)
    if interval == "exact":
        low = beta.ppf(tail, x, n - x + 1) if x else 0.0
        high = beta.isf(tail, x + 1, n - x) if x < n else 1.0
    elif interval == "jeffreys":
        low, high = beta.ppf(tail, x + 0.5, n - x + 0.5), beta.isf(tail, x + 0.5, n - x + 0.5)
    else:
        low = _root(lambda p: binom.sf(x, n, p) + 0.5 * binom.pmf(x, n, p) - tail) if x else 0.0
        high = _root(lambda p: binom.cdf(x - 1, n, p) + 0.5 * binom.pmf(x, n, p) - tail) if x < n else 1.0
    return (0.0 if x == 0 else float(low)), (1.0 if x == n else float(high))


def _root(function: Any) -> float:
    return float(brentq(function, 0.0, 1.0, xtol=1e-15, rtol=1e-14))


def wilson(x: float, n: float, level: float) -> tuple[float, float]:
    """Score limits of x of n, neither of which need be whole. Source: Wilson 1927."""
    z = z_of(level)
    p, z2 = x / n, z * z
    centre = (p + z2 / (2 * n)) / (1 + z2 / n)
    spread = z * float(np.sqrt(p * (1 - p) / n + z2 / (4 * n * n))) / (1 + z2 / n)
    return (0.0 if x == 0 else max(0.0, centre - spread)), (1.0 if x == n else min(1.0, centre + spread))
