"""States, baseline tables, differences and counts in odd situations: an estimate or a coded answer."""

from __future__ import annotations

import itertools
from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest
from analysis_odd import CODES, SITUATIONS, Made, sound

from outcomes.analysis.describe import baseline, missing_patterns, missingness
from outcomes.analysis.multistate import length_of_stay, state_occupation
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
from outcomes.analysis.standard_difference import standardised_difference
from outcomes.errors import InputRefused, NotEstimable

STATES = ["support", "off", "dead"]


def stays(m: Made) -> pd.DataFrame:
    """On support from entry to the time; cause 1 leads off support for an hour more, cause 2 to death."""
    rows = []
    for i, (start, stop, cause) in enumerate(zip(m.entry, m.time, m.cause, strict=True)):
        if stop <= start:
            continue  # a stay without length is no stay
        rows.append((i, start, stop, "support", {0: None, 1: "off", 2: "dead"}[int(cause)]))
        if cause == 1:
            rows.append((i, stop, stop + 1, "off", "dead" if i % 2 else None))
    return pd.DataFrame(rows, columns=["run_key", "from_h", "to_h", "state", "next_state"])


def frame(m: Made) -> pd.DataFrame:
    n = len(m.time)
    return pd.DataFrame(
        {
            "hours": m.time,
            "lactate": np.where(np.arange(n) % 3 == 0, np.nan, m.time),
            "unknown": np.full(n, np.nan),
            "rhythm": pd.Series(np.resize(["sinus", None], n) if n else [], dtype="string"),
            "arrest": m.event.astype(bool),
        }
    )


CALLS: dict[str, Callable[[Made], Result]] = {
    "state_occupation": lambda m: state_occupation(stays(m), states=STATES, times=[0, 2.5, 9]),
    "state_occupation greenwood": lambda m: state_occupation(stays(m), states=STATES, variance="greenwood"),
    "length_of_stay": lambda m: length_of_stay(stays(m), states=STATES, tau=2.0),
    "baseline": lambda m: baseline(frame(m), group=m.group),
    "missingness": lambda m: missingness(frame(m), outcome=m.event),
    "missing_patterns": lambda m: missing_patterns(frame(m)),
    "standardised_difference": lambda m: standardised_difference(m.time, m.group),
    "standardised_difference binary": lambda m: standardised_difference(m.event, m.group),
    "standardised_difference labels": lambda m: standardised_difference(
        np.array(["x", "y", "z"])[m.cause], m.group, kind="categorical"
    ),
    "rate_ratio by run": lambda m: rate_ratio(m.event, m.time, m.event[::2], m.time[::2]),
    "rate_ratio robust": lambda m: rate_ratio(m.event, m.time, m.event, m.time, variance="robust"),
}


def free_of_nan(result: Result) -> None:
    if {"estimate", "lower", "upper"} <= set(result.table.columns):
        sound(result)
        return
    assert len(result.table)
    for name in result.table.columns:
        if result.table[name].dtype == "Float64":
            assert np.isfinite(result.table[name].dropna().to_numpy(dtype=float)).all(), name
        else:
            assert result.table[name].dtype == "string", name


@pytest.mark.parametrize("situation", SITUATIONS)
@pytest.mark.parametrize("call", CALLS)
def test_an_estimate_or_a_coded_answer(call: str, situation: str) -> None:
    try:
        result = CALLS[call](SITUATIONS[situation])
    except NotEstimable as answer:
        assert answer.reason_code in CODES and answer.reason
        return
    free_of_nan(result)


COUNTS = (0, 1, 2, 30, 100_000)
HOURS = (0, 1e-9, 1.0, 1e9)


def answered(call: Callable[[], Result]) -> bool:
    try:
        sound(call())
    except NotEstimable as answer:
        assert answer.reason_code in CODES
        return False
    return True


def test_every_pair_of_counts_is_answered() -> None:
    for x, n in itertools.product(COUNTS, COUNTS):
        if x <= n:
            for interval in ("wilson", "exact", "midp", "jeffreys"):
                ok = answered(lambda x=x, n=n, i=interval: proportion(x, n, interval=i))  # type: ignore[misc]
                assert ok == (n > 0)
    for x, t in itertools.product(COUNTS, HOURS):
        for kind in ("exact", "midp", "byar"):
            ok = answered(lambda x=x, t=t, k=kind: incidence_rate(x, t, variance=k))  # type: ignore[misc]
            assert ok == (t > 0)
            ok = answered(lambda x=x, t=t, k=kind: standardised_ratio(x, t, interval=k))  # type: ignore[misc]
            assert ok == (t > 0)


def test_every_four_counts_are_answered() -> None:
    for a, b, c, d in itertools.product((0, 1, 30), repeat=4):
        ok = answered(lambda v=(a, b, c, d): paired_difference(*v))  # type: ignore[misc]
        assert ok == (a + b + c + d > 0)
        if a <= b and c <= d:
            for interval in ("newcombe", "miettinen-nurminen"):
                call = lambda v=(a, b, c, d), i=interval: proportion_difference(*v, interval=i)  # noqa: E731
                assert answered(call) == (b > 0 and d > 0)
        for kind in ("exact", "midp"):
            ratio = lambda v=(a, b, c, d), k=kind: rate_ratio(*v, variance=k)  # noqa: E731
            assert answered(ratio) == (b > 0 and d > 0 and a + c > 0)


@pytest.mark.parametrize("interval", ["fay-feuer", "tiwari", "dobson"])
@pytest.mark.parametrize("events", [[0, 0], [1, 0], [3, 5]])
def test_direct_standardisation_is_answered(interval: str, events: list[int]) -> None:
    assert answered(lambda: direct_standardisation(events, [200, 150], [0.6, 0.4], interval=interval))
    assert not answered(lambda: direct_standardisation([1, 0], [10, 0], [0.5, 0.5], interval=interval))


@pytest.mark.parametrize(
    "call",
    [
        lambda: proportion(3, 2), lambda: proportion(-1, 2), lambda: proportion(0.5, 2),
        lambda: proportion(np.nan, 2), lambda: proportion("1", 2), lambda: proportion(1, 2, level=0),
        lambda: proportion([1, 2, 0]), lambda: proportion(1, 2, interval="wald"),
        lambda: incidence_rate(-1, 2), lambda: incidence_rate(1.5, 2), lambda: incidence_rate(1, -2),
        lambda: incidence_rate(1, np.inf), lambda: incidence_rate([1, 0], [1]),
        lambda: incidence_rate([1, np.nan], [1, 2]), lambda: incidence_rate(1, 2, per=0),
        lambda: proportion_difference(3, 2, 1, 2), lambda: rate_ratio(1, 2, -1, 2),
        lambda: standardised_ratio(1, -2), lambda: standardised_ratio([1, 0], [0.5, 1.5]),
        lambda: paired_difference(1, 2, 3, -1),
    ],
)  # fmt: skip
def test_counts_that_no_method_accepts_are_refused(call: Callable[[], Any]) -> None:
    with pytest.raises(InputRefused):
        call()
