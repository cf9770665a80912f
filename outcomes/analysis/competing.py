"""Competing endings: Aalen–Johansen, exact under ties, with delayed entry and weights; three variances by name."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
from scipy.stats import beta

from outcomes.analysis._input import Floats, asked_times, entries, frequency_weights, groups, need_rows, probability, times as checked_times
from outcomes.analysis.intervals import incidence_limits, survival_limits
from outcomes.analysis.result import Method, Result, tidy
from outcomes.analysis.risk_set import RiskSet, at_risk, risk_set, running, step_at
from outcomes.analysis.survival import TIES
from outcomes.errors import InputRefused

COLUMNS = ("group", "cause", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "censored", "n", "reason")
STILL = "still supported"
VARIANCES = {
    "aalen": "Aalen (multinomial increments)",
    "cmprsk": "Gray 1988, as in cmprsk",
    "infinitesimal_jackknife": "infinitesimal jackknife",
}
_CITE = ("Aalen OO, Johansen S. Scand J Stat 1978;5:141-150.",)
_VARIANCE_CITE = {
    "aalen": "Marubini E, Valsecchi MG. Analysing Survival Data from Clinical Trials. Wiley, 1995.",
    "cmprsk": "Gray RJ. Ann Stat 1988;16:1141-1154.",
    "infinitesimal_jackknife": "Efron B, Tibshirani RJ. J Am Stat Assoc 1997;92:548-560.",
}


def cumulative_incidence(time: Any, cause: Any, *, entry: Any = None, weights: Any = None, group: Any = None,
                         causes: Sequence[Any] | None = None, variance: str = "aalen", interval: str = "log-log",
                         level: float = 0.95, times: Sequence[float] | None = None, still: str = STILL,
                         time_unit: str = "") -> Result:  # fmt: skip
    """Probability of each ending by t with the others in play, and of none of them yet (row `still`).

    time, entry, weights, group: shape (n,). cause: 0 or '' censored, else one of `causes` (labels or numbers; without
    `causes` the sorted ones that occur). Every cause keeps its rows whether or not it occurs.

    Result: per group, cause and time (0, every distinct event time of any cause, every asked time) the estimate, its
    standard error and limits on log(−log(1−F)); at_risk just before t, events of this cause and censorings since the row
    before, n = everyone of the group. Sum over the causes and `still` is 1. At F = 0 the upper limit is the exact
    binomial one with the number at time zero (with the number at risk at t if anyone was censored before: conservative).

    Raises InputRefused (also for a cause that is present and not named); NotEstimable no_runs.

    >>> r = cumulative_incidence([1, 2, 2, 3, 4, 5], ["A", "B", "", "A", "", "B"], causes=["A", "B"])
    >>> [round(float(v), 4) for v in r.table.loc[r.table["cause"] == "A", "estimate"]]
    [0.0, 0.1667, 0.1667, 0.3889, 0.3889]
    """
    t = checked_times(time)
    need_rows(len(t))
    probability(level)
    if variance not in VARIANCES:
        raise InputRefused("variance", "variance must be one of " + ", ".join(VARIANCES))
    labels, code = cause_numbers(cause, len(t), causes)
    e, w = entries(entry, t), frequency_weights(weights, len(t))
    if variance == "cmprsk" and not np.isneginf(e).all():
        raise InputRefused("variance", "the cmprsk variance has no delayed entry")
    asked = asked_times(times)
    rows: list[dict[str, object]] = []
    for label, inside in groups(group, len(t)):
        part = _Part(label, t[inside], code[inside], e[inside], w[inside], labels, asked)
        rows += part.rows(variance, interval, level, still)
    method = Method("Aalen-Johansen", VARIANCES[variance], "log(-log(1-F))" if interval == "log-log" else interval, level, TIES, time_unit,
                    (*_CITE, _VARIANCE_CITE[variance]))  # fmt: skip
    return Result(tidy(rows, COLUMNS), method, {"n": int(w.sum()), "events": int(w[code > 0].sum())})


def cause_numbers(cause: Any, n: int, causes: Sequence[Any] | None) -> tuple[list[str], npt.NDArray[np.int64]]:
    """Labels of the causes and the code 0 (censored), 1 … k of every row."""
    raw = np.asarray(cause, dtype=object)
    if raw.ndim != 1 or len(raw) != n:
        raise InputRefused("length", "cause has another length than the times")
    if any(v is None or v != v for v in raw):
        raise InputRefused("not_finite", "cause has a missing value; 0 or an empty text means censored")
    words = [_word(v) for v in raw]
    named = [_word(c) for c in causes] if causes is not None else sorted(set(words) - {""})
    if len(set(named)) != len(named) or "" in named:
        raise InputRefused("causes", "causes must be distinct and none of them may be the code of censoring")
    place = {"": 0, **{c: i + 1 for i, c in enumerate(named)}}
    unknown = set(words) - place.keys()
    if unknown:
        raise InputRefused("event_code", f"{len(unknown)} causes occur that are not named")
    return named, np.array([place[v] for v in words], dtype=np.int64)


def _word(value: Any) -> str:
    if isinstance(value, str):
        return value
    number = float(value)
    return "" if number == 0 else str(int(number)) if number == int(number) else str(number)


class _Part:
    """One group: counts, the survival of all causes together and the incidences, on the grid of the answer."""

    def __init__(self, label: str, t: Floats, code: npt.NDArray[np.int64], e: Floats, w: Floats, labels: list[str], asked: Floats) -> None:
        self.label, self.labels = label, labels
        self.t, self.code, self.e, self.w = t, code, e, w
        c = risk_set(t, code, len(labels), e, w)
        keep = c.all_events > 0
        self.all = c
        self.c = RiskSet(c.time[keep], c.at_risk[keep], c.events[keep], c.censored[keep], c.n)
        d, n = self.c.all_events, self.c.at_risk
        self.survival = np.cumprod(1 - d / n)
        self.before = np.concatenate([[1.0], self.survival[:-1]])
        self.incidence = np.cumsum(self.before[:, None] * self.c.events / n[:, None], axis=0)
        self.at = np.unique(np.concatenate([[0.0], self.c.time, asked]))

    def rows(self, variance: str, interval: str, level: float, still: str) -> list[dict[str, object]]:
        out: list[dict[str, object]] = []
        n_at = at_risk(self.at, self.t, self.e, self.w)
        n_at[self.at == 0] = self.w[np.isneginf(self.e)].sum()
        gone = np.diff(np.concatenate([[0.0], running(self.at, self.all.time, self.all.censored)]))
        for k, name in enumerate(self.labels):
            f = step_at(self.at, self.c.time, self.incidence[:, k], 0.0)
            se = step_at(self.at, self.c.time, self._std_error(k, variance), 0.0)
            low, high = incidence_limits(f, se, level, interval)
            new = np.diff(np.concatenate([[0.0], running(self.at, self.c.time, self.c.events[:, k])]))
            out += self._cause_rows(name, f, se, low, high, n_at, new, gone, level)
        return out + self._still_rows(still, n_at, gone, level)

    def _cause_rows(self, name: str, f: Floats, se: Floats, low: Floats, high: Floats, n_at: Floats, new: Floats, gone: Floats, level: float) -> list[dict[str, object]]:
        rows = []
        for i, moment in enumerate(self.at):
            row = self._row(name, moment, f[i], n_at[i], new[i], gone[i])
            if row.get("reason"):
                rows.append(row)
            elif f[i] <= 0:
                n = self._binomial_n(moment, n_at[i])
                rows.append(row | {"std_error": 0.0, "lower": 0.0, "upper": float(beta.ppf(0.5 + level / 2, 1, n)) if n >= 1 else None})
            elif f[i] >= 1:
                rows.append(row | {"reason": "no_nonevents"})
            else:
                rows.append(row | {"std_error": se[i], "lower": low[i], "upper": high[i]})
        return rows

    def _still_rows(self, still: str, n_at: Floats, gone: Floats, level: float) -> list[dict[str, object]]:
        d, n = self.c.all_events, self.c.at_risk
        with np.errstate(divide="ignore"):
            g = np.cumsum(np.where(n > d, d / (n * np.where(n > d, n - d, 1)), 0.0))
        s = step_at(self.at, self.c.time, self.survival, 1.0)
        spread = step_at(self.at, self.c.time, g, 0.0)
        low, high = survival_limits(s, spread, level, "log-log")
        new = np.diff(np.concatenate([[0.0], running(self.at, self.c.time, d)]))
        rows = []
        for i, moment in enumerate(self.at):
            row = self._row(still, moment, s[i], n_at[i], new[i], gone[i])
            if row.get("reason"):
                rows.append(row)
            elif s[i] >= 1:
                lower = float(beta.ppf((1 - level) / 2, n_at[i], 1)) if n_at[i] >= 1 else None
                rows.append(row | {"std_error": 0.0, "lower": lower, "upper": 1.0 if lower is not None else None})
            elif s[i] <= 0:
                rows.append(row | {"reason": "no_nonevents"})
            else:
                rows.append(row | {"std_error": s[i] * float(np.sqrt(spread[i])), "lower": low[i], "upper": high[i]})
        return rows

    def _row(self, name: str, moment: float, value: float, n_at: float, new: float, gone: float) -> dict[str, object]:
        row: dict[str, object] = {"group": self.label, "cause": name, "time": moment, "estimate": value, "at_risk": n_at,
                                  "events": new, "censored": gone, "n": self.c.n}  # fmt: skip
        left = step_at(np.array([moment]), self.c.time, self.survival, 1.0)[0]
        if moment > self.t.max() and left > 1e-15:
            row |= {"estimate": None, "reason": "beyond_follow_up"}
        return row

    def _binomial_n(self, moment: float, n_at: float) -> float:
        """Everyone, if nobody was censored or entered late before t; else those at risk at t."""
        whole = np.isneginf(self.e).all() and not self.w[(self.t < moment) & (self.code == 0)].sum()
        return self.c.n if whole else n_at

    def _std_error(self, k: int, variance: str) -> Floats:
        if variance == "infinitesimal_jackknife":
            return jackknife_error(self.t, self.code, self.e, self.w, self.c, k)
        d, n, dk, s = self.c.all_events, self.c.at_risk, self.c.events[:, k], self.before
        f = self.incidence[:, k]
        return aalen_error(d, n, dk, s, f) if variance == "aalen" else cmprsk_error(d, n, dk, s, self.survival, f)


def aalen_error(d: Floats, n: Floats, dk: Floats, s: Floats, f: Floats) -> Floats:
    """Var = Σ D² d/(n(n−d)) + Σ S(u−)² dk(n−dk)/n³ − 2 Σ D S(u−) dk/n², D = F(t) − F(u); a term with D = 0 is 0."""
    rest = n - d
    a = np.where(rest > 0, d / (n * np.where(rest > 0, rest, 1)), 0.0)
    b, q = s**2 * dk * (n - dk) / n**3, s * dk / n**2
    # With D = F(t) − F(u) each sum is a polynomial in F(t) of running sums, so all t take one pass.
    a0, a1, a2 = np.cumsum(a), np.cumsum(a * f), np.cumsum(a * f**2)
    q0, q1, b0 = np.cumsum(q), np.cumsum(q * f), np.cumsum(b)
    variance = f**2 * a0 - 2 * f * a1 + a2 + b0 - 2 * (f * q0 - q1)
    return np.sqrt(np.maximum(variance, 0.0))


def cmprsk_error(d: Floats, n: Floats, dk: Floats, s: Floats, after: Floats, f: Floats) -> Floats:
    """The recursion of Gray 1988 as R cmprsk prints it; slightly larger, in tiny samples much."""
    v = v1 = v2 = 0.0
    out = np.empty(len(d))
    for i in range(len(d)):
        other = d[i] - dk[i]
        for count, own in ((other, False), (dk[i], True)):
            if count <= 0 or (not own and after[i] <= 0):
                continue
            c = 1 - (count - 1) / (n[i] - 1) if n[i] > 1 else 1.0
            h = s[i] ** 2 * c * count / n[i] ** 2
            b = 1 / after[i] if after[i] > 0 else 0.0
            a = 1 + b * f[i] if own else f[i] * b
            v, v1, v2 = v + a * a * h, v1 + a * b * h, v2 + b * b * h
        out[i] = max(v + f[i] ** 2 * v2 - 2 * f[i] * v1, 0.0)
    return np.sqrt(out)


def jackknife_error(t: Floats, code: npt.NDArray[np.int64], e: Floats, w: Floats, c: RiskSet, k: int) -> Floats:
    """Square root of the summed squared influences of the rows on F_k; a weight counts as that many rows."""
    psi_s, psi_f = np.zeros(len(t)), np.zeros(len(t))
    s = 1.0
    out = np.empty(len(c.time))
    for i, u in enumerate(c.time):
        n, d, dk = c.at_risk[i], c.all_events[i], c.events[i, k]
        inside = (e < u) & (t >= u)
        here = t == u
        a = (here & (code > 0)) - inside * d / n
        b = (here & (code == k + 1)) - inside * dk / n
        psi_f = psi_f + psi_s * dk / n + s * b / n
        psi_s = psi_s * (1 - d / n) - s * a / n
        s *= 1 - d / n
        out[i] = np.sqrt(np.sum(w * psi_f**2))
    return out
