"""Four runs: 1 off support at 2, home at 5; 2 dead on support at 3; 3 off at 4, dead at 6; 4 on at 5."""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import pandas as pd
import pytest

from outcomes.analysis.multistate import length_of_stay, state_occupation
from outcomes.errors import InputRefused, NotEstimable

STATES = ("support", "off", "home", "dead")
COLUMNS = ["run_key", "from_h", "to_h", "state", "next_state"]
ROWS: list[tuple[Any, ...]] = [
    (1, 0, 2, "support", "off"),
    (1, 2, 5, "off", "home"),
    (2, 0, 3, "support", "dead"),
    (3, 0, 4, "support", "off"),
    (3, 4, 6, "off", "dead"),
    (4, 0, 5, "support", None),
]


def stays(rows: list[tuple[Any, ...]]) -> pd.DataFrame:
    return pd.DataFrame(rows, columns=COLUMNS)


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def at(result: Any, state: str, t: float, name: str = "estimate") -> Any:
    return result.table.set_index(["state", "time"]).loc[(state, float(t)), name]


def test_occupation_of_four_runs() -> None:
    result = state_occupation(stays(ROWS), states=STATES, carry_forward=True)
    expected = {
        ("support", 2): F(3, 4), ("off", 2): F(1, 4), ("support", 4): F(1, 4), ("off", 4): F(1, 2),
        ("dead", 4): F(1, 4), ("home", 5): F(1, 4), ("dead", 6): F(1, 2),
    }  # fmt: skip
    for (state, t), value in expected.items():
        assert at(result, state, t) == near(value)
    # Nobody was censored before 5, so each is a binomial share of four: √(3/64), √(1/16).
    for state, value in (("support", F(3, 64)), ("dead", F(3, 64)), ("off", F(1, 16))):
        assert at(result, state, 4, "std_error") == near(math.sqrt(value))
    greenwood = state_occupation(stays(ROWS), states=STATES, variance="greenwood", carry_forward=True)
    assert at(greenwood, "support", 4, "std_error") == near(math.sqrt(F(3, 64)))
    assert (at(result, "support", 5, "at_risk"), at(result, "support", 5, "censored")) == (1, 1)
    assert at(result, "dead", 6, "events") == 1


def test_expected_time_in_each_state() -> None:
    # support 2 + 3/4 + 1/2 + 2·1/4; off 1/4 + 1/4 + 1/2 + 1/4; home 1/4; dead 1/4·3.
    result = length_of_stay(stays(ROWS), states=STATES, tau=6, carry_forward=True)
    assert result.table["estimate"].tolist() == [near(F(15, 4)), near(F(5, 4)), near(F(1, 4)), near(F(3, 4))]
    assert sum(result.table["estimate"]) == near(6)


def test_error_of_the_time_in_a_state_is_that_of_a_mean_without_censoring() -> None:
    # Three runs on support for 1, 2 and 6 hours: mean 3, Σ(x − 3)²/9 = 14/9.
    rows = [(i, 0, t, "support", "dead") for i, t in enumerate((1, 2, 6))]
    found = length_of_stay(stays(rows), states=("support", "dead"), tau=6).table.iloc[0]
    assert found["estimate"] == near(3) and found["std_error"] == near(math.sqrt(F(14, 9)))


def test_nothing_is_said_after_the_last_one_in_a_state_left_unwatched() -> None:
    # After 5 nobody on support is watched though a quarter may still be there.
    result = state_occupation(stays(ROWS), states=STATES)
    assert at(result, "dead", 6, "reason") == "beyond_follow_up" and pd.isna(at(result, "dead", 6))
    assert at(result, "dead", 5) == near(F(1, 4))
    with pytest.raises(NotEstimable) as told:
        length_of_stay(stays(ROWS), states=STATES, tau=6)
    assert told.value.reason_code == "beyond_follow_up"


def test_a_stay_cut_in_two_changes_nothing() -> None:
    cut = [*ROWS[:2], (2, 0, 1, "support", None), (2, 1, 3, "support", "dead"), *ROWS[3:]]
    pd.testing.assert_frame_equal(
        state_occupation(stays(cut), states=STATES).table, state_occupation(stays(ROWS), states=STATES).table
    )


def test_late_entry_counts_in_the_risk_set_only() -> None:
    # Run 5 is seen on support from 2 on: one of four leaves at 2 and at 3; p(0) stays with the first four.
    rows = [*ROWS, (5, 2, 9, "support", "dead")]
    result = state_occupation(stays(rows), states=STATES, carry_forward=True)
    assert at(result, "support", 2) == near(F(3, 4)) and at(result, "support", 3) == near(F(3, 4) * F(3, 4))
    assert at(result, "support", 3, "at_risk") == 4


def test_runs_of_one_person_vary_together() -> None:
    # Ten people with two runs of the same course: five die at 1, five are watched to 2. By run the variance
    # of p = 1/2 is 1/80, by person 1/40, times 10/9.
    rows = [
        (f"{p}{k}", 0, 1 if p < 5 else 2, "support", "dead" if p < 5 else None)
        for p in range(10)
        for k in "ab"
    ]
    frame = stays(rows)
    by_run = state_occupation(frame, states=("support", "dead"))
    by_person = state_occupation(frame.assign(person_key=[r[0][0] for r in rows]), states=("support", "dead"))
    assert at(by_run, "dead", 1, "std_error") == near(math.sqrt(F(1, 80)))
    assert at(by_person, "dead", 1, "std_error") == near(math.sqrt(F(1, 40) * F(10, 9)))
    assert by_person.method.variance == "infinitesimal jackknife by person"
    few = frame.assign(person_key=["x"] * 10 + ["y"] * 10)
    told = state_occupation(few, states=("support", "dead"))
    assert [n.code for n in told.notes] == ["FEW-PERSONS"]
    assert at(told, "dead", 1, "std_error") == near(math.sqrt(F(1, 80)))


def test_states_nobody_was_in_or_left() -> None:
    rows = [(1, 0, 5, "support", None), (2, 0, 5, "support", None)]
    result = state_occupation(stays(rows), states=("support", "dead"))
    assert at(result, "support", 5) == 1 and at(result, "support", 5, "reason") == "no_nonevents"
    assert at(result, "dead", 5) == 0 and at(result, "dead", 5, "reason") == "no_events"


@pytest.mark.parametrize(
    "wrong",
    [
        [(1, 0, 2, "support", "off"), (1, 3, 5, "off", "home")],
        [(1, 0, 2, "support", "off"), (1, 1, 5, "off", "home")],
        [(1, 0, 2, "support", "dead"), (1, 2, 5, "off", "home")],
        [(1, 0, 2, "support", None), (1, 2, 5, "off", "home")],
        [(1, 2, 2, "support", "off")],
        [(1, 0, 2, "support", "elsewhere")],
        [(1, 0, 2, None, "off")],
        [(1, 0, None, "support", "off")],
    ],
    ids=["gap", "overlap", "another state", "no move", "no length", "undeclared", "no state", "no end"],
)
def test_stays_that_do_not_fit_are_refused(wrong: list[tuple[Any, ...]]) -> None:
    with pytest.raises(InputRefused):
        state_occupation(stays(wrong), states=STATES)


def test_nobody_from_the_start() -> None:
    with pytest.raises(NotEstimable) as told:
        state_occupation(stays([(1, 2, 5, "support", "dead")]), states=STATES)
    assert told.value.reason_code == "empty_risk_set"
    with pytest.raises(NotEstimable) as told:
        state_occupation(stays([]), states=STATES)
    assert told.value.reason_code == "no_runs"
