"""Rates per time at risk: exact, mid-P and Byar limits, robust limits when runs differ or persons repeat."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.optimize import brentq
from scipy.stats import poisson

from outcomes.analysis._input import (
    Codes,
    Floats,
    cluster_codes,
    counts,
    number,
    one_of,
    probability,
    same_length,
    times,
    whole_count,
)
from outcomes.analysis._person import FEW_PERSONS, few_repeats, person_variance, persons, too_few
from outcomes.analysis.intervals import garwood, log_limits, z_of
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = (
    "estimate", "std_error", "lower", "upper", "lower_poisson", "upper_poisson", "events", "affected",
    "exposure", "at_risk", "phi", "reason",
)  # fmt: skip
INTERVALS = {
    "exact": ("Garwood", "Garwood F. Biometrika 1936;28:437-442."),
    "midp": ("mid-P", "Ulm K. Am J Epidemiol 1990;131:373-375."),
    "byar": ("Byar", "Rothman KJ, Boice JD. Epidemiologic Analysis with a Programmable Calculator. 1979."),
}
SPREAD = {
    "robust": ("log with robust SE", "Lin DY, Wei LJ. J Am Stat Assoc 1989;84:1074-1078."),
    "quasi": ("log with quasi-Poisson SE", "McCullagh P, Nelder JA. Generalized Linear Models. 1989."),
}
MANY_RUNS, DISPERSED = 10, 1.5


def incidence_rate(events: Any, exposure: Any, *, per: float = 1.0, variance: str = "auto",
                   cluster: Any = None, level: float = 0.95, time_unit: str = "") -> Result:  # fmt: skip
    """Events per `per` units of exposure.

    events, exposure: two totals, or one value a run, shape (n,), and then `cluster` may name the person
    of each run. variance: exact (Garwood), midp, byar; robust (by run, or by person with `cluster`) or
    quasi, which need one value a run; auto: robust if there are at least 10 runs and Pearson's φ exceeds
    1.5, or if at least 10 people have several runs, else exact. Robust limits need 10 runs or people:
    else Poisson ones, with a caution. Below 50 runs or people robust variances are multiplied by G/(G−1).

    Columns: estimate, std_error (of the rate), lower, upper, lower_poisson and upper_poisson (exact,
    beside any other), events, affected (runs with an event), exposure, at_risk (runs), phi. Zero events
    have an upper limit. Raises InputRefused; NotEstimable no_runs, zero_exposure.

    >>> r = incidence_rate(3, 1.2).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper")]
    [2.5, 0.51556, 7.306061]
    """
    probability(level)
    scale = number(per, "per", above=0.0)
    one_of(variance, "variance", ("auto", *INTERVALS, *SPREAD))
    runs = Runs.checked(events, exposure, cluster)
    if runs.time <= 0:
        raise NotEstimable("zero_exposure", "nobody was at risk for any time")
    if runs.single and variance in SPREAD:
        raise InputRefused("variance", f"{variance} limits need one value for each run")
    kind, notes = _choose(runs, variance)
    low, high = garwood(int(runs.total), level)
    reason: dict[str, object] = {}
    numbers: dict[str, Any] = {
        "estimate": runs.rate, "lower_poisson": low / runs.time, "upper_poisson": high / runs.time,
    }  # fmt: skip
    if kind in SPREAD:
        error = runs.log_error(kind)
        found = log_limits(runs.rate, error, level)
        numbers |= {"std_error": runs.rate * error, "lower": found["lower"], "upper": found["upper"]}
        reason = {"reason": found.get("reason")}
        words, source = SPREAD[kind]
        name = (
            "quasi-Poisson" if kind == "quasi" else "robust by " + ("run" if runs.who is None else "person")
        )
    else:
        low, high = count_limits(int(runs.total), kind, level)
        numbers |= {"lower": low / runs.time, "upper": high / runs.time}
        numbers |= {"std_error": float(np.sqrt(runs.total)) / runs.time} if runs.total else {}
        (words, source), name = INTERVALS[kind], "Poisson"
    shown = {key: None if value is None else value * scale for key, value in numbers.items()} | reason
    method = Method("events / exposure", name, words, level, "", time_unit, (source,))
    return Result(
        tidy([shown | runs.described()], COLUMNS), method, runs.counted(), (*notes, *few_repeats(runs.who))
    )


@dataclass(frozen=True)
class Runs:
    """x events and t exposure of each run; of one single total if `single`."""

    x: Floats
    t: Floats
    who: Codes | None
    single: bool

    @classmethod
    def checked(cls, events: Any, exposure: Any, cluster: Any) -> Runs:
        if np.ndim(events) == 0:
            if cluster is not None:
                raise InputRefused("cluster", "persons need one value for each run")
            time = number(exposure, "exposure", least=0.0)
            return cls(np.array([float(whole_count(events, "events"))]), np.array([time]), None, True)
        x, t = counts(events, "events"), times(exposure, "exposure")
        same_length(len(x), t, "exposure", "the events")
        if not len(x):
            raise NotEstimable("no_runs", "no run is at risk")
        return cls(x, t, cluster_codes(cluster, len(x)), False)

    @property
    def total(self) -> float:
        return float(self.x.sum())

    @property
    def time(self) -> float:
        return float(self.t.sum())

    @property
    def rate(self) -> float:
        return self.total / self.time

    def pearson(self) -> float:
        """Σ (n − RT)²/(RT) over the exposed runs."""
        seen = self.t > 0
        expected = self.rate * self.t[seen]
        return float(np.sum((self.x[seen] - expected) ** 2 / expected))

    def log_error(self, kind: str) -> float:
        """Standard error of the log rate: √Σ residual²/x over runs or persons, or √(φ/x)."""
        if kind == "quasi":
            return float(np.sqrt((dispersion(self.x, self.t) or 1.0) / self.total))
        return float(np.sqrt(person_variance(self.x - self.rate * self.t, self.who))) / self.total

    def described(self) -> dict[str, object]:
        row: dict[str, object] = {"events": self.total, "exposure": self.time}
        if self.single:
            return row
        return row | {
            "affected": int((self.x > 0).sum()),
            "at_risk": len(self.x),
            "phi": dispersion(self.x, self.t),
        }

    def counted(self) -> dict[str, int]:
        found = {"events": int(self.total)}
        found |= {} if self.single else {"runs": len(self.x)}
        return found if self.who is None else found | {"persons": persons(self.who, 0)}


def _choose(runs: Runs, variance: str) -> tuple[str, tuple[Caution, ...]]:
    """The kind of limits that will be printed, and why if it is not the one asked for."""
    if variance in INTERVALS:
        return variance, ()
    if runs.single or runs.total == 0:
        return "exact", ()
    independent = persons(runs.who, len(runs.x))
    if variance == "auto":
        phi = dispersion(runs.x, runs.t)
        spread = phi is not None and phi > DISPERSED and len(runs.x) >= MANY_RUNS
        again = runs.who is not None and int((np.bincount(runs.who) > 1).sum()) >= FEW_PERSONS
        return ("robust" if (spread or again) and independent >= FEW_PERSONS else "exact"), ()
    if independent < FEW_PERSONS and variance == "robust":
        return "exact", (too_few(),)
    if variance == "quasi" and not dispersion(runs.x, runs.t):
        return "exact", (
            Caution("DISPERSION", "With one run, or none that differs, there is no over-dispersion."),
        )
    return variance, ()


def dispersion(x: Floats, t: Floats) -> float | None:
    """Pearson's φ of counts against one common rate; None with fewer than two exposed runs or no event."""
    seen = t > 0
    total, time = float(x[seen].sum()), float(t[seen].sum())
    if seen.sum() < 2 or total == 0:
        return None
    expected = total / time * t[seen]
    return float(np.sum((x[seen] - expected) ** 2 / expected) / (seen.sum() - 1))


