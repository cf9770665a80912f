"""The frames of a cohort hang together: times inside support, intervals that tile."""

from __future__ import annotations

from dataclasses import fields
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd
import pytest

from synthetic_cohort import Cohort, Settings, generate
from synthetic_cohort.clock import TwiceHours, add_hours, local
from synthetic_cohort.complications import KINDS


@pytest.fixture(scope="module")
def cohort() -> Cohort:
    return generate(3000, seed=21, settings=Settings(open_share=0.03))


def observed(cohort: Cohort, frame: pd.DataFrame) -> pd.DataFrame:
    return frame.merge(
        cohort.ending[["run_no", "observed_h", "entry_h", "end_kind"]], on="run_no", validate="many_to_one"
    )


@pytest.mark.parametrize("n", [1, 2, 7, 500])
def test_exactly_as_many_runs_as_asked(n: int) -> None:
    small = generate(n, seed=2)
    assert len(small.run) == n
    assert small.run["run_no"].tolist() == list(range(1, n + 1))
    for frame in (small.ending, small.inputs, small.recorded, small.follow_up):
        assert frame["run_no"].tolist() == small.run["run_no"].tolist()


def test_nothing_asked_is_refused() -> None:
    with pytest.raises(ValueError, match="at least one run"):
        generate(0, seed=1)


def test_same_seed_same_frames() -> None:
    one, two, other = generate(200, seed=9), generate(200, seed=9), generate(200, seed=10)
    for field in fields(Cohort):
        if isinstance(getattr(one, field.name), pd.DataFrame):
            pd.testing.assert_frame_equal(getattr(one, field.name), getattr(two, field.name))
    assert not one.run["start_utc"].equals(other.run["start_utc"])


def test_starts_lie_in_the_period_and_local_time_is_the_zone_s(cohort: Cohort) -> None:
    run = cohort.run
    assert run["start_local"].dt.date.min() >= cohort.period[0]
    assert run["start_local"].dt.date.max() <= cohort.period[1]
    zone = ZoneInfo(cohort.programme.zone)
    for utc, wall in zip(run["start_utc"].head(400), run["start_local"].head(400), strict=True):
        assert (
            utc.tz_localize("UTC").to_pydatetime().astimezone(zone).replace(tzinfo=None)
            == wall.to_pydatetime()
        )
    assert set((run["start_local"] - run["start_utc"]).unique()) == {
        pd.Timedelta(hours=1),
        pd.Timedelta(hours=2),
    }


def test_no_moment_lies_in_an_hour_that_exists_twice(cohort: Cohort) -> None:
    zone = ZoneInfo(cohort.programme.zone)
    start = cohort.run.set_index("run_no")["start_utc"]
    moments = [cohort.run["start_utc"]]
    for frame, column in (
        (cohort.ending, "end_h"),
        (cohort.follow_up, "discharge_h"),
        (cohort.follow_up, "contact_h"),
        (cohort.complication, "onset_h"),
        (cohort.complication, "resolved_h"),
        (cohort.weaning_step, "study_h"),
        (cohort.run, "decision_h"),
        (cohort.inputs, "arrest_onset_h"),
    ):
        known = frame[frame[column].notna()]
        moments.append(
            add_hours(
                start.reindex(known["run_no"]).reset_index(drop=True), known[column].reset_index(drop=True)
            )
        )
    for wall in local(pd.concat(moments), cohort.programme.zone):
        first = wall.to_pydatetime().replace(tzinfo=zone, fold=0)
        assert first.utcoffset() == first.replace(fold=1).utcoffset(), wall


def test_twice_hours_moves_to_their_end_and_keeps_order() -> None:
    twice = TwiceHours("Europe/Vienna", 2022, 2023)
    hours = pd.Series(pd.date_range("2022-10-29 22:30", "2022-10-30 03:30", freq="20min"))
    moved = twice.after(hours)
    assert moved.is_monotonic_increasing
    changed = hours[moved != hours]
    assert changed.min() == pd.Timestamp("2022-10-30 00:10")
    assert changed.max() == pd.Timestamp("2022-10-30 01:50")
    assert (moved[changed.index] == pd.Timestamp("2022-10-30 02:00")).all()


