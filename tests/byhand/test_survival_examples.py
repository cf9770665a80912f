"""Survival on up to six runs: every number is a fraction that can be checked with a pencil.

Set A, times 1, 2, 2+, 3, 4+, 5 (+ censored): at risk 6, 5, 3, 1 at the event times, so
S(1) = 5/6, S(2) = 5/6·4/5 = 2/3, S(3) = 2/3·2/3 = 4/9, S(5) = 0.
"""

from __future__ import annotations

from fractions import Fraction as F
from typing import Any

import pandas as pd
import pytest

from outcomes.analysis.result import Result
from outcomes.analysis.survival import kaplan_meier, median_time, nelson_aalen, restricted_mean, survival_at
from outcomes.errors import NotEstimable

TIME, EVENT = [1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1]
# Greenwood at 3: 1/(6·5) + 1/(5·4) + 1/(3·2) = 1/4, so Var = (4/9)²/4 = 4/81.
VAR_3 = F(4, 81)


def row(result: Result, t: float, **where: str) -> Any:
    table = result.table
    for name, value in where.items():
        table = table[table[name] == value]
    found = table[table["time"] == t]
    assert len(found) == 1
    return found.iloc[0]


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def test_curve_of_six_with_a_tie_of_event_and_censoring() -> None:
    result = kaplan_meier(TIME, EVENT)
    steps: dict[int, tuple[F | int, int, int, int]] = {
        0: (1, 6, 0, 0),
        1: (F(5, 6), 6, 1, 0),
        2: (F(2, 3), 5, 1, 1),
        3: (F(4, 9), 3, 1, 0),
        5: (0, 1, 1, 1),
    }
    assert result.table["time"].tolist() == list(steps)
    for t, (s, n, events, censored) in steps.items():
        found = row(result, t)
        assert found["estimate"] == near(s)
        assert (found["at_risk"], found["events"], found["censored"]) == (n, events, censored)
    assert row(result, 3)["std_error"] ** 2 == near(VAR_3)
    assert result.counts["n"] == 6 and result.counts["events"] == 4


@pytest.mark.parametrize(
    ("scale", "lower", "upper"),
    [
        # z = 1.959964, S = 4/9, √g = 1/2: plain S ± z·2/9; log S·exp(± z/2), cut at 1;
        # log-log S^exp(± z/(2|ln S|)); arcsine sin²(asin(2/3) ± z/2·√(S/4/(5/9))).
        ("plain", 0.00889689232443, 0.879991996564),
        ("log", 0.166807936628, 1.0),
        ("log-log", 0.0661867531464, 0.784908367148),
        ("arcsine", 0.0825740871195, 0.846333968488),
    ],
)
def test_four_intervals_at_three(scale: str, lower: float, upper: float) -> None:
    found = row(kaplan_meier(TIME, EVENT, interval=scale), 3)
    assert (found["lower"], found["upper"]) == (near(lower), near(upper))


def test_no_interval_at_zero_survival() -> None:
    last = row(kaplan_meier(TIME, EVENT), 5)
    assert last["estimate"] == 0 and last["reason"] == "no_nonevents"
    assert pd.isna(last["std_error"]) and pd.isna(last["lower"]) and pd.isna(last["upper"])


def test_a_run_that_enters_at_an_event_time_is_not_at_risk_there() -> None:
    # (entry, time, event): (0,2,1) (0,3,0) (1,4,1) (2,5,1). At 2: the first three, S = 2/3. At 4: third and
    # fourth, S = 2/3·1/2 = 1/3. At 5: the fourth alone, S = 0.
    result = kaplan_meier([2, 3, 4, 5], [1, 0, 1, 1], entry=[0, 0, 1, 2])
    assert [row(result, t)["at_risk"] for t in (2, 4, 5)] == [3, 2, 1]
    assert [row(result, t)["estimate"] for t in (2, 4, 5)] == [near(F(2, 3)), near(F(1, 3)), 0]


def test_entry_at_a_censoring_time_comes_after_the_censoring() -> None:
    # (0,2,0) (0,4,1) (2,5,1): just before 2 two are watched; at 4 the second and the third: S = 1/2.
    result = kaplan_meier([2, 4, 5], [0, 1, 1], entry=[0, 0, 2], times=[2])
    assert [row(result, t)["at_risk"] for t in (2, 4, 5)] == [2, 2, 1]
    assert [row(result, t)["estimate"] for t in (2, 4, 5)] == [1, near(F(1, 2)), 0]


