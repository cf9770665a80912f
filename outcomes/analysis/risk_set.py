"""Counts at distinct times: at risk just before, events of each kind, censored.

Order at one time: events, then censorings, then entries. At risk at t: entry < t <= time.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from outcomes.analysis._input import (
    Codes,
    Floats,
    cluster_codes,
    entries,
    frequency_weights,
    need_rows,
    times,
)

TIES = "events before censorings, entries after"


@dataclass(frozen=True)
class Sample:
    """Checked rows, each of shape (n,): code 0 censored, 1 … k an event; entry −inf if seen from time zero;
    weight a count above 0; who the person's number, or None."""

    time: Floats
    code: Codes
    entry: Floats
    weight: Floats
    who: Codes | None = None

    def pick(self, keep: npt.NDArray[np.bool_]) -> Sample:
        who = None if self.who is None else self.who[keep]
        return Sample(self.time[keep], self.code[keep], self.entry[keep], self.weight[keep], who)

    def after(self, start: float) -> Sample:
        """Those still under observation beyond `start`, seen from then on or from their later entry."""
        if start <= 0:
            return self
        rest = self.pick(self.time > start)
        return replace(rest, entry=np.where(rest.entry <= start, -np.inf, rest.entry))

    @property
    def is_late(self) -> bool:
        return not bool(np.isneginf(self.entry).all())

    @property
    def size(self) -> float:
        return float(self.weight.sum())


def sample(time: Any, code: Codes, entry: Any = None, weights: Any = None, cluster: Any = None) -> Sample:
    """Checked rows; a row of weight 0 is as if absent. NotEstimable no_runs if none is left."""
    t = times(time)
    need_rows(len(t))
    rows = Sample(
        t, code, entries(entry, t), frequency_weights(weights, len(t)), cluster_codes(cluster, len(t))
    )
    need_rows(rows.size)
    return rows


@dataclass(frozen=True)
class RiskSet:
    """time: ascending, shape (m,). at_risk: entry < t <= time, summed weights, shape (m,). events: shape
    (m, k), one column a cause. censored: at exactly t, shape (m,). n: summed weights of everyone."""

    time: Floats
    at_risk: Floats
    events: Floats
    censored: Floats
    n: float

    @property
    def all_events(self) -> Floats:
        return np.asarray(self.events.sum(axis=1))

    def at_events(self) -> RiskSet:
        """Only the times at which something happened."""
        keep = self.all_events > 0
        return RiskSet(self.time[keep], self.at_risk[keep], self.events[keep], self.censored[keep], self.n)


def at_risk(at: Floats, rows: Sample) -> Floats:
    """Summed weights of entry < t <= time for each t of `at`, by two sorted searches."""
    order, late = np.argsort(rows.time, kind="stable"), np.argsort(rows.entry, kind="stable")
    leaving = np.concatenate([[0.0], np.cumsum(rows.weight[order])])
    entering = np.concatenate([[0.0], np.cumsum(rows.weight[late])])
    left_before = leaving[np.searchsorted(rows.time[order], at, side="left")]
    entered_before = entering[np.searchsorted(rows.entry[late], at, side="left")]
    return np.asarray(entered_before - left_before)


def risk_set(rows: Sample, n_causes: int = 1) -> RiskSet:
    """Counts at every distinct end of observation."""
    distinct, place = np.unique(rows.time, return_inverse=True)
    counts = np.zeros((len(distinct), n_causes + 1))
    np.add.at(counts, (place, rows.code), rows.weight)
    return RiskSet(distinct, at_risk(distinct, rows), counts[:, 1:], counts[:, 0], rows.size)


def empties_at(rows: Sample) -> float:
    """First end of observation after which nobody is watched although someone enters later; inf if none."""
    if not rows.is_late or not len(rows.time):
        return float("inf")
    ends = np.unique(rows.time)[:-1]
    entered = np.searchsorted(np.sort(rows.entry), ends, side="right")
    left = np.searchsorted(np.sort(rows.time), ends, side="right")
    empty = ends[entered == left]
    return float(empty[0]) if len(empty) else float("inf")


def step_at(at: Floats, time: Floats, values: Floats, before: float) -> Floats:
    """Value of a right-continuous step function at each t of `at`; `before` ahead of the first time."""
    padded = np.concatenate([[before], values])
    return np.asarray(padded[np.searchsorted(time, at, side="right")])


def increments(at: Floats, time: Floats, counts: Floats) -> Floats:
    """Sum of counts in (previous, this] for each t of ascending `at`; the first takes everything up to it."""
    total = np.concatenate([[0.0], np.cumsum(counts)])
    return np.diff(total[np.searchsorted(time, at, side="right")], prepend=0.0)


def survival_steps(c: RiskSet) -> tuple[Floats, Floats]:
    """Kaplan–Meier of all events together at c.time; Greenwood's sum of d/(n(n−d)), a term n = d being 0."""
    d, n = c.all_events, np.where(c.at_risk > 0, c.at_risk, 1.0)
    left = n - d
    terms = np.where(left > 0, d / (n * np.where(left > 0, left, 1.0)), 0.0)
    return np.asarray(np.cumprod(1 - d / n)), np.asarray(np.cumsum(terms))
