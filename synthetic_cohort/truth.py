"""What estimates must come near: probabilities of the generator, by integration where that is exact.

Everything is about first runs whose support began at this programme: no transfer in, no end of the extract.
Cumulative incidences and discharge are integrated over severity, indication and age; survival after support
and the rates of complications are means of a large simulated cohort.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd

from synthetic_cohort.balance import balanced_hazards
from synthetic_cohort.clock import stream
from synthetic_cohort.complications import KINDS, Supported, draw_onsets
from synthetic_cohort.course import discharge_chance, draw_course
from synthetic_cohort.hazards import KIND, Array, Index, incidence_at, scaled
from synthetic_cohort.mixture import cells
from synthetic_cohort.persons import draw_persons
from synthetic_cohort.settings import ENDINGS, GROUPS, HAZARD_GROUPS, Settings

DAYS = (1.0, 3.0, 7.0, 14.0, 21.0, 30.0, 90.0, 180.0, 365.0)
_ALL = "all"
_EVER = 5000.0


@dataclass(frozen=True)
class Truth:
    """Tables of what is true.

    incidence: group, day, ending, probability of that ending by that day of support; group is "all" or an
    indication. on_support: group, day, probability. exits: group, ending, probability in the end, for "all",
    each indication and the two kinds of start during compressions. discharge: group, probability of leaving
    hospital alive. survival: day, probability of being alive so many days after the start of support. rates:
    kind, episodes per 1,000 days on support, proportion of runs with at least one. median_support_h: marginal
    median of the time on support.
    """

    incidence: pd.DataFrame
    on_support: pd.DataFrame
    exits: pd.DataFrame
    discharge: pd.DataFrame
    survival: pd.DataFrame
    rates: pd.DataFrame
    median_support_h: float


def truth(
    settings: Settings | None = None,
    days: Sequence[float] = DAYS,
    *,
    n: int = 1_000_000,
    seed: int = 20_210_101,
) -> Truth:
    """Compute the truth for these settings. n: size of the simulated cohort behind `survival` and `rates`."""
    settings = settings or Settings()
    incidence, on_support = _incidence(settings, np.unique(np.asarray(days, dtype=float)))
    exits, discharge = _exits(settings)
    survival, rates = _simulated(settings, days, n, seed)
    return Truth(incidence, on_support, exits, discharge, survival, rates, median_support(settings))


def _cells(settings: Settings) -> tuple[Array, Index, Index, Array]:
    """Hazards (cell, band, ending), hazard group, indication and weight of every cell of the mixture."""
    group, indication, z, old, weight = cells(settings)
    hazards = scaled(balanced_hazards(settings)[group.astype(int)], z, old > 0, settings)
    return hazards, group.astype(int), indication.astype(int), weight


def _groupings(group: Index, indication: Index, with_starts: bool) -> list[tuple[str, Array]]:
    """Name and mask of each group of cells that has any weight."""
    named = [(_ALL, np.ones(len(group), dtype=bool))]
    named += [(g.key, indication == i) for i, g in enumerate(GROUPS)]
    if with_starts:
        named += [(g.key, group == i) for i, g in enumerate(HAZARD_GROUPS) if i >= len(GROUPS)]
    return named


def _incidence(settings: Settings, days: Array) -> tuple[pd.DataFrame, pd.DataFrame]:
    hazards, group, indication, weight = _cells(settings)
    by_cell, on_cell = incidence_at(hazards, days)
    parts, on_parts = [], []
    for name, mask in _groupings(group, indication, with_starts=False):
        share = weight[mask] / weight[mask].sum()
        mean = np.einsum("cdk,c->dk", by_cell[mask], share)
        parts.append(
            pd.DataFrame(
                {
                    "group": name,
                    "day": np.repeat(days, len(ENDINGS)),
                    "ending": np.tile(ENDINGS, len(days)),
                    "probability": mean.ravel(),
                }
            )
        )
        on_parts.append(pd.DataFrame({"group": name, "day": days, "probability": on_cell[mask].T @ share}))
    return pd.concat(parts, ignore_index=True), pd.concat(on_parts, ignore_index=True)


def _exits(settings: Settings) -> tuple[pd.DataFrame, pd.DataFrame]:
    hazards, group, indication, weight = _cells(settings)
    final = incidence_at(hazards, np.array([_EVER]))[0][:, 0]
    alive = _leaves_alive(settings, final, group, indication)
    exits, discharge = [], []
    for name, mask in _groupings(group, indication, with_starts=True):
        share = weight[mask] / weight[mask].sum()
        exits.append(pd.DataFrame({"group": name, "ending": ENDINGS, "probability": share @ final[mask]}))
        discharge.append({"group": name, "probability": float(share @ alive[mask])})
    return pd.concat(exits, ignore_index=True), pd.DataFrame(discharge)


def _leaves_alive(settings: Settings, final: Array, group: Index, indication: Index) -> Array:
    """Probability of leaving hospital alive for each cell, a second run after recovery included."""
    after = np.column_stack(
        [discharge_chance(np.full(len(group), k), group, settings) for k in range(len(ENDINGS))]
    )
    second = _second_run(settings)[indication]
    recovered = KIND["recovery"]
    q = settings.recannulation
    after[:, recovered] = (1 - q) * after[:, recovered] + q * second
    return np.asarray((final * after).sum(axis=1))


def _second_run(settings: Settings) -> Array:
    """Probability of leaving hospital alive from the start of a second run on, by indication."""
    group, indication, z, old, weight = cells(settings)
    indication = indication.astype(int)
    hazards = scaled(balanced_hazards(settings)[indication], z, old > 0, settings)
    final = incidence_at(hazards, np.array([_EVER]))[0][:, 0]
    chance = np.column_stack(
        [discharge_chance(np.full(len(group), k), indication, settings) for k in range(len(ENDINGS))]
    )
    alive = (final * chance).sum(axis=1)
    return np.array(
        [
            alive[indication == i] @ weight[indication == i] / weight[indication == i].sum()
            for i in range(len(GROUPS))
        ]
    )


def median_support(settings: Settings) -> float:
    """Marginal median of hours on support, by bisection on the exact curve."""
    hazards, _, _, weight = _cells(settings)
    low, high = 0.0, 60.0
    for _ in range(40):
        middle = (low + high) / 2
        on = float(incidence_at(hazards, np.array([middle]))[1][:, 0] @ weight)
        low, high = (middle, high) if on > 0.5 else (low, middle)
    return 24.0 * low


def _simulated(
    settings: Settings, days: Sequence[float], n: int, seed: int
) -> tuple[pd.DataFrame, pd.DataFrame]:
    people = draw_persons(n, seed, settings)
    course = draw_course(people, seed, settings)
    death = course["death_h"].fillna(np.inf).to_numpy()
    survival = pd.DataFrame(
        {"day": list(days), "probability": [float((death > d * 24.0).mean()) for d in days]}
    )
    run = people.assign(indication_group=np.array([g.key for g in GROUPS])[people["group"]])
    end = course["end_h"].to_numpy()
    runs = Supported.of(run, np.zeros(n), end, (course["kind"] == KIND["recovery"]).to_numpy())
    rng = stream(seed, "truth")
    rates = []
    for kind in KINDS:
        rows, _ = draw_onsets(rng, kind, runs, settings)
        per_day = len(rows) * 24_000.0 / float(end.sum())
        rates.append({"kind": kind.key, "per_1000_days": per_day, "proportion": len(np.unique(rows)) / n})
    return survival, pd.DataFrame(rates)
