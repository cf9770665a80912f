"""Pointwise limits of survival and cumulative incidence on several scales, and exact ones of counts."""

from __future__ import annotations

import numpy as np
from scipy.stats import chi2, norm

from outcomes.analysis._input import Floats, one_of

SURVIVAL_SCALES = ("log-log", "log", "plain", "arcsine")
TOO_WIDE = 300.0
INCIDENCE_SCALES = {"cloglog": "log(−log(1−F))", "loglog": "log(−log F)", "plain": "plain"}


def z_of(level: float) -> float:
    """Two-sided normal quantile.

    >>> round(z_of(0.95), 6)
    1.959964
    """
    return float(norm.ppf(0.5 + level / 2))


def survival_limits(s: Floats, g: Floats, level: float, scale: str) -> tuple[Floats, Floats]:
    """Limits of S from g = Var(S)/S². NaN where S is 0 or 1: no scale gives an interval there.

    Source: Kalbfleisch & Prentice 1980 (log-log); Borgan & Liestøl 1990 (arcsine).
    """
    one_of(scale, "interval", SURVIVAL_SCALES)
    z = z_of(level)
    inside = (s > 0) & (s < 1)
    p, root = np.where(inside, s, 0.5), np.sqrt(np.where(inside, g, 0.0))
    if scale == "log-log":
        v = z * root / np.abs(np.log(p))
        with np.errstate(over="ignore"):
            low, high = p ** np.exp(v), p ** np.exp(-v)
    elif scale == "log":
        low, high = p * np.exp(-z * root), p * np.exp(z * root)
    elif scale == "plain":
        low, high = p - z * p * root, p + z * p * root
    else:
        half = 0.5 * z * np.sqrt(p * root**2 / (1 - p))
        angle = np.arcsin(np.sqrt(p))
        low = np.sin(np.maximum(0, angle - half)) ** 2
        high = np.sin(np.minimum(np.pi / 2, angle + half)) ** 2
    return np.where(inside, np.clip(low, 0, 1), np.nan), np.where(inside, np.clip(high, 0, 1), np.nan)


def incidence_limits(f: Floats, se: Floats, level: float, scale: str) -> tuple[Floats, Floats]:
    """Limits of a cumulative incidence. cloglog: on log(−log(1−F)), the scale of survival with one cause;
    loglog: on log(−log F); plain. NaN where F is 0 or 1."""
    one_of(scale, "interval", tuple(INCIDENCE_SCALES))
    z = z_of(level)
    inside = (f > 0) & (f < 1)
    p, e = np.where(inside, f, 0.5), np.where(inside, se, 0.0)
    with np.errstate(over="ignore"):
        if scale == "cloglog":
            v = z * e / ((1 - p) * np.abs(np.log1p(-p)))
            low, high = 1 - (1 - p) ** np.exp(-v), 1 - (1 - p) ** np.exp(v)
        elif scale == "loglog":
            v = z * e / (p * np.abs(np.log(p)))
            low, high = p ** np.exp(v), p ** np.exp(-v)
        else:
            low, high = p - z * e, p + z * e
    return np.where(inside, np.clip(low, 0, 1), np.nan), np.where(inside, np.clip(high, 0, 1), np.nan)


def logit_limits(p: Floats, se: Floats, level: float) -> tuple[Floats, Floats]:
    """Limits on the logit scale. NaN where p is 0 or 1."""
    inside = (p > 0) & (p < 1)
    q, e = np.where(inside, p, 0.5), np.where(inside, se, 0.0)
    half, centre = z_of(level) * e / (q * (1 - q)), np.log(q) - np.log1p(-q)
    with np.errstate(over="ignore"):
        low, high = 1 / (1 + np.exp(half - centre)), 1 / (1 + np.exp(-half - centre))
    return np.where(inside, low, np.nan), np.where(inside, high, np.nan)


def log_limits(value: float, error: float, level: float) -> dict[str, object]:
    """Cells lower and upper of value·exp(±z error); an upper limit beyond any number is not_reached.

    >>> {k: round(float(v), 4) for k, v in log_limits(2.0, 0.5, 0.95).items()}
    {'lower': 0.7506, 'upper': 5.3288}
    """
    half = z_of(level) * error
    if half > TOO_WIDE:
        return {"lower": 0.0, "upper": None, "reason": "not_reached"}
    factor = float(np.exp(half))
    return {"lower": value / factor, "upper": value * factor}


def all_lower(n: Floats, level: float) -> Floats:
    """Exact lower limit of n of n, two-sided: (α/2)^(1/n). NaN for n < 1. Source: Clopper & Pearson 1934."""
    some = n >= 1
    return np.where(some, ((1 - level) / 2) ** (1 / np.where(some, n, 1.0)), np.nan)


def none_upper(n: Floats, level: float) -> Floats:
    """Exact upper limit of 0 of n, two-sided. NaN for n < 1."""
    return 1 - all_lower(n, level)


def garwood(x: int, level: float) -> tuple[float, float]:
    """Exact limits of a Poisson count. Source: Garwood 1936."""
    tail = (1 - level) / 2
    low = 0.5 * float(chi2.ppf(tail, 2 * x)) if x else 0.0
    return low, 0.5 * float(chi2.isf(tail, 2 * x + 2))
