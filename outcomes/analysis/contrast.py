"""Differences of survival, of cumulative incidence and of restricted means, each against the first group."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.stats import chi2, norm

from outcomes.analysis._incidence_error import aalen_error
from outcomes.analysis._input import (
    Members,
    binary,
    causes_of,
    groups,
    number,
    one_of,
    probability,
    word,
)
from outcomes.analysis._input import times as checked_times
from outcomes.analysis.curve import area_to
from outcomes.analysis.intervals import all_lower, incidence_limits, none_upper, survival_limits, z_of
from outcomes.analysis.proportion import wilson
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.risk_set import TIES, Sample, at_risk, empties_at, risk_set, sample, survival_steps
from outcomes.errors import NotEstimable

COLUMNS = (
    "group", "reference", "time", "estimate", "std_error", "lower", "upper", "interval", "statistic",
    "p_value", "statistic_plain", "p_plain", "value", "value_reference", "at_risk", "at_risk_reference",
    "reason",
)  # fmt: skip
INTERVALS = ("auto", "plain", "square-and-add", "newcombe")
WORDS = {
    "plain": "plain",
    "square-and-add": "square-and-add of the two log-log intervals",
    "newcombe": "Newcombe",
}
_KLEIN = "Klein JP, Logan B, Harhoff M, Andersen PK. Stat Med 2007;26:4505-4519."
_MULT = Caution("MULT", "Several groups are compared with the first; no interval or P value is adjusted.")


def difference_at(time: Any, event: Any, group: Any, t: float, *, entry: Any = None, weights: Any = None,
                  cause: Any = None, causes: Sequence[Any] | None = None, interval: str = "auto",
                  level: float = 0.95, known_at: Any = None, time_unit: str = "") -> Result:  # fmt: skip
    """Difference at one stated time of survival, or of the incidence of one ending: later group minus
    first group.

    event: 1 or 0; with `cause` (the ending asked for) a cause for every run as in `cumulative_incidence`.
    interval: plain (D ± z SE), square-and-add of the limits of both groups, newcombe (only where nobody
    was censored before t or entered late: then it is the difference of two proportions), or auto:
    newcombe where it applies, square-and-add with exact limits where a group stands at 0 or 1, else
    plain. All are cut to [−1, 1].

    Result: one row a group after the first, with estimate, std_error, limits, the interval used,
    statistic and p_value on the log(−log) scale, statistic_plain and p_plain, both values and numbers at
    risk. A group that does not reach t has no estimate (beyond_follow_up); with two groups that is
    raised.

    Raises InputRefused; NotEstimable no_runs, one_group, beyond_follow_up, empty_risk_set,
    grouping_from_the_future. Source: Klein et al. 2007.

    >>> a, b = ([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1]), ([1, 2, 4, 4, 5, 6], [0, 1, 1, 1, 0, 1])
    >>> r = difference_at(a[0] + b[0], a[1] + b[1], ["A"] * 6 + ["B"] * 6, 3)
    >>> round(float(r.table["estimate"].iloc[0]), 6)
    0.355556
    """
    moment = number(t, "t", least=0.0)
    probability(level)
    one_of(interval, "interval", INTERVALS)
    n = len(checked_times(time))
    if cause is None:
        code, wanted, k = binary(event, n).astype(np.int64), -1, 1
    else:
        named, code = causes_of(event, n, causes)
        wanted, k = named.index(one_of(word(cause), "cause", named)), len(named)
    rows = sample(time, code, entry, weights)
    points = {
        g: _point(rows.pick(m & (rows.weight > 0)), moment, wanted, k, level)
        for g, m in two(group, n, known_at)
    }
    first, *others = points
    out: list[dict[str, Any]] = []
    for g in others:
        row = _difference(points[g], points[first], interval, level)
        out.append({"group": g, "reference": first, "time": moment} | row)
    _raise_if_alone(out)
    name = f"difference of {'survival' if cause is None else 'incidence'} at a time"
    words = "as named beside it" if interval == "auto" else WORDS[interval]
    method = Method(name, "sum of both", words, level, TIES, time_unit, (_KLEIN,))
    notes = (_MULT,) if len(others) > 1 else ()
    return Result(tidy(out, COLUMNS, ("reference", "interval")), method, {"n": int(rows.size)}, notes)


def two(group: Any, n: int, known_at: Any) -> Members:
    """The groups; NotEstimable one_group if there are fewer than two."""
    members = groups(group, n, known_at)
    if len(members) < 2:
        raise NotEstimable("one_group", "there is only one group")
    return members


def _raise_if_alone(rows: list[dict[str, Any]]) -> None:
    reason = rows[0].get("reason")
    if len(rows) == 1 and rows[0].get("estimate") is None and isinstance(reason, str):
        raise NotEstimable(reason, "one of the two groups has no estimate there")


@dataclass(frozen=True)
class _Point:
    """A value at t with its variance, its own limits, and whether it is a plain proportion of n."""

    value: float = 0.0
    variance: float = 0.0
    limits: tuple[float, float] = (0.0, 1.0)
    at_risk: float = 0.0
    n: float = 0.0
    is_proportion: bool = False
    reason: str = ""

    @property
    def is_sure(self) -> bool:
        return self.value <= 0 or self.value >= 1


def _point(rows: Sample, t: float, wanted: int, k: int, level: float) -> _Point:
    if rows.size == 0:
        return _Point(reason="empty_group")
    c = risk_set(rows, k).at_events()
    steps, terms = survival_steps(c)
    last = int(np.searchsorted(c.time, t, side="right")) - 1
    s = float(steps[last]) if last >= 0 else 1.0
    gap = empties_at(rows)
    before_gap = int(np.searchsorted(c.time, gap, side="right")) - 1
    if t > gap and (before_gap < 0 or steps[before_gap] > 0):
        return _Point(reason="empty_risk_set")
    if s > 0 and t > rows.time.max():
        return _Point(reason="beyond_follow_up")
    value, g = (s, float(terms[last]) if last >= 0 else 0.0)
    variance = s * s * g
    if wanted >= 0:
        before = np.concatenate([[1.0], steps[:-1]])[: len(steps)]
        f = np.cumsum(before * c.events[:, wanted] / c.at_risk)
        error = aalen_error(c.all_events, c.at_risk, c.events[:, wanted], before, f)
        value, variance = (float(f[last]), float(error[last]) ** 2) if last >= 0 else (0.0, 0.0)
    complete = not rows.is_late and not rows.weight[(rows.code == 0) & (rows.time < t)].sum()
    ended = c.time[steps <= 0]
    there = np.array([min(t, float(ended[0])) if len(ended) else t])
    exact_n = rows.size if complete else float(at_risk(there, rows)[0])
    limits = _own_limits(value, variance, exact_n, wanted >= 0, level)
    return _Point(value, variance, limits, float(at_risk(np.array([t]), rows)[0]), rows.size, complete)


def _own_limits(
    value: float, variance: float, n: float, is_incidence: bool, level: float
) -> tuple[float, float]:
    if value <= 0:
        return 0.0, float(none_upper(np.array([n]), level)[0]) if n >= 1 else 1.0
    if value >= 1:
        return float(all_lower(np.array([n]), level)[0]) if n >= 1 else 0.0, 1.0
    v, spread = np.array([value]), np.array([variance])
    if is_incidence:
        low, high = incidence_limits(v, np.sqrt(spread), level, "cloglog")
    else:
        low, high = survival_limits(v, spread / v**2, level, "log-log")
    return float(low[0]), float(high[0])


def _difference(one: _Point, ref: _Point, interval: str, level: float) -> dict[str, Any]:
    row: dict[str, Any] = {"at_risk": one.at_risk, "at_risk_reference": ref.at_risk}
    for point in (one, ref):
        if point.reason:
            return row | {"reason": point.reason}
    d, variance = one.value - ref.value, one.variance + ref.variance
    kind = interval
    proportions = one.is_proportion and ref.is_proportion
    if interval == "auto":
        kind = "newcombe" if proportions else "square-and-add" if one.is_sure or ref.is_sure else "plain"
    row |= {"estimate": d, "value": one.value, "value_reference": ref.value, "interval": WORDS[kind]}
    if variance > 0:
        error = float(np.sqrt(variance))
        row |= {"std_error": error, "statistic_plain": (d / error) ** 2}
        row["p_plain"] = float(chi2.sf(row["statistic_plain"], 1))
    limits = _limits(one, ref, d, variance, kind, proportions, level)
    row |= limits if limits else _NO_INTERVAL
    if not one.is_sure and not ref.is_sure:
        row["statistic"] = _log_log(one, ref)
        row["p_value"] = float(chi2.sf(row["statistic"], 1))
    return row


_NO_INTERVAL = {"interval": None, "reason": "no_nonevents"}


def _limits(one: _Point, ref: _Point, d: float, variance: float, kind: str, proportions: bool,
            level: float) -> dict[str, float]:  # fmt: skip
    """Empty if this kind of interval does not exist here."""
    if kind == "plain":
        half = z_of(level) * float(np.sqrt(variance))
        return {"lower": max(-1.0, d - half), "upper": min(1.0, d + half)} if half > 0 else {}
    if kind == "newcombe" and not proportions:
        return {}
    (l1, u1), (l0, u0) = one.limits, ref.limits
    if kind == "newcombe":
        (l1, u1), (l0, u0) = (wilson(p.value * p.n, p.n, level) for p in (one, ref))
    low = d - float(np.hypot(one.value - l1, u0 - ref.value))
    high = d + float(np.hypot(u1 - one.value, ref.value - l0))
    return {"lower": max(-1.0, low), "upper": min(1.0, high)}


def _log_log(one: _Point, ref: _Point) -> float:
    """(f₁ − f₂)²/(V₁/(S₁ ln S₁)² + V₂/(S₂ ln S₂)²), f = ln(−ln S); the same on F for an ending."""
    f = [float(np.log(-np.log(p.value))) for p in (one, ref)]
    spread = [p.variance / (p.value * np.log(p.value)) ** 2 for p in (one, ref)]
    return float((f[0] - f[1]) ** 2 / sum(spread))


MEAN_COLUMNS = (
    "group", "reference", "time", "estimate", "std_error", "lower", "upper", "p_value", "ratio",
    "ratio_lower", "ratio_upper", "log_ratio_error", "value", "value_reference", "reason",
)  # fmt: skip
_ROYSTON = "Royston P, Parmar MKB. BMC Med Res Methodol 2013;13:152."


def rmst_difference(time: Any, event: Any, group: Any, tau: float, *, entry: Any = None, weights: Any = None,
                    level: float = 0.95, known_at: Any = None, time_unit: str = "") -> Result:  # fmt: skip
    """Difference and ratio of restricted means to tau: later group minus (over) first group.

    Result: one row a group after the first: estimate ± z SE, two-sided normal p_value, ratio with limits
    from its log, and both means. No event in either group: no limits (no_events). A group that does not
    reach tau has no estimate (beyond_follow_up, empty_risk_set); with two groups that is raised.

    Raises InputRefused; NotEstimable no_runs, one_group, beyond_follow_up, empty_risk_set,
    grouping_from_the_future. Source: Royston & Parmar 2013.

    >>> a, b = ([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1]), ([1, 2, 4, 4, 5, 6], [0, 1, 1, 1, 0, 1])
    >>> r = rmst_difference(a[0] + b[0], a[1] + b[1], ["A"] * 6 + ["B"] * 6, 5)
    >>> round(float(r.table["estimate"].iloc[0]), 6)
    0.611111
    """
    end = number(tau, "tau", above=0.0)
    probability(level)
    n = len(checked_times(time))
    rows = sample(time, binary(event, n).astype(np.int64), entry, weights)
    areas = {g: area_to(rows.pick(m & (rows.weight > 0)), end) for g, m in two(group, n, known_at)}
    first, *others = areas
    out: list[dict[str, Any]] = []
    for g in others:
        one, ref = areas[g], areas[first]
        row: dict[str, Any] = {"group": g, "reference": first, "time": end}
        reason = one.reason or ref.reason
        out.append(
            row
            | (
                {"reason": reason}
                if reason
                else _means(one.mean, ref.mean, one.variance, ref.variance, level)
            )
        )
    _raise_if_alone(out)
    name = "difference of areas under Kaplan–Meier to τ"
    method = Method(name, "sum of both", "plain", level, TIES, time_unit, (_ROYSTON,))
    notes = (_MULT,) if len(others) > 1 else ()
    return Result(tidy(out, MEAN_COLUMNS, ("reference",)), method, {"n": int(rows.size)}, notes)


def _means(one: float, ref: float, v1: float, v0: float, level: float) -> dict[str, Any]:
    row: dict[str, Any] = {"estimate": one - ref, "value": one, "value_reference": ref}
    if ref > 0:
        row["ratio"] = one / ref
    if v1 + v0 <= 0:
        return row | {"reason": "no_events"}
    z, error = z_of(level), float(np.sqrt(v1 + v0))
    row |= {"std_error": error, "lower": one - ref - z * error, "upper": one - ref + z * error}
    row["p_value"] = 2 * float(norm.sf(abs(one - ref) / error))
    if one > 0 and ref > 0:
        spread = float(np.sqrt(v1 / one**2 + v0 / ref**2))
        factor = float(np.exp(z * spread))
        row |= {
            "ratio_lower": one / ref / factor,
            "ratio_upper": one / ref * factor,
            "log_ratio_error": spread,
        }
    return row