def test_support_is_seen_from_arrival_to_its_end(cohort: Cohort) -> None:
    ending = cohort.ending
    assert (ending["observed_h"] > ending["entry_h"]).all()
    assert (ending["end_h"].dropna() > 0).all()
    is_open = ending["end_kind"] == "open"
    assert is_open.any()
    assert (ending["end_h"].isna() == is_open).all()
    assert (ending.loc[is_open, "true_end_h"] > ending.loc[is_open, "observed_h"]).all()
    assert (cohort.run["transferred_in"] == (ending["entry_h"] > 0)).all()
    minutes = ending["end_h"].dropna() * 60.0
    assert np.allclose(minutes, minutes.round(), atol=1e-6)


def test_complications_lie_inside_support_and_apart(cohort: Cohort) -> None:
    events = observed(cohort, cohort.complication)
    assert ((events["onset_h"] > events["entry_h"]) & (events["onset_h"] > 0)).all()
    assert (events["onset_h"] < events["observed_h"]).all()
    over = events[events["resolved_h"].notna()]
    assert ((over["resolved_h"] > over["onset_h"]) & (over["resolved_h"] < over["observed_h"])).all()
    gap = events.groupby(["run_no", "kind"])["onset_h"].diff()
    needed = events["kind"].map({k.key: k.gap_h for k in KINDS})
    # Rounding to minutes and the hour that exists twice can take a little off.
    assert (gap.dropna() >= (needed - 2.1)[gap.notna()]).all()
    once = [k.key for k in KINDS if k.once]
    assert not events[events["kind"].isin(once)].duplicated(["run_no", "kind"]).any()
    assert events["kind"].duplicated().any()
    repeated = events[~events["kind"].isin(once)].duplicated(["run_no", "kind"])
    assert repeated.any()


def test_only_femoral_kinds_need_a_femoral_return(cohort: Cohort) -> None:
    events = cohort.complication.merge(cohort.run[["run_no", "arterial_return"]], on="run_no")
    femoral = events[events["kind"].isin([k.key for k in KINDS if k.femoral])]
    assert set(femoral["arterial_return"]) == {"femoral"}
    assert not cohort.run.loc[cohort.run["arterial_return"] != "femoral", "leg_cannula"].any()


def test_configurations_tile_support(cohort: Cohort) -> None:
    parts = observed(cohort, cohort.configuration)
    first, last = parts.groupby("run_no").nth(0), parts.groupby("run_no").nth(-1)
    assert (first["from_h"] == 0).all()
    after = parts.groupby("run_no")["from_h"].shift(-1)
    assert (parts.loc[after.notna(), "to_h"] == after.dropna()).all()
    ended = last[last["end_kind"] != "open"]
    assert np.allclose(ended["to_h"], ended["observed_h"])
    assert set(parts["config"]) == {"va", "vav"}


def test_weaning_studies_come_before_the_end(cohort: Cohort) -> None:
    steps = observed(cohort, cohort.weaning_step)
    assert ((steps["study_h"] > 0) & (steps["study_h"] <= steps["observed_h"])).all()
    assert (steps.groupby(["run_no", "study_h"]).size() >= 2).all()
    weaned = cohort.ending[(cohort.ending["end_kind"] == "recovery") & (cohort.ending["end_h"] > 30.0)]
    share = weaned["run_no"].isin(steps.loc[steps["result"] == "passed", "run_no"]).mean()
    assert share == pytest.approx(0.70, abs=0.05)


def test_stay_and_death_do_not_contradict(cohort: Cohort) -> None:
    both = observed(cohort, cohort.follow_up)
    seen = both[both["discharge_h"].notna()]
    assert (seen["discharge_h"] >= seen["observed_h"]).all()
    alive = seen["is_alive_at_discharge"].eq(True)
    assert (seen.loc[~alive, "register_death_h"] == seen.loc[~alive, "discharge_h"]).all()
    later = seen[alive & seen["register_death_h"].notna()]
    assert (later["register_death_h"] >= later["discharge_h"]).all()
    died = seen[seen["end_kind"] == "death"]
    assert (died["discharge_h"] == died["observed_h"]).all()
    assert not died["is_alive_at_discharge"].any()
    assert both.loc[both["end_kind"].isin(["open", "transfer_out"]), "discharge_h"].isna().all()
    dead = both["vital_status"].eq("dead")
    assert (both.loc[dead, "death_h"] == both.loc[dead, "true_death_h"]).all()
    assert (both.loc[dead, "death_h"] == both.loc[dead, "contact_h"]).all()
    told_alive = both[both["vital_status"].eq("alive") & both["true_death_h"].notna()]
    assert (told_alive["contact_h"] <= told_alive["true_death_h"]).all()


