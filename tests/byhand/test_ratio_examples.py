"""Ratios of rates, observed over expected, standardised rates: few events, limits to twelve digits."""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import pytest

from outcomes.analysis.rates import direct_standardisation, rate_ratio, standardised_ratio
from outcomes.errors import NotEstimable


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def first(result: Any) -> Any:
    return result.table.iloc[0]


def test_four_events_against_two() -> None:
    # Given 6 events, 4 of them with chance 0.9/2.0 = 9/20 each. Upper tail: 15p⁴q² + 6p⁵q + p⁶.
    p, q = F(9, 20), F(11, 20)
    at, above = 15 * p**4 * q**2, 15 * p**4 * q**2 + 6 * p**5 * q + p**6
    exact, mid = first(rate_ratio(4, 0.9, 2, 1.1)), first(rate_ratio(4, 0.9, 2, 1.1, variance="midp"))
    assert exact["estimate"] == near(F(22, 9))
    assert (exact["lower"], exact["upper"]) == (near(0.350330243362), near(27.0229696413))
    assert (mid["lower"], mid["upper"]) == (near(0.433660706938), near(19.081853125))
    assert exact["p_value"] == near(2 * above) == near(0.5105278125)
    assert exact["p_midp"] == near(2 * above - at) == near(0.324461953125)


def test_no_event_in_the_group() -> None:
    exact, mid = first(rate_ratio(0, 900, 6, 1800)), first(rate_ratio(0, 900, 6, 1800, variance="midp"))
    assert exact["estimate"] == 0 and exact["lower"] == 0
    assert exact["upper"] == near(1.69862238859) and mid["upper"] == near(1.29509794488)
    # Upper limit of the share: 1 − 0.025^(1/6); as a ratio times 1800/900.
    share = 1 - 0.025 ** (1 / 6)
    assert exact["upper"] == near(share / (1 - share) * 2)


def test_no_event_in_the_reference() -> None:
    # The mirror of the case above: the lower limit is the inverse of its upper one.
    found = first(rate_ratio(6, 1800, 0, 900))
    assert found["reason"] == "not_reached"
    assert found[["estimate", "upper"]].isna().all() and found["lower"] == near(1 / 1.69862238859)


def test_no_event_anywhere() -> None:
    with pytest.raises(NotEstimable) as told:
        rate_ratio(0, 10, 0, 20)
    assert told.value.reason_code == "no_events"


def test_robust_and_quasi_errors_of_a_ratio() -> None:
    # Twelve runs a group of one hour each: x = 0,0,0,4 three times (rate 1) and 0,2 six times (rate 1).
    # Robust: Σ r²/x² = 3(3·1 + 9)/144 = 1/4 and 12/144 = 1/12, each times 12/11.
    # φ = (36 + 12)/22 = 24/11; quasi: φ(1/12 + 1/12).
    one, ref = [0, 0, 0, 4] * 3, [0, 2] * 6
    robust = first(rate_ratio(one, [1.0] * 12, ref, [1.0] * 12))
    assert robust["phi"] == near(F(24, 11)) and robust["estimate"] == near(1)
    assert robust["std_error"] == near(math.sqrt(F(1, 3) * F(12, 11)))
    assert robust["upper"] == near(math.exp(1.959963984540054 * math.sqrt(4 / 11)))
    quasi = first(rate_ratio(one, [1.0] * 12, ref, [1.0] * 12, variance="quasi"))
    assert quasi["std_error"] == near(math.sqrt(F(24, 11) / 6))


def test_three_deaths_where_one_and_a_half_were_predicted() -> None:
    # p = 0.2, 0.5, 0.8: all three die with 0.08, none with 0.08; E = 1.5, variance 0.16 + 0.25 + 0.16.
    found = first(standardised_ratio([1, 1, 1], [0.2, 0.5, 0.8]))
    assert found["estimate"] == near(2) and found["variance"] == near(0.57)
    assert found["p_at_least"] == near(0.08) and found["p_at_most"] == near(1)
    assert found["p_given"] == near(0.08)
    half = 1.959963984540054 * math.sqrt(0.57) / 1.5
    assert (found["given_lower"], found["given_upper"]) == (near(2 - half), near(2 + half))
    # z = (3 − 1.5)/√0.57 = 1.9868: just outside these limits.
    assert found["given_lower"] > 1 and 1.5 / math.sqrt(0.57) == near(1.9867985356)


def test_expected_with_a_variance_of_its_own() -> None:
    found = first(standardised_ratio(17, 11.4, variance_expected=1.44))
    spread = math.exp(1.959963984540054 * math.sqrt(1 / 17 + 1.44 / 11.4**2))
    assert (found["lower"], found["upper"]) == (near(17 / 11.4 / spread), near(17 / 11.4 * spread))
    assert (found["lower"], found["upper"]) == (near(0.888161642319), near(2.50377977535))
    known = first(standardised_ratio(17, 11.4, variance_expected=0))
    assert (known["lower"], known["upper"]) == (near(0.927037648119), near(2.39878192843))


def test_nothing_expected() -> None:
    with pytest.raises(NotEstimable) as told:
        standardised_ratio(2, 0)
    assert told.value.reason_code == "zero_expected"


def test_rate_standardised_over_two_strata() -> None:
    # w = 0.6/200 = 0.003 and 0.4/150 = 0.008/3: 3w₁ + 5w₂ = 0.009 + 0.04/3 = 67/3000; Σw²x.
    w = F(3, 1000), F(8, 3000)
    found = first(direct_standardisation([3, 5], [200, 150], [0.6, 0.4]))
    assert found["estimate"] == near(F(67, 3000)) == near(0.0223333333333)
    assert found["std_error"] ** 2 == near(3 * w[0] ** 2 + 5 * w[1] ** 2) == near(6.25555555556e-05)
    assert found["crude"] == near(F(8, 350))
    assert (found["lower"], found["upper"]) == (near(0.00962559187965), near(0.0444073575011))


def test_standardised_rate_of_nothing_has_an_upper_limit() -> None:
    # −ln 0.025 times the largest weight, 0.003.
    found = first(direct_standardisation([0, 0], [200, 150], [0.6, 0.4]))
    assert found["estimate"] == 0 and found["lower"] == 0 and found["upper"] == near(-math.log(0.025) * 0.003)


def test_standard_with_a_stratum_that_is_empty_here() -> None:
    with pytest.raises(NotEstimable) as told:
        direct_standardisation([3, 0], [200, 0], [0.6, 0.4])
    assert told.value.reason_code == "no_overlap"


def test_one_weight_far_above_the_others_is_warned_of() -> None:
    found = direct_standardisation([20, 1], [2000, 5], [0.5, 0.5])
    assert [note.code for note in found.notes] == ["WEIGHT"]
