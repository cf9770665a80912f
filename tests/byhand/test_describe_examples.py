"""Baseline tables, missing values and standardised differences on a handful of runs."""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import numpy as np
import pandas as pd
import pytest

from outcomes.analysis.describe import baseline, missing_patterns, missingness, standardised_difference
from outcomes.errors import InputRefused, NotEstimable


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def first(result: Any) -> Any:
    return result.table.iloc[0]


def test_quartiles_of_six_numbers() -> None:
    # Type 7: place 1 + 5p: 2.25 → 2 + ¼·2, 3.5 → 6, 4.75 → 8 + ¾·8. Mean 63/6, SD² = Σ(x − 10.5)²/5.
    row = first(baseline(pd.DataFrame({"x": [1, 2, 4, 8, 16, 32]})))
    assert (row["q25"], row["median"], row["q75"]) == (2.5, 6, 14) and row["mean"] == 10.5
    squares = sum((F(x) - F(21, 2)) ** 2 for x in (1, 2, 4, 8, 16, 32))
    assert row["std_dev"] == near(math.sqrt(squares / 5))


FRAME = pd.DataFrame(
    {"age": [50.0, 60.0, np.nan, 70.0], "sex": ["f", "m", "m", None], "arrest": [True, False, False, True]}
)


def test_baseline_counts_of_those_known_and_missing_apart() -> None:
    table = baseline(FRAME, group=["a", "a", "b", "b"]).table.set_index(
        ["group", "variable", "kind", "value"]
    )
    assert table.loc[("", "age", "number", ""), "median"] == 60
    assert table.loc[("", "age", "missing", ""), "count"] == 1
    assert table.loc[("", "age", "missing", ""), "share"] == near(F(1, 4))
    assert table.loc[("", "sex", "level", "m"), "share"] == near(F(2, 3))
    assert table.loc[("a", "sex", "level", "f"), "share"] == near(F(1, 2))
    assert table.loc[("b", "sex", "level", "f"), "count"] == 0
    assert table.loc[("b", "age", "number", ""), "reason"] == "one_run"
    assert table.loc[("", "arrest", "level", "1"), "count"] == 2
    assert set(table.loc["a"].index) == set(table.loc["b"].index) == set(table.loc[""].index)


def test_baseline_of_an_empty_group_and_of_nothing_known() -> None:
    group = pd.Categorical(["a"] * 4, categories=["a", "b"])
    table = baseline(FRAME.assign(none=np.nan), group=group).table
    assert set(table.loc[table["group"] == "b", "reason"]) == {"empty_group"}
    nothing = table[(table["variable"] == "none") & (table["group"] == "") & (table["kind"] == "number")]
    assert nothing["reason"].tolist() == ["no_runs"]


def test_numbers_can_be_shown_as_levels() -> None:
    table = baseline(pd.DataFrame({"centre": [1, 10, 2, 2]}), categorical=["centre"]).table
    assert table["value"].tolist() == ["1", "2", "10", ""] and table["count"].tolist() == [1, 2, 1, 0]


def test_missing_values_by_kind_and_outcome() -> None:
    frame = pd.DataFrame({"ph": [7.1, None, None, None, 7.3], "bmi": [20.0, 21.0, 22.0, 23.0, 24.0]})
    told = {"ph": ["", "", "not_applicable", "withheld", ""]}
    result = missingness(frame, reasons=told, outcome=["died", "died", "lived", "lived", "lived"])
    table = result.table.set_index(["group", "variable"])
    row = table.loc[("", "ph")]
    assert [row[k] for k in ("present", "missing", "not_applicable", "withheld", "eligible")] == [
        2,
        1,
        1,
        1,
        4,
    ]
    assert row["share"] == near(F(1, 4)) and table.loc[("died", "ph"), "share"] == near(F(1, 2))
    assert table.loc[("", "bmi"), "missing"] == 0
    assert [n.code for n in result.notes] == ["MISS"] and "10%" in result.notes[0].text
    with pytest.raises(InputRefused):
        missingness(frame, reasons={"bmi": ["withheld"] * 5})


