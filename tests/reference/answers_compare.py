"""Log-rank tests, differences at a time and of restricted means, exposures that begin later."""

from __future__ import annotations

from typing import Any

import pandas as pd
from harness import Case

from outcomes.analysis.compare import (
    difference_at,
    landmark,
    logrank,
    mantel_byar,
    rmst_difference,
    simon_makuch,
)
from outcomes.analysis.result import Result
from outcomes.analysis.survival import kaplan_meier, restricted_mean


def _columns(case: Case, *keys: str) -> dict[str, Any]:
    frame = case.data()
    frame = frame.dropna(subset=[k for k in [case.inputs.get("group")] if k in frame.columns])
    return {k: case.column(k, frame) for k in keys if k in case.inputs}


def _test(case: Case) -> tuple[pd.Series, pd.DataFrame]:
    given = _columns(case, "time", "event", "group", "strata", "entry")
    extra = {k: case.inputs[k] for k in ("rho", "scores") if k in case.inputs}
    table = logrank(**given, **extra).table
    return table.iloc[0], table.iloc[1:]


def test_of_groups(case: Case) -> dict[str, Any]:
    whole, each = _test(case)
    found = {
        "chisq": whole["statistic"], "df": whole["df"], "p": whole["p_value"], "n": each["n"].tolist(),
        "observed": each["observed"].tolist(), "expected": each["expected"].tolist(),
        "U": each["observed"].iloc[-1] - each["expected"].iloc[-1], "V": each["variance"].iloc[-1],
    }  # fmt: skip
    return {name: value for name, value in found.items() if name in case.expected}


def restricted(case: Case) -> dict[str, Any]:
    given, tau = _columns(case, "time", "event", "group"), case.inputs["tau"]
    means = restricted_mean(given["time"], given["event"], tau, group=given["group"]).table
    row = rmst_difference(given["time"], given["event"], given["group"], tau).table.iloc[0]
    return {
        "groups": means["group"].astype(int).tolist(), "rmst": means["estimate"].tolist(),
        "se": means["std_error"].tolist(), "diff": row["estimate"], "diff_se": row["std_error"],
        "diff_lower": row["lower"], "diff_upper": row["upper"], "p": row["p_value"], "ratio": row["ratio"],
        "log_ratio_se": row["log_ratio_error"],
    }  # fmt: skip


def difference(case: Case) -> dict[str, Any]:
    given, t = _columns(case, "time", "event", "group"), case.inputs["t"]
    row = difference_at(given["time"], given["event"], given["group"], t).table.iloc[0]
    curve = kaplan_meier(given["time"], given["event"], group=given["group"], times=[t]).table
    return {
        "surv": [row["value_reference"], row["value"]], "diff": row["estimate"],
        "se": curve.loc[curve["time"] == t, "std_error"].tolist(),
        "lower": row["lower"], "upper": row["upper"],
        "chisq_plain": row["statistic_plain"], "chisq_cloglog": row["statistic"],
    }  # fmt: skip


def _at(result: Result, times: list[float], name: str) -> list[Any]:
    return [result.table.set_index("time").loc[t, name] for t in times]


def from_landmark(case: Case) -> dict[str, Any]:
    given = _columns(case, "time", "event", "exposure_time")
    found = landmark(
        given["time"], given["event"], case.inputs["landmark"], exposure_time=given["exposure_time"]
    )
    times = case.inputs["times_after_landmark"]
    out: dict[str, Any] = {"n_at_landmark": int(found.kept.sum()), "n_excluded": int((~found.kept).sum()),
                           "n_exposed": int(found.exposed.sum())}  # fmt: skip
    for name, group in (("unexposed", ~found.exposed), ("exposed", found.exposed)):
        curve = kaplan_meier(found.time[group], found.event[group], times=times)
        out |= {f"surv_{name}": _at(curve, times, "estimate"), f"se_{name}": _at(curve, times, "std_error")}
    test = logrank(found.time, found.event, found.exposed).table.iloc[0]
    return out | {"logrank_chisq": test["statistic"]}


def _switching(case: Case) -> tuple[Any, Any, Any]:
    """One row a patient from the rows of (start, stop]."""
    frame = case.data().sort_values(["id", "start"])
    switch = frame[frame["transplant"] == 1].groupby("id")["start"].min()
    last = frame.groupby("id").last()
    return last["stop"], last["event"], switch.reindex(last.index)


def switched_curves(case: Case) -> dict[str, Any]:
    times = case.inputs["times"]
    result = simon_makuch(*_switching(case), times=times)
    out = {}
    for name, group in (("untreated", "not yet exposed"), ("treated", "exposed")):
        part = result.table[result.table["group"] == group].set_index("time").loc[times]
        out |= {name: part["estimate"].tolist(), f"n_risk_{name}": part["at_risk"].tolist()}
    return out


def switched_test(case: Case) -> dict[str, Any]:
    table = mantel_byar(*_switching(case)).table.set_index("group")
    row = table.loc["exposed"]
    return {"observed": row["observed"], "expected": row["expected"], "variance": row["variance"],
            "chisq": table.loc["", "statistic"]}  # fmt: skip


COX = "a Cox model; those have cases of their own"
ANSWERS = {
    "logrank": test_of_groups,
    "peto_wilcoxon": test_of_groups,
    "logrank_trend": test_of_groups,
    "rmst": restricted,
    "survival_difference": difference,
    "landmark": from_landmark,
    "simon_makuch": switched_curves,
    "mantel_byar": switched_test,
}
NOT_OURS = {
    "landmark": dict.fromkeys(("cox_coef", "cox_se"), COX),
    "mantel_byar": {"cox_score_breslow": COX},
}
