"""Log-rank test: delayed entry, strata, rho weights, trend, and a permutation test where events are few."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.stats import chi2

from outcomes.analysis._input import (
    Codes,
    Floats,
    binary,
    floats,
    groups,
    number,
    numbered,
    same_length,
    whole_count,
)
from outcomes.analysis._input import times as checked_times
from outcomes.analysis._permutation import permuted_p
from outcomes.analysis._score_test import NO_OVERLAP, chi_square
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.risk_set import TIES, Sample, at_risk, sample
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = (
    "group",
    "observed",
    "expected",
    "variance",
    "n",
    "statistic",
    "df",
    "p_value",
    "p_asymptotic",
    "reason",
)
FEW_EVENTS = 5
_CITE = "Mantel N. Cancer Chemother Rep 1966;50:163-170."
_WEIGHTED = "Fleming TR, Harrington DP. Counting Processes and Survival Analysis. Wiley, 1991."


def logrank(time: Any, event: Any, group: Any, *, entry: Any = None, weights: Any = None, strata: Any = None,
            rho: float = 0.0, scores: Sequence[float] | None = None, known_at: Any = None, seed: int = 0,
            time_unit: str = "") -> Result:  # fmt: skip
    """Do the hazards of the groups differ, weighted by the numbers at risk?

    time, event, group, entry, weights, strata: shape (n,). Of one ending with the others censored it is
    the cause-specific test. rho: weight S(u−)^rho of the pooled curve of the stratum. scores: one number
    a group, in the order of the groups, for a test of trend. known_at: when the groups were known, as in
    `kaplan_meier`. With fewer than five events the P value comes from 10,000 permutations of the groups
    within strata (seed).

    Result: first the row of group '' with statistic (χ²), df, p_value, p_asymptotic (always from χ²) and
    n; then one row a group with observed and expected events (weighted), the variance of their
    difference, and n.

    Raises InputRefused; NotEstimable no_runs, one_group, no_events, no_overlap, grouping_from_the_future.
    Sources: Mantel 1966; Fleming & Harrington 1991 (rho).

    >>> r = logrank([1, 3, 4, 2, 2, 5], [1, 1, 0, 1, 0, 1], ["A"] * 3 + ["B"] * 3)
    >>> round(float(r.table["statistic"].iloc[0]), 6)
    0.263651
    """
    n = len(checked_times(time))
    rows = sample(time, binary(event, n).astype(np.int64), entry, weights)
    power = number(rho, "rho", least=0.0)
    named = [(g, inside & (rows.weight > 0)) for g, inside in groups(group, n, known_at)]
    named = [(g, inside) for g, inside in named if inside.any()]
    if len(named) < 2:
        raise NotEstimable("one_group", "there is only one group with runs")
    layer = np.zeros(n, dtype=np.int64) if strata is None else numbered(strata, n, "strata")
    keep = rows.weight > 0
    rows, which = rows.pick(keep), np.argmax(np.array([m for _, m in named]), axis=0)[keep]
    layer = layer[keep]
    deaths = float(rows.weight[rows.code > 0].sum())
    if deaths == 0:
        raise NotEstimable("no_events", "nobody had the event")
    contrast = None if scores is None else _contrast(scores, len(named))
    total = _score(rows, which, layer, len(named), power)
    statistic, df, asymptotic = _test(total, contrast)
    p = asymptotic
    notes: tuple[Caution, ...] = ()
    if deaths < FEW_EVENTS:
        p = permuted_p(rows, which, layer, power, contrast, statistic, whole_count(seed, "seed"))
        notes = (
            Caution("PERMUTED", "Fewer than five events: the P value is from permutations of the groups."),
        )
    first: dict[str, object] = {"group": "", "statistic": statistic, "df": df, "p_value": p,
                                "p_asymptotic": asymptotic, "n": rows.size}  # fmt: skip
    each = [
        {"group": g, "observed": total.observed[i], "expected": total.expected[i],
         "variance": total.covariance[i, i], "n": float(rows.weight[which == i].sum())}
        for i, (g, _) in enumerate(named)
    ]  # fmt: skip
    method = Method(_name(power, contrast, strata), "hypergeometric", "", 0.95, TIES, time_unit,
                    (_CITE, _WEIGHTED) if power else (_CITE,))  # fmt: skip
    found = {"n": int(rows.size), "events": int(deaths), "groups": len(named)}
    return Result(tidy([first, *each], COLUMNS), method, found, notes)


def _name(rho: float, contrast: Floats | None, strata: Any) -> str:
    words = "Mantel log-rank" if rho == 0 else f"log-rank with weight S^{rho:g}"
    words += "" if contrast is None else ", trend over the groups"
    return words if strata is None else words + ", stratified"


def _contrast(scores: Sequence[float], g: int) -> Floats:
    found: Floats = same_length(g, floats(scores, "scores"), "scores", "the groups with runs")
    if np.ptp(found) == 0:
        raise InputRefused("scores", "the scores of all groups are the same")
    return found


@dataclass(frozen=True)
class Score:
    """Observed, expected, shape (g,), and the covariance of their difference, shape (g, g)."""

    observed: Floats
    expected: Floats
    covariance: Floats


def _score(rows: Sample, which: Codes, layer: Codes, g: int, rho: float) -> Score:
    parts = [_stratum(rows.pick(layer == v), which[layer == v], g, rho) for v in np.unique(layer)]
    return Score(*(np.sum([getattr(p, name) for p in parts], axis=0) for name in Score.__annotations__))


def _stratum(rows: Sample, which: Codes, g: int, rho: float) -> Score:
    """V = Σ w² d(n−d)/(n−1)·(δ n_k/n − n_k n_l/n²); a term with n = 1 is 0."""
    died = rows.code > 0
    at = np.unique(rows.time[died])
    if not len(at):
        return Score(np.zeros(g), np.zeros(g), np.zeros((g, g)))
    n_k = np.array([at_risk(at, rows.pick(which == k)) for k in range(g)]).T
    d_k = np.zeros((len(at), g))
    np.add.at(d_k, (np.searchsorted(at, rows.time[died]), which[died]), rows.weight[died])
    n, d = n_k.sum(axis=1), d_k.sum(axis=1)
    curve = np.cumprod(1 - d / n)
    w = np.concatenate([[1.0], curve[:-1]]) ** rho
    share = n_k / n[:, None]
    factor = w**2 * d * np.where(n > 1, (n - d) / np.where(n > 1, n - 1, 1.0), 0.0)
    covariance = np.diag(factor @ share) - (share * factor[:, None]).T @ share
    return Score((w[:, None] * d_k).sum(axis=0), (w * d) @ share, covariance)


def _test(total: Score, contrast: Floats | None) -> tuple[float, int, float]:
    u = total.observed - total.expected
    if contrast is None:
        return chi_square(u, total.covariance)
    variance = float(contrast @ total.covariance @ contrast)
    if variance <= 1e-14 * float(np.sum(contrast**2)):
        raise NotEstimable("no_overlap", NO_OVERLAP)
    value = float(contrast @ u) ** 2 / variance
    return value, 1, float(chi2.sf(value, 1))
