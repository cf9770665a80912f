"""Whether runs differ more in their counts than one rate allows: Pearson's φ and a negative binomial fit."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.optimize import brentq, minimize_scalar
from scipy.special import gammaln
from scipy.stats import chi2

from outcomes.analysis._input import Floats, counts, groups, probability, same_length, times
from outcomes.analysis.intervals import log_limits
from outcomes.analysis.result import Method, Result, tidy
from outcomes.errors import NotEstimable

COLUMNS = (
    "group", "estimate", "std_error", "lower", "upper", "events", "exposure", "n", "phi", "alpha", "theta",
    "log_likelihood", "statistic", "p_value", "reason",
)  # fmt: skip
SMALLEST, LARGEST = -12.0, 16.0  # of log θ; beyond, the fit is a Poisson one
_CITE = ("Hilbe JM. Negative Binomial Regression. Cambridge University Press, 2011.",)


def overdispersion(events: Any, exposure: Any, *, group: Any = None, per: float = 1.0, level: float = 0.95,
                   time_unit: str = "") -> Result:  # fmt: skip
    """Negative binomial rates by group with one common dispersion, and the test that there is none.

    events, exposure, group: one value a run, shape (n,); variance of a count μ + αμ². Limits on the log
    scale with α as if known. The test of α = 0 lies on the boundary: its P value is half that of χ² on 1.

    Result: first the row of group '' with n, events, exposure, phi (Pearson, about the rates), alpha,
    theta = 1/α (missing if α = 0), log_likelihood, statistic and p_value; then one row a group: estimate
    (rate per `per`), std_error (of the log rate), lower, upper, events, exposure, n. A group without
    events: no_events.

    Raises InputRefused; NotEstimable no_runs, zero_exposure, no_events, one_run (fewer than three runs).
    """
    probability(level)
    x, t = counts(events, "events"), times(exposure, "exposure")
    same_length(len(x), t, "exposure", "the events")
    members = [(g, m & (t > 0)) for g, m in groups(group, len(x))]
    members = [(g, m) for g, m in members if m.any()]
    if not len(x):
        raise NotEstimable("no_runs", "no run is at risk")
    if not members:
        raise NotEstimable("zero_exposure", "nobody was at risk for any time")
    if not x[t > 0].sum():
        raise NotEstimable("no_events", "there is no event")
    n = int((t > 0).sum())
    if n <= len(members) + 1:
        raise NotEstimable("one_run", "too few runs to see how they differ")
    parts = [(x[m], t[m]) for _, m in members]
    theta = _best(parts)
    base, best = (sum(_profile(v, u, k)[0] for v, u in parts) for k in (np.inf, theta))
    phi = sum(_pearson(v, u) for v, u in parts) / (n - len(members))
    statistic = max(0.0, 2 * (best - base))
    first: dict[str, object] = {
        "group": "", "events": float(x[t > 0].sum()), "exposure": float(t.sum()), "n": n, "phi": phi,
        "alpha": 0.0 if np.isinf(theta) else 1 / theta, "theta": None if np.isinf(theta) else theta,
        "log_likelihood": best, "statistic": statistic, "p_value": 0.5 * float(chi2.sf(statistic, 1)),
    }  # fmt: skip
    rows = [first]
    for (name, _), (v, u) in zip(members, parts, strict=True):
        row: dict[str, object] = {
            "group": name,
            "events": float(v.sum()),
            "exposure": float(u.sum()),
            "n": len(v),
        }
        rate = _profile(v, u, theta)[1]
        row["estimate"] = rate * per
        if rate > 0:
            error = float(1 / np.sqrt(np.sum(rate * u / (1 + rate * u / theta))))
            row |= {"std_error": error} | log_limits(rate * per, error, level)
        else:
            row["reason"] = "no_events"
        rows.append(row)
    method = Method("negative binomial rate", "α as if known", "log", level, "", time_unit, _CITE)
    return Result(tidy(rows, COLUMNS), method, {"runs": n, "events": int(x[t > 0].sum())})


def _best(parts: list[tuple[Floats, Floats]]) -> float:
    """θ of the largest likelihood; infinity if the Poisson fit is at least as good."""

    def loss(log_theta: float) -> float:
        return -sum(_profile(v, u, float(np.exp(log_theta)))[0] for v, u in parts)

    grid = np.linspace(SMALLEST, LARGEST, 57)
    values = [loss(g) for g in grid]
    place = int(np.argmin(values))
    if place == len(grid) - 1 or values[place] >= loss(LARGEST) - 1e-9:
        return float("inf")
    low, high = grid[max(place - 1, 0)], grid[min(place + 1, len(grid) - 1)]
    found = minimize_scalar(loss, bounds=(low, high), method="bounded", options={"xatol": 1e-10})
    return float(np.exp(found.x))


def _profile(x: Floats, t: Floats, theta: float) -> tuple[float, float]:
    """(log-likelihood at the best rate of this group, that rate)."""
    total = float(x.sum())
    if total == 0:
        return 0.0, 0.0
    start = total / float(t.sum())
    if np.isinf(theta):
        mu = start * t
        return float(np.sum(x * np.log(mu) - mu - gammaln(x + 1))), start

    def slope(b: float) -> float:
        mu = np.exp(b) * t
        return float(np.sum((x - mu) / (1 + mu / theta)))

    centre = float(np.log(start))
    low, high = centre - 1.0, centre + 1.0
    while slope(low) < 0:
        low -= 2.0
    while slope(high) > 0:
        high += 2.0
    rate = float(np.exp(brentq(slope, low, high, xtol=1e-14, rtol=1e-14)))
    mu = rate * t
    kernel = gammaln(x + theta) - gammaln(theta) - gammaln(x + 1)
    return float(np.sum(kernel - theta * np.log1p(mu / theta) + x * np.log(mu / (theta + mu)))), rate


def _pearson(x: Floats, t: Floats) -> float:
    mu = float(x.sum()) / float(t.sum()) * t
    return float(np.sum((x - mu) ** 2 / mu)) if x.sum() else 0.0
