"""Proportions and their difference by hand."""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import pandas as pd
import pytest

from outcomes.analysis.rates import paired_difference, proportion, proportion_difference

Z2 = 1.959963984540054**2


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11)


@pytest.mark.parametrize(
    ("interval", "lower", "upper"),
    [
        ("wilson", 0.0523687458962, 0.360418864741),  # (p + z²/2n ± z√(pq/n + z²/4n²))/(1 + z²/n), p = 3/20
        ("exact", 0.0320709371855, 0.378926826545),  # β(0.025; 3, 18), β(0.975; 4, 17)
        ("midp", 0.0396197843292, 0.356107360314),  # P(X>3) + ½P(X=3) = 0.025; P(X<3) + ½P(X=3) = 0.025
        ("jeffreys", 0.0441313419752, 0.348577710858),  # β(0.025; 3½, 17½), β(0.975; 3½, 17½)
    ],
)
def test_three_of_twenty(interval: str, lower: float, upper: float) -> None:
    found = proportion(3, 20, interval=interval).table.iloc[0]
    assert found["estimate"] == near(F(3, 20)) and found["std_error"] ** 2 == near(F(51, 8000))
    assert (found["lower"], found["upper"]) == (near(lower), near(upper))
    assert (found["events"], found["at_risk"]) == (3, 20)


@pytest.mark.parametrize(
    ("interval", "upper"),
    [
        ("wilson", 0.242494006655),  # z²/(12 + z²)
        ("exact", 0.264648469397),  # 1 − 0.025^(1/12)
        ("midp", 0.220922191946),  # ½(1 − p)^12 = 0.025
        ("jeffreys", 0.185305938312),  # β(0.975; ½, 12½)
    ],
)
def test_none_of_twelve_and_all_of_twelve(interval: str, upper: float) -> None:
    none, everyone = (proportion(x, 12, interval=interval).table.iloc[0] for x in (0, 12))
    assert (none["estimate"], none["lower"], none["upper"]) == (0, 0, near(upper))
    assert (everyone["estimate"], everyone["upper"], everyone["lower"]) == (1, 1, near(1 - upper))
    assert pd.isna(none["std_error"]) and pd.isna(everyone["std_error"])


def test_closed_forms_at_none() -> None:
    assert proportion(0, 12).table["upper"].iloc[0] == near(Z2 / (12 + Z2))
    assert proportion(0, 12, interval="exact").table["upper"].iloc[0] == near(1 - 0.025 ** (1 / 12))
    # The one-sided exact limit at 95% is the two-sided one at 90%, and here the mid-P one at 95%.
    one_sided = proportion(0, 12, interval="exact", level=0.90).table["upper"].iloc[0]
    assert one_sided == near(0.220922191946) and one_sided == near(1 - 0.05 ** (1 / 12))


def test_one_of_one_and_none_of_one() -> None:
    # Exact: 1 of 1 from 0.025 to 1, 0 of 1 from 0 to 0.975.
    one, none = (proportion(x, 1, interval="exact").table.iloc[0] for x in (1, 0))
    assert (one["lower"], one["upper"]) == (near(0.025), 1)
    assert (none["lower"], none["upper"]) == (0, near(0.975))


@pytest.mark.parametrize(
    ("counts", "difference", "lower", "upper"),
    [
        # 4/5 − 3/5; the distances of each proportion to its Wilson limits, squared and added.
        ((56, 70, 48, 80), F(1, 5), 0.0524314724024, 0.333872654037),
        ((18, 40, 14, 42), F(7, 60), -0.0913660316813, 0.312104687805),
    ],
)
def test_difference_of_two(counts: tuple[int, ...], difference: F, lower: float, upper: float) -> None:
    found = proportion_difference(*counts).table.iloc[0]
    assert found["estimate"] == near(difference)
    assert (found["lower"], found["upper"]) == (near(lower), near(upper))


def test_difference_from_the_limits_of_each() -> None:
    one, two = proportion(5, 9).table.iloc[0], proportion(0, 7).table.iloc[0]
    found = proportion_difference(5, 9, 0, 7).table.iloc[0]
    # The second proportion is 0 and its lower limit 0, so the upper limit moves by the first alone.
    assert found["upper"] == near(one["upper"])
    assert found["lower"] == near(F(5, 9) - math.hypot(5 / 9 - one["lower"], two["upper"]))


def test_runs_of_the_same_person() -> None:
    # 1,1,0,1,0,0 of persons 1,1,2,3,4,4, three times over: p = 1/2, residuals by person 1, −½, ½, −1, so
    # Σ = 15/2 over 18² times 12/11 for twelve persons; over the binomial 1/72 it is deff = 20/11.
    hits, who = [1, 1, 0, 1, 0, 0] * 3, [f"{k}{p}" for k in range(3) for p in "aabcdd"]
    found = proportion(hits, cluster=who).table.iloc[0]
    assert found["std_error"] ** 2 == near(F(15, 2) / 18**2 * F(12, 11))
    assert found["std_error"] ** 2 * 72 == near(F(20, 11))
    # Wilson of 9.9/2 of 18·11/20 = 9.9 runs: ½ ± ½ z √(1/(n + z²)).
    half = math.sqrt(Z2 / (9.9 + Z2)) / 2
    assert (found["lower"], found["upper"]) == (near(0.5 - half), near(0.5 + half))


def test_unknown_status_stands_beside() -> None:
    # 3 of 5 known, 2 unknown: between 3/7 and 5/7.
    found = proportion(3, 5, unknown=2).table.iloc[0]
    assert (found["worst"], found["best"]) == (near(F(3, 7)), near(F(5, 7)))


def test_pairs_with_a_negative_difference() -> None:
    # 1 both, 1 first only, 7 second only, 12 neither: −6/21; φ corrected to 0; of 8 that differ 1 one way:
    # exact 2·(1 + 8)/2⁸ = 9/128, mid-P less 8/2⁸: 5/128.
    found = paired_difference(1, 1, 7, 12).table.iloc[0]
    assert found["estimate"] == near(F(-2, 7))
    assert (found["lower"], found["upper"]) == (near(-0.506920226686), near(-0.0255591241649))
    assert (found["p_exact"], found["p_value"]) == (near(F(9, 128)), near(F(5, 128)))


def test_pairs_that_balance() -> None:
    # 5 and 5: exact P capped at 1; mid-P 1 − ½·252/1024.
    found = paired_difference(0, 5, 5, 0).table.iloc[0]
    assert (found["p_exact"], found["p_value"]) == (1, near(1 - F(126, 1024)))
