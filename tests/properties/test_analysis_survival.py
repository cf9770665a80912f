"""What must hold of every survival curve, whatever the runs."""

from __future__ import annotations

from random import Random

import numpy as np
import pytest
from analysis_made import FEW, Runs, floats, has_no_nan, runs, same
from hypothesis import assume, given
from hypothesis import strategies as st

from outcomes.analysis.survival import (
    kaplan_meier,
    median_time,
    nelson_aalen,
    restricted_mean,
    survival_at,
)
from outcomes.errors import InputRefused, NotEstimable

SCALES = ("log-log", "log", "plain", "arcsine")


@FEW
@given(runs(), st.sampled_from(SCALES), st.sampled_from([0.5, 0.9, 0.95, 0.99]))
def test_bounds_and_order(made: Runs, scale: str, level: float) -> None:
    table = kaplan_meier(
        made.time, made.event, entry=made.entry, weights=made.weight, interval=scale, level=level,
        times=[0.5, 3, 20],
    ).table  # fmt: skip
    has_no_nan(table)
    s, low, high = (floats(table[c]) for c in ("estimate", "lower", "upper"))
    known = ~np.isnan(s)
    assert ((s[known] >= 0) & (s[known] <= 1)).all() and (np.diff(s[known]) <= 1e-15).all()
    both = known & ~np.isnan(low) & ~np.isnan(high)
    assert ((low[both] <= s[both] + 1e-12) & (s[both] <= high[both] + 1e-12)).all()
    assert ((low[both] >= 0) & (high[both] <= 1)).all()
    assert (np.diff(floats(table["time"])) > 0).all()


@FEW
@given(runs(), st.randoms(use_true_random=False))
def test_order_of_rows_changes_nothing(made: Runs, random: Random) -> None:
    order = list(range(len(made)))
    random.shuffle(order)
    other = made.taken(order)
    first = kaplan_meier(made.time, made.event, entry=made.entry, weights=made.weight).table
    assert first.equals(kaplan_meier(other.time, other.event, entry=other.entry, weights=other.weight).table)


@FEW
@given(runs())
def test_weights_are_repeated_rows(made: Runs) -> None:
    rows = made.taken(np.repeat(np.arange(len(made)), made.weight.astype(int)))
    same(
        kaplan_meier(made.time, made.event, entry=made.entry, weights=made.weight).table,
        kaplan_meier(rows.time, rows.event, entry=rows.entry).table,
    )
    same(
        nelson_aalen(made.time, made.event, entry=made.entry, weights=made.weight).table,
        nelson_aalen(rows.time, rows.event, entry=rows.entry).table,
    )


@FEW
@given(runs(late=False))
def test_entry_at_zero_is_no_entry(made: Runs) -> None:
    plain = kaplan_meier(made.time, made.event).table
    assert plain.equals(kaplan_meier(made.time, made.event, entry=made.entry).table)
    assert plain.equals(kaplan_meier(made.time, made.event, entry=made.entry - 3).table)


@FEW
@given(runs(), st.booleans())
def test_a_run_censored_at_zero_changes_only_the_number(made: Runs, late: bool) -> None:
    """Someone without any time watched; with an event at 0 he would be at risk there."""
    time, entry = made.without_events_at_zero(), made.entry if late else np.zeros(len(made))
    before = kaplan_meier(time, made.event, entry=entry)
    after = kaplan_meier(np.append(time, 0), np.append(made.event, 0), entry=np.append(entry, 0))
    assert after.counts["n"] == before.counts["n"] + 1
    left, right = (r.table[r.table["time"] > 0].reset_index(drop=True) for r in (before, after))
    assert left.equals(right)


@FEW
@given(runs(), st.sampled_from([1e-6, 1 / 24, 24.0, 1e9]))
def test_unit_of_time_changes_no_curve(made: Runs, factor: float) -> None:
    first = kaplan_meier(made.time, made.event, entry=made.entry).table
    other = kaplan_meier(made.time * factor, made.event, entry=made.entry * factor).table
    assert np.allclose(floats(other["time"]), floats(first["time"]) * factor, rtol=1e-12)
    same(first, other, but=("time",))


@FEW
@given(runs())
def test_every_run_twice_halves_the_variance(made: Runs) -> None:
    once = kaplan_meier(made.time, made.event, entry=made.entry).table
    twice = kaplan_meier(
        *[np.tile(v, 2) for v in (made.time, made.event)], entry=np.tile(made.entry, 2)
    ).table
    assert np.allclose(floats(once["estimate"]), floats(twice["estimate"]), equal_nan=True)
    assert np.allclose(
        floats(once["std_error"]) ** 2, 2 * floats(twice["std_error"]) ** 2, rtol=1e-10, equal_nan=True
    )


@FEW
@given(runs(late=False))
def test_without_censoring_it_is_a_proportion(made: Runs) -> None:
    n = len(made)
    for r in kaplan_meier(made.time, np.ones(n)).table.itertuples():
        share = float((made.time > r.time).mean())
        assert r.estimate == pytest.approx(share, abs=1e-12)
        if 0 < share < 1:
            assert r.std_error**2 == pytest.approx(share * (1 - share) / n, rel=1e-9)


