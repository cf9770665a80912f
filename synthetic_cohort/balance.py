"""Hazards that keep each group's exits where the group settings put them, although severity is on."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache

import numpy as np

from synthetic_cohort.hazards import (
    DEADLY_KINDS,
    RECOVERY_KIND,
    Z_GRID,
    Z_WEIGHT,
    Array,
    group_hazards,
    incidence_at,
    scaled,
)
from synthetic_cohort.mixture import cells
from synthetic_cohort.settings import HAZARD_GROUPS, Settings


@lru_cache(maxsize=16)
def balanced_hazards(settings: Settings) -> Array:
    """`group_hazards` with two constants a group (death, recovery) that undo the mean effect of severity.

    Found by Newton's method on: proportion that dies on support, and proportion still on support on day 4.
    """
    plain = group_hazards(settings)
    if not settings.keeps_group_exits or (settings.z_death == 0 and settings.z_recovery == 0):
        return plain
    still = replace(settings, z_death=0.0, z_recovery=0.0)
    target = _landmarks(plain, still, np.zeros((len(HAZARD_GROUPS), 2)))
    logs = np.zeros((len(HAZARD_GROUPS), 2))
    for _ in range(8):
        here = _landmarks(plain, settings, logs)
        step = 1e-4
        by_death = (_landmarks(plain, settings, logs + np.array([step, 0.0])) - here) / step
        by_recovery = (_landmarks(plain, settings, logs + np.array([0.0, step])) - here) / step
        slope = np.stack([by_death, by_recovery], axis=2)
        logs = logs + np.linalg.solve(slope, (target - here)[:, :, None])[:, :, 0]
    return _with_constants(plain, logs)


def _with_constants(hazards: Array, logs: Array) -> Array:
    out = hazards.copy()
    out[:, :, DEADLY_KINDS] *= np.exp(logs[:, 0])[:, None, None]
    out[:, :, RECOVERY_KIND] *= np.exp(logs[:, 1])[:, None]
    return out


def _landmarks(hazards: Array, settings: Settings, logs: Array) -> Array:
    """(group, 2): death or withdrawal in the end, still on support on day 4; mean over severity."""
    n = len(Z_GRID)
    grid = np.repeat(_with_constants(hazards, logs), n, axis=0)
    z = np.tile(Z_GRID, len(hazards))
    incidence, on_support = incidence_at(
        scaled(grid, z, np.zeros(len(z), dtype=bool), settings), np.array([4.0, 2000.0])
    )
    died = incidence[:, 1][:, DEADLY_KINDS].sum(axis=1)
    pair = np.stack([died, on_support[:, 0]], axis=1).reshape(len(hazards), n, 2)
    return np.asarray(np.einsum("gzk,gz->gk", pair, _severity_by_group(settings)))


def _severity_by_group(settings: Settings) -> Array:
    """Distribution of severity over Z_GRID within each hazard group, shape (group, grid)."""
    group, _, z, _, weight = cells(settings)
    place = np.searchsorted(Z_GRID, z)
    out = np.zeros((len(HAZARD_GROUPS), len(Z_GRID)))
    np.add.at(out, (group.astype(int), place), weight)
    total = out.sum(axis=1, keepdims=True)
    return np.where(total > 0, out / np.where(total > 0, total, 1.0), Z_WEIGHT)
