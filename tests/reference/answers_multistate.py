"""State occupation and expected time in each state."""

from __future__ import annotations

from typing import Any

import pandas as pd
from harness import Case

from outcomes.analysis.multistate import length_of_stay, state_occupation

STATES = ("support", "weaned", "lvad", "tx", "dead", "discharged")
LABELS = {"dead": 5, "discharged": 6, "lvad": 3, "support": 1, "tx": 4, "weaned": 2}
NAMES = {"run_key": "run_id", "from_h": "tstart", "to_h": "tstop", "state": "from", "next_state": "to"}


def _named(case: Case) -> pd.DataFrame:
    words = {number: name for name, number in LABELS.items()}
    frame = case.data()
    return frame.assign(**{"from": frame["from"].map(words), "to": frame["to"].map(words)})


def _columns(case: Case, variance: str, error: str) -> dict[str, list[Any]]:
    times = case.inputs["times"]
    result = state_occupation(_named(case), states=STATES, times=times, variance=variance, names=NAMES)
    found: dict[str, list[Any]] = {}
    for name in STATES:
        rows = result.table[result.table["state"] == name].set_index("time").loc[times]
        found |= {f"p_{name}": rows["estimate"].tolist(), f"{error}_{name}": rows["std_error"].tolist()}
    return found


def occupation(case: Case) -> dict[str, Any]:
    found: dict[str, Any] = _columns(case, "infinitesimal_jackknife", "se_ij")
    shares = [found[f"p_{name}"] for name in STATES]
    stay = length_of_stay(_named(case), states=STATES, tau=case.inputs["tau"], names=NAMES)
    return found | {
        "states": stay.table["state"].tolist(),
        "time_in_state": stay.table["estimate"].tolist(),
        "p_sum": [sum(column) for column in zip(*shares, strict=True)],
    }


def with_greenwood(case: Case) -> dict[str, Any]:
    return {"times": case.inputs["times"]} | _columns(case, "greenwood", "se_greenwood")


ANSWERS = {"state_occupation": occupation, "state_occupation_variance": with_greenwood}
