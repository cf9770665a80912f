"""Pointwise limits of survival and cumulative incidence on several scales, cut to [0, 1]."""

from __future__ import annotations

import numpy as np
from scipy.stats import norm

from outcomes.analysis._input import Floats
from outcomes.errors import InputRefused

SCALES = ("log-log", "log", "plain", "arcsine")


def z_of(level: float) -> float:
    return float(norm.ppf(0.5 + level / 2))


def survival_limits(s: Floats, g: Floats, level: float, scale: str) -> tuple[Floats, Floats]:
    """Limits of S from g = Var(S)/S². NaN where S is 0 or 1: no scale gives an interval there.

    Source: Kalbfleisch & Prentice 1980 (log-log); Borgan & Liestøl 1990 (arcsine).
    """
    if scale not in SCALES:
        raise InputRefused("interval", "interval must be one of " + ", ".join(SCALES))
    z = z_of(level)
    inside = (s > 0) & (s < 1)
    p, root = np.where(inside, s, 0.5), np.sqrt(np.where(inside, g, 0.0))
    if scale == "log-log":
        v = z * root / np.abs(np.log(p))
        low, high = p ** np.exp(v), p ** np.exp(-v)
    elif scale == "log":
        low, high = p * np.exp(-z * root), p * np.exp(z * root)
    elif scale == "plain":
        low, high = p - z * p * root, p + z * p * root
    else:
        half = 0.5 * z * np.sqrt(p * root**2 / (1 - p))
        angle = np.arcsin(np.sqrt(p))
        low, high = np.sin(np.maximum(0, angle - half)) ** 2, np.sin(np.minimum(np.pi / 2, angle + half)) ** 2
    return np.where(inside, np.clip(low, 0, 1), np.nan), np.where(inside, np.clip(high, 0, 1), np.nan)


def incidence_limits(f: Floats, se: Floats, level: float, scale: str) -> tuple[Floats, Floats]:
    """Limits of a cumulative incidence. log-log: on log(−log(1−F)), the scale of survival with one cause;
    log(-log F): on that scale; plain. NaN where F is 0 or 1."""
    z = z_of(level)
    inside = (f > 0) & (f < 1)
    p, e = np.where(inside, f, 0.5), np.where(inside, se, 0.0)
    if scale == "log-log":
        v = z * e / ((1 - p) * np.abs(np.log(1 - p)))
        low, high = 1 - (1 - p) ** np.exp(-v), 1 - (1 - p) ** np.exp(v)
    elif scale == "log(-log F)":
        v = z * e / (p * np.abs(np.log(p)))
        low, high = p ** np.exp(v), p ** np.exp(-v)
    elif scale == "plain":
        low, high = p - z * e, p + z * e
    else:
        raise InputRefused("interval", "interval must be log-log, log(-log F) or plain")
    return np.where(inside, np.clip(low, 0, 1), np.nan), np.where(inside, np.clip(high, 0, 1), np.nan)
