"""The generator's marginals stand where published cohorts of adult V-A support stand.

Anchors: Smith 2017, Crit Care 21:45 (support time of survivors and others, discharge 41.4%); Alba 2020, J
Heart Lung Transplant 39:S186 (survival to discharge by indication). How near to them the generator has to
come is this project's choice. Monte-Carlo bands are four standard errors.
"""

from __future__ import annotations

import math

import numpy as np
import pandas as pd
import pytest

from synthetic_cohort import Cohort, Settings, Truth, generate, truth
from synthetic_cohort.hazards import group_hazards, incidence_at

N = 24_000


@pytest.fixture(scope="module")
def cohort() -> Cohort:
    return generate(N, seed=11)


@pytest.fixture(scope="module")
def true() -> Truth:
    return truth(n=100_000)


def own_first(cohort: Cohort) -> pd.Series:
    """First runs that began at the programme: what the truth is about."""
    return (cohort.run["nth_run"] == 1) & ~cohort.run["transferred_in"]


def within(observed: float, expected: float, n: int, extra_variance: float = 0.0) -> bool:
    return abs(observed - expected) <= 4.0 * math.sqrt(expected * (1 - expected) / n + extra_variance)


def test_plain_hazards_have_the_published_time_on_support() -> None:
    """Fitted figures of the plain hazards: median 93 h, quartiles 48 and 162 h, day 7 0.23, day 21 0.027."""
    hours = np.arange(1.0, 1500.0)
    _, on = incidence_at(group_hazards(Settings().plain())[:1], hours / 24.0)
    quantile = {q: float(hours[np.argmax(on[0] < 1 - q)]) for q in (0.25, 0.5, 0.75)}
    assert quantile[0.5] == pytest.approx(93.0, abs=1.5)
    assert quantile[0.25] == pytest.approx(48.0, abs=1.5)
    assert quantile[0.75] == pytest.approx(162.0, abs=2.0)
    assert on[0][7 * 24 - 1] == pytest.approx(0.235, abs=0.01)
    assert on[0][21 * 24 - 1] == pytest.approx(0.028, abs=0.004)


def test_plain_hazards_have_the_fitted_endings() -> None:
    """Death or withdrawal 0.41, recovery 0.49, durable pump 0.05, transplant 0.05, no age limit applied."""
    incidence, _ = incidence_at(group_hazards(Settings().plain())[:1], np.array([3000.0]))
    recovery, lvad, transplant, death, withdrawal = incidence[0, 0, :5]
    assert death + withdrawal == pytest.approx(0.41, abs=0.005)
    assert recovery == pytest.approx(0.49, abs=0.005)
    assert (lvad, transplant) == (pytest.approx(0.05, abs=0.003), pytest.approx(0.05, abs=0.003))
    assert incidence[0, 0].sum() == pytest.approx(1.0)


def test_time_on_support_and_discharge_near_the_anchors(cohort: Cohort) -> None:
    rows = own_first(cohort)
    hours = cohort.ending.loc[rows, "true_end_h"]
    assert 91.0 <= hours.median() <= 97.0
    assert 0.21 <= (hours > 168).mean() <= 0.26
    assert 0.02 <= (hours > 504).mean() <= 0.045
    assert cohort.follow_up.loc[rows, "true_left_alive"].mean() == pytest.approx(0.41, abs=0.015)


@pytest.mark.parametrize(
    ("group", "target"),
    [
        ("myocarditis", 0.59),
        ("primary_graft_dysfunction_heart", 0.64),
        ("decompensated_chronic_heart_failure", 0.49),
        ("acute_myocardial_infarction", 0.40),
        ("post_cardiotomy", 0.42),
        ("in_hospital_ecpr", 0.37),
        ("out_of_hospital_ecpr", 0.24),
    ],
)
def test_discharge_by_group_near_its_target(cohort: Cohort, group: str, target: float) -> None:
    """Groups by exits: those begun during compressions stand apart from their indication. Transfers out leave
    too early to be counted in the published figures."""
    rows = (
        own_first(cohort)
        & (cohort.run["hazard_group"] == group)
        & (cohort.ending["true_end_kind"] != "transfer_out")
    )
    observed = cohort.follow_up.loc[rows, "true_left_alive"].mean()
    assert abs(observed - target) <= 0.045 + 2.0 * math.sqrt(target * (1 - target) / rows.sum())


