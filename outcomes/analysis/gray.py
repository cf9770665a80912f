"""Gray's test: do the cumulative incidence curves of one ending differ between groups?"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from outcomes.analysis._input import Codes, Floats, causes_of, groups, labels, number, one_of, word
from outcomes.analysis._input import times as checked_times
from outcomes.analysis._score_test import chi_square
from outcomes.analysis.result import Method, Result, tidy
from outcomes.analysis.risk_set import TIES, Sample, at_risk, sample
from outcomes.errors import NotEstimable

COLUMNS = ("cause", "statistic", "df", "p_value", "events", "n", "reason")


def compare_incidence(time: Any, cause: Any, group: Any, *, causes: Sequence[Any] | None = None,
                      cause_of_interest: Any = None, strata: Any = None, rho: float = 0.0,
                      weights: Any = None, known_at: Any = None, time_unit: str = "") -> Result:  # fmt: skip
    """Gray's test of equal cumulative incidence, one row a cause (only one with `cause_of_interest`).

    time, cause, group, strata, weights: shape (n,); cause as in `cumulative_incidence`. rho weighs the score
    by (1 − F)^rho of the pooled curve. There is no form for late entry. It tests the incidence, so an ending
    that is only forestalled by another one shows too: read it beside the cause-specific log-rank test.

    Columns: cause, statistic (χ²), df, p_value, events (of the cause), n, reason. A cause without events:
    no_events; no two groups in a common stratum: no_overlap.

    Raises InputRefused; NotEstimable no_runs, one_group, grouping_from_the_future. Source: Gray 1988.

    >>> time, cause = [1, 1, 2, 3, 4, 5, 2, 3, 4, 5, 6, 6], [1, 1, 2, 1, 0, 1, 2, 1, 0, 2, 2, 0]
    >>> r = compare_incidence(time, cause, [0] * 6 + [1] * 6, cause_of_interest=1)
    >>> round(float(r.table["statistic"].iloc[0]), 6)
    3.163574
    """
    n = len(checked_times(time))
    named, code = causes_of(cause, n, causes)
    rows = sample(time, code, None, weights)
    power = number(rho, "rho", least=0.0)
    members = [inside & (rows.weight > 0) for _, inside in groups(group, n, known_at)]
    members = [m for m in members if m.any()]
    if len(members) < 2:
        raise NotEstimable("one_group", "there is only one group with runs")
    which = np.argmax(np.array(members), axis=0)
    layers = [np.ones(n, dtype=bool)] if strata is None else _layers(strata, n)
    wanted = (
        named if cause_of_interest is None else [one_of(word(cause_of_interest), "cause_of_interest", named)]
    )
    out = []
    for name in wanted:
        kind = np.where(code == 0, 0, np.where(code == named.index(name) + 1, 1, 2))
        events = float(rows.weight[kind == 1].sum())
        row: dict[str, object] = {"cause": name, "events": events, "n": rows.size}
        out.append(row | _test(rows, kind, which, layers, len(members), power))
    method = Method(f"Gray, rho {power:g}", "Gray 1988 as in cmprsk", "", 0.95, TIES, time_unit,
                    ("Gray RJ. Ann Stat 1988;16:1141-1154.",))  # fmt: skip
    return Result(tidy(out, COLUMNS), method, {"n": int(rows.size), "groups": len(members)})


def _layers(strata: Any, n: int) -> list[Any]:
    words = labels(strata, n, "strata")
    return [words == v for v in sorted(set(words))]


def _test(
    rows: Sample, kind: Codes, which: Codes, layers: list[Any], g: int, rho: float
) -> dict[str, object]:
    if not (rows.weight[kind == 1] > 0).any():
        return {"reason": "no_events"}
    score, covariance = np.zeros(g), np.zeros((g, g))
    for layer in layers:
        keep = layer & (rows.weight > 0)
        if keep.any():
            one = _Stratum(rows.pick(keep), kind[keep], which[keep], g, rho)
            score, covariance = score + one.score, covariance + one.variance()
    try:
        value, df, p = chi_square(score, covariance)
    except NotEstimable as none:
        return {"reason": none.reason_code}
    return {"statistic": value, "df": df, "p_value": p}


class _Stratum:
    """Score and covariance of one stratum, one pass over its event times.

    At each time, by group: r at risk, d1 events of interest, d2 others, s the Kaplan–Meier of all endings
    just before, f the incidence just before; h = r/s; pooled incidence f0 grows by D1/Σh. Parts of the
    variance that depend on the rest of the curve are kept in c, v2 and v3 and joined at the end.
    """

    def __init__(self, rows: Sample, kind: Codes, which: Codes, g: int, rho: float) -> None:
        self.score, self.v, self.c = np.zeros(g), np.zeros((g, g)), np.zeros((g, g))
        self.v2, self.v3 = np.zeros((g, g)), np.zeros(g)
        times = np.unique(rows.time[kind > 0])
        r = np.zeros((len(times), g))
        counts = np.zeros((len(times), g, 3))
        for i in range(g):
            inside = which == i
            r[:, i] = at_risk(times, rows.pick(inside))
            ended = inside & (kind > 0)
            place = np.searchsorted(times, rows.time[ended])
            np.add.at(counts[:, i], (place, kind[ended]), rows.weight[ended])
        s, f, f0 = np.ones(g), np.zeros(g), 0.0
        for j in range(len(times)):
            s, f, f0 = self._step(r[j], counts[j, :, 1], counts[j, :, 2], s, f, f0, rho)

    def _step(self, r: Floats, d1: Floats, d2: Floats, s: Floats, f: Floats, f0: float,
              rho: float) -> tuple[Floats, Floats, float]:  # fmt: skip
        some = r > 0
        safe = np.where(some, r, 1.0)
        after = np.where(some, s * (1 - (d1 + d2) / safe), s)
        h = np.where(some, r / np.where(some, s, 1.0), 0.0)
        total, of_interest, emphasis = float(h.sum()), float(d1.sum()), (1 - f0) ** rho
        next_f0 = f0 + of_interest / total
        share = h * (1 - f)
        if share.sum() > 0:
            self.score += emphasis * (d1 - of_interest * share / share.sum())
        a = (np.diag(h) - np.outer(h, h) / total) * emphasis
        if f0 < 1:
            self.c += a * of_interest / (total * (1 - f0))
        for k in map(int, np.flatnonzero(some)):
            rest = (1 - next_f0) / after[k] if after[k] > 0 else 0.0
            if of_interest > 0:
                c = _tied(of_interest, total * s[k])
                self._add(
                    k,
                    c * s[k] * of_interest / (total * r[k]),
                    1 - rest,
                    a[:, k] - (1 - rest) * self.c[:, k],
                    1,
                )
            if d2[k] > 0 and after[k] > 0:
                c = _tied(d2[k], r[k])
                self._add(k, c * s[k] ** 2 * d2[k] / r[k] ** 2, rest, rest * self.c[:, k], -1)
        return after, f + np.where(some, s * d1 / safe, 0.0), next_f0

    def _add(self, k: int, e: float, b: float, w: Floats, sign: int) -> None:
        self.v += e * np.outer(w, w)
        self.v2[:, k] += sign * e * b * w
        self.v3[k] += e * b * b

    def variance(self) -> Floats:
        cross = self.c @ self.v2.T
        return self.v + cross + cross.T + (self.c * self.v3) @ self.c.T


def _tied(d: float, n: float) -> float:
    """Hypergeometric factor of d events at one time among n."""
    return 1 - (d - 1) / (n - 1) if d > 1 and n > 1 else 1.0
