"""Competing endings on up to six runs, with every kind of tie, by pencil.

Set B, times 1 A, 2 B, 2+, 3 A, 4+, 5 B (+ censored). All causes together: S(1−) = 1, S(2−) = 5/6,
S(3−) = 2/3, S(5−) = 4/9 with 6, 5, 3, 1 at risk, so
F_A(3) = 1/6 + 2/3·1/3 = 7/18, F_B(2) = 5/6·1/5 = 1/6, F_B(5) = 1/6 + 4/9 = 11/18, S(3) = 4/9.
"""

from __future__ import annotations

from fractions import Fraction as F
from typing import Any

import pandas as pd
import pytest

from outcomes.analysis.competing import compare_incidence, cumulative_incidence
from outcomes.analysis.result import Result
from outcomes.analysis.survival import kaplan_meier

TIME, CAUSE = [1, 2, 2, 3, 4, 5], ["A", "B", "", "A", "", "B"]


def row(result: Result, cause: str, t: float) -> Any:
    found = result.table[(result.table["cause"] == cause) & (result.table["time"] == t)]
    assert len(found) == 1
    return found.iloc[0]


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def test_two_endings_and_still_supported() -> None:
    result = cumulative_incidence(TIME, CAUSE)
    assert row(result, "A", 3)["estimate"] == near(F(7, 18))
    assert row(result, "B", 2)["estimate"] == near(F(1, 6))
    assert row(result, "B", 5)["estimate"] == near(F(11, 18))
    assert row(result, "still supported", 3)["estimate"] == near(F(4, 9))
    assert [row(result, "A", t)["at_risk"] for t in (0, 1, 2, 3, 5)] == [6, 6, 5, 3, 1]
    assert [row(result, "B", t)["events"] for t in (0, 1, 2, 3, 5)] == [0, 0, 1, 0, 1]
    assert [row(result, "A", t)["censored"] for t in (0, 1, 2, 3, 5)] == [0, 0, 1, 0, 1]


@pytest.mark.parametrize(
    ("kind", "variance"),
    [
        # F_A(3) − F_A(1) = 2/9, F_A(3) − F_A(2) = 2/9, 0 at 3.
        # Σ D² d/(n(n−d)): 4/81·(1/30 + 1/20) = 4/81·1/12 = 1/243.
        # Σ S²d_k(n−d_k)/n³: 1·5/216 + 4/9·2/27 = 5/216 + 8/243.
        # −2 Σ D S d_k/n²: −2·2/9·1/36 = −1/81 (at 2 no A; at 3 D = 0).
        # Together 1/243 + 5/216 + 8/243 − 1/81 = 31/648.
        ("aalen", F(31, 648)),
        ("infinitesimal_jackknife", F(31, 648)),
        # cmprsk's recursion by hand over 1 A, 2 B, 3 A: 91/1350.
        ("cmprsk", F(91, 1350)),
    ],
)
def test_three_variances_of_the_first_ending(kind: str, variance: F) -> None:
    found = row(cumulative_incidence(TIME, CAUSE, variance=kind), "A", 3)
    assert found["std_error"] ** 2 == near(variance)


@pytest.mark.parametrize(
    ("scale", "lower", "upper"),
    [("cloglog", 0.111760954667, 0.87080655754), ("loglog", 0.0481021644143, 0.745304523626)],
)
def test_limits_of_the_first_ending(scale: str, lower: float, upper: float) -> None:
    found = row(cumulative_incidence(TIME, CAUSE, interval=scale), "A", 3)
    assert (found["lower"], found["upper"]) == (near(lower), near(upper))


def test_the_other_ending_is_not_censoring() -> None:
    # With B censored 1 − Kaplan–Meier of A would be 1 − 5/6·2/3 = 4/9: more than 7/18.
    wrong = kaplan_meier(TIME, [c == "A" for c in CAUSE])
    at_three = wrong.table[wrong.table["time"] == 3]["estimate"].iloc[0]
    assert 1 - at_three == near(F(4, 9))
    assert row(cumulative_incidence(TIME, CAUSE), "A", 3)["estimate"] == near(F(7, 18))


def test_delayed_entry_parts_the_two_variances() -> None:
    # (entry, time, cause): (0,2,A) (0,3,+) (1,4,B) (2,5,A). F_A(2) = 1/3, S(2) = 2/3, F_B(4) = 2/3·1/2 = 1/3,
    # F_A(5) = 1/3 + 1/3. Var F_B(4), multinomial: D(2) = 1/3: 1/9·1/(3·2) + 4/9·1/8 = 1/54 + 1/18 = 2/27.
    data = ([2, 3, 4, 5], ["A", "", "B", "A"])
    result = cumulative_incidence(*data, entry=[0, 0, 1, 2])
    assert row(result, "A", 2)["estimate"] == near(F(1, 3))
    assert row(result, "B", 4)["estimate"] == near(F(1, 3))
    assert row(result, "A", 5)["estimate"] == near(F(2, 3))
    assert row(result, "B", 4)["std_error"] ** 2 == near(F(2, 27))
    other = cumulative_incidence(*data, entry=[0, 0, 1, 2], variance="infinitesimal_jackknife")
    assert row(other, "B", 4)["std_error"] ** 2 == near(F(5, 54))