def test_persons_near_the_anchors(cohort: Cohort) -> None:
    run = cohort.run
    assert run["age_years"].min() >= 18
    assert 56.0 <= run["age_years"].median() <= 60.0
    assert (run["age_years"] >= 90).mean() == pytest.approx(0.01, abs=0.003)
    assert 0.66 <= (cohort.person["sex"] == "male").mean() <= 0.73
    assert 0.38 <= run["had_arrest"].mean() <= 0.52
    assert 0.18 <= run["is_ecpr"].mean() <= 0.25
    assert (run["nth_run"] == 2).mean() == pytest.approx(0.05, abs=0.012)
    assert run["transferred_in"].mean() == pytest.approx(0.03, abs=0.006)
    assert (cohort.ending["end_kind"] == "transfer_out").mean() == pytest.approx(0.03, abs=0.006)


def test_open_share_can_be_set() -> None:
    small = generate(6000, seed=4, settings=Settings(open_share=0.04))
    assert (small.ending["end_kind"] == "open").mean() == pytest.approx(0.04, abs=0.01)


def test_severity_shows_where_it_should(cohort: Cohort) -> None:
    alive = cohort.follow_up["true_left_alive"].to_numpy(dtype=bool)
    mean = cohort.inputs.groupby(alive).mean(numeric_only=True)
    assert mean.loc[False, "lactate_mmol_l"] > mean.loc[True, "lactate_mmol_l"] + 1.0
    assert mean.loc[False, "ph"] < mean.loc[True, "ph"] - 0.02
    assert cohort.run["had_arrest"][~alive].mean() > cohort.run["had_arrest"][alive].mean() + 0.05


def test_severity_can_be_switched_off() -> None:
    off = generate(20_000, seed=3, settings=Settings(z_death=0.0, z_recovery=0.0, z_arrest=0.0))
    z, died = off.run["z"].to_numpy(), ~off.follow_up["true_left_alive"].to_numpy(dtype=bool)
    assert abs(np.corrcoef(z, died)[0, 1]) < 4.0 / math.sqrt(len(z))
    on = generate(20_000, seed=3)
    assert np.corrcoef(on.run["z"], ~on.follow_up["true_left_alive"].to_numpy(dtype=bool))[0, 1] > 0.1


def test_switching_one_topic_leaves_the_others_alone() -> None:
    one, other = generate(300, seed=5), generate(300, seed=5, settings=Settings(complication_multiplier=0.0))
    pd.testing.assert_frame_equal(one.run, other.run)
    pd.testing.assert_frame_equal(one.recorded, other.recorded)
    assert other.complication.empty
    assert not one.complication.empty


def test_incidence_by_day_agrees_with_truth(cohort: Cohort, true: Truth) -> None:
    rows = own_first(cohort)
    ending = cohort.ending[rows]
    for row in true.incidence[true.incidence["group"] == "all"].itertuples():
        hit = (ending["true_end_kind"] == row.ending) & (ending["true_end_h"] <= row.day * 24.0)
        assert within(hit.mean(), row.probability, len(ending)), row


def test_incidence_by_indication_agrees_with_truth(cohort: Cohort, true: Truth) -> None:
    rows = own_first(cohort)
    both = cohort.run[rows].merge(cohort.ending[["run_no", "true_end_h"]], on="run_no")
    for row in true.on_support[true.on_support["group"] != "all"].itertuples():
        hours = both.loc[both["indication_group"] == row.group, "true_end_h"]
        # Ends are rounded up to the first minute, which no probability here can feel.
        assert within((hours > row.day * 24.0).mean(), row.probability, len(hours)), row


def test_survival_and_discharge_agree_with_truth(cohort: Cohort, true: Truth) -> None:
    rows = own_first(cohort)
    death = cohort.follow_up.loc[rows, "true_death_h"].fillna(np.inf)
    for row in true.survival.itertuples():
        spread = row.probability * (1 - row.probability) / 100_000
        assert within((death > row.day * 24.0).mean(), row.probability, len(death), spread), row
    alive = cohort.follow_up.loc[rows, "true_left_alive"].astype(bool)
    for row in true.discharge.itertuples():
        by = "hazard_group" if row.group.endswith("ecpr") else "indication_group"
        part = alive if row.group == "all" else alive[cohort.run.loc[rows, by] == row.group]
        assert within(part.mean(), row.probability, len(part)), row


def test_complication_rates_agree_with_truth(cohort: Cohort, true: Truth) -> None:
    """Episodes under observation per 1,000 days on support; variance from the counts of the runs."""
    rows = own_first(cohort)
    days = (cohort.ending["observed_h"] / 24.0)[rows]
    for row in true.rates.itertuples():
        events = cohort.complication[cohort.complication["kind"] == row.kind]
        count = cohort.run["run_no"].map(events["run_no"].value_counts()).fillna(0.0)[rows]
        rate = row.per_1000_days / 1000.0
        spread = math.sqrt(((count - rate * days) ** 2).sum() * (1 + len(days) / 100_000)) / days.sum()
        assert abs(count.sum() / days.sum() - rate) <= 4.0 * spread, row
