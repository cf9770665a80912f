"""Comparisons of groups of three to six runs; fractions can be checked with a pencil."""

from __future__ import annotations

import itertools
import math
from fractions import Fraction as F
from typing import Any

import numpy as np
import pytest

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

# A: 1, 2, 2+, 3, 4+, 5.  B: 1+, 2, 4, 4, 5+, 6.
A = ([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1])
B = ([1, 2, 4, 4, 5, 6], [0, 1, 1, 1, 0, 1])
TIME, EVENT, GROUP = A[0] + B[0], A[1] + B[1], ["A"] * 6 + ["B"] * 6
# A: 1, 3, 4+.  B: 2, 2+, 5.
SHORT = ([1, 3, 4, 2, 2, 5], [1, 1, 0, 1, 0, 1], ["A"] * 3 + ["B"] * 3)


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def first(result: Any) -> Any:
    return result.table.iloc[0]


def test_log_rank_of_three_and_three() -> None:
    # At 1, 2, 3, 5 the share of A at risk is 3/6, 2/5, 2/3, 0: E = 47/30.
    # V = 1/4 + 6/25 + 2/9 + 0 = 641/900, O − E = 13/30, so χ² = 169/641.
    table = logrank(*SHORT).table.set_index("group")
    assert table.loc["A", "observed"] == 2 and table.loc["A", "expected"] == near(F(47, 30))
    assert table.loc["A", "variance"] == near(F(641, 900))
    assert table.loc["", "statistic"] == near(F(169, 641)) and table.loc["", "df"] == 1
    # P of χ² on 1: erfc(√(x/2)).
    assert table.loc["", "p_asymptotic"] == near(math.erfc(math.sqrt(169 / 641 / 2)))
    assert table.loc["", "p_asymptotic"] == near(0.607623200262)


def test_two_strata_with_the_same_rows_double_the_statistic() -> None:
    time, event, group = (v * 2 for v in SHORT)
    found = first(logrank(time, event, group, strata=[1] * 6 + [2] * 6))
    assert found["statistic"] == near(F(338, 641))
    assert found["p_value"] == near(0.46774375172)
    assert first(logrank(time, event, group))["statistic"] == near(0.607317869977)


def test_few_events_are_judged_by_permutation() -> None:
    # Four events. Of the 20 ways to choose three runs of six, count those with a statistic as large.
    time, event, _ = SHORT
    observed = first(logrank(*SHORT))["statistic"]
    hits = []
    for chosen in itertools.combinations(range(6), 3):
        labels = ["A" if i in chosen else "B" for i in range(6)]
        hits.append(first(logrank(time, event, labels))["statistic"] >= observed - 1e-9)
    found = logrank(*SHORT)
    assert [note.code for note in found.notes] == ["PERMUTED"]
    share, error = np.mean(hits), math.sqrt(np.mean(hits) * (1 - np.mean(hits)) / 10_000)
    assert abs(first(found)["p_value"] - share) < 4 * error
    assert first(logrank(*SHORT))["p_value"] == first(found)["p_value"]


def test_trend_of_two_groups_is_the_log_rank_test() -> None:
    # One degree of freedom: c(O−E)²c/(cVc) does not depend on the two scores.
    assert first(logrank(*SHORT, scores=[3, 7]))["statistic"] == near(F(169, 641))


def test_weight_of_a_falling_curve() -> None:
    # rho = 1: weights S(u−) = 1, 5/6, 2/3, 4/9 at 1, 2, 3, 5.
    # A: O = 1 + 2/3 = 5/3; E = 1/2 + 5/6·2/5 + 2/3·2/3 = 23/18; V = 1/4 + 25/36·6/25 + 4/9·2/9 = 167/324.
    table = logrank(*SHORT, rho=1).table.set_index("group")
    assert table.loc["A", "observed"] == near(F(5, 3)) and table.loc["A", "expected"] == near(F(23, 18))
    assert table.loc["A", "variance"] == near(F(1, 4) + F(25, 36) * F(6, 25) + F(4, 9) * F(2, 9))


def test_log_rank_has_no_answer_without_overlap() -> None:
    with pytest.raises(NotEstimable) as told:
        logrank([1, 2, 5, 6], [1, 1, 1, 1], ["a", "a", "b", "b"], entry=[0, 0, 4, 4])
    assert told.value.reason_code == "no_overlap"
    with pytest.raises(NotEstimable) as told:
        logrank([1, 2, 3, 4], [1, 1, 1, 0], ["a", "a", "b", "b"], strata=[1, 1, 2, 2])
    assert told.value.reason_code == "no_overlap"


