"""Rates per time at risk: exact, mid-P and Byar limits, robust limits when runs differ or persons repeat; O/E."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq
from scipy.stats import chi2, poisson

from outcomes.analysis._input import Floats, floats, probability, whole_count
from outcomes.analysis.intervals import z_of
from outcomes.analysis.proportion import proportion, proportion_difference
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

__all__ = ["incidence_rate", "proportion", "proportion_difference", "standardised_ratio"]

COLUMNS = ("estimate", "std_error", "lower", "upper", "events", "exposure", "at_risk", "phi", "reason")
INTERVALS = {
    "exact": ("Garwood", "Garwood F. Biometrika 1936;28:437-442."),
    "mid_p": ("mid-P", "Ulm K. Am J Epidemiol 1990;131:373-375."),
    "byar": ("Byar", "Rothman KJ, Boice JD. Epidemiologic Analysis with a Programmable Calculator. 1979."),
}
_ROBUST = "Lin DY, Wei LJ. J Am Stat Assoc 1989;84:1074-1078."
MANY_RUNS, DISPERSED, FEW_PERSONS = 10, 1.5, 10


def incidence_rate(events: Any, exposure: Any, *, per: float = 1.0, variance: str = "auto", interval: str = "exact",
                   cluster: Any = None, level: float = 0.95) -> Result:  # fmt: skip
    """Events per `per` units of exposure.

    events, exposure: two numbers, or one value a run (shape (n,)). variance: poisson, robust (by run, or by person with
    `cluster`), or auto: robust if there are at least 10 runs and Pearson's phi exceeds 1.5, or if at least 10
    persons have several runs; else poisson. Two numbers are always poisson. interval: exact (Garwood, default), mid_p, byar for poisson.

    Columns: estimate, std_error (of the rate), lower, upper, events, exposure, at_risk (runs), phi. Zero events always
    have an upper limit. Raises InputRefused; NotEstimable no_runs, zero_exposure.

    >>> r = incidence_rate(3, 1.2).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper")]
    [2.5, 0.51556, 7.306061]
    """
    probability(level)
    if interval not in INTERVALS or variance not in ("auto", "poisson", "robust"):
        raise InputRefused("interval", "interval is exact, mid_p or byar; variance is auto, poisson or robust")
    if np.ndim(events) == 0:
        return _simple(whole_count(events, "events"), _exposure(exposure), per, interval, level, None)
    x, t, who = _rows(events, exposure, cluster)
    total, time = float(x.sum()), float(t.sum())
    if time <= 0:
        raise NotEstimable("zero_exposure", "nobody was at risk for any time")
    phi = dispersion(x, t)
    repeats = who is not None and int((np.bincount(who) > 1).sum()) >= FEW_PERSONS
    wanted = variance == "robust" or (variance == "auto" and (repeats or (len(x) >= MANY_RUNS and phi is not None and phi > DISPERSED)))
    if not wanted or total == 0:
        return _simple(int(total), time, per, interval, level, (len(x), phi))
    return _robust(x, t, who, per, level, phi)


def _rows(events: Any, exposure: Any, cluster: Any) -> tuple[Floats, Floats, npt.NDArray[np.int64] | None]:
    x, t = floats(events, "events"), floats(exposure, "exposure")
    if len(x) != len(t):
        raise InputRefused("length", "events and exposure have different lengths")
    if not len(x):
        raise NotEstimable("no_runs", "no run is at risk")
    if (x < 0).any() or (x != np.floor(x)).any() or (t < 0).any():
        raise InputRefused("count", "events are whole numbers and exposures are not negative")
    if cluster is None:
        return x, t, None
    persons = np.asarray(cluster, dtype=object)
    if len(persons) != len(x):
        raise InputRefused("length", "cluster has another length than events")
    order = {p: i for i, p in enumerate(sorted({str(p) for p in persons}))}
    return x, t, np.array([order[str(p)] for p in persons], dtype=np.int64)


def _exposure(value: Any) -> float:
    time = float(value)
    if not np.isfinite(time) or time < 0:
        raise InputRefused("exposure", "exposure must be a number, not negative")
    if time == 0:
        raise NotEstimable("zero_exposure", "nobody was at risk for any time")
    return time


def _simple(x: int, time: float, per: float, interval: str, level: float, runs: tuple[int, float | None] | None) -> Result:
    low, high = count_limits(x, interval, level)
    row: dict[str, object] = {
        "estimate": x / time * per, "std_error": np.sqrt(x) / time * per if x else None, "lower": low / time * per,
        "upper": high / time * per, "events": x, "exposure": time,
    }  # fmt: skip
    if runs is not None:
        row |= {"at_risk": runs[0], "phi": runs[1]}
    words, source = INTERVALS[interval]
    return Result(tidy([row], COLUMNS), Method("events / exposure", "Poisson", words, level, citations=(source,)), {"events": x})


def _robust(x: Floats, t: Floats, who: npt.NDArray[np.int64] | None, per: float, level: float, phi: float | None) -> Result:
    """log rate ± z SE, SE² = Σ (residual of a run or person)² / x², times G/(G−1) when there are fewer than 50."""
    total, time = float(x.sum()), float(t.sum())
    rate = total / time
    residual = x - rate * t
    if who is not None:
        residual = np.bincount(who, weights=residual)
    size = len(residual)
    squared = float(np.sum(residual**2)) / total**2
    corrected = squared * size / (size - 1) if 1 < size < 50 else squared
    error = float(np.sqrt(corrected))
    factor = float(np.exp(z_of(level) * error))
    row = {
        "estimate": rate * per, "std_error": rate * per * error, "lower": rate * per / factor, "upper": rate * per * factor,
        "events": total, "exposure": time, "at_risk": len(x), "phi": phi,
    }  # fmt: skip
    notes = ()
    if who is not None and size < FEW_PERSONS:
        notes = (Caution("FEW-PERSONS", "Fewer than ten people: the interval by person is not reliable."),)
    by = "robust by person" if who is not None else "robust by run"
    method = Method("events / exposure", by, "log rate", level, citations=(_ROBUST,))
    return Result(tidy([row], COLUMNS), method, {"events": int(total)}, notes)


def dispersion(x: Floats, t: Floats) -> float | None:
    """Pearson's phi of counts against one common rate; None with one run or no event."""
    seen = t > 0
    total, time = float(x[seen].sum()), float(t[seen].sum())
    if seen.sum() < 2 or total == 0:
        return None
    expected = total / time * t[seen]
    return float(np.sum((x[seen] - expected) ** 2 / expected) / (seen.sum() - 1))


