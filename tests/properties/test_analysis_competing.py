"""What must hold of every set of competing endings."""

from __future__ import annotations

from random import Random

import numpy as np
import pandas as pd
import pytest
from analysis_made import FEW, Runs, floats, has_no_nan, runs, same
from hypothesis import given
from hypothesis import strategies as st

from outcomes.analysis.competing import compare_incidence, cumulative_incidence
from outcomes.analysis.survival import kaplan_meier
from outcomes.errors import NotEstimable

KINDS = ("aalen", "infinitesimal_jackknife", "cmprsk")


def of(table: pd.DataFrame, cause: str) -> pd.DataFrame:
    return table[table["cause"] == cause].reset_index(drop=True)


@FEW
@given(runs(causes=3), st.sampled_from(KINDS[:2]), st.sampled_from(["cloglog", "loglog", "plain"]))
def test_endings_and_still_add_to_one_within_bounds(made: Runs, kind: str, scale: str) -> None:
    table = cumulative_incidence(
        made.time, made.cause, entry=made.entry, weights=made.weight, causes=[1, 2, 3], variance=kind,
        interval=scale, times=[0.5, 3, 20],
    ).table  # fmt: skip
    has_no_nan(table)
    estimate = table.assign(estimate=floats(table["estimate"])).pivot(
        index="time", columns="cause", values="estimate"
    )
    known = estimate.dropna()
    assert np.allclose(known.sum(axis=1), 1, rtol=0, atol=1e-12)
    assert (known.min(axis=1) >= 0).all() and (known.max(axis=1) <= 1).all()
    assert (known.drop(columns="still supported").diff().fillna(0) >= -1e-15).all(axis=None)
    f, low, high = (floats(table[c]) for c in ("estimate", "lower", "upper"))
    both = ~np.isnan(low) & ~np.isnan(high)
    assert ((low[both] <= f[both] + 1e-12) & (f[both] <= high[both] + 1e-12)).all()
    assert ((low[both] >= 0) & (high[both] <= 1)).all()


@FEW
@given(runs(), st.sampled_from(KINDS[:2]))
def test_one_ending_is_the_mirror_of_survival(made: Runs, kind: str) -> None:
    """Limits included: both are on the log(−log) scale of the share without the ending."""
    late = made.entry if kind == "aalen" else np.zeros(len(made))
    curve = kaplan_meier(made.time, made.event, entry=late, weights=made.weight).table
    table = cumulative_incidence(
        made.time, made.event, entry=late, weights=made.weight, causes=[1], variance=kind
    ).table
    still, ending = of(table, "still supported"), of(table, "1")
    for name in ("estimate", "std_error", "lower", "upper"):
        values = floats(still[name])
        at = np.isin(floats(still["time"]), floats(curve["time"]))
        assert np.allclose(values[at], floats(curve[name]), rtol=1e-9, atol=1e-12, equal_nan=True)
    inside = (floats(still["estimate"]) > 0) & (floats(still["estimate"]) < 1)
    for ours, theirs in (("estimate", "estimate"), ("lower", "upper"), ("upper", "lower")):
        mine, mirrored = floats(ending[ours])[inside], 1 - floats(still[theirs])[inside]
        assert np.allclose(mine, mirrored, rtol=1e-9, atol=1e-12)
    assert np.allclose(
        floats(ending["std_error"])[inside],
        floats(still["std_error"])[inside],
        rtol=1e-9,
    )


@FEW
@given(runs(), st.randoms(use_true_random=False))
def test_order_of_rows_changes_nothing(made: Runs, random: Random) -> None:
    order = list(range(len(made)))
    random.shuffle(order)
    other = made.taken(order)
    first = cumulative_incidence(made.time, made.cause, entry=made.entry, weights=made.weight)
    second = cumulative_incidence(other.time, other.cause, entry=other.entry, weights=other.weight)
    assert first.table.equals(second.table)


@FEW
@given(runs(), st.sampled_from(KINDS))
def test_weights_are_repeated_rows(made: Runs, kind: str) -> None:
    entry = np.zeros(len(made)) if kind == "cmprsk" else made.entry
    place = np.repeat(np.arange(len(made)), made.weight.astype(int))
    rows = made.taken(place)
    left = cumulative_incidence(
        made.time, made.cause, entry=entry, weights=made.weight, causes=[1, 2], variance=kind
    )
    right = cumulative_incidence(rows.time, rows.cause, entry=entry[place], causes=[1, 2], variance=kind)
    same(left.table, right.table)


@FEW
@given(runs(late=False))
def test_entry_at_zero_is_no_entry(made: Runs) -> None:
    plain = cumulative_incidence(made.time, made.cause).table
    assert plain.equals(cumulative_incidence(made.time, made.cause, entry=made.entry).table)