def test_difference_at_three() -> None:
    # S_A(3) = 4/9 with variance 4/81, S_B(3) = 4/5 with variance (4/5)²/20 = 4/125.
    found = first(difference_at(TIME, EVENT, GROUP, 3))
    assert (found["group"], found["reference"], found["interval"]) == ("B", "A", "plain")
    assert found["value"] == near(F(4, 5)) and found["value_reference"] == near(F(4, 9))
    assert found["estimate"] == near(F(16, 45))
    variance = F(4, 81) + F(4, 125)
    assert found["std_error"] == near(math.sqrt(variance)) and found["std_error"] == near(0.285276560638)
    assert found["lower"] == near(-0.203576228928) and found["upper"] == near(0.914687340039)
    assert found["statistic_plain"] == near(F(16, 45) ** 2 / variance)
    assert found["statistic"] == near(1.20278816357) and found["p_plain"] == near(0.212634495739)


def test_difference_by_square_and_add() -> None:
    found = first(difference_at(TIME, EVENT, GROUP, 3, interval="square-and-add"))
    a, b = (kaplan_meier(*g, times=[3]).table.set_index("time").loc[3] for g in (A, B))
    d = 16 / 45
    assert found["lower"] == near(d - math.hypot(4 / 5 - b["lower"], a["upper"] - 4 / 9))
    assert found["upper"] == near(d + math.hypot(b["upper"] - 4 / 5, 4 / 9 - a["lower"]))


def test_difference_without_censoring_is_one_of_proportions() -> None:
    # 3 of 5 and 1 of 4 alive beyond 2.
    found = first(difference_at([1, 2, 3, 4, 5, 1, 1, 2, 6], [1] * 9, [0] * 5 + [1] * 4, 2))
    assert found["interval"] == "Newcombe" and found["estimate"] == near(F(1, 4) - F(3, 5))


def test_difference_where_nobody_died_in_one_group() -> None:
    # A: 2, 4+, 5; alive beyond 4: 2/3. B: 3+, 6, 6: all, two at risk at 4, exact lower limit √0.025.
    found = first(difference_at([2, 4, 5, 3, 6, 6], [1, 0, 1, 0, 1, 1], ["A"] * 3 + ["B"] * 3, 4.5))
    assert found["interval"].startswith("square-and-add") and found["estimate"] == near(F(1, 3))
    curve = kaplan_meier([2, 4, 5], [1, 0, 1]).table.iloc[1]
    assert found["lower"] == near(1 / 3 - math.hypot(1 - math.sqrt(0.025), curve["upper"] - 2 / 3))


def test_difference_of_incidences() -> None:
    # Ending 1 by 3: A has 1 of 4 and nobody left before, B has 2 of 4.
    cause = [1, 2, 2, 0, 1, 1, 2, 0]
    found = first(difference_at([1, 2, 3, 4] * 2, cause, [0] * 4 + [1] * 4, 3, cause=1))
    assert found["estimate"] == near(F(1, 4)) and found["interval"] == "Newcombe"
    assert found["std_error"] == near(math.sqrt(F(1, 4) * F(3, 4) / 4 + F(1, 2) * F(1, 2) / 4))


def test_difference_of_restricted_means() -> None:
    # A: 1 + 5/6 + 2/3 + 2·4/9 = 61/18, variance 287/648. B: S is 1 to 2, 4/5 to 4, 2/5 to 5: the sum is 4;
    # A(2) = 2, A(4) = 2/5: variance 4·1/20 + 4/25·2/8 = 6/25.
    found = first(rmst_difference(TIME, EVENT, GROUP, 5))
    assert found["value"] == near(4) and found["value_reference"] == near(F(61, 18))
    assert found["estimate"] == near(F(11, 18))
    assert found["std_error"] == near(math.sqrt(F(6, 25) + F(287, 648))) == near(0.82637838462)
    assert found["ratio"] == near(F(72, 61)) and found["log_ratio_error"] == near(0.231440925309)


def test_tau_beyond_the_follow_up_of_one_group_is_no_difference() -> None:
    with pytest.raises(NotEstimable) as told:
        rmst_difference([1, 4, 2, 9], [1, 0, 1, 0], [0, 0, 1, 1], 6)
    assert told.value.reason_code == "beyond_follow_up"
    three = rmst_difference([1, 4, 2, 9, 3, 8], [1, 0, 1, 0, 1, 1], [1, 1, 0, 0, 2, 2], 6)
    assert three.table["reason"].tolist()[0] == "beyond_follow_up"
    assert three.table["estimate"].notna().tolist() == [False, True]