def test_a_gap_that_opens_by_censoring_leaves_no_estimate() -> None:
    # (0,1,A) (0,2,+) (4,6,B): nobody is watched between 2 and 4, so neither F_A nor F_B at 6 is known.
    result = cumulative_incidence([1, 2, 6], ["A", "", "B"], entry=[0, 0, 4])
    assert row(result, "A", 1)["estimate"] == near(F(1, 2))
    for name in ("A", "B", "still supported"):
        assert (
            pd.isna(row(result, name, 6)["estimate"]) and row(result, name, 6)["reason"] == "empty_risk_set"
        )


def test_two_endings_and_a_censoring_at_one_time_share_the_risk_set() -> None:
    # At 2: A, A, B and one censored of five; S(2−) = 1. F_A = 2/5, F_B = 1/5, still 2/5; at 4 B: 2/5·1/1.
    # The one censored at 2 counts at 2 and is gone at 4.
    result = cumulative_incidence([2, 2, 2, 2, 4], ["A", "A", "B", "", "B"])
    assert row(result, "A", 2)["estimate"] == near(F(2, 5))
    assert row(result, "B", 2)["estimate"] == near(F(1, 5))
    assert row(result, "still supported", 2)["estimate"] == near(F(2, 5))
    assert row(result, "B", 4)["estimate"] == near(F(3, 5))
    assert row(result, "still supported", 4)["estimate"] == 0
    # No censoring before 2, so the variance is that of a proportion: 2/5·3/5/5.
    assert row(result, "A", 2)["std_error"] ** 2 == near(F(6, 125))


def test_ending_at_time_zero() -> None:
    result = cumulative_incidence([0, 1, 2], ["A", "B", ""])
    assert row(result, "A", 0)["estimate"] == near(F(1, 3))
    assert row(result, "B", 1)["estimate"] == near(F(1, 3))
    assert row(result, "still supported", 2)["estimate"] == near(F(1, 3))


def test_a_declared_ending_that_never_happened_has_an_exact_upper_limit() -> None:
    # Nobody was censored before 3: 0 of 6 at 1 and 3, upper limit 1 − 0.025^(1/6).
    result = cumulative_incidence([1, 2, 3, 3, 3, 3], ["A", "B", "A", "", "", ""], causes=["A", "B", "C"])
    for t in (1, 3):
        found = row(result, "C", t)
        assert (found["estimate"], found["lower"]) == (0, 0)
        assert found["upper"] == near(1 - 0.025 ** (1 / 6))


def test_weights_are_rows() -> None:
    # Weight 3 of the run that ends with A: as three rows. At 1: 3 of 4, at 2: B, F_B = 1/4.
    result = cumulative_incidence([1, 2], ["A", "B"], weights=[3, 1])
    assert row(result, "A", 1)["estimate"] == near(F(3, 4))
    assert row(result, "A", 1)["std_error"] ** 2 == near(F(3, 64))
    assert row(result, "B", 2)["estimate"] == near(F(1, 4))


def test_empty_declared_group_keeps_every_row() -> None:
    group = pd.Categorical(["x"] * 6, categories=["x", "y"])
    table = cumulative_incidence(TIME, CAUSE, group=group).table
    empty = table[table["group"] == "y"]
    assert empty["cause"].tolist() == ["A", "B", "still supported"]
    assert empty["reason"].tolist() == ["empty_group"] * 3 and empty["at_risk"].tolist() == [0, 0, 0]


def test_comparison_of_two_groups_of_six() -> None:
    # Group 0: 1A 1A 2B 3A 4+ 5A; group 1: 2B 3A 4+ 5B 6B 6+. Score 1.914286, variance 1.158339.
    time = [1, 1, 2, 3, 4, 5, 2, 3, 4, 5, 6, 6]
    cause = ["A", "A", "B", "A", "", "A", "B", "A", "", "B", "B", ""]
    table = compare_incidence(time, cause, [0] * 6 + [1] * 6).table
    found = table[table["cause"] == "A"].iloc[0]
    assert found["statistic"] == near(3.16357396763) and found["df"] == 1
    assert found["p_value"] == near(0.075298169162)
    assert found["statistic"] == pytest.approx(1.91428571429**2 / 1.15833858586, rel=1e-9)
