"""Every estimator in every odd situation: an estimate, or a coded answer; never an accident, never NaN."""

from __future__ import annotations

import itertools
from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np
import pandas as pd
import pytest
from analysis_odd import CODES, SITUATIONS, SIX, Made, sound

from outcomes.analysis.compare import (
    difference_at,
    landmark,
    logrank,
    mantel_byar,
    rmst_difference,
    simon_makuch,
)
from outcomes.analysis.competing import compare_incidence, cumulative_incidence
from outcomes.analysis.rates import incidence_rate, mean_cumulative_count, proportion, rate_by_band
from outcomes.analysis.result import Result
from outcomes.analysis.survival import kaplan_meier, median_time, nelson_aalen, restricted_mean, survival_at
from outcomes.errors import InputRefused, NotEstimable


def _events(m: Made) -> tuple[Any, Any]:
    """An event at the end of every other run that has some length."""
    which = [i for i in range(0, len(m.time), 2) if m.time[i] > 0]
    return np.array(which, dtype=int), m.time[which]


def _counted(m: Made) -> Result:
    which, when = _events(m)
    return mean_cumulative_count(
        which, when, run=np.arange(len(m.time)), end=m.time, terminal=m.event, times=[0, 2]
    )


def _banded(m: Made) -> Result:
    which, when = _events(m)
    return rate_by_band(m.time, which, when, edges=[0, 1.5, 1e6])


def _exposed(m: Made) -> Any:
    return np.where(np.arange(len(m.time)) % 2 == 0, m.time / 2, np.nan)


def _curve(m: Made, scale: str) -> Result:
    return kaplan_meier(m.time, m.event, entry=m.entry, group=m.group, interval=scale, times=[0, 2.5, 9])


KINDS = ("aalen", "infinitesimal_jackknife", "cmprsk")


def _endings(m: Made, kind: str, scale: str) -> Result:
    return cumulative_incidence(
        m.time, m.cause, entry=None if kind == "cmprsk" else m.entry, group=m.group, causes=[1, 2],
        variance=kind, interval=scale, times=[0, 2.5, 9],
    )  # fmt: skip


