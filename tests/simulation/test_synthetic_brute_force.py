"""The truth against a slow simulation that shares no code with the generator's draws.

Quarter-hour steps, with a chance for every exit in each, written from the tables of settings."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest

from synthetic_cohort import Settings, truth
from synthetic_cohort.complications import EDGES_H, KINDS, Supported, band_hazards, draw_onsets
from synthetic_cohort.persons import draw_persons
from synthetic_cohort.settings import (
    BAND_DAYS,
    CROSSOVER_VV,
    DEATH_OR_WITHDRAWAL,
    DURABLE_LVAD,
    GROUPS,
    RECOVERY,
    TEMPORARY_PUMP,
    TRANSPLANTATION,
    WITHDRAWAL_SHARE,
)

pytestmark = pytest.mark.thorough

STEP_H = 0.25
N = 20_000
# Without groups and without constants that undo severity the hazards are those of the tables times exp(c Z).
BARE = Settings(has_groups=False, keeps_group_exits=False, recannulation=0.0, over_89=0.0)


def ages(rng: np.random.Generator, z: np.ndarray) -> np.ndarray:
    """Years of age: normal by indication, correlation 0.1 with severity, drawn again until inside [18.02,
    90)."""
    group = rng.choice(len(GROUPS), N, p=[g.share for g in GROUPS])
    mean, sd = np.array([g.age for g in GROUPS])[group].T
    age = np.full(N, np.nan)
    while (wrong := ~((age >= 18.02) & (age < 90.0))).any():
        age[wrong] = (mean + sd * (0.1 * z + math.sqrt(0.99) * rng.standard_normal(N)))[wrong]
    return age


def step_by_step(rng: np.random.Generator) -> dict[tuple[str, float], float]:
    """Proportion with each ending by day 2, 7 and 21."""
    z = rng.standard_normal(N)
    is_young = ages(rng, z) < 76.0
    alive = np.ones(N, dtype=bool)
    done = {"death": 0, "withdrawal": 0, "recovery": 0, "durable_lvad": 0, "transplantation": 0}
    seen: dict[tuple[str, float], float] = {}
    for number in range(int(21 * 24 / STEP_H)):
        day = number * STEP_H / 24.0
        b = max(i for i, low in enumerate(BAND_DAYS) if low <= day + 1e-9)
        dying = DEATH_OR_WITHDRAWAL[b] * np.exp(0.45 * z[alive])
        hazards = np.column_stack(
            [
                dying * (1 - WITHDRAWAL_SHARE[b]),
                dying * WITHDRAWAL_SHARE[b],
                RECOVERY[b] * np.exp(-0.3 * z[alive]),
                DURABLE_LVAD[b] * is_young[alive],
                TRANSPLANTATION[b] * is_young[alive],
                np.full(alive.sum(), TEMPORARY_PUMP[b] + CROSSOVER_VV[b] + BARE.transfer_out_per_day),
            ]
        )
        total = hazards.sum(axis=1)
        leaves = rng.random(len(total)) < 1 - np.exp(-total * STEP_H / 24.0)
        which = (rng.random(len(total))[:, None] > np.cumsum(hazards, axis=1) / total[:, None]).sum(axis=1)
        for k, name in enumerate(done):
            done[name] += int((leaves & (which == k)).sum())
        alive[np.flatnonzero(alive)[leaves]] = False
        after = (number + 1) * STEP_H / 24.0
        if after in (2.0, 7.0, 21.0):
            seen.update({(name, after): count / N for name, count in done.items()})
    return seen


def test_truth_of_incidence_agrees_with_steps() -> None:
    exact = truth(BARE, days=(2.0, 7.0, 21.0), n=1000)
    table = exact.incidence[exact.incidence["group"] == "all"].set_index(["ending", "day"])["probability"]
    for (name, day), share in step_by_step(np.random.default_rng(8)).items():
        assert abs(share - table[name, day]) <= 4.0 * math.sqrt(max(share * (1 - share), 1e-5) / N), (
            name,
            day,
        )


@pytest.mark.parametrize("variance", [0.0, 0.5, 2.0])
def test_first_episode_agrees_with_the_laplace_transform(variance: float) -> None:
    """No episode by t has probability (1 + v H(t)) ** (-1 / v) under gamma frailty of mean 1 and variance v.

    A kind that happens once, at hazards without modifiers, in runs of fixed length."""
    kind = next(k for k in KINDS if k.key == "stroke")
    hazard = band_hazards()[KINDS.index(kind)]
    length = 150.0
    total = sum(
        h * (min(high, length) - low)
        for h, (low, high) in zip(hazard, pairwise(EDGES_H), strict=True)
        if low < length
    )
    expected = 1 - math.exp(-total) if variance == 0 else 1 - (1 + variance * total) ** (-1 / variance)
    assert fixed_length_share(kind.key, length, variance) == pytest.approx(
        expected, abs=4 * math.sqrt(expected / 60_000)
    )


def fixed_length_share(key: str, length: float, variance: float) -> float:
    """Share of 60,000 runs of that length with an episode, drawn by the generator."""

    n = 60_000
    settings = Settings(frailty_variance=variance)
    people = draw_persons(n, 3, settings).assign(indication_group="other")
    runs = Supported.of(people, np.zeros(n), np.full(n, length), np.zeros(n, dtype=bool))
    kind = next(k for k in KINDS if k.key == key)
    rows, _ = draw_onsets(np.random.default_rng(1), kind, runs, settings)
    return len(set(rows.tolist())) / n