def test_nothing_is_known_after_the_extract(cohort: Cohort) -> None:
    noon = pd.Timestamp(cohort.extract_date).replace(hour=12)
    start = cohort.run["start_utc"]
    for hours in (
        cohort.ending["end_h"],
        cohort.follow_up["discharge_h"],
        cohort.follow_up["register_death_h"],
        cohort.follow_up["contact_h"],
    ):
        assert (local(add_hours(start, hours), cohort.programme.zone).dropna() <= noon).all()


def test_second_runs_follow_recovery_of_the_same_person(cohort: Cohort) -> None:
    run = cohort.run.merge(cohort.ending[["run_no", "true_end_kind"]], on="run_no", suffixes=("", "_too"))
    second = run[run["nth_run"] == 2].merge(run[run["nth_run"] == 1], on="person_no", suffixes=("", "_first"))
    assert len(second) == (run["nth_run"] == 2).sum() > 50
    assert set(second["true_end_kind_first"]) == {"recovery"}
    assert (second["hours_from_first_run"] >= second["end_h_first"] + 2.9).all()
    apart = (second["start_utc"] - second["start_utc_first"]) / pd.Timedelta(hours=1)
    assert np.allclose(apart, second["hours_from_first_run"])
    assert (second["indication_group"] == second["indication_group_first"]).all()
    assert second["age_years"].between(second["age_years_first"], second["age_years_first"] + 1).all()


def test_inputs_that_cannot_be_asked_are_missing(cohort: Cohort) -> None:
    inputs = cohort.inputs
    assert inputs.loc[~inputs["ventilated_at_zero"], "peak_inspiratory_pressure_cmh2o"].isna().all()
    assert inputs.loc[inputs["ventilated_at_zero"], "intubation_hours"].ge(0).all()
    assert inputs.loc[~inputs["pci_done"], "timi_flow_after_pci"].isna().all()
    assert inputs.loc[~inputs["had_arrest"], ["low_flow_min", "arrest_onset_h"]].isna().all().all()
    assert (inputs.loc[inputs["had_arrest"], "arrest_onset_h"] < 0).all()
    assert (inputs["dbp_mmhg"] < inputs["sbp_mmhg"]).all()
    assert inputs["map_mmhg"].between(inputs["dbp_mmhg"], inputs["sbp_mmhg"]).all()


def test_gaps_have_their_shares(cohort: Cohort) -> None:
    missing = cohort.recorded.isna().mean()
    assert missing["prothrombin_activity_percent"] == pytest.approx(0.60, abs=0.03)
    assert missing["ck_mb_activity_u_l"] == pytest.approx(0.50, abs=0.03)
    assert 1 - cohort.neuro["is_recorded"].mean() == pytest.approx(0.20, abs=0.03)
    whole = generate(200, seed=2, settings=Settings(has_missing=False))
    pd.testing.assert_frame_equal(whole.recorded, whole.inputs)


def test_transfers_and_attempts(cohort: Cohort) -> None:
    assert (cohort.transfer["direction"] == "in").sum() == cohort.run["transferred_in"].sum()
    assert (cohort.transfer["direction"] == "out").sum() == (
        cohort.ending["end_kind"] == "transfer_out"
    ).sum()
    assert len(cohort.attempt) > 30
    assert not set(cohort.attempt["record_number"]) & set(cohort.person["record_number"])


def test_identities_are_distinct_and_invented(cohort: Cohort) -> None:
    assert cohort.person["record_number"].is_unique
    assert cohort.person["phone"].str.startswith("+000 ").all()
    assert cohort.person["person_no"].is_unique
    assert set(cohort.run["person_no"]) == set(cohort.person["person_no"])
