"""Events that come again: the mean number by t, with the end of support stopping further events."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from outcomes.analysis._input import (
    Codes,
    Floats,
    asked_times,
    binary,
    cluster_codes,
    entries,
    labels,
    need_rows,
    probability,
)
from outcomes.analysis._input import times as checked_times
from outcomes.analysis._person import FEW_PERSONS, few_repeats, persons, small_sample, summed, too_few
from outcomes.analysis.intervals import garwood, z_of
from outcomes.analysis.result import Method, Result, tidy_columns
from outcomes.analysis.risk_set import Sample, at_risk, increments, step_at
from outcomes.errors import InputRefused

COLUMNS = (
    "group", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "censored",
    "terminal", "reason",
)  # fmt: skip
_CITE = (
    "Ghosh D, Lin DY. Biometrics 2000;56:554-562.",
    "Cook RJ, Lawless JF. Stat Med 1997;16:911-924.",
)


def mean_cumulative_count(id: Any, time: Any, *, run: Any, end: Any, terminal: Any = None, entry: Any = None,
                          cluster: Any = None, times: Sequence[float] | None = None, level: float = 0.95,
                          time_unit: str = "") -> Result:  # fmt: skip
    """Expected number of events of a run by t (Ghosh–Lin); without terminal events Nelson's mean function.

    id, time: run and time of every event, shape (m,), possibly none. run, end, terminal, entry, cluster:
    every run, shape (n,): its name, the end of its observation, 1 if that was the terminal event (0
    censored), from when it was seen, and its person. An event lies in (entry, end]; one at the hour of
    the end counts. The terminal event is never censoring: that would count events that the ended runs
    would have had.

    μ(t) = Σ S(u−) dN(u)/Y(u), S the Kaplan–Meier of the terminal event, Y the runs at risk. Variance by
    influences of runs, or of persons (factor G/(G−1) below 50; runs if there are fewer than ten people).

    Result: a row at every event time, asked time and at the last end. events, censored and terminal fall
    in (previous row, t]. μ = 0 has the upper limit of a Poisson count over the number at risk. After the
    last end, unless every run ended by its terminal event: beyond_follow_up.

    Raises InputRefused; NotEstimable no_runs.

    >>> runs = {"run": [1, 2, 3, 4], "end": [6, 4, 3, 7], "terminal": [1, 0, 1, 0]}
    >>> r = mean_cumulative_count([1, 1, 2, 4], [2, 5, 3, 5], **runs)
    >>> r.table.loc[r.table["time"] == 5, "estimate"].tolist()
    [1.25]
    """
    probability(level)
    stop = checked_times(end, "end")
    need_rows(len(stop))
    died = np.zeros(len(stop), dtype=bool) if terminal is None else binary(terminal, len(stop), "terminal")
    who = cluster_codes(cluster, len(stop))
    rows = Sample(stop, died.astype(np.int64), entries(entry, stop), np.ones(len(stop)), None)
    which, when = _events(id, time, labels(run, len(stop), "run"), rows)
    few = who is not None and persons(who, 0) < FEW_PERSONS
    count = _Count(rows, which, when, None if few else who, asked_times(times))
    table = count.table(level)
    words = "robust by run" if who is None else "robust by person"
    method = Method("Ghosh–Lin", words, "log", level, "event before terminal event", time_unit, _CITE)
    found = {"runs": len(stop), "events": len(when), "terminal": int(died.sum())}
    return Result(table, method, found, (too_few(),) if few else few_repeats(who))


def _events(id: Any, time: Any, names: Any, rows: Sample) -> tuple[Codes, Floats]:
    when = checked_times(time)
    if len(set(names)) != len(names):
        raise InputRefused("run", "a run occurs twice")
    place = {name: i for i, name in enumerate(names)}
    called = labels(id, len(when), "id")
    if any(name not in place for name in called):
        raise InputRefused("run", "an event belongs to no run")
    which = np.array([place[name] for name in called], dtype=np.int64)
    if (when > rows.time[which]).any() or (when <= rows.entry[which]).any():
        raise InputRefused("onset", "an event lies outside the observation of its run")
    return which, when


class _Count:
    """μ and its influences, one pass over the distinct times of events and terminal events."""

    def __init__(self, rows: Sample, which: Codes, when: Floats, who: Codes | None, asked: Floats) -> None:
        self.rows, self.which, self.when, self.who = rows, which, when, who
        died = rows.code > 0
        self.u = np.unique(np.concatenate([when, rows.time[died]]))
        self.y = at_risk(self.u, rows)
        self.dn = np.bincount(np.searchsorted(self.u, when), minlength=len(self.u)).astype(float)
        self.dd = np.bincount(np.searchsorted(self.u, rows.time[died]), minlength=len(self.u)).astype(float)
        survival = np.cumprod(1 - self.dd / self.y)
        self.before = np.concatenate([[1.0], survival[:-1]])[: len(self.u)]
        self.mu = np.cumsum(self.before * self.dn / self.y)
        self.ended = bool(len(survival)) and survival[-1] <= 0
        self.at = np.unique(np.concatenate([when, asked, [rows.time.max()]]))

    def errors(self) -> Floats:
        """Root of Σ ψ² at each time of `at`.

        ψ(t) = Σ_{u<=t} S(u−)(dN_i − Y_i dN/Y)/Y − Σ_{u<=t} (μ(t) − μ(u))(dD_i − Y_i dD/Y)/Y; the second
        sum is μ(t) times one running sum less another. Source: Ghosh & Lin 2000.
        """
        n = len(self.rows.time)
        a, b, c = np.zeros(n), np.zeros(n), np.zeros(n)
        out, done = np.empty(len(self.at)), 0
        starts = np.searchsorted(self.u, self.when)
        for j, t in enumerate(self.at):
            while done < len(self.u) and self.u[done] <= t:
                u, y = self.u[done], self.y[done]
                inside = (self.rows.entry < u) & (self.rows.time >= u)
                own = np.bincount(self.which[starts == done], minlength=n)
                a = a + self.before[done] * (own - inside * self.dn[done] / y) / y
                ends = ((self.rows.time == u) & (self.rows.code > 0)) - inside * self.dd[done] / y
                b, c, done = b + ends / y, c + self.mu[done] * ends / y, done + 1
            now = self.mu[done - 1] if done else 0.0
            total = summed(a - (now * b - c), self.who)
            out[j] = np.sqrt(np.sum(total**2) * (1.0 if self.who is None else small_sample(len(total))))
        return out

    def table(self, level: float) -> Any:
        mu, error = step_at(self.at, self.u, self.mu, 0.0), self.errors()
        some = mu > 0
        factor = np.exp(z_of(level) * error / np.where(some, mu, 1.0))
        n_at = at_risk(self.at, self.rows)
        none = np.where(n_at >= 1, garwood(0, level)[1] / np.maximum(n_at, 1.0), np.nan)
        reason = np.full(len(self.at), None, dtype=object)
        hidden = (self.at > self.rows.time.max()) & (not self.ended)
        reason[~some & (n_at < 1)] = "empty_risk_set"
        reason[hidden] = "beyond_follow_up"
        shown = {"estimate": mu, "std_error": np.where(some, error, 0.0),
                 "lower": np.where(some, mu / factor, np.where(n_at >= 1, 0.0, np.nan)),
                 "upper": np.where(some, mu * factor, none)}  # fmt: skip
        gone = self.rows.time[self.rows.code == 0]
        values: dict[str, object] = {
            "group": "", "time": self.at, "at_risk": n_at, "reason": reason,
            "events": increments(self.at, self.u, self.dn), "terminal": increments(self.at, self.u, self.dd),
            "censored": increments(self.at, np.sort(gone), np.ones(len(gone))),
        }  # fmt: skip
        return tidy_columns(values | {k: np.where(hidden, np.nan, v) for k, v in shown.items()}, COLUMNS)
