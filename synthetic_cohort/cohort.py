"""The cohort: a programme's runs over some years, as frames that hold the truth, one grain each."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date

import numpy as np
import pandas as pd

from synthetic_cohort.aftermath import ending_frame, follow_up_frame, neuro_frame, transfer_frame
from synthetic_cohort.attempts import attempt_frame
from synthetic_cohort.clock import TwiceHours, add_hours, local, stream, to_minute
from synthetic_cohort.complications import complication_frame
from synthetic_cohort.course import draw_course
from synthetic_cohort.hazards import Array
from synthetic_cohort.inputs import input_frame, recorded_inputs
from synthetic_cohort.names import PROGRAMME, Programme
from synthetic_cohort.persons import add_identity, draw_persons
from synthetic_cohort.settings import ENDINGS, GROUPS, HAZARD_GROUPS, Settings
from synthetic_cohort.weaning import configuration_frame, weaning_frame


@dataclass(frozen=True)
class Cohort:
    """What really happened, and what an extract on `extract_date` at noon could know of it.

    Times are hours after the start of the run, on whole minutes. run has one row a run; every other frame but
    person and attempt refers to it by run_no. `inputs` is complete, `recorded` has the gaps of a real source.
    """

    settings: Settings
    programme: Programme
    seed: int
    period: tuple[date, date]
    extract_date: date
    person: pd.DataFrame
    run: pd.DataFrame
    ending: pd.DataFrame
    inputs: pd.DataFrame
    recorded: pd.DataFrame
    complication: pd.DataFrame
    weaning_step: pd.DataFrame
    follow_up: pd.DataFrame
    neuro: pd.DataFrame
    attempt: pd.DataFrame
    configuration: pd.DataFrame
    transfer: pd.DataFrame


def generate(
    n_runs: int,
    seed: int,
    *,
    start_year: int = 2021,
    years: int = 3,
    programme: Programme = PROGRAMME,
    settings: Settings | None = None,
) -> Cohort:
    """Exactly n_runs runs that began in `years` calendar years from start_year on.

    A person transferred in on support is seen only if support lasted until arrival. Raises ValueError for
    fewer than one run or year.
    """
    if n_runs < 1 or years < 1:
        raise ValueError("at least one run and one year")
    settings = settings or Settings()
    last = date(start_year + years - 1, 12, 31)
    twice = TwiceHours(programme.zone, start_year, start_year + years + 11)
    noon = pd.Timestamp(last).replace(hour=12)
    cutoff = noon.tz_localize(programme.zone).tz_convert("UTC").tz_localize(None)
    people = draw_persons(math.ceil(n_runs * 1.06) + 60, seed, settings)
    people["start_utc"] = twice.after(_starts(len(people), seed, start_year, cutoff, programme, settings))
    people["entry_h"] = _arrivals(len(people), seed, settings, twice, people["start_utc"])
    course = _outside_twice_hours(draw_course(people, seed, settings), people["start_utc"], twice)
    run = _describe(_runs(people, course, n_runs, cutoff), twice, seed, programme)
    ending = ending_frame(run, cutoff, seed)
    inputs = input_frame(run, twice, seed, settings)
    recorded = recorded_inputs(inputs, run, seed, settings)
    complication = complication_frame(run, ending, twice, seed, settings)
    follow_up = follow_up_frame(run, ending, cutoff, twice, seed, settings)
    person = add_identity(_persons(run), seed)
    return Cohort(
        settings,
        programme,
        seed,
        (date(start_year, 1, 1), last),
        last,
        person,
        run,
        ending,
        inputs,
        recorded,
        complication,
        weaning_frame(run, ending, twice, seed),
        follow_up,
        neuro_frame(run, follow_up, seed, settings),
        attempt_frame(n_runs, cutoff, start_year, programme, seed, settings),
        configuration_frame(run, ending, complication),
        transfer_frame(run, ending, programme, seed),
    )


def _outside_twice_hours(course: pd.DataFrame, start: pd.Series, twice: TwiceHours) -> pd.DataFrame:
    moved = {c: twice.hours_after(start, course[c]) for c in ("end_h", "again_h", "left_h", "death_h")}
    second = add_hours(start, moved["again_h"])
    return course.assign(**moved, again_end_h=twice.hours_after(second, course["again_end_h"]))


def _starts(
    n: int, seed: int, start_year: int, cutoff: pd.Timestamp, programme: Programme, settings: Settings
) -> pd.Series:
    """Starts in UTC, spread evenly over the period; some crowd before the extract if that is asked for."""
    rng = stream(seed, "starts")
    first = pd.Timestamp(start_year, 1, 1).tz_localize(programme.zone).tz_convert("UTC").tz_localize(None)
    minutes = int((cutoff - first) / pd.Timedelta(minutes=1))
    at = rng.integers(0, minutes, n)
    if settings.open_share is not None:
        # About 0.35 of the runs that began in the last fortnight are still going at its end.
        late = rng.random(n) < settings.open_share / 0.35
        at = np.where(late, minutes - 1 - rng.integers(0, 14 * 24 * 60, n), at)
    return first + pd.to_timedelta(pd.Series(at), unit="m")


def _arrivals(n: int, seed: int, settings: Settings, twice: TwiceHours, start: pd.Series) -> Array:
    """Hours from the start elsewhere to arrival on support; 0 for those whose support began here."""
    rng = stream(seed, "arrivals")
    moved = rng.random(n) < settings.transfer_in
    hours = np.clip(np.exp(rng.normal(np.log(10.0), 0.7, n)), 1.0, 96.0)
    return twice.hours_after(start, to_minute(np.where(moved, hours, 0.0)))


def _runs(people: pd.DataFrame, course: pd.DataFrame, n_runs: int, cutoff: pd.Timestamp) -> pd.DataFrame:
    """Stack first and second runs of the first persons that together give n_runs, in order of start."""
    both = pd.concat([people, course], axis=1)
    seen = both["entry_h"] < both["end_h"]
    arrival = add_hours(both["start_utc"], both["entry_h"])
    both = both[seen & (arrival < cutoff)].reset_index(drop=True)
    second_start = add_hours(both["start_utc"], both["again_h"])
    has_second = second_start.notna() & (second_start < cutoff)
    total = (1 + has_second.astype(int)).cumsum()
    chosen = total <= n_runs
    missing = n_runs - int(total[chosen].max() if chosen.any() else 0)
    if missing:
        extra = both.index[~chosen & ~has_second][:missing]
        chosen[extra] = True
    first = both[chosen].assign(nth_run=1, hours_from_first_run=0.0)
    again = both[chosen & has_second].copy()
    shift = again["again_h"].to_numpy()
    again = again.assign(
        nth_run=2,
        hours_from_first_run=shift,
        start_utc=add_hours(again["start_utc"], shift),
        entry_h=0.0,
        end_h=again["again_end_h"],
        kind=again["again_kind"],
        left_h=to_minute(again["left_h"] - shift),
        death_h=to_minute(again["death_h"] - shift),
        is_ecpr=False,
        had_arrest=False,
        arrest_location=None,
        hazard_group=again["group"],
        age_exact=again["age_exact"] + shift / 8766.0,
    )
    first["person"], again["person"] = first.index, again.index
    run = pd.concat([first, again]).sort_values(["start_utc", "person"], kind="stable").reset_index(drop=True)
    run["person_no"] = pd.factorize(run["person"])[0] + 1
    run.insert(0, "run_no", np.arange(1, len(run) + 1))
    return run.drop(columns=["person", "again_h", "again_end_h", "again_kind"]).assign(
        is_rerun_followed=_followed(run)
    )


def _followed(run: pd.DataFrame) -> pd.Series:
    """Whether another run of the same person follows in the frame."""
    return run.groupby("person_no")["nth_run"].transform("max") > run["nth_run"]


def _describe(run: pd.DataFrame, twice: TwiceHours, seed: int, programme: Programme) -> pd.DataFrame:
    """Words for numbers, local time, completed age, plan at start, place of cannulation."""
    rng = stream(seed, "describe")
    n = len(run)
    run["start_local"] = local(run["start_utc"], programme.zone)
    run["run_year"] = run["start_local"].dt.year
    run["indication_group"] = np.array([g.key for g in GROUPS])[run["group"]]
    run["hazard_group"] = np.array([g.key for g in HAZARD_GROUPS])[run["hazard_group"]]
    run["true_end_kind"] = np.array(ENDINGS)[run["kind"]]
    born = run["start_local"].dt.normalize() - pd.to_timedelta(
        np.floor(run["age_exact"] * 365.2425), unit="D"
    )
    first_birth = born.groupby(run["person_no"]).transform("first")
    run["birth_date"] = first_birth
    day = run["start_local"]
    early = (day.dt.month * 100 + day.dt.day) < (first_birth.dt.month * 100 + first_birth.dt.day)
    run["age_years"] = day.dt.year - first_birth.dt.year - early.astype(int)
    run["transferred_in"] = run["entry_h"] > 0
    run["intended_pathway"] = _plans(run, rng)
    run["cannulated_where"] = _places(run, rng)
    run["right_sided_monitoring"] = rng.random(n) < 0.9
    run["unloading_at_start"] = rng.random(n) < 0.31
    run["decision_h"] = twice.hours_after(run["start_utc"], -np.exp(rng.normal(np.log(1.5), 0.6, n)))
    return run.drop(columns=["kind", "bmi"])


def _plans(run: pd.DataFrame, rng: np.random.Generator) -> Array:
    """The bridge aimed at when support began: by indication and age, not by what came."""
    chronic = run["indication_group"].to_numpy() == "decompensated_chronic_heart_failure"
    names = np.array(["recovery", "decision", "durable_lvad", "transplantation"])
    edges = np.where(chronic[:, None], [0.25, 0.60, 0.80], [0.60, 0.92, 0.96])
    edges = np.where(run["is_old"].to_numpy()[:, None], [0.65, 1.0, 1.0], edges)
    return np.asarray(names[(rng.random(len(run))[:, None] > edges).sum(axis=1)])


def _places(run: pd.DataFrame, rng: np.random.Generator) -> Array:
    names = np.array(["this_centre_cathlab", "this_centre_icu", "this_centre_theatre", "this_centre_ed"])
    surgical = (run["indication_group"].to_numpy() == "post_cardiotomy")[:, None]
    edges = np.where(surgical, [0.0, 0.25, 1.0], [0.40, 0.75, 0.90])
    here = names[(rng.random(len(run))[:, None] > edges).sum(axis=1)]
    away = np.where(rng.random(len(run)) < 0.5, "other_hospital_by_our_team", "other_hospital_by_others")
    return np.where(run["transferred_in"], away, here)


def _persons(run: pd.DataFrame) -> pd.DataFrame:
    columns = ["person_no", "sex", "height_cm", "weight_kg", "birth_date", "frailty"]
    return (
        run.sort_values(["person_no", "nth_run"])[columns].drop_duplicates("person_no").reset_index(drop=True)
    )
