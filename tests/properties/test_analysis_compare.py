"""Properties of comparisons: labels, order, units, repetition, strata, exposures that begin later."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
import pytest
from analysis_made import FEW as MORE
from analysis_made import Runs, runs, same
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from outcomes.analysis.compare import (
    difference_at,
    landmark,
    logrank,
    mantel_byar,
    rmst_difference,
    simon_makuch,
)
from outcomes.analysis.survival import kaplan_meier
from outcomes.errors import NotEstimable

FEW = settings(MORE, max_examples=15)


def halves(made: Runs) -> np.ndarray:
    return np.arange(len(made)) % 2


def compared(made: Runs, group: Any, **more: Any) -> pd.DataFrame:
    try:
        return logrank(made.time, made.event, group, entry=made.entry, weights=made.weight, **more).table
    except NotEstimable as answer:
        assume(answer.reason_code == "never")
        raise


def near(value: Any) -> Any:
    return pytest.approx(value, rel=1e-9, abs=1e-9)


@FEW
@given(runs(least=4))
def test_observed_and_expected_have_one_sum(made: Runs) -> None:
    table = compared(made, halves(made))
    assert table["observed"].iloc[1:].sum() == near(float(table["expected"].iloc[1:].sum()))
    assert table["variance"].iloc[1] == near(float(table["variance"].iloc[2]))


@FEW
@given(runs(least=6), st.permutations(range(3)))
def test_names_and_order_of_groups_do_not_matter(made: Runs, names: list[int]) -> None:
    group = np.arange(len(made)) % 3
    one = compared(made, group)
    other = compared(made, np.array(names)[group])
    assert one["statistic"].iloc[0] == near(float(other["statistic"].iloc[0]))
    assert sorted(one["observed"].iloc[1:]) == near(sorted(other["observed"].iloc[1:]))


@FEW
@given(runs(least=4), st.sampled_from([1 / 24, 3.0, 1e6]))
def test_unit_of_time_changes_no_test(made: Runs, factor: float) -> None:
    scaled = Runs(made.time * factor, made.cause, made.entry * factor, made.weight)
    same(compared(made, halves(made)), compared(scaled, halves(made)))


@FEW
@given(runs(least=4))
def test_weights_are_repeated_rows(made: Runs) -> None:
    counts = made.weight.astype(int)
    rows = made.taken(np.repeat(np.arange(len(made)), counts))
    rows = Runs(rows.time, rows.cause, rows.entry, np.ones(len(rows)))
    same(compared(made, halves(made)), compared(rows, np.repeat(halves(made), counts)))


@FEW
@given(runs(least=4))
def test_a_run_split_at_any_time_changes_no_test(made: Runs) -> None:
    """Each run is cut at its middle: (entry, middle] without an event, (middle, end] with it."""
    group, cut = halves(made), (made.entry + made.time) / 2
    assume((cut < made.time).all())
    whole = compared(made, group)
    cause = np.concatenate([made.cause, np.zeros(len(made), dtype=int)])
    split = Runs(np.concatenate([made.time, cut]), cause, np.concatenate([cut, made.entry]),
                 np.concatenate([made.weight, made.weight]))  # fmt: skip
    assume(((cut > 0) & (made.entry < cut)).all())
    again = compared(split, np.concatenate([group, group]))
    same(whole.drop(columns="n"), again.drop(columns="n"), ("p_value",))


@FEW
@given(runs(least=6))
def test_strata_of_one_group_each_tell_nothing(made: Runs) -> None:
    with pytest.raises(NotEstimable) as answer:
        logrank(made.time, np.ones(len(made)), halves(made), strata=halves(made))
    assert answer.value.reason_code == "no_overlap"


@FEW
@given(runs(least=4, late=False), st.floats(0.5, 8), st.sampled_from(["auto", "plain", "square-and-add"]))
def test_difference_changes_its_sign_with_the_order(made: Runs, t: float, kind: str) -> None:
    try:
        one = difference_at(made.time, made.event, halves(made), t, interval=kind).table.iloc[0]
        other = difference_at(made.time, made.event, 1 - halves(made), t, interval=kind).table.iloc[0]
    except NotEstimable as answer:
        assert answer.reason_code == "beyond_follow_up"
        return
    assert one["estimate"] == near(-float(other["estimate"])) and -1 <= one["estimate"] <= 1
    if not pd.isna(one["lower"]):
        assert one["lower"] == near(-float(other["upper"])) and one["upper"] == near(-float(other["lower"]))
        assert one["lower"] <= one["estimate"] <= one["upper"]


@FEW
@given(runs(least=4, late=False), st.integers(1, 5))
def test_difference_of_means_is_mirrored_and_its_ratio_inverted(made: Runs, tau: int) -> None:
    try:
        one = rmst_difference(made.time, made.event, halves(made), tau).table.iloc[0]
        other = rmst_difference(made.time, made.event, 1 - halves(made), tau).table.iloc[0]
    except NotEstimable as answer:
        assert answer.reason_code == "beyond_follow_up"
        return
    assert one["estimate"] == near(-float(other["estimate"]))
    if not pd.isna(one["ratio"]) and not pd.isna(other["ratio"]):
        assert one["ratio"] * other["ratio"] == near(1.0)


@FEW
@given(runs(least=3), st.integers(0, 6))
def test_landmark_flow_adds_up(made: Runs, at: int) -> None:
    try:
        found = landmark(made.time, made.event, at, entry=made.entry, exposure_time=made.time / 2)
    except NotEstimable as answer:
        assert answer.reason_code == "no_runs"
        return
    flow = found.flow.table.set_index("group")["events"]
    lost = ["event at or before the landmark", "censored at or before the landmark",
            "seen only from after the landmark"]  # fmt: skip
    assert flow["all runs"] == sum(flow[stage] for stage in lost) + flow["kept"]
    assert (found.time > 0).all() and len(found.time) == flow["kept"] == found.kept.sum()
    if not (made.entry > 0).any():
        conditional = kaplan_meier(made.time, made.event, start=at).table
        after = kaplan_meier(found.time, found.event).table
        assert conditional["estimate"].dropna().tolist() == near(after["estimate"].dropna().tolist())


@FEW
@given(runs(least=3, late=False))
def test_exposure_that_never_begins_is_one_curve(made: Runs) -> None:
    time = np.where(made.time == 0, 1.0, made.time)
    never = simon_makuch(time, made.event, [None] * len(made)).table
    plain = kaplan_meier(time, made.event).table
    same(never.drop(columns="group"), plain.drop(columns="group"))
    with pytest.raises(NotEstimable) as answer:
        mantel_byar(time, made.event, [None] * len(made))
    assert answer.value.reason_code == "one_group"


@FEW
@given(runs(least=4, late=False))
def test_exposure_from_the_start_is_a_log_rank_test(made: Runs) -> None:
    time = np.where(made.time == 0, 1.0, made.time)
    switch = np.where(halves(made) == 1, 0.0, np.nan)
    try:
        one = mantel_byar(time, made.event, switch).table.iloc[0]
    except NotEstimable as answer:
        assert answer.reason_code in ("no_events", "no_overlap")
        return
    assert one["statistic"] == near(float(logrank(time, made.event, halves(made)).table["statistic"].iloc[0]))