CALLS: dict[str, Callable[[Made], Result]] = {
    **{f"kaplan_meier {scale}": partial(_curve, scale=scale)
       for scale in ("log-log", "log", "plain", "arcsine")},
    "kaplan_meier by person": lambda m: kaplan_meier(
        m.time, m.event, entry=m.entry, cluster=np.arange(len(m.time)) // 2
    ),
    "kaplan_meier from 2": lambda m: kaplan_meier(m.time, m.event, entry=m.entry, group=m.group, start=2),
    "survival_at": lambda m: survival_at(kaplan_meier(m.time, m.event, entry=m.entry, group=m.group), 2.5),
    "median_time": lambda m: median_time(kaplan_meier(m.time, m.event, entry=m.entry, group=m.group)),
    "nelson_aalen": lambda m: nelson_aalen(m.time, m.event, entry=m.entry, group=m.group, times=[0, 9]),
    "restricted_mean": lambda m: restricted_mean(m.time, m.event, 3, entry=m.entry, group=m.group),
    "restricted_mean of all": lambda m: restricted_mean(m.time, m.event, 3, entry=m.entry),
    **{f"cumulative_incidence {kind} {scale}": partial(_endings, kind=kind, scale=scale)
       for kind, scale in itertools.product(KINDS, ("cloglog", "loglog", "plain"))},
    "compare_incidence": lambda m: compare_incidence(m.time, m.cause, m.group, causes=[1, 2]),
    "logrank": lambda m: logrank(m.time, m.event, m.group, entry=m.entry),
    "logrank rho": lambda m: logrank(m.time, m.event, m.group, entry=m.entry, rho=1),
    "logrank strata": lambda m: logrank(m.time, m.event, m.group, strata=np.arange(len(m.time)) // 3),
    "difference_at": lambda m: difference_at(m.time, m.event, m.group, 2.5, entry=m.entry),
    "difference_at incidence": lambda m: difference_at(
        m.time, m.cause, m.group, 2.5, entry=m.entry, cause=1, causes=[1, 2]
    ),
    "rmst_difference": lambda m: rmst_difference(m.time, m.event, m.group, 3, entry=m.entry),
    "mantel_byar": lambda m: mantel_byar(m.time, m.event, _exposed(m), entry=m.entry),
    "simon_makuch": lambda m: simon_makuch(m.time, m.event, _exposed(m), entry=m.entry),
    "incidence_rate": lambda m: incidence_rate(m.event, m.time),
    "incidence_rate robust": lambda m: incidence_rate(m.event, m.time, variance="robust"),
    "incidence_rate quasi": lambda m: incidence_rate(m.event, m.time, variance="quasi"),
    "rate_by_band": _banded,
    "proportion": lambda m: proportion(m.event),
    "proportion by person": lambda m: proportion(m.event, cluster=np.arange(len(m.time)) // 2),
    "mean_cumulative_count": _counted,
}  # fmt: skip


@pytest.mark.parametrize("situation", SITUATIONS)
@pytest.mark.parametrize("call", CALLS)
def test_an_estimate_or_a_coded_answer(call: str, situation: str) -> None:
    try:
        result = CALLS[call](SITUATIONS[situation])
    except NotEstimable as answer:
        assert answer.reason_code in CODES and answer.reason
        return
    sound(result)


@pytest.mark.parametrize("call", CALLS)
def test_no_rows_is_an_answer(call: str) -> None:
    with pytest.raises(NotEstimable) as answer:
        CALLS[call](SITUATIONS["no rows"])
    assert answer.value.reason_code == "no_runs"


SPOILT: dict[str, dict[str, Any]] = {
    "time missing": {"time": [1, np.nan, 3, 4]},
    "time None": {"time": [1, None, 3, 4]},
    "time infinite": {"time": [1, np.inf, 3, 4]},
    "time negative": {"time": [1, -0.5, 3, 4]},
    "time in words": {"time": ["1", "2", "3", "4"]},
    "time too short": {"time": [1, 2, 3]},
    "cause missing": {"cause": [1, np.nan, 0, 1]},
    "cause not declared": {"cause": [1, 3, 0, 1]},
    "entry not before the end": {"entry": [0, 2, 0, 0]},
    "entry missing": {"entry": [0, np.nan, 0, 0]},
    "entry too short": {"entry": [0, 0]},
    "group missing": {"group": ["a", None, "a", "b"]},
    "group too short": {"group": ["a", "b"]},
    "weight half": {"weights": [1, 0.5, 1, 1]},
    "weight negative": {"weights": [1, -1, 1, 1]},
    "weight missing": {"weights": [1, np.nan, 1, 1]},
    "level 1": {"level": 1.0},
    "level 95": {"level": 95},
    "level missing": {"level": np.nan},
    "asked time negative": {"times": [-1]},
    "asked time missing": {"times": [np.nan]},
}
GOOD: dict[str, Any] = {"time": [1, 2, 3, 4], "cause": [1, 1, 0, 1], "entry": [0, 0, 0, 0],
                        "group": ["a", "b", "a", "b"], "weights": [1, 1, 1, 1], "level": 0.9,
                        "times": [2]}  # fmt: skip


def _asked(function: Callable[..., Result], keys: tuple[str, ...], second: str = "event", **more: Any) -> Any:
    def call(values: dict[str, Any]) -> Result:
        named = {k: values[k] for k in keys} | {second: values["cause"]}
        return function(time=values["time"], **named, **more)

    return call


REFUSALS = {
    "kaplan_meier": _asked(kaplan_meier, ("entry", "group", "weights", "level", "times")),
    "nelson_aalen": _asked(nelson_aalen, ("entry", "group", "weights", "level", "times")),
    "restricted_mean": _asked(restricted_mean, ("entry", "group", "weights", "level"), tau=2),
    "cumulative_incidence": _asked(
        cumulative_incidence, ("entry", "group", "weights", "level", "times"), "cause", causes=[1, 2]
    ),
    "compare_incidence": _asked(compare_incidence, ("group", "weights"), "cause", causes=[1, 2]),
    "logrank": _asked(logrank, ("entry", "group", "weights")),
    "difference_at": _asked(difference_at, ("entry", "group", "weights", "level"), t=2),
    "rmst_difference": _asked(rmst_difference, ("entry", "group", "weights", "level"), tau=2),
}
USES = {
    "kaplan_meier": {"entry", "group", "weight", "level", "asked"},
    "nelson_aalen": {"entry", "group", "weight", "level", "asked"},
    "restricted_mean": {"entry", "group", "weight", "level"},
    "cumulative_incidence": {"entry", "group", "weight", "level", "asked"},
    "compare_incidence": {"group", "weight"},
    "logrank": {"entry", "group", "weight"},
    "difference_at": {"entry", "group", "weight", "level"},
    "rmst_difference": {"entry", "group", "weight", "level"},
}


@pytest.mark.parametrize(
    ("call", "fault"),
    [(c, f) for c in REFUSALS for f in SPOILT if f.split()[0] in USES[c] | {"time", "cause"}],
)
def test_input_that_no_method_accepts_is_refused_without_its_values(call: str, fault: str) -> None:
    REFUSALS[call](GOOD)
    with pytest.raises(InputRefused) as refusal:
        REFUSALS[call](GOOD | SPOILT[fault])
    assert not any(mark in str(refusal.value) for mark in ("0.5", "95", "nan", "inf ", "-1"))


def test_two_dimensions_are_refused() -> None:
    with pytest.raises(InputRefused):
        kaplan_meier([[1, 2], [3, 4]], [[1, 0], [1, 0]])


@pytest.mark.parametrize("at", [0.0, 2.0, 9.0])
def test_landmark_keeps_what_is_watched_then(at: float) -> None:
    for m in SITUATIONS.values():
        if len(m.time):
            try:
                found = landmark(m.time, m.event, at, entry=m.entry)
            except NotEstimable as answer:
                assert answer.reason_code in CODES
                continue
            assert found is not None


def test_limits_beyond_any_number_are_not_reached() -> None:
    """A count of 1 in a microsecond beside years makes φ, and with it the log error, absurd."""
    found = incidence_rate([1, 1, 0], [1e-6, 1, 1e9], variance="quasi").table.iloc[0]
    assert pd.isna(found["upper"]) and found["reason"] == "not_reached" and found["lower"] == 0


def test_huge_times_give_the_same_curve() -> None:
    small = kaplan_meier(SIX, [1, 1, 0, 1, 0, 1]).table
    large = kaplan_meier(np.array(SIX) * 1e9, [1, 1, 0, 1, 0, 1]).table
    assert small.drop(columns="time").equals(large.drop(columns="time"))


def test_a_group_without_rows_keeps_its_place() -> None:
    m = SITUATIONS["one group empty"]
    table = kaplan_meier(m.time, m.event, group=m.group).table
    empty = table[table["group"] == "b"].iloc[0]
    assert empty["at_risk"] == 0 and empty["reason"] == "empty_group" and pd.isna(empty["estimate"])