def test_patterns_of_missing_values() -> None:
    frame = pd.DataFrame({"a": [1.0, None, None, 4.0, None], "b": [1.0, None, None, 4.0, 5.0]})
    table = missing_patterns(frame).table
    assert table["group"].tolist() == ["", "a, b", "a"] and table["count"].tolist() == [2, 2, 1]
    assert missing_patterns(frame, least=2).table["group"].tolist() == ["", "a, b", "others"]


def test_standardised_difference_of_means() -> None:
    # Means 12 and 10, SD 4 and 3: 2/√(25/2).
    one, ref = (
        [12 - 4 * math.sqrt(0.5), 12 + 4 * math.sqrt(0.5)],
        [10 - 3 * math.sqrt(0.5), 10 + 3 * math.sqrt(0.5)],
    )
    row = first(standardised_difference(ref + one, ["x", "x", "y", "y"]))
    assert row["estimate"] == near(2 / math.sqrt(12.5)) == near(0.565685424949)
    assert row["std_error"] == near(math.sqrt(1 / 2 + 1 / 2 + (4 / 12.5) / 8))
    assert row["variance_ratio"] == near(F(16, 9))


def test_standardised_difference_of_shares() -> None:
    # 31 and 22 of 100: 0.09/√((0.31·0.69 + 0.22·0.78)/2).
    x = [1] * 22 + [0] * 78 + [1] * 31 + [0] * 69
    row = first(standardised_difference(x, [0] * 100 + [1] * 100))
    assert row["kind"] == "binary" and row["estimate"] == near(0.204995966554)
    assert row["estimate"] == near(0.09 / math.sqrt((0.31 * 0.69 + 0.22 * 0.78) / 2))


def test_standardised_difference_of_three_levels() -> None:
    # Shares 0.2, 0.5, 0.3 against 0.3, 0.45, 0.25; a level in neither group changes nothing.
    one, ref = ["a"] * 20 + ["b"] * 50 + ["c"] * 30, ["a"] * 30 + ["b"] * 45 + ["c"] * 25
    group = [0] * 100 + [1] * 100
    assert first(standardised_difference(ref + one, group))["estimate"] == near(0.234739925772)
    mixed = pd.Series(pd.Categorical(ref + one, categories=["a", "b", "c", "never"]))
    assert first(standardised_difference(mixed, group))["estimate"] == near(0.234739925772)


def test_standardised_difference_without_spread() -> None:
    assert first(standardised_difference([2.5] * 4, [0, 0, 1, 1]))["estimate"] == 0
    for x, code in (
        ([1.5, 1.5, 2.5, 2.5], "constant_predictor"),
        (["a", "a", "b", "b"], "constant_predictor"),
    ):
        with pytest.raises(NotEstimable) as told:
            standardised_difference(x, [0, 0, 1, 1])
        assert told.value.reason_code == code
    with pytest.raises(NotEstimable) as told:
        standardised_difference([1.5, 2.5, 3.5], [0, 0, 1])
    assert told.value.reason_code == "one_run"
    with pytest.raises(NotEstimable) as told:
        standardised_difference([1.5, 2.5], [0, 0])
    assert told.value.reason_code == "one_group"


def test_weights_of_two_are_not_two_runs_but_change_no_mean() -> None:
    # (Σw)²/Σw² of equal weights is the number of runs.
    plain = first(standardised_difference([1.0, 2.0, 4.0, 8.0], [0, 0, 1, 1]))
    double = first(standardised_difference([1.0, 2.0, 4.0, 8.0], [0, 0, 1, 1], weights=[2.0] * 4))
    assert double["estimate"] == near(plain["estimate"]) and double["effective_n"] == near(2)
