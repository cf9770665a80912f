"""Where runs are at t: state occupation and expected time in each state, clustered by person."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis._input import Codes, Floats, asked_times, number, one_of, probability, word
from outcomes.analysis._person import FEW_PERSONS, few_repeats, persons, small_sample, summed, too_few
from outcomes.analysis._stays import Occupation, Stays, read
from outcomes.analysis.intervals import incidence_limits, logit_limits, z_of
from outcomes.analysis.result import Caution, Method, Result, joined, tidy, tidy_columns
from outcomes.analysis.risk_set import increments
from outcomes.errors import NotEstimable

COLUMNS = (
    "state", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "censored", "reason",
)  # fmt: skip
STAY_COLUMNS = ("state", "time", "estimate", "std_error", "lower", "upper", "reason")
VARIANCES = ("infinitesimal_jackknife", "greenwood")
_TIES = "moves at one time together"
_CITE = (
    "Aalen OO, Johansen S. Scand J Stat 1978;5:141-150.",
    "Datta S, Satten GA. Stat Probab Lett 2001;55:403-411.",
)


def state_occupation(intervals: pd.DataFrame, *, states: Sequence[Any],
                     times: Sequence[float] | None = None, variance: str = "infinitesimal_jackknife",
                     level: float = 0.95, carry_forward: bool = False,
                     names: Mapping[str, str] | None = None, time_unit: str = "") -> Result:  # fmt: skip
    """Share of runs in each state at t (Aalen–Johansen product integral; no Markov assumption is needed).

    intervals: one row a run and stay with the columns run_key, from_h, to_h, state, next_state (missing,
    empty or 0: observation stopped, or the same state goes on in the next row) and, if there, person_key;
    `names` gives other column names for these. states: all states in order. Stays of a run are
    contiguous; one that begins after 0 enters late. variance: infinitesimal_jackknife, by person if
    persons are known (by run for fewer than ten people), or greenwood. carry_forward: keep the estimate
    after the last person in a state that can be left is no longer watched.

    Result: by state a row at 0, every time of a move, every asked time and the end of observation.
    at_risk: in the state just before t; events: moves into it and censored: stays in it that only stopped
    being watched, in (previous row, t]. The states add to 1. Limits on log(−log(1−p)) for states that
    nobody leaves, else logit; none at 0 (no_events) or 1 (no_nonevents). Afterwards, unless carried
    forward: beyond_follow_up.

    Raises InputRefused (gap, overlap, undeclared state); NotEstimable no_runs, empty_risk_set (nobody
    from time 0). Source: Datta & Satten 2001.
    """
    probability(level)
    one_of(variance, "variance", VARIANCES)
    stays = read(intervals, states, names)
    found = Occupation(stays, len(states))
    who, notes, words = _persons(stays)
    if variance == "greenwood":
        errors, words, notes = found.greenwood(), "Greenwood type", ()
    else:
        errors = np.array([_root_sum(psi, who) for psi in found.influences()])
    at = np.unique(np.concatenate([found.time, asked_times(times), [stays.stop.max()]]))
    place = np.searchsorted(found.time, at, side="right") - 1
    hidden = np.zeros(len(at), dtype=bool) if carry_forward else _unknown(found, at, place)
    parts = []
    for s, name in enumerate(word(v) for v in states):
        p, error = found.p[place, s], errors[place, s]
        leaves = bool((stays.held == s).any())
        low, high = logit_limits(p, error, level) if leaves else incidence_limits(p, error, level, "cloglog")
        reason = np.full(len(at), None, dtype=object)
        reason[p <= 0], reason[p >= 1] = "no_events", "no_nonevents"
        reason[hidden] = "beyond_follow_up"
        numbers = {"estimate": p, "std_error": error, "lower": low, "upper": high}
        values: dict[str, object] = {
            "state": name,
            "time": at,
            "at_risk": stays.at_risk(s, at),
            "reason": reason,
        }
        values |= {key: np.where(hidden, np.nan, v) for key, v in numbers.items()} | _moved(stays, s, at)
        parts.append(tidy_columns(values, COLUMNS))
    method = Method(
        "Aalen–Johansen product integral", words, "log(−log(1−p)) or logit", level, _TIES, time_unit, _CITE
    )
    return Result(joined(parts, COLUMNS), method, _counts(stays), notes)


def _persons(stays: Stays) -> tuple[Codes | None, tuple[Caution, ...], str]:
    """Person of each run (None: every run counts for itself), cautions, and the words for it."""
    if stays.person is None:
        return None, (), "infinitesimal jackknife by run"
    if persons(stays.person, 0) < FEW_PERSONS:
        return None, (too_few(),), "infinitesimal jackknife by run"
    return stays.person, few_repeats(stays.person), "infinitesimal jackknife by person"


def _root_sum(psi: Floats, who: Codes | None) -> Floats:
    total = summed(psi, who)
    factor = 1.0 if who is None else small_sample(len(total))
    return np.asarray(np.sqrt(np.sum(total**2, axis=0) * factor))


def _unknown(found: Occupation, at: Floats, place: Any) -> Any:
    """Whether at t somebody may still be in a state in which nobody has been watched any more before t."""
    return ((at[:, None] > found.known_until()) & (found.p[place] > 0)).any(axis=1)


def _moved(stays: Stays, s: int, at: Floats) -> dict[str, Floats]:
    came = np.sort(stays.stop[stays.moved == s])
    again = np.zeros(len(stays.run), dtype=bool)
    again[:-1] = (stays.run[1:] == stays.run[:-1]) & (stays.moved[:-1] < 0)
    gone = np.sort(stays.stop[(stays.held == s) & (stays.moved < 0) & ~again])
    return {
        "events": increments(at, came, np.ones(len(came))),
        "censored": increments(at, gone, np.ones(len(gone))),
    }


def _counts(stays: Stays) -> dict[str, int]:
    found = {"runs": stays.n_runs, "moves": int((stays.moved >= 0).sum())}
    return found if stays.person is None else found | {"persons": persons(stays.person, 0)}


def length_of_stay(intervals: pd.DataFrame, *, states: Sequence[Any], tau: float, level: float = 0.95,
                   carry_forward: bool = False, names: Mapping[str, str] | None = None,
                   time_unit: str = "") -> Result:  # fmt: skip
    """Expected time in each state up to tau: the area under its occupation curve. One row a state; they
    add to tau.

    Arguments as in `state_occupation`. Variance by summed influences of runs or persons; limits ± z SE,
    cut to [0, tau]. A state that nobody was in: 0 without limits (no_events).

    Raises InputRefused; NotEstimable no_runs, empty_risk_set, beyond_follow_up (tau after the states are
    watched).
    """
    end, z = number(tau, "tau", above=0.0), z_of(probability(level))
    stays = read(intervals, states, names)
    found = Occupation(stays, len(states))
    last = np.array([np.searchsorted(found.time, end, side="right") - 1])
    if not carry_forward and _unknown(found, np.array([end]), last)[0]:
        raise NotEstimable("beyond_follow_up", "tau lies after the last time at which a state was watched")
    who, notes, words = _persons(stays)
    widths = np.diff(np.append(found.time[found.time < end], end))
    area = np.zeros(len(states))
    psi_area = np.zeros((stays.n_runs, len(states)))
    for width, p, psi in zip(widths, found.p, found.influences(), strict=False):
        area, psi_area = area + width * p, psi_area + width * psi
    errors = _root_sum(psi_area, who)
    rows = []
    for s, name in enumerate(word(v) for v in states):
        row: dict[str, object] = {"state": name, "time": end, "estimate": area[s], "std_error": errors[s]}
        if area[s] <= 0:
            row["reason"] = "no_events"
        elif errors[s] <= 0:
            row["reason"] = "no_nonevents"
        else:
            row |= {"lower": max(0.0, area[s] - z * errors[s]), "upper": min(end, area[s] + z * errors[s])}
        rows.append(row)
    method = Method("area under state occupation to τ", words, "plain", level, _TIES, time_unit, _CITE)
    return Result(tidy(rows, STAY_COLUMNS), method, _counts(stays), notes)
