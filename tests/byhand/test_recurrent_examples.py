"""Mean cumulative count of four runs.

A: events 2 and 5, dies 6. B: event 3, censored 4. C: dies 3. D: event 5, censored 7.
At risk 4 at 2 and 3, 2 at 5. S(3) = 3/4, S(6) = 3/8.
"""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import pytest

from outcomes.analysis.rates import mean_cumulative_count
from outcomes.analysis.survival import kaplan_meier
from outcomes.errors import InputRefused

RUNS: dict[str, Any] = {"run": ["A", "B", "C", "D"], "end": [6, 4, 3, 7], "terminal": [1, 0, 1, 0]}
WHO, WHEN = ["A", "A", "B", "D"], [2, 5, 3, 5]


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11, abs=1e-14)


def at(result: Any, t: float) -> Any:
    return result.table.set_index("time").loc[t]


def test_four_runs_with_a_terminal_event() -> None:
    result = mean_cumulative_count(WHO, WHEN, **RUNS)
    # 1/4; + 1/4; + 3/4·2/2.
    for t, value in ((2, F(1, 4)), (3, F(1, 2)), (5, F(5, 4))):
        assert at(result, t)["estimate"] == near(value)
    assert (at(result, 5)["at_risk"], at(result, 5)["events"], at(result, 5)["terminal"]) == (2, 2, 0)
    curve = kaplan_meier(RUNS["end"], RUNS["terminal"], times=[3, 6]).table.set_index("time")["estimate"]
    assert curve[3] == near(F(3, 4)) and curve[6] == near(F(3, 8))


def test_variance_of_four_runs() -> None:
    result = mean_cumulative_count(WHO, WHEN, **RUNS)
    # At 2: (3/16)² + 3·(1/16)² = 3/64. At 5 by run:
    # A 1/8 − 0 + 3/4·(1 − 1)/2 + 3/4·1/16 = 11/64 …: the squares add to 139/1024.
    assert at(result, 2)["std_error"] == near(math.sqrt(F(3, 64)))
    assert at(result, 3)["std_error"] == near(F(1, 4))
    assert at(result, 5)["std_error"] == near(math.sqrt(F(139, 1024))) == near(0.36843206633)


def test_influences_of_four_runs_by_hand() -> None:
    # ψ(5) = Σ S(u−)(dN_i − Y_i dN/Y)/Y − (μ(5) − μ(3))(dD_i − Y_i/4)/4 for u = 3, with μ(5) − μ(3) = 3/4.
    quarter = F(1, 4)
    first = {"A": 3 * quarter**2, "B": -(quarter**2), "C": -(quarter**2), "D": -(quarter**2)}
    second = {"A": -(quarter**2), "B": 3 * quarter**2, "C": -(quarter**2), "D": -(quarter**2)}
    third = {"A": F(0), "B": F(0), "C": F(0), "D": F(0)}  # both of those at risk have an event
    deaths = {k: F(3, 4) * ((k == "C") - quarter) / 4 for k in "ABCD"}
    psi = [first[k] + second[k] + third[k] - deaths[k] for k in "ABCD"]
    assert sum(v * v for v in psi) == F(139, 1024)


def test_without_a_terminal_event_it_is_the_sum_of_increments() -> None:
    # The same runs with deaths taken for censoring: 1/4 + 1/4 + 2/2 = 3/2, a number never to print for them.
    result = mean_cumulative_count(WHO, WHEN, run=RUNS["run"], end=RUNS["end"])
    assert at(result, 5)["estimate"] == near(F(3, 2))


def test_event_in_the_hour_of_the_end_counts() -> None:
    result = mean_cumulative_count(["a"], [4], run=["a", "b"], end=[4, 9], terminal=[1, 0])
    assert at(result, 4)["estimate"] == near(F(1, 2))


def test_no_event_has_an_upper_limit() -> None:
    # Four at risk at 2: −ln 0.025 events over four runs.
    result = mean_cumulative_count([], [], **RUNS, times=[2])
    row = at(result, 2)
    assert (row["estimate"], row["lower"]) == (0, 0) and row["upper"] == near(-math.log(0.025) / 4)


def test_after_the_last_end_nothing_is_known() -> None:
    assert at(mean_cumulative_count(WHO, WHEN, **RUNS, times=[8]), 8)["reason"] == "beyond_follow_up"
    ended = mean_cumulative_count(["a"], [1], run=["a", "b"], end=[2, 3], terminal=[1, 1], times=[9])
    assert at(ended, 9)["estimate"] == near(F(1, 2))


def test_late_entry_counts_from_then_on() -> None:
    # b is seen from 2 on: at 1 one run is at risk, at 3 two.
    result = mean_cumulative_count(["a", "b"], [1, 3], run=["a", "b"], end=[5, 5], entry=[0, 2])
    assert at(result, 3)["estimate"] == near(F(3, 2))


@pytest.mark.parametrize(
    ("who", "when", "entry"), [("z", 2, 0), ("a", 7, 0), ("a", 2, 2)], ids=["no such run", "after", "before"]
)
def test_event_outside_the_observation_of_its_run_is_refused(who: str, when: float, entry: float) -> None:
    with pytest.raises(InputRefused):
        mean_cumulative_count([who], [when], run=["a"], end=[5], entry=[entry])