def test_landmark_keeps_those_still_watched() -> None:
    # At 5: one dead at 2, one censored at 4, one seen only from 6; exposed at 4 and exactly at 5.
    found = landmark([2, 4, 7, 9, 12, 8], [1, 0, 1, 0, 1, 1], 5, exposure_time=[1, None, 4, 5, 6, None],
                     entry=[0, 0, 0, 0, 0, 6])  # fmt: skip
    assert found.time.tolist() == [2, 4, 7] and found.event.tolist() == [1, 0, 1]
    assert found.exposed.tolist() == [True, True, False]
    assert found.flow.table["events"].tolist() == [6, 1, 1, 1, 3, 2]


# Runs: dies at 2 unexposed; switches at 1, dies at 3; switches at 2, censored at 4; dies at 4 unexposed.
SWITCH = ([2, 3, 4, 4], [1, 1, 0, 1], [None, 1, 2, None])


def test_current_exposure_test_of_four_runs() -> None:
    # At risk at 2: unexposed 1, 3, 4 (run 3 switches just after 2), exposed 2. At 3: unexposed 4, exposed 2
    # and 3. At 4: unexposed 4, exposed 3. Exposed: O = 1, E = 1/4 + 2/3 + 1/2 = 17/12,
    # V = 3/16 + 2/9 + 1/4 = 95/144, χ² = (5/12)²/(95/144) = 25/95.
    table = mantel_byar(*SWITCH).table.set_index("group")
    assert table.loc["exposed", "observed"] == 1 and table.loc["exposed", "expected"] == near(F(17, 12))
    assert table.loc["exposed", "variance"] == near(F(95, 144))
    assert table.loc["", "statistic"] == near(F(25, 95))


def test_curves_by_current_exposure_of_four_runs() -> None:
    # Not yet exposed: 1/3 die at 2, the last of one at 4. Exposed from 1 on: 1 of 2 at 3.
    table = simon_makuch(*SWITCH).table.set_index(["group", "time"])
    assert table.loc[("not yet exposed", 2.0), "estimate"] == near(F(2, 3))
    assert table.loc[("not yet exposed", 4.0), "estimate"] == 0
    assert table.loc[("exposed", 3.0), "estimate"] == near(F(1, 2))


def test_group_from_the_future_is_refused_as_an_answer() -> None:
    time, event, ever = [2, 5, 6, 9], [1, 1, 0, 1], [0, 1, 0, 1]
    for call in (
        lambda: logrank(time, event, ever, known_at=[9, 1, 9, 3]),
        lambda: kaplan_meier(time, event, group=ever, known_at=[None, 1, None, 3]),
        lambda: difference_at(time, event, ever, 4, known_at=1),
        lambda: rmst_difference(time, event, ever, 4, known_at=1),
    ):
        with pytest.raises(NotEstimable) as told:
            call()
        assert told.value.reason_code == "grouping_from_the_future"
        assert "landmark" in told.value.reason and "Mantel-Byar" in told.value.reason
    assert first(logrank(time, event, ever, known_at=0))["n"] == 4


def test_immortal_time_makes_a_gap_of_thirty_points_out_of_nothing() -> None:
    """Deaths and implants both at 0.1 a day, independent: no effect at all. Survival at day 10 is e^−1.

    Ever implanted by 10 and alive: (1 − e^−1)·e^−1; ever implanted before death by 10: (1 − e^−2)/2; so the
    naive share among them is 0.5379. Never implanted: e^−2 of the rest (1 + e^−2)/2: 0.2384.
    """
    ever = (1 - math.exp(-1)) * math.exp(-1) / ((1 - math.exp(-2)) / 2)
    never = math.exp(-2) / ((1 + math.exp(-2)) / 2)
    assert ever == near(0.53788284274) and never == near(0.238405844044)
    stream = np.random.default_rng(20240101)
    death, implant = stream.exponential(10, 20_000), stream.exponential(10, 20_000)
    time, event = np.minimum(death, 10.5), (death <= 10.5).astype(int)
    switch = np.where(implant < np.minimum(time, 10.0), implant, np.nan)
    by_ending = kaplan_meier(time, event, group=np.where(np.isnan(switch), "never", "ever"), times=[10])
    shown = by_ending.table[by_ending.table["time"] == 10].set_index("group")["estimate"]
    assert abs(shown["ever"] - ever) < 0.02 and abs(shown["never"] - never) < 0.02
    by_current = simon_makuch(time, event, switch, times=[10]).table
    for value in by_current.loc[by_current["time"] == 10, "estimate"]:
        assert abs(value - math.exp(-1)) < 0.03
    assert first(mantel_byar(time, event, switch))["p_value"] > 0.001
    assert first(logrank(time, event, ~np.isnan(switch)))["p_value"] < 1e-10