@FEW
@given(runs(causes=3))
def test_merging_two_endings_adds_them(made: Runs) -> None:
    apart = cumulative_incidence(made.time, made.cause, entry=made.entry, causes=[1, 2, 3]).table
    merged = np.where(made.cause == 3, 2, made.cause)
    both = cumulative_incidence(made.time, merged, entry=made.entry, causes=[1, 2]).table
    added = floats(of(apart, "2")["estimate"]) + floats(of(apart, "3")["estimate"])
    assert np.allclose(floats(of(both, "2")["estimate"]), added, atol=1e-12, equal_nan=True)
    same(of(both, "1"), of(apart, "1"))


@FEW
@given(runs(), st.sampled_from([1 / 24, 24.0, 1e9]))
def test_unit_of_time_changes_no_curve(made: Runs, factor: float) -> None:
    first = cumulative_incidence(made.time, made.cause, entry=made.entry).table
    other = cumulative_incidence(made.time * factor, made.cause, entry=made.entry * factor).table
    same(first, other, but=("time",))


@FEW
@given(runs(), st.sampled_from(KINDS[:2]))
def test_every_run_twice_halves_the_variance(made: Runs, kind: str) -> None:
    once = cumulative_incidence(made.time, made.cause, entry=made.entry, variance=kind).table
    twice = cumulative_incidence(
        np.tile(made.time, 2), np.tile(made.cause, 2), entry=np.tile(made.entry, 2), variance=kind
    ).table
    assert np.allclose(floats(once["estimate"]), floats(twice["estimate"]), equal_nan=True)
    assert np.allclose(
        floats(once["std_error"]) ** 2, 2 * floats(twice["std_error"]) ** 2, rtol=1e-8, atol=1e-15,
        equal_nan=True,
    )  # fmt: skip


@FEW
@given(runs(late=False))
def test_without_late_entry_two_variances_are_one(made: Runs) -> None:
    first, second = (
        floats(cumulative_incidence(made.time, made.cause, causes=[1, 2], variance=k).table["std_error"])
        for k in KINDS[:2]
    )
    assert np.allclose(first, second, rtol=1e-8, atol=1e-9, equal_nan=True)


@FEW
@given(runs(), st.booleans())
def test_a_run_censored_at_zero_changes_only_the_number(made: Runs, late: bool) -> None:
    time, entry = made.without_events_at_zero(), made.entry if late else np.zeros(len(made))
    before = cumulative_incidence(time, made.cause, entry=entry, causes=[1, 2]).table
    after = cumulative_incidence(
        np.append(time, 0), np.append(made.cause, 0), entry=np.append(entry, 0), causes=[1, 2]
    ).table
    left, right = (t[t["time"] > 0].reset_index(drop=True) for t in (before, after))
    assert (right["n"] == left["n"] + 1).all()
    assert left.drop(columns="n").equals(right.drop(columns="n"))


@FEW
@given(runs(least=4, late=False))
def test_names_of_groups_do_not_matter_for_their_comparison(made: Runs) -> None:
    group = np.arange(len(made)) % 3

    def answer(names: list[str]) -> pd.DataFrame | str:
        try:
            return compare_incidence(made.time, made.cause, np.array(names)[group], causes=[1, 2]).table
        except NotEstimable as code:
            return code.reason_code

    first, second = answer(["a", "b", "c"]), answer(["z", "y", "x"])
    if isinstance(first, str) or isinstance(second, str):
        assert first == second
        return
    for name in ("statistic", "df", "p_value"):
        assert np.allclose(floats(first[name]), floats(second[name]), rtol=1e-6, atol=1e-9, equal_nan=True)


def test_label_of_an_ending_does_not_matter() -> None:
    time, cause = [1, 2, 2, 3], ["A", "B", "", "A"]
    named = cumulative_incidence(time, cause).table
    coded = cumulative_incidence(time, [1, 2, 0, 1]).table
    assert floats(named["estimate"]).tolist() == floats(coded["estimate"]).tolist()
    assert named["cause"].tolist()[:4] == ["A"] * 4 and coded["cause"].tolist()[:4] == ["1"] * 4


@pytest.mark.parametrize("kind", KINDS)
def test_no_censoring_is_a_multinomial(kind: str) -> None:
    time, cause = np.arange(1, 9), np.array([1, 2, 1, 1, 2, 1, 2, 1])
    table = of(cumulative_incidence(time, cause, variance=kind).table, "1")
    for r in table.itertuples():
        share = float(((time <= r.time) & (cause == 1)).mean())
        assert r.estimate == pytest.approx(share, abs=1e-12)
        if kind != "cmprsk" and 0 < share < 1:
            assert r.std_error**2 == pytest.approx(share * (1 - share) / 8, rel=1e-9)
