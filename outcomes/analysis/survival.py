"""Survival: Kaplan–Meier with delayed entry, its value at a time, its quantiles, and the restricted mean."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pandas as pd
from scipy.stats import beta

from outcomes.analysis._input import (
    Floats,
    asked_times,
    binary,
    entries,
    frequency_weights,
    groups,
    need_rows,
    probability,
    times as checked_times,
)
from outcomes.analysis.intervals import survival_limits, z_of
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.risk_set import RiskSet, at_risk, risk_set, running, step_at
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = ("group", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "censored", "reason")
TIES = "events before censorings, entries after"
_CITE = {
    "km": "Kaplan EL, Meier P. J Am Stat Assoc 1958;53:457-481.",
    "greenwood": "Greenwood M. Reports on Public Health and Medical Subjects 1926;33:1-26.",
    "log-log": "Kalbfleisch JD, Prentice RL. The Statistical Analysis of Failure Time Data. Wiley, 1980.",
    "arcsine": "Borgan O, Liestol K. Scand J Stat 1990;17:35-41.",
    "quantile": "Brookmeyer R, Crowley J. Biometrics 1982;38:29-41.",
    "rmst": "Karrison T. J Am Stat Assoc 1987;82:1169-1176.",
}


def kaplan_meier(time: Any, event: Any, *, entry: Any = None, weights: Any = None, group: Any = None,
                 interval: str = "log-log", level: float = 0.95, times: Sequence[float] | None = None,
                 time_unit: str = "") -> Result:  # fmt: skip
    """Probability of being event-free beyond t under independent censoring and delayed entry.

    time, event, entry, weights, group: shape (n,). event: 1 event, 0 censored. entry: seen from then on (missing or
    <= 0: from time zero). weights: counts. times: asked times beside the event times.

    Result: a row at time 0, at every distinct event time and at every asked time, by group. at_risk counts just before
    t; events and censored fall in (previous row, t]. At S = 1 the limits are exact (Clopper–Pearson with the number at
    risk at t; conservative under censoring); at S = 0 there are none (reason no_nonevents). An asked time beyond the
    last observation with S > 0 has reason beyond_follow_up.

    Raises InputRefused; NotEstimable no_runs.

    >>> r = kaplan_meier([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1])
    >>> [round(float(v), 4) for v in r.table["estimate"]]
    [1.0, 0.8333, 0.6667, 0.4444, 0.0]
    """
    t = checked_times(time)
    need_rows(len(t))
    d = binary(event, len(t))
    e, w = entries(entry, t), frequency_weights(weights, len(t))
    probability(level)
    asked = asked_times(times)
    rows: list[dict[str, object]] = []
    notes: list[Caution] = []
    members = groups(group, len(t))
    for label, inside in members:
        counts = risk_set(t[inside], d[inside].astype(np.int64), 1, e[inside], w[inside])
        rows += _curve(label, counts, t[inside], e[inside], w[inside], asked, interval, level)
        notes += _thin(label, counts)
    cites = tuple(_CITE[k] for k in ("km", "greenwood", interval) if k in _CITE)
    method = Method("Kaplan-Meier", "Greenwood", interval, level, TIES, time_unit, cites)
    n_of = {"n": int(w.sum()), "events": int(w[d].sum())}
    return Result(tidy(rows, COLUMNS), method, n_of, tuple(notes))


def _curve(label: str, c: RiskSet, t: Floats, e: Floats, w: Floats, asked: Floats, scale: str, level: float) -> list[dict[str, object]]:
    deaths = c.all_events
    at = np.unique(np.concatenate([[0.0], c.time[deaths > 0], asked]))
    factor = np.where(c.at_risk > 0, 1 - deaths / np.where(c.at_risk > 0, c.at_risk, 1), 1.0)
    left = c.at_risk - deaths
    piece = np.where(left > 0, deaths / np.where(left > 0, c.at_risk * left, 1), np.where(deaths > 0, np.inf, 0.0))
    s = step_at(at, c.time, np.cumprod(factor), 1.0)
    g = step_at(at, c.time, np.cumsum(piece), 0.0)
    s = np.where(np.isinf(g), 0.0, s)
    low, high = survival_limits(s, np.where(np.isinf(g), 0, g), level, scale)
    n_at = at_risk(at, t, e, w)
    n_at[at == 0] = w[np.isneginf(e)].sum()
    events, gone = _increments(at, c, deaths), _increments(at, c, c.censored)
    last = float(t.max()) if len(t) else 0.0
    rows = []
    for i, moment in enumerate(at):
        row: dict[str, object] = {
            "group": label, "time": moment, "estimate": s[i], "at_risk": n_at[i], "events": events[i], "censored": gone[i],
        }  # fmt: skip
        rows.append(row | _limits(s[i], g[i], low[i], high[i], n_at[i], level, beyond=moment > last and s[i] > 0))
    return rows


def _increments(at: Floats, c: RiskSet, counts: Floats) -> Floats:
    return np.diff(np.concatenate([[0.0], running(at, c.time, counts)]))


def _limits(s: float, g: float, low: float, high: float, n_at: float, level: float, *, beyond: bool) -> dict[str, object]:
    if beyond:
        return {"estimate": None, "reason": "beyond_follow_up"}
    if s >= 1:
        lower = float(beta.ppf((1 - level) / 2, n_at, 1)) if n_at >= 1 else None
        return {"std_error": 0.0, "lower": lower, "upper": 1.0 if lower is not None else None}
    if s <= 0:
        return {"reason": "no_nonevents"}
    return {"std_error": s * float(np.sqrt(g)), "lower": low, "upper": high}


def _thin(label: str, c: RiskSet) -> list[Caution]:
    """With delayed entry an early tiny risk set can carry the whole curve away."""
    deaths = c.all_events
    early = (deaths > 0) & (c.at_risk < 5)
    if len(c.time) and any(c.at_risk[i:].max() > c.at_risk[i] for i in np.flatnonzero(early)):
        where = f" in {label}" if label else ""
        return [Caution("THIN", f"A very small number was at risk early, and more later{where}: the curve hangs on it.")]
    return []


def survival_at(result: Result, t: float) -> Result:
    """The step curve read at t: one row a group with estimate, limits and the number at risk by definition.

    t must have been asked for (`times`) or lie at an event time for at_risk to be exact; between rows at_risk is taken
    from the row before minus what left since. t after the last row: beyond_follow_up if the curve has not reached 0.
    """
    rows = []
    for label, part in result.table.groupby("group", sort=True):
        known = part[part["time"] <= t + 1e-12]
        row = known.iloc[-1].to_dict() if len(known) else {}
        later = part[part["time"] > t]
        if row and float(row["time"]) < t and not len(later) and _positive(row):
            row |= {"estimate": pd.NA, "std_error": pd.NA, "lower": pd.NA, "upper": pd.NA, "reason": "beyond_follow_up"}
        if row and float(row["time"]) < t:
            row["at_risk"] = float(row["at_risk"]) - float(row["events"]) - float(row["censored"]) if pd.notna(row["at_risk"]) else pd.NA
        rows.append({**row, "group": label, "time": t})
    table = tidy(rows, COLUMNS)
    notes = tuple(Caution("SMALL", "Fewer than ten were at risk at this time.") for n in table["at_risk"] if pd.notna(n) and n < 10)[:1]
    return Result(table, result.method, result.counts, result.notes + notes)


def _positive(row: dict[str, Any]) -> bool:
    return pd.isna(row["estimate"]) or float(row["estimate"]) > 0


def median_time(result: Result, p: float = 0.5) -> Result:
    """First time at which S <= 1 − p, the midpoint where the curve is flat at 1 − p; limits by inverting the pointwise
    limits (Brookmeyer & Crowley 1982). Columns group, estimate, lower, upper, reason."""
    probability(p, "p")
    rows = []
    for label, part in result.table.groupby("group", sort=True):
        events = part[(part["events"] > 0)]
        time = events["time"].to_numpy(dtype=float)
        found = [_invert(time, events[c].to_numpy(dtype=float, na_value=np.nan), 1 - p) for c in ("estimate", "lower", "upper")]
        row: dict[str, object] = {"group": label, "estimate": found[0], "lower": found[1], "upper": found[2]}
        if found[0] is None or found[2] is None:
            row["reason"] = "not_reached"
        rows.append(row)
    method = Method("first time with S <= 1 - p, midpoint on a flat", "", "inversion of pointwise limits", result.method.level,
                    TIES, result.method.time_unit, (*result.method.citations, _CITE["quantile"]))  # fmt: skip
    return Result(tidy(rows, ("group", "estimate", "lower", "upper", "reason")), method, result.counts)


def _invert(time: Floats, curve: Floats, level: float) -> float | None:
    usable = ~np.isnan(curve)
    t, s = time[usable], curve[usable]
    below = np.flatnonzero(s <= level + 1e-9)
    if not len(below):
        return None
    first = below[0]
    if abs(s[first] - level) > 1e-9:
        return float(t[first])
    lower = np.flatnonzero(s < level - 1e-9)
    return float((t[first] + t[lower[0]]) / 2) if len(lower) else float(t[first])


def restricted_mean(time: Any, event: Any, tau: float, *, entry: Any = None, weights: Any = None, level: float = 0.95, time_unit: str = "") -> Result:
    """Mean event-free time up to tau: the area under Kaplan–Meier, with its Greenwood-type variance.

    Raises NotEstimable beyond_follow_up if tau lies after the last observation and the curve has not reached 0.
    """
    if not np.isfinite(tau) or tau <= 0:
        raise InputRefused("tau", "tau must be positive")
    t = checked_times(time)
    need_rows(len(t))
    d = binary(event, len(t))
    e, w = entries(entry, t), frequency_weights(weights, len(t))
    c = risk_set(t, d.astype(np.int64), 1, e, w)
    deaths = c.all_events
    keep = (deaths > 0) & (c.time <= tau)
    at, n, x = c.time[keep], c.at_risk[keep], deaths[keep]
    s = np.cumprod(1 - x / n)
    if tau > t.max() and (not len(s) or s[-1] > 1e-15):
        raise NotEstimable("beyond_follow_up", "tau lies after the last observation")
    edges, heights = np.concatenate([[0.0], at, [tau]]), np.concatenate([[1.0], s])
    area = float(np.sum(np.diff(edges) * heights))
    rest = np.cumsum((np.diff(edges) * heights)[::-1])[::-1][1:]
    with np.errstate(divide="ignore", invalid="ignore"):
        terms = np.where(rest > 0, rest**2 * x / (n * (n - x)), 0.0)
    variance = float(np.sum(terms))
    row: dict[str, object] = {"group": "", "time": tau, "estimate": area, "events": float(x.sum()), "at_risk": float(w.sum())}
    if len(at):
        half = z_of(probability(level)) * np.sqrt(variance)
        row |= {"std_error": float(np.sqrt(variance)), "lower": max(0.0, area - half), "upper": min(tau, area + half)}
    else:
        row["reason"] = "no_events"
    method = Method("area under Kaplan-Meier to tau", "Greenwood type", "plain", level, TIES, time_unit, (_CITE["km"], _CITE["rmst"]))
    return Result(tidy([row], ("group", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "reason")), method)


def nelson_aalen(time: Any, event: Any, *, entry: Any = None, weights: Any = None, time_unit: str = "") -> Result:
    """Cumulative hazard H = sum of d/n with variance sum of d/n²; a row at every event time."""
    t = checked_times(time)
    need_rows(len(t))
    d = binary(event, len(t))
    c = risk_set(t, d.astype(np.int64), 1, entries(entry, t), frequency_weights(weights, len(t)))
    keep = c.all_events > 0
    n, x = c.at_risk[keep], c.all_events[keep]
    hazard, variance = np.cumsum(x / n), np.cumsum(x / n**2)
    rows = [{"group": "", "time": a, "estimate": h, "std_error": float(np.sqrt(v)), "at_risk": r, "events": k}
            for a, h, v, r, k in zip(c.time[keep], hazard, variance, n, x, strict=True)]  # fmt: skip
    method = Method("Nelson-Aalen", "Aalen", "", 0.95, TIES, time_unit, ("Aalen O. Ann Stat 1978;6:701-726.",))
    return Result(tidy(rows, ("group", "time", "estimate", "std_error", "at_risk", "events")), method)
