"""Competing exits from support: cause-specific hazards, constant within bands of days.

An ending is drawn as the first of competing exits; the way taken is never drawn before the duration, because
that would give the survivors of the first days their ending in advance.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from synthetic_cohort.settings import (
    BAND_DAYS,
    CROSSOVER_VV,
    DEATH_OR_WITHDRAWAL,
    DURABLE_LVAD,
    ENDINGS,
    HAZARD_GROUPS,
    RECOVERY,
    TEMPORARY_PUMP,
    TRANSPLANTATION,
    WITHDRAWAL_SHARE,
    Settings,
)

Array = NDArray[Any]
Index = NDArray[Any]
Flags = NDArray[Any]

KIND = {name: i for i, name in enumerate(ENDINGS)}
DEADLY_KINDS = [KIND["death"], KIND["withdrawal"]]
RECOVERY_KIND = KIND["recovery"]
REPLACEMENT_KINDS = [KIND["durable_lvad"], KIND["transplantation"]]
Z_GRID: Array = np.linspace(-5.0, 5.0, 81)
Z_WEIGHT: Array = np.exp(-0.5 * Z_GRID**2) / np.exp(-0.5 * Z_GRID**2).sum()


def group_hazards(settings: Settings) -> Array:
    """Hazards per day at average severity, shape (hazard group, band, ending)."""
    death = np.array(DEATH_OR_WITHDRAWAL)
    share = np.array(WITHDRAWAL_SHARE)
    base = np.zeros((len(BAND_DAYS), len(ENDINGS)))
    base[:, KIND["death"]] = death * (1 - share)
    base[:, KIND["withdrawal"]] = death * share
    base[:, RECOVERY_KIND] = RECOVERY
    base[:, REPLACEMENT_KINDS] = np.column_stack([DURABLE_LVAD, TRANSPLANTATION])
    if settings.has_other_exits:
        base[:, KIND["temporary_pump"]] = TEMPORARY_PUMP
        base[:, KIND["crossover_vv"]] = CROSSOVER_VV
    base[:, KIND["transfer_out"]] = settings.transfer_out_per_day
    out = np.repeat(base[None], len(HAZARD_GROUPS), axis=0)
    if settings.has_groups:
        early = np.array(BAND_DAYS) < 2.0
        for g, group in enumerate(HAZARD_GROUPS):
            factor = np.where(early, group.early_death, group.death)
            out[g][:, DEADLY_KINDS] *= factor[:, None]
            out[g][:, RECOVERY_KIND] *= group.recovery
            out[g][:, REPLACEMENT_KINDS] *= group.replacement
    return out


def scaled(hazards: Array, z: Array, is_old: Flags, settings: Settings) -> Array:
    """Hazards of single runs, (run, band, ending): with severity and the age limit of pump and transplant."""
    out = hazards.copy()
    out[:, :, DEADLY_KINDS] *= np.exp(settings.z_death * z)[:, None, None]
    out[:, :, RECOVERY_KIND] *= np.exp(settings.z_recovery * z)[:, None]
    out[:, :, REPLACEMENT_KINDS] *= np.where(is_old, 0.0, 1.0)[:, None, None]
    return out


def incidence_at(hazards: Array, days: Array) -> tuple[Array, Array]:
    """Cumulative incidence (row, day, ending) and proportion on support (row, day), exact within each band.

    hazards: (row, band, ending) per day. days: ascending.
    """
    edges = np.unique(np.concatenate([np.array(BAND_DAYS), days]))
    edges = edges[edges <= days[-1]]
    band = np.searchsorted(BAND_DAYS, edges[:-1], side="right") - 1
    survived = np.ones(len(hazards))
    incidence = np.zeros((len(hazards), hazards.shape[2]))
    out_incidence = np.zeros((len(hazards), len(days), hazards.shape[2]))
    out_survived = np.ones((len(hazards), len(days)))
    for low, high, b in zip(edges[:-1], edges[1:], band, strict=True):
        total = hazards[:, b].sum(axis=1)
        left = survived * np.exp(-total * (high - low))
        gone = np.divide(survived - left, total, out=np.zeros_like(total), where=total > 0)
        incidence = incidence + hazards[:, b] * gone[:, None]
        survived = left
        for place in np.flatnonzero(days == high):
            out_incidence[:, place], out_survived[:, place] = incidence, survived
    return out_incidence, out_survived


def draw_endings(
    rng: np.random.Generator, hazards: Array, group: Index, z: Array, is_old: Flags, settings: Settings
) -> tuple[Array, Index]:
    """Time (hours) and number in ENDINGS of the first exit of each run.

    hazards: (hazard group, band, ending). One unit-exponential clock a run runs against the total hazard; the
    exit is then chosen by the shares of the hazards at that time.
    """
    n = len(group)
    widths = np.diff(np.array([*BAND_DAYS, np.inf]))
    clock = rng.exponential(size=n)
    chance = rng.random(n)
    time = np.full(n, np.nan)
    kind = np.zeros(n, dtype=np.int64)
    left = np.arange(n)
    for b, low in enumerate(BAND_DAYS):
        here = scaled(hazards[group[left], b : b + 1], z[left], is_old[left], settings)[:, 0]
        total = here.sum(axis=1)
        within = np.divide(clock[left], total, out=np.full(len(left), np.inf), where=total > 0)
        ends = within < widths[b]
        rows = left[ends]
        time[rows] = low + within[ends]
        shares = np.cumsum(here[ends], axis=1) / total[ends][:, None]
        kind[rows] = np.minimum((chance[rows][:, None] > shares).sum(axis=1), len(ENDINGS) - 1)
        left = left[~ends]
        clock[left] -= total[~ends] * widths[b] if np.isfinite(widths[b]) else 0.0
    return time * 24.0, kind