def test_two_events_two_censorings_and_an_entry_at_one_time() -> None:
    # At 3: at risk (1,3,1) (0,3,1) (0,3,0) (0,3,0) (0,6,1) = 5, not (3,7,0): S = 3/5, g = 2/(5·3).
    # At 6: (0,6,1) and (3,7,0) are at risk: S = 3/10, g = 2/15 + 1/2 = 19/30, Var = 9/100·19/30 = 57/1000.
    result = kaplan_meier([3, 3, 3, 3, 6, 7], [1, 1, 0, 0, 1, 0], entry=[1, 0, 0, 0, 0, 3])
    third, sixth = row(result, 3), row(result, 6)
    assert (third["at_risk"], third["events"], third["censored"]) == (5, 2, 2)
    assert third["estimate"] == near(F(3, 5)) and third["std_error"] ** 2 == near(F(9, 25) * F(2, 15))
    assert sixth["at_risk"] == 2 and sixth["estimate"] == near(F(3, 10))
    assert sixth["std_error"] ** 2 == near(F(57, 1000))


def test_weight_two_for_every_run_halves_the_variance() -> None:
    found = row(kaplan_meier(TIME, EVENT, weights=[2] * 6), 3)
    assert found["estimate"] == near(F(4, 9)) and found["std_error"] ** 2 == near(F(2, 81))
    assert found["at_risk"] == 6


def test_all_of_twelve_alive_have_an_exact_lower_limit() -> None:
    # (α/2)^(1/12) = 0.025^(1/12).
    found = row(kaplan_meier([5] * 12, [0] * 12), 5)
    assert (found["estimate"], found["upper"]) == (1, 1)
    assert found["lower"] == near(0.735351530603)


def test_survival_between_two_events() -> None:
    # At 2.5 three are left under observation: those of 3, 4+ and 5.
    result = kaplan_meier(TIME, EVENT, times=[2.5])
    found = survival_at(result, 2.5).table.iloc[0]
    assert found["estimate"] == near(F(2, 3)) and found["at_risk"] == 3


def test_after_the_last_observation() -> None:
    assert survival_at(kaplan_meier(TIME, EVENT), 9).table["estimate"].tolist() == [0]
    open_end = survival_at(kaplan_meier([1, 2], [1, 0]), 3).table.iloc[0]
    assert pd.isna(open_end["estimate"]) and open_end["reason"] == "beyond_follow_up"


def test_median_with_a_lower_limit_only() -> None:
    # S falls to 4/9 <= 1/2 first at 3. The lower limits are 0.27 at 1 already; the upper ones (0.78 at 3)
    # never fall to 1/2.
    found = median_time(kaplan_meier(TIME, EVENT)).table.iloc[0]
    assert (found["estimate"], found["lower"]) == (3, 1)
    assert pd.isna(found["upper"]) and found["reason"] == "not_reached"


def test_median_on_a_flat_is_its_middle() -> None:
    # Four events at 1, 2, 3, 4: S = 1/2 on [2, 3), 3/4 on [1, 2).
    result = kaplan_meier([1, 2, 3, 4], [1, 1, 1, 1])
    assert median_time(result).table["estimate"].tolist() == [2.5]
    assert median_time(result, 0.25).table["estimate"].tolist() == [1.5]


def test_median_where_the_flat_has_no_end_is_its_beginning() -> None:
    # Two of four die at 2, the others are censored: S stays 1/2 from 2 on.
    found = median_time(kaplan_meier([2, 2, 5, 6], [1, 1, 0, 0])).table.iloc[0]
    assert found["estimate"] == 2 and pd.isna(found["upper"])


def test_restricted_mean_to_five() -> None:
    # 1·1 + 5/6·1 + 2/3·1 + 4/9·2 = 61/18. A(1) = 43/18, A(2) = 14/9, A(3) = 8/9:
    # Var = A(1)²/30 + A(2)²/20 + A(3)²/6 = 287/648.
    found = restricted_mean(TIME, EVENT, 5).table.iloc[0]
    assert found["estimate"] == near(F(61, 18)) and found["std_error"] ** 2 == near(F(287, 648))


