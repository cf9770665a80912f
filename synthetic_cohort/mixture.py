"""Who is who at a given severity: shares of hazard groups and of those above the age limit."""

from __future__ import annotations

import math

import numpy as np

from synthetic_cohort.hazards import Z_GRID, Z_WEIGHT, Array
from synthetic_cohort.settings import GROUPS, HAZARD_GROUPS, LVAD_TRANSPLANT_AGE_LIMIT, Group, Settings

AGE_Z = 0.1
"""Correlation of age with severity."""
AGE_RANGE = (18.02, 90.0)
"""Ages are drawn inside; a small share of the very old (`Settings.over_89`) comes on top."""


def normal_cdf(x: Array) -> Array:
    """Standard normal distribution function.

    >>> round(float(normal_cdf(np.array([1.96]))[0]), 3)
    0.975
    """
    return np.array([0.5 * math.erfc(-v / math.sqrt(2.0)) for v in np.ravel(x)]).reshape(np.shape(x))


def age_moments(group: Group, z: Array) -> tuple[Array, float]:
    """Mean (per run) and standard deviation of age before truncation, given severity."""
    mean, sd = group.age
    return mean + sd * AGE_Z * z, sd * math.sqrt(1 - AGE_Z**2)


def share_old(group: Group, z: Array, settings: Settings) -> Array:
    """Probability of being above the age limit of pump and transplant, given severity."""
    mean, sd = age_moments(group, z)
    low, high = (normal_cdf((edge - mean) / sd) for edge in AGE_RANGE)
    limit = normal_cdf((LVAD_TRANSPLANT_AGE_LIMIT + 1.0 - mean) / sd)
    return np.asarray(settings.over_89 + (1 - settings.over_89) * (high - limit) / (high - low))


def share_arrest(group: Group, z: Array, settings: Settings) -> Array:
    """Probability of an arrest before support, given severity."""
    logit = math.log(group.arrest / (1 - group.arrest))
    return np.asarray(1.0 / (1.0 + np.exp(-(logit + settings.z_arrest * z))))


def cells(settings: Settings) -> tuple[Array, Array, Array, Array, Array]:
    """The mixture as weighted cells: hazard group, indication, severity, above the age limit, weight.

    The weights add up to one.
    """
    parts: list[tuple[Array, Array, Array, Array, Array]] = []
    inside, outside = len(GROUPS), len(GROUPS) + 1
    for i, group in enumerate(GROUPS):
        arrest = share_arrest(group, Z_GRID, settings)
        old = share_old(group, Z_GRID, settings)
        pumped = arrest * group.extracorporeal
        for number, share in (
            (i, 1 - pumped),
            (inside, pumped * (1 - group.out)),
            (outside, pumped * group.out),
        ):
            for is_old, part in ((0.0, 1 - old), (1.0, old)):
                weight = group.share * Z_WEIGHT * share * part
                n = np.ones_like(Z_GRID)
                parts.append((n * number, n * i, Z_GRID, n * is_old, weight))
    columns = [np.concatenate(column) for column in zip(*parts, strict=True)]
    return columns[0], columns[1], columns[2], columns[3], columns[4]


def discharge_by_hazard_group(settings: Settings) -> Array:
    """Probability of leaving hospital alive after recovery, per hazard group."""
    if not settings.has_groups:
        return np.full(len(HAZARD_GROUPS), 0.69)
    return np.array([g.discharge for g in HAZARD_GROUPS])
