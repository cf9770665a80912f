"""Counts at distinct times: at risk just before, events of each kind, censored. Everything else is built on these."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from outcomes.analysis._input import Floats


@dataclass(frozen=True)
class RiskSet:
    """time: ascending, shape (m,). at_risk: entry < t <= time, summed weights, shape (m,). events: shape (m, k), one
    column a cause. censored: at exactly t, shape (m,). n: summed weights of everyone."""

    time: Floats
    at_risk: Floats
    events: Floats
    censored: Floats
    n: float

    @property
    def all_events(self) -> Floats:
        return np.asarray(self.events.sum(axis=1))


def at_risk(at: Floats, time: Floats, entry: Floats, weight: Floats) -> Floats:
    """Summed weights of entry < t <= time for each t of `at`, by two sorted searches."""
    order, late = np.argsort(time, kind="stable"), np.argsort(entry, kind="stable")
    leaving = np.concatenate([[0.0], np.cumsum(weight[order])])
    entering = np.concatenate([[0.0], np.cumsum(weight[late])])
    left_before = leaving[np.searchsorted(time[order], at, side="left")]
    entered_before = entering[np.searchsorted(entry[late], at, side="left")]
    return np.asarray(entered_before - left_before)


def risk_set(time: Floats, cause: npt.NDArray[np.int64], n_causes: int, entry: Floats, weight: Floats) -> RiskSet:
    """cause: 0 censored, 1 … n_causes. Events come before censorings, entries after both, at one time."""
    distinct, place = np.unique(time, return_inverse=True)
    counts = np.zeros((len(distinct), n_causes + 1))
    np.add.at(counts, (place, cause), weight)
    return RiskSet(distinct, at_risk(distinct, time, entry, weight), counts[:, 1:], counts[:, 0], float(weight.sum()))


def step_at(at: Floats, time: Floats, values: Floats, before: float) -> Floats:
    """Value of a right-continuous step function at each t of `at`; `before` ahead of the first time."""
    place = np.searchsorted(time, at, side="right") - 1
    return np.where(place >= 0, values[np.clip(place, 0, None)] if len(values) else before, before)


def running(at: Floats, time: Floats, counts: Floats) -> Floats:
    """Sum of counts up to and including each t."""
    total = np.concatenate([[0.0], np.cumsum(counts)])
    return np.asarray(total[np.searchsorted(time, at, side="right")])
