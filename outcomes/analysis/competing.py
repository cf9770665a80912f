"""Competing endings: Aalen–Johansen, exact under ties, with delayed entry and weights. See also gray.py."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis._incidence_error import aalen_error, cmprsk_error, jackknife_errors
from outcomes.analysis._input import Floats, asked_times, causes_of, groups, one_of, probability
from outcomes.analysis._input import times as checked_times
from outcomes.analysis._person import FEW_PERSONS, few_repeats, persons, too_few
from outcomes.analysis.gray import compare_incidence
from outcomes.analysis.intervals import (
    INCIDENCE_SCALES,
    all_lower,
    incidence_limits,
    none_upper,
    survival_limits,
)
from outcomes.analysis.result import Caution, Method, Result, joined, tidy, tidy_columns
from outcomes.analysis.risk_set import (
    TIES,
    Sample,
    at_risk,
    increments,
    risk_set,
    sample,
    step_at,
    survival_steps,
)
from outcomes.analysis.survival import lost_track, reasons
from outcomes.errors import InputRefused

__all__ = ["compare_incidence", "cumulative_incidence"]

COLUMNS = (
    "group", "cause", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "censored", "n",
    "reason",
)  # fmt: skip
STILL = "still supported"
VARIANCES = {
    "aalen": "Aalen, multinomial increments",
    "infinitesimal_jackknife": "infinitesimal jackknife",
    "cmprsk": "Gray 1988 as in cmprsk",
}
_CITE = "Aalen OO, Johansen S. Scand J Stat 1978;5:141-150."
_VARIANCE_CITE = {
    "aalen": "Marubini E, Valsecchi MG. Analysing Survival Data from Clinical Trials. Wiley, 1995.",
    "infinitesimal_jackknife": "Efron B, Tibshirani RJ. J Am Stat Assoc 1997;92:548-560.",
    "cmprsk": "Gray RJ. Ann Stat 1988;16:1141-1154.",
}


def cumulative_incidence(time: Any, cause: Any, *, entry: Any = None, weights: Any = None, group: Any = None,
                         causes: Sequence[Any] | None = None, variance: str = "aalen",
                         interval: str = "cloglog", level: float = 0.95,
                         times: Sequence[float] | None = None, cluster: Any = None, known_at: Any = None,
                         still: str = STILL, time_unit: str = "") -> Result:  # fmt: skip
    """Probability of each ending by t with the others in play, and of none of them yet (rows `still`).

    time, entry, weights, group, cluster: shape (n,). cause: 0 or '' censored, else one of `causes` (labels or
    numbers; without `causes` the sorted ones that occur). variance: aalen (multinomial increments),
    infinitesimal_jackknife, cmprsk (no late entry). With `cluster`, the person of each run, it is the
    jackknife by person (aalen in a group of fewer than ten people). interval: cloglog (scale of survival with
    one cause), loglog, plain. known_at: when the group was known, as in `kaplan_meier`.

    Result: by group and cause a row at time 0, at every distinct event time of any cause, every asked time
    and the last observation. at_risk counts just before t; events (of this cause; of all in the rows `still`)
    and censored fall in (previous row, t]; n is everyone of the group. Causes and `still` add to 1. Every
    declared cause keeps its rows. F = 0: exact upper limit from everyone, or from those at risk at t if
    somebody was censored before or entered late (conservative). Codes as in `kaplan_meier`.

    Raises InputRefused (also for a cause that occurs and is not declared); NotEstimable no_runs,
    grouping_from_the_future.

    >>> r = cumulative_incidence([1, 2, 2, 3, 4, 5], ["A", "B", "", "A", "", "B"], causes=["A", "B"])
    >>> [round(float(v), 4) for v in r.table.loc[r.table["cause"] == "A", "estimate"]]
    [0.0, 0.1667, 0.1667, 0.3889, 0.3889]
    """
    probability(level)
    one_of(interval, "interval", tuple(INCIDENCE_SCALES))
    one_of(variance, "variance", tuple(VARIANCES))
    n = len(checked_times(time))
    named, code = causes_of(cause, n, causes)
    if still in named:
        raise InputRefused("causes", "a cause has the name of the rows without any ending")
    rows = sample(time, code, entry, weights, cluster)
    if variance == "cmprsk" and rows.is_late:
        raise InputRefused("variance", "the cmprsk variance has no delayed entry")
    kind = variance if cluster is None else "infinitesimal_jackknife"
    parts: list[pd.DataFrame] = []
    notes: list[Caution] = []
    for label, inside in groups(group, n, known_at):
        part = rows.pick(inside & (rows.weight > 0))
        if part.size == 0:
            parts.append(_empty(label, [*named, still]))
            continue
        few = part.who is not None and persons(part.who, 0) < FEW_PERSONS
        notes += [too_few(label)] if few else []
        curves = _Curves(part, len(named), asked_times(times), "aalen" if few else kind)
        parts += [curves.cause(label, name, k, interval, level) for k, name in enumerate(named)]
        parts.append(curves.still(label, still, interval, level))
    words = VARIANCES[kind] + (" by person" if cluster is not None else "")
    method = Method("Aalen–Johansen", words, INCIDENCE_SCALES[interval], level, TIES, time_unit,
                    (_CITE, _VARIANCE_CITE[kind]))  # fmt: skip
    found = {"n": int(rows.size), "events": int(rows.weight[code > 0].sum())}
    return Result(joined(parts, COLUMNS), method, found, (*notes, *few_repeats(rows.who)))


def _empty(label: str, names: Sequence[str]) -> pd.DataFrame:
    nothing = {"time": 0, "at_risk": 0, "events": 0, "censored": 0, "n": 0, "reason": "empty_group"}
    return tidy([{"group": label, "cause": name} | nothing for name in names], COLUMNS)


class _Curves:
    """One group: counts at the event times, all curves and their errors, and the grid of the answer."""

    def __init__(self, rows: Sample, n_causes: int, asked: Floats, variance: str) -> None:
        self.rows, everyone = rows, risk_set(rows, n_causes)
        self.c = everyone.at_events()
        self.at = np.unique(np.concatenate([[0.0], self.c.time, asked, everyone.time[-1:]]))
        self.s, terms = survival_steps(self.c)
        self.before = np.concatenate([[1.0], self.s[:-1]])[: len(self.s)]
        per_person = self.before / np.where(self.c.at_risk > 0, self.c.at_risk, 1.0)
        self.f = np.cumsum(per_person[:, None] * self.c.events, axis=0)
        self.error, self.spread = self._errors(variance), terms
        if variance == "infinitesimal_jackknife":
            self.error, of_s = jackknife_errors(rows, self.c)
            self.spread = (of_s / np.where(self.s > 0, self.s, 1.0)) ** 2
        self.n_at = at_risk(self.at, rows)
        self.gone = increments(self.at, everyone.time, everyone.censored)
        self.none_yet = step_at(self.at, self.c.time, self.s, 1.0)
        self.reason = reasons(self.at, self.none_yet, self.n_at, rows)
        self.hidden = (self.at > rows.time.max()) & (self.none_yet > 0)
        self.hidden |= lost_track(self.at, rows, self.c.time, self.s)
        self.binomial_n = self._binomial_n(everyone.time, everyone.censored)

    def _errors(self, variance: str) -> Floats:
        d, n = self.c.all_events, self.c.at_risk
        out = np.zeros(self.c.events.shape)
        for k in range(len(self.f.T) if variance != "infinitesimal_jackknife" else 0):
            dk, f = self.c.events[:, k], self.f[:, k]
            if variance == "cmprsk":
                out[:, k] = cmprsk_error(d, n, dk, self.before, self.s, f)
            else:
                out[:, k] = aalen_error(d, n, dk, self.before, f)
        return out

    def _binomial_n(self, time: Floats, censored: Floats) -> Floats:
        """Everyone watched beyond 0, if nobody was censored before t or entered late; else those at risk at
        t, or when the last of them had an ending."""
        ended = self.c.time[self.s <= 0]
        n = at_risk(np.minimum(self.at, ended[0]) if len(ended) else self.at, self.rows)
        if self.rows.is_late:
            return n
        unseen = float(censored[time == 0].sum())
        total = np.concatenate([[0.0], np.cumsum(censored)])
        before = total[np.searchsorted(time, self.at, side="left")]
        return np.where(before <= unseen, (self.rows.size - unseen) or self.rows.size, n)

    def cause(self, label: str, name: str, k: int, interval: str, level: float) -> pd.DataFrame:
        f = step_at(self.at, self.c.time, self.f[:, k], 0.0)
        error = step_at(self.at, self.c.time, self.error[:, k], 0.0)
        low, high = incidence_limits(f, error, level, interval)
        none, some = f <= 0, self.binomial_n >= 1
        low, high = np.where(none & some, 0.0, low), np.where(none, none_upper(self.binomial_n, level), high)
        reason = self.reason.copy()
        reason[(reason == "no_nonevents") & (f < 1)] = None
        new = increments(self.at, self.c.time, self.c.events[:, k])
        error = np.where(f < 1, error, np.nan)
        return self._frame(label, name, f, error, low, high, new, reason)

    def still(self, label: str, name: str, interval: str, level: float) -> pd.DataFrame:
        s, g = self.none_yet, step_at(self.at, self.c.time, self.spread, 0.0)
        low, high = survival_limits(s, g, level, "plain" if interval == "plain" else "log-log")
        sure = s >= 1
        low = np.where(sure, all_lower(self.n_at, level), low)
        high = np.where(sure & (self.n_at >= 1), 1.0, high)
        new = increments(self.at, self.c.time, self.c.all_events)
        error = np.where(s > 0, s * np.sqrt(g), np.nan)
        return self._frame(label, name, s, error, low, high, new, self.reason)

    def _frame(self, label: str, name: str, value: Floats, error: Floats, low: Floats, high: Floats,
               new: Floats, reason: Any) -> pd.DataFrame:  # fmt: skip
        numbers = {"estimate": value, "std_error": error, "lower": low, "upper": high}
        found: dict[str, object] = {
            "group": label, "cause": name, "time": self.at, "at_risk": self.n_at, "events": new,
            "censored": self.gone, "n": self.rows.size, "reason": reason,
        }  # fmt: skip
        return tidy_columns(
            found | {key: np.where(self.hidden, np.nan, v) for key, v in numbers.items()}, COLUMNS
        )