def count_limits(x: int, interval: str, level: float) -> tuple[float, float]:
    """Limits of a Poisson count."""
    tail = (1 - level) / 2
    if interval == "exact":
        return (0.5 * float(chi2.ppf(tail, 2 * x)) if x else 0.0), 0.5 * float(chi2.ppf(1 - tail, 2 * x + 2))
    if interval == "byar":
        z = z_of(level)
        low = x * (1 - 1 / (9 * x) - z / (3 * np.sqrt(x))) ** 3 if x else 0.0
        return float(low), float((x + 1) * (1 - 1 / (9 * (x + 1)) + z / (3 * np.sqrt(x + 1))) ** 3)
    if x == 0:
        return 0.0, float(-np.log(1 - level))
    top = 4 * x + 40.0
    low = brentq(lambda m: poisson.sf(x, m) + 0.5 * poisson.pmf(x, m) - tail, 1e-12, top, xtol=1e-13, rtol=1e-14)
    high = brentq(lambda m: poisson.cdf(x - 1, m) + 0.5 * poisson.pmf(x, m) - tail, 1e-12, top, xtol=1e-13, rtol=1e-14)
    return float(low), float(high)


def standardised_ratio(observed: Any, expected: Any, *, interval: str = "exact", level: float = 0.95) -> Result:
    """Observed / expected with limits of the observed count; expected is treated as known.

    Raises InputRefused; NotEstimable zero_expected.

    >>> r = standardised_ratio(17, 11.4).table.iloc[0]
    >>> [round(float(r[c]), 4) for c in ("estimate", "lower", "upper")]
    [1.4912, 0.8687, 2.3876]
    """
    x, e = whole_count(observed, "observed"), float(expected)
    if not np.isfinite(e) or e < 0:
        raise InputRefused("expected", "expected must be a number, not negative")
    if e == 0:
        raise NotEstimable("zero_expected", "nothing was expected")
    if interval not in INTERVALS:
        raise InputRefused("interval", "interval must be one of " + ", ".join(INTERVALS))
    low, high = count_limits(x, interval, probability(level))
    words, source = INTERVALS[interval]
    row = {"estimate": x / e, "lower": low / e, "upper": high / e, "events": x, "exposure": e}
    table = tidy([row], ("estimate", "lower", "upper", "events", "exposure", "reason"))
    return Result(table, Method("observed / expected, expected known", "Poisson in the observed count", words, level, citations=(source,)), {"events": x})
