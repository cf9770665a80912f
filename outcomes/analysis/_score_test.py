"""Quadratic forms of score tests: one χ² from scores and their covariance over groups."""

from __future__ import annotations

import numpy as np
from scipy.stats import chi2

from outcomes.analysis._input import Floats
from outcomes.errors import NotEstimable

NO_OVERLAP = "no stratum or time holds runs of two groups, so they cannot be compared"


def chi_square(score: Floats, covariance: Floats) -> tuple[float, int, float]:
    """(χ², df, P) of scores that add to zero: groups without any variance are left out, one more is dropped.

    NotEstimable no_overlap if nothing is left or the groups fall into sets that never meet.
    """
    spread = np.sqrt(np.maximum(np.diag(covariance), 0.0))
    keep = spread > 1e-10 * max(float(spread.max(initial=0.0)), 1e-300)
    u, v, sd = score[keep][:-1], covariance[np.ix_(keep, keep)][:-1, :-1], spread[keep][:-1]
    if not len(u):
        raise NotEstimable("no_overlap", NO_OVERLAP)
    scaled = v / np.outer(sd, sd)
    if np.linalg.matrix_rank(scaled, tol=1e-9 * len(u)) < len(u):
        raise NotEstimable("no_overlap", NO_OVERLAP)
    z = u / sd
    value = float(z @ np.linalg.solve(scaled, z))
    return value, len(u), float(chi2.sf(value, len(u)))
