"""Survival with delayed entry: Kaplan–Meier, Nelson–Aalen. What is read off a curve is in curve.py."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis._input import Floats, asked_times, binary, groups, number, one_of, probability
from outcomes.analysis._input import times as checked_times
from outcomes.analysis._person import FEW_PERSONS, few_repeats, persons, small_sample, summed, too_few
from outcomes.analysis.curve import median_time, restricted_mean, survival_at
from outcomes.analysis.intervals import SURVIVAL_SCALES, all_lower, survival_limits, z_of
from outcomes.analysis.result import Caution, Method, Result, joined, tidy, tidy_columns
from outcomes.analysis.risk_set import (
    TIES,
    RiskSet,
    Sample,
    at_risk,
    empties_at,
    increments,
    risk_set,
    sample,
    step_at,
    survival_steps,
)

__all__ = ["TIES", "kaplan_meier", "median_time", "nelson_aalen", "restricted_mean", "survival_at"]

COLUMNS = (
    "group", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "censored", "reason",
)  # fmt: skip
THIN = 5
_KM = "Kaplan EL, Meier P. J Am Stat Assoc 1958;53:457-481."
_GREENWOOD = "Greenwood M. Reports on Public Health and Medical Subjects 1926;33:1-26."
_EFRON = "Efron B, Tibshirani R. J Am Stat Assoc 1997;92:548-560."
_SCALE = {
    "log-log": "Kalbfleisch JD, Prentice RL. The Statistical Analysis of Failure Time Data. Wiley, 1980.",
    "arcsine": "Borgan O, Liestol K. Scand J Stat 1990;17:35-41.",
}


def kaplan_meier(time: Any, event: Any, *, entry: Any = None, weights: Any = None, group: Any = None,
                 interval: str = "log-log", level: float = 0.95, times: Sequence[float] | None = None,
                 start: float = 0.0, cluster: Any = None, known_at: Any = None,
                 time_unit: str = "") -> Result:  # fmt: skip
    """Probability of being event-free beyond t under independent censoring and delayed entry.

    time, event, entry, weights, group, cluster: shape (n,). event: 1 event, 0 censored. entry: seen from then
    on (<= 0: from time zero). weights: counts. times: asked times beside the event times. start: condition on
    being event-free at this time, where the curve then begins. cluster: the person of each run; the standard
    error is then the infinitesimal jackknife by person (Greenwood in a group of fewer than ten people).
    known_at: when the group was known, on the clock of `time`; above 0 is refused as an answer.

    Result: by group a row at `start`, at every distinct event time, at every asked time and at the last
    observation. at_risk counts just before t; events and censored fall in (previous row, t]. S = 1: exact
    limits from the number at risk at t. S = 0: none (no_nonevents), and 0 it stays (empty_risk_set where
    someone enters later). After a time at which nobody is watched the estimate is missing (empty_risk_set),
    likewise after the last observation if S > 0 (beyond_follow_up). A declared group without rows:
    empty_group.

    Raises InputRefused; NotEstimable no_runs, grouping_from_the_future.

    >>> r = kaplan_meier([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1])
    >>> [round(float(v), 4) for v in r.table["estimate"]]
    [1.0, 0.8333, 0.6667, 0.4444, 0.0]
    """
    probability(level)
    one_of(interval, "interval", SURVIVAL_SCALES)
    begin = number(start, "start", least=0.0)
    n = len(checked_times(time))
    rows = sample(time, binary(event, n).astype(np.int64), entry, weights, cluster)
    asked = asked_times(times)
    parts: list[pd.DataFrame] = []
    notes: list[Caution] = []
    for label, inside in groups(group, n, known_at):
        part = rows.pick(inside & (rows.weight > 0)).after(begin)
        if part.size == 0:
            parts.append(_empty(label, begin))
            continue
        parts.append(_curve(label, part, begin, asked[asked >= begin], interval, level))
        notes += _thin(label, risk_set(part))
        if part.who is not None and persons(part.who, 0) < FEW_PERSONS:
            notes.append(too_few(label))
    estimator = "Kaplan–Meier" if begin == 0 else f"Kaplan–Meier, of those event-free at time {begin:g}"
    variance, source = ("Greenwood", _GREENWOOD) if cluster is None else (BY_PERSON, _EFRON)
    cites = tuple(c for c in (_KM, source, _SCALE.get(interval)) if c)
    method = Method(estimator, variance, interval, level, TIES, time_unit, cites)
    return Result(
        joined(parts, COLUMNS), method, _counts(rows.after(begin)), (*notes, *few_repeats(rows.who))
    )


BY_PERSON = "infinitesimal jackknife by person"


def _counts(rows: Sample) -> dict[str, int]:
    late = rows.weight[~np.isneginf(rows.entry)].sum()
    found = {"n": int(rows.size), "events": int(rows.weight[rows.code > 0].sum()), "late": int(late)}
    return found if rows.who is None else found | {"persons": persons(rows.who, 0)}


def _empty(label: str, begin: float) -> pd.DataFrame:
    row = {"group": label, "time": begin, "at_risk": 0, "events": 0, "censored": 0, "reason": "empty_group"}
    return tidy([row], COLUMNS)


def _curve(label: str, rows: Sample, begin: float, asked: Floats, scale: str, level: float) -> pd.DataFrame:
    c = risk_set(rows)
    deaths = c.all_events
    at = np.unique(np.concatenate([[begin], c.time[deaths > 0], asked, c.time[-1:]]))
    steps, terms = survival_steps(c)
    s, g = step_at(at, c.time, steps, 1.0), step_at(at, c.time, terms, 0.0)
    if rows.who is not None and persons(rows.who, 0) >= FEW_PERSONS:
        g = person_spread(rows, c, at)
    n_at = at_risk(at, rows)
    if begin > 0:
        n_at[0] = rows.weight[np.isneginf(rows.entry)].sum()
    low, high = survival_limits(s, g, level, scale)
    sure = s >= 1
    low, high = np.where(sure, all_lower(n_at, level), low), np.where(sure & (n_at >= 1), 1.0, high)
    reason = reasons(at, s, n_at, rows)
    hidden = (reason == "beyond_follow_up") | ((reason == "empty_risk_set") & (s > 0) & (at > begin))
    hidden |= lost_track(at, rows, c.time, steps)
    error = np.where(s > 0, s * np.sqrt(g), np.nan)
    values = {"estimate": s, "std_error": error, "lower": low, "upper": high}
    shown = {name: np.where(hidden, np.nan, v) for name, v in values.items()}
    gone = {"events": increments(at, c.time, deaths), "censored": increments(at, c.time, c.censored)}
    return tidy_columns(
        {"group": label, "time": at, "at_risk": n_at, "reason": reason} | shown | gone, COLUMNS
    )


def reasons(at: Floats, s: Floats, n_at: Floats, rows: Sample) -> Any:
    """Code of every row that lacks a number, None of the others; s is the share without any event yet."""
    last, gap = float(rows.time.max()), empties_at(rows)
    out = np.full(len(at), None, dtype=object)
    out[s <= 0] = "no_nonevents"
    out[(s >= 1) & (n_at < 1)] = "empty_risk_set"
    out[at > gap] = "empty_risk_set"
    out[(at > last) & (s > 0)] = "beyond_follow_up"
    return out


def lost_track(at: Floats, rows: Sample, time: Floats, steps: Floats) -> Any:
    """Whether t lies after a time at which nobody was watched although the curve had not reached 0 by then.

    What happens to those who enter later says nothing of the time between, even if all have the event.
    """
    gap = empties_at(rows)
    return (at > gap) & (step_at(np.array([gap]), time, steps, 1.0)[0] > 0)


def person_spread(rows: Sample, c: RiskSet, at: Floats) -> Floats:
    """Var(S)/S² at each t of `at` from influences summed over each person's runs.

    Influence of a run on S(t), over S(t): minus [event by t]/(n − d) plus the hazard terms d/(n(n − d)) of
    the event times at which it was at risk. Source: Efron & Tibshirani 1997.
    """
    _, terms = survival_steps(c)
    left = step_at(rows.time, c.time, c.at_risk - c.all_events, 0.0)
    own = np.where((rows.code > 0) & (left > 0), 1 / np.where(left > 0, left, 1.0), 0.0)
    entered = step_at(rows.entry, c.time, terms, 0.0)
    out = np.empty(len(at))
    for i, t in enumerate(at):
        seen = step_at(np.minimum(t, rows.time), c.time, terms, 0.0) - np.where(rows.entry < t, entered, 0.0)
        seen = np.where(rows.entry < t, seen, 0.0)
        influence = rows.weight * (seen - own * (rows.time <= t))
        total = summed(influence, rows.who)
        out[i] = np.sum(total**2) * small_sample(len(total))
    return out


def _thin(label: str, c: RiskSet) -> list[Caution]:
    """With delayed entry an early tiny risk set can carry the whole curve away."""
    early = (c.all_events > 0) & (c.at_risk < THIN)
    later = np.maximum.accumulate(c.at_risk[::-1])[::-1]
    if (early & (later > c.at_risk)).any():
        where = f" in {label}" if label else ""
        text = (
            f"Fewer than five were at risk at an early event{where}, and more later: the curve hangs on it."
        )
        return [Caution("THIN", text)]
    return []


def nelson_aalen(time: Any, event: Any, *, entry: Any = None, weights: Any = None, group: Any = None,
                 level: float = 0.95, times: Sequence[float] | None = None,
                 time_unit: str = "") -> Result:  # fmt: skip
    """Cumulative hazard H = Σ d/n with variance Σ d/n², limits H·exp(±z SE/H).

    Arguments and columns as in `kaplan_meier`; rows at every event time, every asked time and the last
    observation. H = 0 has no
    limits (no_events). After the last observation, or a time at which nobody is watched, H is missing.

    Raises InputRefused; NotEstimable no_runs.

    >>> nelson_aalen([1, 2, 3], [1, 0, 1]).table["estimate"].round(4).tolist()
    [0.3333, 1.3333]
    """
    z = z_of(probability(level))
    n = len(checked_times(time))
    rows = sample(time, binary(event, n).astype(np.int64), entry, weights)
    parts = []
    for label, inside in groups(group, n):
        part = rows.pick(inside & (rows.weight > 0))
        if part.size == 0:
            parts.append(_empty(label, 0.0))
            continue
        parts.append(_hazard(label, part, asked_times(times), z))
    cites = ("Aalen O. Ann Stat 1978;6:701-726.",)
    method = Method("Nelson–Aalen", "sum of d/n²", "log", level, TIES, time_unit, cites)
    return Result(joined(parts, COLUMNS), method, _counts(rows))


def _hazard(label: str, rows: Sample, asked: Floats, z: float) -> pd.DataFrame:
    c = risk_set(rows)
    deaths = c.all_events
    at = np.unique(np.concatenate([c.time[deaths > 0], asked, c.time[-1:]]))
    safe = np.where(c.at_risk > 0, c.at_risk, 1.0)
    h = step_at(at, c.time, np.cumsum(deaths / safe), 0.0)
    error = np.sqrt(step_at(at, c.time, np.cumsum(deaths / safe**2), 0.0))
    some = h > 0
    factor = np.exp(z * error / np.where(some, h, 1.0))
    reason = np.full(len(at), None, dtype=object)
    reason[~some] = "no_events"
    reason[at > empties_at(rows)] = "empty_risk_set"
    reason[at > rows.time.max()] = "beyond_follow_up"
    hidden = np.isin(reason.astype(str), ("empty_risk_set", "beyond_follow_up"))
    shown = {
        "estimate": np.where(hidden, np.nan, h),
        "std_error": np.where(hidden, np.nan, error),
        "lower": np.where(hidden | ~some, np.nan, h / factor),
        "upper": np.where(hidden | ~some, np.nan, h * factor),
    }
    gone = {"events": increments(at, c.time, deaths), "censored": increments(at, c.time, c.censored)}
    found: dict[str, object] = {"group": label, "time": at, "at_risk": at_risk(at, rows), "reason": reason}
    return tidy_columns(found | shown | gone, COLUMNS)
