"""Persons and the state in which their first support began: indication, severity, age, arrest."""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.clock import stream
from synthetic_cohort.given import given
from synthetic_cohort.hazards import Array, Index
from synthetic_cohort.mixture import AGE_RANGE, age_moments, share_arrest
from synthetic_cohort.names import person_names, phones, record_numbers
from synthetic_cohort.settings import GROUPS, LVAD_TRANSPLANT_AGE_LIMIT, Settings

LEG_CANNULA = 0.55
"""Share of femoral returns with a leg perfusion cannula from the start (published 34 to 70% by era)."""


def draw_persons(n: int, seed: int, settings: Settings) -> pd.DataFrame:
    """n candidates, one row each: indication, severity, age, sex, size, arrest, hazard group, cannulation."""
    rng = stream(seed, "persons")
    group = rng.choice(len(GROUPS), size=n, p=[g.share for g in GROUPS])
    z = rng.standard_normal(n)
    people = pd.DataFrame({"group": group, "z": z, "age_exact": _ages(rng, group, z, settings)})
    people["is_old"] = np.floor(people["age_exact"]) > LVAD_TRANSPLANT_AGE_LIMIT
    _add_arrest(people, rng, settings)
    male = np.array([g.male for g in GROUPS])[group]
    outside = people["is_ecpr"] & (people["arrest_location"] == "out_of_hospital")
    male = np.where(outside, 0.79, male)
    people["sex"] = np.where(rng.random(n) < male, "male", "female")
    is_male = people["sex"].to_numpy() == "male"
    people["height_cm"] = np.round(np.where(is_male, rng.normal(175, 7.5, n), rng.normal(162, 7, n)))
    people["bmi"] = np.clip(np.exp(rng.normal(np.log(26.7), 0.228, n)), 15.0, 55.0)
    people["weight_kg"] = np.round(people["bmi"] * (people["height_cm"] / 100.0) ** 2, 1)
    people["frailty"] = _frailty(rng, n, settings)
    return people


def _ages(rng: np.random.Generator, group: Index, z: Array, settings: Settings) -> Array:
    mean = np.empty(len(z))
    sd = np.empty(len(z))
    for i, g in enumerate(GROUPS):
        here = group == i
        mean[here], sd[here] = age_moments(g, z[here])
    age = rng.normal(mean, sd)
    while (outside := (age < AGE_RANGE[0]) | (age >= AGE_RANGE[1])).any():
        age[outside] = rng.normal(mean[outside], sd[outside])
    very_old = rng.random(len(z)) < settings.over_89
    return np.where(very_old, 90.0 + 6.0 * rng.random(len(z)), age)


def _add_arrest(people: pd.DataFrame, rng: np.random.Generator, settings: Settings) -> None:
    """Arrest, its place, pump start during compressions; from these the hazard group and the cannulation."""
    n = len(people)
    group = people["group"].to_numpy()
    chance = np.empty(n)
    for i, g in enumerate(GROUPS):
        here = group == i
        chance[here] = share_arrest(g, people["z"].to_numpy()[here], settings)
    arrest = rng.random(n) < chance
    ecpr = arrest & (rng.random(n) < np.array([g.extracorporeal for g in GROUPS])[group])
    out = arrest & (rng.random(n) < np.array([g.out for g in GROUPS])[group])
    people["had_arrest"], people["is_ecpr"] = arrest, ecpr
    emergency = rng.random(n) < 0.05
    place = np.where(out, "out_of_hospital", np.where(emergency, "emergency_department", "in_hospital"))
    people["arrest_location"] = given(arrest, place)
    people["hazard_group"] = np.where(ecpr, len(GROUPS) + out.astype(int), group)
    femoral = np.where(ecpr, 0.95, np.array([g.femoral for g in GROUPS])[group])
    draw = rng.random(n)
    rest = np.where(group == 2, "central", "axillary")
    people["arterial_return"] = np.where(
        draw < femoral, "femoral", np.where(rng.random(n) < 0.8, rest, "central")
    )
    people["leg_cannula"] = (people["arterial_return"] == "femoral") & (rng.random(n) < LEG_CANNULA)


def _frailty(rng: np.random.Generator, n: int, settings: Settings) -> Array:
    """Gamma with mean 1, shared by all complications of a person."""
    v = settings.frailty_variance
    return rng.gamma(1.0 / v, v, n) if v > 0 else np.ones(n)


def add_identity(people: pd.DataFrame, seed: int) -> pd.DataFrame:
    """Invented names, hospital numbers and telephone numbers."""
    rng = stream(seed, "identity")
    first, last = person_names(rng, len(people))
    return people.assign(
        first_name=first,
        last_name=last,
        record_number=record_numbers(rng, len(people)),
        phone=phones(rng, len(people)),
    )