def count_limits(x: int, interval: str, level: float) -> tuple[float, float]:
    """Limits of a Poisson count: exact, byar or midp."""
    if interval == "exact":
        return garwood(x, level)
    if interval == "byar":
        z = z_of(level)
        low = x * (1 - 1 / (9 * x) - z / (3 * np.sqrt(x))) ** 3 if x else 0.0
        return max(0.0, float(low)), float((x + 1) * (1 - 1 / (9 * (x + 1)) + z / (3 * np.sqrt(x + 1))) ** 3)
    if x == 0:
        return 0.0, float(-np.log(1 - level))
    tail = (1 - level) / 2
    below, above = garwood(x, level)
    low = _root(lambda m: poisson.sf(x, m) + 0.5 * poisson.pmf(x, m) - tail, below * 0.5, above)
    high = _root(lambda m: poisson.cdf(x - 1, m) + 0.5 * poisson.pmf(x, m) - tail, below, above * 1.5)
    return low, high


def _root(function: Any, low: float, high: float) -> float:
    return float(brentq(function, low, high, xtol=1e-13, rtol=1e-14))


BAND_COLUMNS = ("group", *COLUMNS)


def rate_by_band(stop: Any, run: Any, onset: Any, *, edges: Sequence[float], start: Any = None,
                 per: float = 1.0, level: float = 0.95, time_unit: str = "") -> Result:  # fmt: skip
    """Rates in bands of time since time zero that were fixed before looking; one row a band.

    stop (and start): end (and beginning) of each run's time at risk, shape (n,). run, onset: for each
    event the place of its run (0 … n−1) and its time, within (start, stop]. edges: ascending, e.g. 0, 24,
    72; the last band is open. An event exactly at an edge belongs to the earlier band. The bands' hours
    add to the total.

    Columns as in `incidence_rate` (exact limits), group being the band, e.g. '24 to 72' or '72 on'. A
    band that nobody reached: zero_exposure. Raises InputRefused; NotEstimable no_runs.
    """
    end = times(stop, "stop")
    if not len(end):
        raise NotEstimable("no_runs", "no run is at risk")
    begin = np.zeros(len(end)) if start is None else same_length(len(end), times(start, "start"), "start")
    borders = times(edges, "edges")
    if (end < begin).any() or not len(borders) or (np.diff(borders) <= 0).any():
        raise InputRefused("edges", "edges must ascend, and no run may stop before it starts")
    which, when = counts(run, "run").astype(int), times(onset, "onset")
    same_length(len(which), when, "onset", "the runs of the events")
    if (which >= len(end)).any() or (when <= begin[which]).any() or (when > end[which]).any():
        raise InputRefused("onset", "an event lies outside its run")
    if (begin < borders[0]).any():
        raise InputRefused("edges", "a run starts before the first edge")
    tops = np.concatenate([borders[1:], [np.inf]])
    rows, method = (
        [],
        Method("events / exposure", "Poisson", "Garwood", level, "", time_unit, (INTERVALS["exact"][1],)),
    )
    for low, high in zip(borders, tops, strict=True):
        hours = np.clip(np.minimum(end, high) - np.maximum(begin, low), 0.0, None)
        events = np.bincount(which[(when > low) & (when <= high)], minlength=len(end)).astype(float)
        label = {"group": f"{low:g} on" if np.isinf(high) else f"{low:g} to {high:g}"}
        reached = hours > 0
        if not reached.any():
            rows.append(label | {"events": 0, "exposure": 0, "at_risk": 0, "reason": "zero_exposure"})
            continue
        one = incidence_rate(events[reached], hours[reached], per=per, variance="exact", level=level)
        rows.append(label | one.table.iloc[0].to_dict())
    return Result(tidy(rows, BAND_COLUMNS), method, {"runs": len(end), "events": len(when)})
