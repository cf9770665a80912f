"""Direct standardisation of a rate to the strata of a standard population."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.stats import chi2

from outcomes.analysis._input import Floats, counts, number, one_of, probability, same_length, times
from outcomes.analysis.intervals import garwood
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import InputRefused, NotEstimable

COLUMNS = ("estimate", "std_error", "lower", "upper", "crude", "events", "exposure", "reason")
INTERVALS = {
    "fay-feuer": ("Fay–Feuer gamma", "Fay MP, Feuer EJ. Stat Med 1997;16:791-801."),
    "tiwari": ("Tiwari gamma", "Tiwari RC, Clegg LX, Zou Z. Stat Methods Med Res 2006;15:547-569."),
    "dobson": ("Dobson", "Dobson AJ et al. Stat Med 1991;10:457-462."),
}
EXTREME = 5.0


def direct_standardisation(events: Any, population: Any, standard: Any, *, per: float = 1.0,
                           interval: str = "fay-feuer", level: float = 0.95) -> Result:  # fmt: skip
    """Rate that the standard's mix of strata would have had: Σ w x, w = standard share / population.

    events, population, standard: one value a stratum, shape (k,); population is exposure or runs,
    standard is scaled to shares. interval: fay-feuer, tiwari (less conservative), dobson.

    Columns: estimate, std_error, lower, upper, crude (all per `per`), events, exposure, reason. A weight
    more than five times the average one gives a caution: prefer the indirect ratio.

    Raises InputRefused; NotEstimable no_runs, zero_exposure, no_overlap (a stratum of the standard
    without population).

    >>> r = direct_standardisation([3, 5], [200, 150], [0.6, 0.4]).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper")]
    [0.022333, 0.009626, 0.044407]
    """
    probability(level)
    one_of(interval, "interval", tuple(INTERVALS))
    scale = number(per, "per", above=0.0)
    x, n, share = counts(events, "events"), times(population, "population"), times(standard, "standard")
    same_length(len(x), n, "population", "the events")
    same_length(len(x), share, "standard", "the events")
    if not len(x) or share.sum() <= 0:
        raise NotEstimable("no_runs", "there is no stratum to standardise to")
    if n.sum() <= 0:
        raise NotEstimable("zero_exposure", "nobody was at risk for any time")
    if ((n == 0) & (x > 0)).any():
        raise InputRefused("population", "a stratum has events and no population")
    if ((n == 0) & (share > 0)).any():
        raise NotEstimable("no_overlap", "a stratum of the standard is empty here")
    w = np.where(n > 0, share / share.sum() / np.where(n > 0, n, 1.0), 0.0)
    rate, variance, total = float(np.sum(w * x)), float(np.sum(w**2 * x)), int(x.sum())
    low, high = _limits(w, rate, variance, total, interval, level)
    row: dict[str, object] = {
        "estimate": rate * scale, "lower": low * scale, "upper": high * scale,
        "crude": total / float(n.sum()) * scale, "events": total, "exposure": float(n.sum()),
    }  # fmt: skip
    if variance > 0:
        row["std_error"] = float(np.sqrt(variance)) * scale
    words, source = INTERVALS[interval]
    method = Method("weighted rate", "Σw²x", words, level, citations=(source,))
    extreme = rate > 0 and w.max() * total / rate > EXTREME
    notes = (Caution("WEIGHT", "One stratum weighs more than five times the average: prefer observed over "
                     "expected."),) if extreme else ()  # fmt: skip
    return Result(tidy([row], COLUMNS), method, {"strata": len(x), "events": total}, notes)


def _limits(
    w: Floats, rate: float, variance: float, total: int, interval: str, level: float
) -> tuple[float, float]:
    tail = (1 - level) / 2
    if interval == "dobson" and total > 0:
        low, high = garwood(total, level)
        step = float(np.sqrt(variance / total))
        return max(0.0, rate + step * (low - total)), rate + step * (high - total)
    low = variance / (2 * rate) * float(chi2.ppf(tail, 2 * rate**2 / variance)) if variance > 0 else 0.0
    some = w[w > 0]
    if interval == "tiwari":
        more, squared = float(some.mean()), float(np.mean(some**2))
    else:
        more, squared = float(some.max()), float(some.max()) ** 2
    r, v = rate + more, variance + squared
    return low, v / (2 * r) * float(chi2.isf(tail, 2 * r**2 / v))
