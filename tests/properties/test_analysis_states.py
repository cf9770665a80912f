"""Properties of state occupation, length of stay and mean counts."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
import pytest
from analysis_made import FEW as MORE
from analysis_made import Runs, floats, has_no_nan, runs
from hypothesis import given, settings
from hypothesis import strategies as st

from outcomes.analysis.multistate import length_of_stay, state_occupation
from outcomes.analysis.rates import mean_cumulative_count
from outcomes.analysis.survival import kaplan_meier
from outcomes.errors import NotEstimable

FEW = settings(MORE, max_examples=12)
STATES = ("support", "hospital", "home", "dead")
COLUMNS = ["run_key", "from_h", "to_h", "state", "next_state"]


@st.composite
def courses(draw: st.DrawFn) -> pd.DataFrame:
    """1 to 12 runs that pass from support through hospital, home or death, watched to the end or not."""
    rows: list[tuple[Any, ...]] = []
    for run in range(draw(st.integers(1, 12))):
        t = 0 if run == 0 else draw(st.sampled_from([0, 0, 0, 2]))
        state = "support"
        while state in ("support", "hospital"):
            stop = t + draw(st.integers(1, 4))
            ways = {"support": ["hospital", "dead", None], "hospital": ["home", "dead", "support", None]}
            following = draw(st.sampled_from(ways[state])) if len(rows) < 60 else None
            rows.append((run, t, stop, state, following))
            if following is None:
                break
            t, state = stop, following
    return pd.DataFrame(rows, columns=COLUMNS)


@FEW
@given(courses(), st.sampled_from(["infinitesimal_jackknife", "greenwood"]))
def test_states_add_to_one_within_bounds(frame: pd.DataFrame, kind: str) -> None:
    table = state_occupation(frame, states=STATES, variance=kind, times=[0.5, 30]).table
    has_no_nan(table)
    wide = table.pivot(index="time", columns="state", values="estimate")
    shown = wide.dropna()
    assert np.allclose(shown.sum(axis=1).to_numpy(dtype=float), 1.0, atol=1e-12)
    assert ((shown >= -1e-12) & (shown <= 1 + 1e-12)).to_numpy().all()
    assert (wide.notna().sum(axis=1) % len(STATES) == 0).all()
    known = table.dropna(subset=["lower", "upper"])
    assert (known["lower"] <= known["estimate"] + 1e-12).all() and (
        known["estimate"] <= known["upper"] + 1e-12
    ).all()


@FEW
@given(courses(), st.floats(0.5, 9))
def test_time_in_all_states_adds_to_tau(frame: pd.DataFrame, tau: float) -> None:
    table = length_of_stay(frame, states=STATES, tau=tau, carry_forward=True).table
    has_no_nan(table)
    assert float(table["estimate"].sum()) == pytest.approx(tau, rel=1e-12)
    assert (table["lower"].dropna() >= 0).all() and (table["upper"].dropna() <= tau).all()


@FEW
@given(courses(), st.sampled_from([1 / 24, 7.0]))
def test_unit_of_time_and_order_of_rows_change_nothing(frame: pd.DataFrame, factor: float) -> None:
    one = state_occupation(frame, states=STATES, carry_forward=True).table
    moved = frame.assign(from_h=frame["from_h"] * factor, to_h=frame["to_h"] * factor).iloc[::-1]
    other = state_occupation(moved, states=STATES, carry_forward=True).table
    for name in ("estimate", "std_error", "lower", "upper", "at_risk", "events", "censored"):
        assert np.allclose(floats(one[name]), floats(other[name]), atol=1e-10, equal_nan=True), name


@FEW
@given(courses(), st.floats(0.1, 0.9))
def test_a_stay_cut_in_two_changes_nothing(frame: pd.DataFrame, where: float) -> None:
    middle = frame["from_h"] + where * (frame["to_h"] - frame["from_h"])
    early = frame.assign(to_h=middle, next_state=None)
    cut = pd.concat([early, frame.assign(from_h=middle)]).sample(frac=1, random_state=1)
    times = [1.0, 3.0, 6.0]
    one = state_occupation(frame, states=STATES, times=times).table
    other = state_occupation(cut, states=STATES, times=times).table
    pd.testing.assert_frame_equal(one, other, rtol=1e-10, atol=1e-10)


@FEW
@given(runs(causes=1))
def test_with_one_absorbing_state_it_is_one_minus_survival(made: Runs) -> None:
    time = np.where(made.time == 0, 1.0, made.time)
    entry = np.where(made.time == 0, 0.0, made.entry)
    if (entry > 0).all():
        return
    frame = pd.DataFrame({
        "run_key": range(len(made)), "from_h": entry, "to_h": time, "state": "support",
        "next_state": np.where(made.cause > 0, "dead", None),
    })  # fmt: skip
    table = state_occupation(
        frame, states=("support", "dead"), variance="greenwood", carry_forward=True
    ).table
    alive = table[table["state"] == "support"].set_index("time")
    curve = kaplan_meier(time, made.event, entry=entry).table.set_index("time")
    shared = [t for t in curve.index if t in alive.index and not pd.isna(curve.loc[t, "estimate"])]
    assert np.allclose(
        floats(alive.loc[shared, "estimate"]), floats(curve.loc[shared, "estimate"]), atol=1e-12
    )
    known = [t for t in shared if 0 < curve.loc[t, "estimate"] < 1]
    assert np.allclose(
        floats(alive.loc[known, "std_error"]), floats(curve.loc[known, "std_error"]), atol=1e-12
    )


@st.composite
def counted(draw: st.DrawFn) -> tuple[list[int], list[float], np.ndarray, np.ndarray]:
    """Runs that end at 1 … 8 by the terminal event or not, with up to four events each."""
    n = draw(st.integers(1, 12))
    end = np.array(draw(st.lists(st.integers(1, 8), min_size=n, max_size=n)), dtype=float)
    terminal = np.array(draw(st.lists(st.integers(0, 1), min_size=n, max_size=n)))
    who, when = [], []
    for run in range(n):
        for moment in draw(st.lists(st.integers(1, int(end[run])), max_size=4)):
            who.append(run)
            when.append(float(moment))
    return who, when, end, terminal


@FEW
@given(counted())
def test_mean_count_rises_from_nothing_and_death_only_lowers_it(made: Any) -> None:
    who, when, end, terminal = made
    runs_of = {"run": list(range(len(end))), "end": end}
    table = mean_cumulative_count(who, when, **runs_of, terminal=terminal, times=[0.5]).table
    has_no_nan(table)
    value = floats(table["estimate"])
    assert value[0] == 0 and (np.diff(value) >= -1e-12).all()
    naive = mean_cumulative_count(who, when, **runs_of, times=[0.5]).table
    assert (value <= floats(naive["estimate"]) + 1e-12).all()


@FEW
@given(counted())
def test_without_censoring_the_mean_count_is_a_mean(made: Any) -> None:
    who, when, end, _ = made
    ones = np.ones(len(end))
    table = mean_cumulative_count(who, when, run=list(range(len(end))), end=end, terminal=ones).table
    for t, value in zip(table["time"], table["estimate"], strict=True):
        assert value == pytest.approx(sum(w <= t for w in when) / len(end), rel=1e-12, abs=1e-12)


@FEW
@given(counted())
def test_every_run_twice_halves_the_variance(made: Any) -> None:
    who, when, end, terminal = made
    n = len(end)
    one = mean_cumulative_count(who, when, run=list(range(n)), end=end, terminal=terminal).table
    twice = mean_cumulative_count(
        who + [w + n for w in who], when * 2, run=list(range(2 * n)), end=np.tile(end, 2),
        terminal=np.tile(terminal, 2),
    ).table  # fmt: skip
    assert np.allclose(floats(one["estimate"]), floats(twice["estimate"]), atol=1e-12, equal_nan=True)
    assert np.allclose(
        floats(one["std_error"]) / np.sqrt(2), floats(twice["std_error"]), atol=1e-10, equal_nan=True
    )


ODD: dict[str, list[tuple[Any, ...]]] = {
    "one run, watched": [(1, 0, 5, "support", None)],
    "one run, dead": [(1, 0, 5, "support", "dead")],
    "all dead at once": [(i, 0, 5, "support", "dead") for i in range(6)],
    "all watched to one time": [(i, 0, 5, "support", None) for i in range(6)],
    "a billion hours": [(i, 0, 1e9 * (i + 1), "support", "dead" if i % 2 else None) for i in range(6)],
    "a billionth": [(i, 0, 1e-9 * (i + 1), "support", "dead" if i % 2 else None) for i in range(6)],
    "all but one late": [(0, 0, 3, "support", "dead"),
                         (1, 1, 4, "support", None), (2, 2, 6, "support", "dead")],
    "nobody watched for a while": [(0, 0, 1, "support", None), (1, 4, 6, "support", "dead")],
    "back and forth": [(1, 0, 1, "support", "hospital"), (1, 1, 2, "hospital", "support"),
                       (1, 2, 3, "support", "dead")],
    "none from time zero": [(1, 1, 4, "support", None)],
    "no rows": [],
}  # fmt: skip


@pytest.mark.parametrize("name", ODD)
@pytest.mark.parametrize("person", [False, True])
def test_odd_courses_have_an_estimate_or_a_coded_answer(name: str, person: bool) -> None:
    frame = pd.DataFrame(ODD[name], columns=COLUMNS)
    if person:
        frame = frame.assign(person_key="p")
    for call in (
        lambda: state_occupation(frame, states=STATES, times=[0, 2.5, 1e10]),
        lambda: state_occupation(frame, states=STATES, variance="greenwood", carry_forward=True),
        lambda: length_of_stay(frame, states=STATES, tau=2.5),
        lambda: length_of_stay(frame, states=STATES, tau=2.5, carry_forward=True),
    ):
        try:
            has_no_nan(call().table)
        except NotEstimable as answer:
            assert answer.reason_code in ("no_runs", "empty_risk_set", "beyond_follow_up")
