"""Cumulative incidence with three variances and three intervals; Gray's test."""

from __future__ import annotations

from typing import Any

import numpy as np
from harness import ANY, Case

from outcomes.analysis.competing import compare_incidence, cumulative_incidence

ERRORS = {
    "se_greenwood": "aalen",
    "se_infinitesimal_jackknife": "infinitesimal_jackknife",
    "se_gray_cuminc": "cmprsk",
}


def incidence(case: Case) -> dict[str, Any]:
    frame = case.data()
    time, cause = case.column("time", frame), case.column("event", frame)
    entry = case.column("entry", frame) if "entry" in case.inputs else None
    times = case.inputs["times"]

    def at(variance: str, interval: str = "cloglog") -> Any:
        result = cumulative_incidence(
            time, cause, entry=entry, times=times, variance=variance, interval=interval
        )
        rows = result.table[result.table["cause"] == str(case.inputs["cause"])]
        return rows.set_index("time").loc[times]

    found = {"cif": at("aalen")["estimate"].tolist()}
    found |= {name: at(v)["std_error"].tolist() for name, v in ERRORS.items() if name in case.expected}
    for interval in ("loglog", "cloglog", "plain"):
        for side in ("lower", "upper"):
            if f"{interval}_{side}" in case.expected:
                found[f"{interval}_{side}"] = at("aalen", interval)[side].tolist()
    return found


def cut(case: Case) -> dict[str, Any]:
    """Our limits are cut to [0, 1]; at F = 0 ours are exact and the case's have no width."""
    found = {}
    for name, values in case.expected.items():
        if name.endswith(("_lower", "_upper")):
            found[name] = [ANY if f == 0 else None if v is None else float(np.clip(v, 0, 1))
                           for v, f in zip(values, case.expected["cif"], strict=True)]  # fmt: skip
    return found


def gray(case: Case) -> dict[str, Any]:
    frame = case.data()
    strata = case.column("strata", frame) if "strata" in case.inputs else None
    table = compare_incidence(
        case.column("time", frame), case.column("event", frame), case.column("group", frame), strata=strata
    ).table
    return {"causes": table["cause"].astype(int).tolist(), "statistic": table["statistic"].tolist(),
            "p": table["p_value"].tolist(), "df": table["df"].tolist()}  # fmt: skip


ANSWERS = {"cumulative_incidence": incidence, "gray_test": gray}
EXPECTED = {"cumulative_incidence": cut}
NOT_OURS = {"cumulative_incidence": {"one_minus_km_naive": "wrong with competing endings; never printed"}}