@FEW
@given(runs(late=False), st.integers(1, 8))
def test_without_censoring_the_area_is_a_mean(made: Runs, tau: int) -> None:
    short = np.minimum(made.time, tau)
    found = restricted_mean(made.time, np.ones(len(made)), tau).table.iloc[0]
    assert found["estimate"] == pytest.approx(short.mean(), abs=1e-12)
    if short.var() > 0:
        assert found["std_error"] ** 2 == pytest.approx(short.var() / len(made), rel=1e-9)


@FEW
@given(runs(), st.integers(1, 8))
def test_area_lies_between_nothing_and_tau_and_grows(made: Runs, tau: int) -> None:
    try:
        small = restricted_mean(made.time, made.event, tau / 2, entry=made.entry).table.iloc[0]
        large = restricted_mean(made.time, made.event, tau, entry=made.entry).table.iloc[0]
    except NotEstimable as answer:
        assert answer.reason_code in ("beyond_follow_up", "empty_risk_set")
        return
    assert 0 <= small["estimate"] <= large["estimate"] <= tau
    assert large["estimate"] - small["estimate"] <= tau / 2 + 1e-12
    for r in (small, large):
        assert r[["lower", "upper"]].isna().all() or r["lower"] <= r["estimate"] <= r["upper"]


@FEW
@given(runs(), st.sampled_from([0.1, 0.25, 0.5, 0.75]))
def test_quantile_is_where_the_curve_crosses(made: Runs, p: float) -> None:
    result = kaplan_meier(made.time, made.event, entry=made.entry)
    found = median_time(result, p).table.iloc[0]
    known = result.table.dropna(subset=["estimate"])
    below = known[floats(known["estimate"]) <= 1 - p + 1e-9]
    if found["estimate"] is None or not len(below):
        assert found[["estimate"]].isna().all() and found["reason"] == "not_reached"
        return
    assert found["estimate"] >= below["time"].iloc[0]
    for name, right in (("lower", False), ("upper", True)):
        if not found[[name]].isna().any():
            assert (found[name] >= found["estimate"]) if right else (found[name] <= found["estimate"])


@FEW
@given(runs(least=2), st.sampled_from([0, 1.5, 4, 30]))
def test_reading_off_agrees_with_asking(made: Runs, t: float) -> None:
    bare = survival_at(kaplan_meier(made.time, made.event, entry=made.entry), t).table.iloc[0]
    asked = survival_at(kaplan_meier(made.time, made.event, entry=made.entry, times=[t]), t).table.iloc[0]
    for name in ("estimate", "std_error"):
        a, b = floats(bare[[name]])[0], floats(asked[[name]])[0]
        assert (np.isnan(a) and np.isnan(b)) or a == b
    if not bare[["at_risk"]].isna().any():
        assert bare["at_risk"] == asked["at_risk"]


@FEW
@given(runs(least=2))
def test_groups_are_curves_of_their_own(made: Runs) -> None:
    group = np.where(np.arange(len(made)) % 2 == 0, "b", "a")
    together = kaplan_meier(made.time, made.event, entry=made.entry, group=group).table
    assert list(dict.fromkeys(together["group"])) == ["a", "b"]
    for name in ("a", "b"):
        part = made.taken(np.flatnonzero(group == name))
        alone = kaplan_meier(part.time, part.event, entry=part.entry).table
        inside = together[together["group"] == name].reset_index(drop=True)
        same(inside, alone, but=("group",))


@FEW
@given(runs(late=False))
def test_condition_on_a_time_divides_the_curve(made: Runs) -> None:
    whole = kaplan_meier(made.time, made.event, times=[2]).table.set_index("time")["estimate"]
    assume((made.time > 2).any() and whole.notna().loc[2.0] and whole.loc[2.0] > 0)
    rest = kaplan_meier(made.time, made.event, start=2).table
    for r in rest.itertuples():
        assert r.estimate == pytest.approx(whole.loc[r.time] / whole.loc[2.0], rel=1e-12, abs=1e-12)


@FEW
@given(runs())
def test_every_person_with_one_run_changes_little(made: Runs) -> None:
    """By person, with everyone alone, the variance is Greenwood's times G/(G−1) when nobody enters late."""
    n = 12 + len(made)
    time, event = np.resize(made.time, n), np.resize(made.event, n)
    plain = kaplan_meier(time, event).table
    person = kaplan_meier(time, event, cluster=np.arange(n)).table
    ratio = (
        floats(person["std_error"]) ** 2
        / np.where(plain["estimate"] < 1, floats(plain["std_error"]), np.nan) ** 2
    )
    assert np.allclose(ratio[~np.isnan(ratio)], n / (n - 1), rtol=1e-9)


@pytest.mark.parametrize("late", [3, 4])
def test_an_entry_that_is_not_before_the_end_is_refused(late: float) -> None:
    with pytest.raises(InputRefused):
        kaplan_meier([1, 3], [1, 0], entry=[0, late])
