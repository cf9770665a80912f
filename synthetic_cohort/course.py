"""From the start of support on: ending, second run, hospital stay, death after discharge.

All times in hours. What happened is drawn first and in full; what an extract made on one day could know is
cut out of it afterwards (`observed`).
"""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.balance import balanced_hazards
from synthetic_cohort.clock import stream, to_minute
from synthetic_cohort.hazards import KIND, Array, Index, draw_endings
from synthetic_cohort.mixture import discharge_by_hazard_group
from synthetic_cohort.settings import Settings

MINUTE_H = 1.0 / 60.0
DIED = (KIND["death"], KIND["withdrawal"])


def draw_course(people: pd.DataFrame, seed: int, settings: Settings) -> pd.DataFrame:
    """Course of every person, one row each, hours after the start of the first run.

    end_h, kind: first run. again_h: start of the second run (missing if none); again_end_h (after that
    start), again_kind. left_h, left_alive: end of the hospital stay. death_h: missing if alive at the horizon
    of ten years.
    """
    rng = stream(seed, "course")
    hazards = balanced_hazards(settings)
    z = people["z"].to_numpy()
    old = people["is_old"].to_numpy()
    group = people["hazard_group"].to_numpy()
    end_h, kind = draw_endings(rng, hazards, group, z, old, settings)
    n = len(people)
    again = (kind == KIND["recovery"]) & (rng.random(n) < settings.recannulation)
    gap = np.clip(np.exp(rng.normal(np.log(48.0), 0.8, n)), 3.0, 240.0)
    second_end, second_kind = draw_endings(
        rng, hazards, people["group"].to_numpy(), rng.standard_normal(n), old, settings
    )
    end_h, gap, second_end = (np.maximum(to_minute(x), MINUTE_H) for x in (end_h, gap, second_end))
    course = pd.DataFrame({"end_h": end_h, "kind": kind})
    course["again_h"] = np.where(again, end_h + gap, np.nan)
    course["again_end_h"] = np.where(again, second_end, np.nan)
    course["again_kind"] = np.where(again, second_kind, -1)
    last_end = np.where(again, end_h + gap + second_end, end_h)
    last_kind = np.where(again, second_kind, kind)
    _leave_hospital(course, rng, last_end, last_kind, np.where(again, people["group"], group), settings)
    return course


def _leave_hospital(
    course: pd.DataFrame, rng: np.random.Generator, end: Array, kind: Index, group: Index, settings: Settings
) -> None:
    n = len(course)
    alive = rng.random(n) < discharge_chance(kind, group, settings)
    replaced = (kind == KIND["durable_lvad"]) | (kind == KIND["transplantation"])
    stay = np.exp(rng.normal(np.log(np.where(replaced, 42.0, 20.0)), 0.5, n)) * 24.0
    dying = rng.exponential(np.where(replaced, 15.0, 9.0)) * 24.0
    after_stop = np.exp(rng.normal(np.log(1.0), 1.0, n))
    to_death = np.select(
        [kind == KIND["death"], kind == KIND["withdrawal"]], [np.zeros(n), after_stop], dying
    )
    left = to_minute(end + np.where(alive, np.maximum(stay, 24.0), to_death))
    years = rng.exponential(1.0 / settings.death_per_year_after_discharge, n)
    course["left_h"], course["left_alive"] = left, alive
    death = np.where(alive, to_minute(left + years * 8766.0), left)
    course["death_h"] = np.where(death < 87600.0, death, np.nan)


def discharge_chance(kind: Index, group: Index, settings: Settings) -> Array:
    """Probability of leaving hospital alive, by number of the ending and number of the hazard group."""
    by_kind = np.empty(len(KIND))
    by_kind[[KIND["durable_lvad"], KIND["transplantation"]]] = settings.discharge_after_replacement
    by_kind[[KIND["temporary_pump"], KIND["crossover_vv"], KIND["transfer_out"]]] = (
        settings.discharge_after_other
    )
    by_kind[KIND["death"]] = 0.0
    by_kind[KIND["withdrawal"]] = settings.discharge_after_withdrawal
    recovered = discharge_by_hazard_group(settings)[group]
    return np.where(kind == KIND["recovery"], recovered, by_kind[kind])