def test_restricted_mean_with_late_entry_and_weights() -> None:
    # (0,2,1) (0,3,0) (1,4,1) (2,5,1) to 4: 2·1 + 2·2/3 = 10/3; A(2) = 4/3, n = 3: Var = 16/9/(3·2) = 8/27;
    # the event at 4 = τ has no area after it. Every weight 2: n = 6, d = 2: 16/9·2/(6·4) = 4/27.
    data = ([2, 3, 4, 5], [1, 0, 1, 1])
    once = restricted_mean(*data, 4, entry=[0, 0, 1, 2]).table.iloc[0]
    twice = restricted_mean(*data, 4, entry=[0, 0, 1, 2], weights=[2] * 4).table.iloc[0]
    assert once["estimate"] == near(F(10, 3)) and once["std_error"] ** 2 == near(F(8, 27))
    assert twice["estimate"] == near(F(10, 3)) and twice["std_error"] ** 2 == near(F(4, 27))


def test_events_at_time_zero_step_the_curve_at_zero() -> None:
    # Three runs, events at 0, 1, 2: S(0) = 2/3, S(1) = 1/3, S(2) = 0.
    result = kaplan_meier([0, 1, 2], [1, 1, 1])
    assert [row(result, t)["estimate"] for t in (0, 1, 2)] == [near(F(2, 3)), near(F(1, 3)), 0]
    assert [row(result, t)["at_risk"] for t in (0, 1, 2)] == [3, 2, 1]


def test_an_emptied_risk_set_is_not_revived() -> None:
    # (0,1,1) (0,2,1) (4,6,1): nobody is watched between 2 and 4; S(2) = 0 stays 0 at 6.
    result = kaplan_meier([1, 2, 6], [1, 1, 1], entry=[0, 0, 4])
    assert [row(result, t)["estimate"] for t in (1, 2, 6)] == [near(F(1, 2)), 0, 0]
    assert row(result, 6)["reason"] == "empty_risk_set"


def test_a_gap_that_opens_by_censoring_leaves_no_estimate() -> None:
    # (0,1,1) (0,2,0) (4,6,1): S(2) = 1/2, then nobody is watched until 4: S(6) is unknown.
    result = kaplan_meier([1, 2, 6], [1, 0, 1], entry=[0, 0, 4])
    assert row(result, 1)["estimate"] == near(F(1, 2))
    assert pd.isna(row(result, 6)["estimate"]) and row(result, 6)["reason"] == "empty_risk_set"


def test_no_area_over_a_gap() -> None:
    # The same runs: the area to 6 would need S between 2 and 6. To 2 it is 1 + 1/2.
    with pytest.raises(NotEstimable) as answer:
        restricted_mean([1, 2, 6], [1, 0, 1], 6, entry=[0, 0, 4])
    assert answer.value.reason_code == "empty_risk_set"
    found = restricted_mean([1, 2, 6], [1, 0, 1], 2, entry=[0, 0, 4]).table.iloc[0]
    assert found["estimate"] == near(F(3, 2))


def test_curve_conditional_on_being_alive_at_two() -> None:
    # Of set A those beyond 2: 3, 4+, 5: S(3 | 2) = 2/3, S(5 | 2) = 0; 4/9 = 2/3·2/3 fits with S(2) = 2/3.
    result = kaplan_meier(TIME, EVENT, start=2)
    assert [row(result, t)["estimate"] for t in (2, 3, 5)] == [1, near(F(2, 3)), 0]
    assert row(result, 2)["at_risk"] == 3


def test_cumulative_hazard_of_six() -> None:
    # H(3) = 1/6 + 1/5 + 1/3 = 7/10; Var = 1/36 + 1/25 + 1/9 = 161/900.
    found = row(nelson_aalen(TIME, EVENT), 3)
    assert found["estimate"] == near(F(7, 10)) and found["std_error"] ** 2 == near(F(161, 900))


def test_groups_stand_below_each_other_in_their_declared_order() -> None:
    group = pd.Categorical(["b", "a", "a", "b", "a", "b"], categories=["b", "a", "none"])
    result = kaplan_meier(TIME, EVENT, group=group)
    assert list(dict.fromkeys(result.table["group"])) == ["b", "a", "none"]
    # b: 1, 3, 5 all events: 2/3, 1/3, 0. a: 2, 2+, 4+: S(2) = 2/3.
    assert [row(result, t, group="b")["estimate"] for t in (1, 3, 5)] == [near(F(2, 3)), near(F(1, 3)), 0]
    assert row(result, 2, group="a")["estimate"] == near(F(2, 3))
    empty = row(result, 0, group="none")
    assert empty["at_risk"] == 0 and empty["reason"] == "empty_group" and pd.isna(empty["estimate"])
