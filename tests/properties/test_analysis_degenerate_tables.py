"""Odd counts, strata and frames: an estimate, or a coded answer; never an accident, never NaN."""

from __future__ import annotations

import itertools
from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest

from outcomes.analysis.describe import baseline, missing_patterns, missingness, standardised_difference
from outcomes.analysis.rates import (
    direct_standardisation,
    incidence_rate,
    paired_difference,
    proportion,
    proportion_difference,
    rate_ratio,
    standardised_ratio,
)
from outcomes.analysis.result import Result
from outcomes.errors import InputRefused, NotEstimable

COUNTS = [(0, 0), (0, 1), (1, 1), (0, 12), (12, 12), (1, 2), (3, 20), (0, 10**6), (999_999, 10**6)]
TOTALS = [(0, 0.0), (0, 1.0), (1, 1e-9), (5, 1e9), (137, 24.2), (10_000, 1e4), (1, 1.0)]


def sound(call: Callable[[], Result], may_lack: tuple[str, ...] = ()) -> None:
    try:
        table = call().table
    except NotEstimable as answer:
        assert answer.reason
        return
    assert len(table)
    for name in table.columns:
        if table[name].dtype == "Float64":
            assert np.isfinite(table[name].dropna().to_numpy(dtype=float)).all(), name
    for name in {"estimate", "lower", "upper"} & set(table.columns) - set(may_lack):
        assert (table[name].notna() | table["reason"].notna()).all(), name
    if "lower" in table.columns:
        known = table[["lower", "estimate", "upper"]].dropna().to_numpy(dtype=float)
        assert (np.diff(known, axis=1) >= -1e-12 * (1 + np.abs(known[:, 1:]))).all()


@pytest.mark.parametrize("counts", COUNTS)
@pytest.mark.parametrize("kind", ["wilson", "exact", "midp", "jeffreys"])
def test_one_share(counts: tuple[int, int], kind: str) -> None:
    sound(lambda: proportion(*counts, interval=kind, unknown=3))


@pytest.mark.parametrize("one", COUNTS)
@pytest.mark.parametrize("two", COUNTS)
def test_two_shares(one: tuple[int, int], two: tuple[int, int]) -> None:
    for kind, test in itertools.product(("newcombe", "miettinen-nurminen"), ("fisher", "fisher-midp")):
        if max(one[1], two[1]) <= 20 or test == "fisher-midp":
            sound(lambda k=kind, t=test: proportion_difference(*one, *two, interval=k, test=t))


@pytest.mark.parametrize("counts", list(itertools.product((0, 1, 7), repeat=4)), ids=str)
def test_pairs(counts: tuple[int, ...]) -> None:
    sound(lambda: paired_difference(*counts))


@pytest.mark.parametrize("one", TOTALS)
def test_one_rate_and_its_ratio_to_another(one: tuple[int, float]) -> None:
    for kind in ("auto", "exact", "midp", "byar"):
        sound(lambda k=kind: incidence_rate(*one, variance=k, per=1000))
    for two in TOTALS:
        for kind in ("auto", "exact", "midp"):
            sound(lambda k=kind, t=two: rate_ratio(*one, *t, variance=k))


