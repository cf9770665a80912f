"""Comparisons of groups in one place for callers; each lives in its own module."""

from outcomes.analysis.contrast import difference_at, rmst_difference
from outcomes.analysis.landmark import Landmark, landmark, mantel_byar, simon_makuch
from outcomes.analysis.logrank import logrank

__all__ = [
    "Landmark",
    "difference_at",
    "landmark",
    "logrank",
    "mantel_byar",
    "rmst_difference",
    "simon_makuch",
]