@pytest.mark.parametrize("runs", [[0], [3], [0, 0], [0, 3], [2] * 12, [0] * 12, [0, 0, 0, 40] * 5], ids=str)
def test_rates_of_runs(runs: list[int]) -> None:
    hours = np.linspace(1, 2, len(runs))
    for kind in ("auto", "robust", "quasi", "midp"):
        sound(lambda k=kind: incidence_rate(runs, hours, variance=k))
        sound(lambda k=kind: incidence_rate(runs, hours * 0, variance=k))
        sound(lambda k=kind: incidence_rate(runs, hours, variance=k, cluster=np.arange(len(runs)) // 2))
    for kind in ("auto", "robust", "quasi"):
        sound(lambda k=kind: rate_ratio(runs, hours, runs[::-1], hours, variance=k))


@pytest.mark.parametrize("observed", [0, 1, 17, 10_000])
@pytest.mark.parametrize("expected", [0, 1e-9, 11.4, 1e6])
def test_observed_over_expected(observed: int, expected: float) -> None:
    for kind, spread in itertools.product(("exact", "midp", "byar"), (None, 0, 1.5)):
        sound(
            lambda k=kind, s=spread: standardised_ratio(observed, expected, interval=k, variance_expected=s)
        )


@pytest.mark.parametrize("p", [[], [0.0], [1.0], [0.0, 1.0], [0.5] * 40, [1e-9] * 3])
def test_observed_over_predictions(p: list[float]) -> None:
    for outcome in (np.zeros(len(p)), np.ones(len(p))):
        sound(lambda y=outcome: standardised_ratio(y, p))


@pytest.mark.parametrize(
    ("events", "population", "standard"),
    [([], [], []), ([0, 0], [5, 5], [1, 1]), ([1, 2], [0, 0], [1, 1]), ([3], [7], [2]),
     ([1, 0], [5, 0], [1, 0]),
     ([1, 1], [5, 5], [0, 0]), ([10**6, 1], [1e9, 1e-3], [1, 1])],
)  # fmt: skip
def test_standardised_rates(events: Any, population: Any, standard: Any) -> None:
    for kind in ("fay-feuer", "tiwari", "dobson"):
        try:
            sound(lambda k=kind: direct_standardisation(events, population, standard, interval=k))
        except InputRefused as refusal:
            assert refusal.code == "INPUT.POPULATION" and sum(population) == 0


FRAMES = {
    "no rows": pd.DataFrame({"x": pd.Series([], dtype=float), "y": pd.Series([], dtype=object)}),
    "one row": pd.DataFrame({"x": [1.0], "y": ["a"]}),
    "nothing known": pd.DataFrame({"x": [np.nan] * 3, "y": [None] * 3}),
    "constant": pd.DataFrame({"x": [2.0] * 4, "y": ["a"] * 4}),
    "nullable": pd.DataFrame(
        {"x": pd.array([1, None, 3, 4], "Int64"), "y": pd.array([True, None, False, True], "boolean")}
    ),
    "huge": pd.DataFrame({"x": [1e300, -1e300, 0.0, 1.0], "y": ["a", "b", "a", "b"]}),
}


@pytest.mark.parametrize("name", FRAMES)
def test_frames(name: str) -> None:
    frame = FRAMES[name]
    group = pd.Categorical(np.resize(["a", "b"], len(frame)), categories=["a", "b", "never"])
    sound(lambda: baseline(frame, group=group))
    sound(lambda: missingness(frame, outcome=group))
    sound(lambda: missing_patterns(frame))
    for column in ("x", "y"):
        known = frame[column].notna().to_numpy()
        x, labels = frame.loc[known, column].reset_index(drop=True), np.asarray(group)[known]
        if name != "huge":
            sound(lambda v=x, g=labels: standardised_difference(v, g))


REFUSED: dict[str, Callable[[], Result]] = {
    "x above n": lambda: proportion(3, 2),
    "half an x": lambda: proportion(1.5, 4),
    "negative x": lambda: proportion(-1, 4),
    "x in words": lambda: proportion("3", 4),
    "outcome 2": lambda: proportion([0, 1, 2]),
    "persons of totals": lambda: proportion(3, 4, cluster=[1, 2, 3, 4]),
    "level 95": lambda: proportion(3, 4, level=95),
    "no such interval": lambda: proportion(3, 4, interval="wald"),
    "negative unknown": lambda: proportion(3, 4, unknown=-1),
    "x1 above n1": lambda: proportion_difference(3, 2, 1, 2),
    "negative pairs": lambda: paired_difference(1, 2, 3, -1),
    "negative exposure": lambda: incidence_rate(1, -1.0),
    "half an event": lambda: incidence_rate(1.5, 1.0),
    "lengths": lambda: incidence_rate([1], [1, 2]),
    "exposure missing": lambda: incidence_rate(1, np.nan),
    "robust of totals": lambda: incidence_rate(1, 1.0, variance="robust"),
    "per nothing": lambda: incidence_rate(1, 1.0, per=0),
    "infinite exposure": lambda: rate_ratio(1, 1.0, 1, np.inf),
    "prediction above 1": lambda: standardised_ratio([0, 1], [0.5, 1.5]),
    "predictions too few": lambda: standardised_ratio([0, 1], [0.5]),
    "negative variance": lambda: standardised_ratio(1, 2.0, variance_expected=-1),
    "strata too few": lambda: direct_standardisation([1], [1, 2], [1]),
    "negative population": lambda: direct_standardisation([1], [-1], [1]),
    "infinite value": lambda: baseline(pd.DataFrame({"x": [np.inf]})),
    "group missing": lambda: baseline(pd.DataFrame({"x": [1.0]}), group=[None]),
    "no such column": lambda: baseline(pd.DataFrame({"x": [1]}), categorical=["y"]),
    "value missing": lambda: standardised_difference([1.0, np.nan], [0, 1]),
    "group of one missing": lambda: standardised_difference([1.0, 2.0], [0, None]),
    "weight 0": lambda: standardised_difference([1.0, 2.0], [0, 1], weights=[1, 0]),
    "reason of no variable": lambda: missingness(pd.DataFrame({"x": [1.0]}), reasons={"y": [""]}),
}


@pytest.mark.parametrize("name", REFUSED)
def test_counts_that_no_method_accepts_are_refused(name: str) -> None:
    with pytest.raises(InputRefused):
        REFUSED[name]()
