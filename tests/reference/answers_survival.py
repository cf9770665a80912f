"""Kaplan–Meier, quantiles, Nelson–Aalen, numbers at risk."""

from __future__ import annotations

from typing import Any

import numpy as np
from harness import ANY, Case

from outcomes.analysis.result import Result
from outcomes.analysis.survival import kaplan_meier, median_time, nelson_aalen, survival_at


def _arguments(case: Case) -> tuple[Any, Any, Any]:
    if case.dataset == "inline":
        return case.inputs["time"], case.inputs["event"], None
    frame = case.data()
    entry = case.column("entry", frame) if "entry" in case.inputs else None
    return case.column("time", frame), case.column("event", frame), entry


def _curve(case: Case, times: Any) -> Result:
    time, event, entry = _arguments(case)
    return kaplan_meier(time, event, entry=entry, interval=case.inputs["ci"], level=case.level, times=times)


def curve(case: Case) -> dict[str, Any]:
    times = case.inputs["times"]
    result = _curve(case, times)
    rows = [survival_at(result, t).table.iloc[0] for t in times]
    names = {"time": "time", "n_risk": "at_risk", "surv": "estimate", "se": "std_error", "lower": "lower",
             "upper": "upper"}  # fmt: skip
    found: dict[str, Any] = {theirs: [row[ours] for row in rows] for theirs, ours in names.items()}
    if case.id == "km.edge.zero_events":
        # Three of three alive, nobody gone before: the exact lower limit stands where R has none.
        assert np.isclose(found["lower"][0], 0.025 ** (1 / 2), rtol=1e-12) and found["upper"] == [1.0]
        return {"surv": found["surv"][0]}
    return found


def curve_expected(case: Case) -> dict[str, Any]:
    """At S = 1 R prints 1 to 1; we print exact limits there. Limits are cut to [0, 1]."""
    found: dict[str, Any] = {}
    for name in ("lower", "upper"):
        pairs = zip(
            case.expected.get(name, []),
            case.expected.get("surv", []) if name in case.expected else [],
            strict=True,
        )
        found[name] = [ANY if s == 1 else None if v is None else min(max(v, 0.0), 1.0) for v, s in pairs]
    return {k: v for k, v in found.items() if k in case.expected}


def quantiles(case: Case) -> dict[str, Any]:
    result = _curve(case, None)
    rows = [median_time(result, p).table.iloc[0] for p in case.inputs["probs"]]
    names = {"quantile": "estimate", "lower": "lower", "upper": "upper"}
    return {theirs: [row[ours] for row in rows] for theirs, ours in names.items()}


def hazard(case: Case) -> dict[str, Any]:
    time, event, entry = _arguments(case)
    times = case.inputs["times"]
    table = nelson_aalen(time, event, entry=entry, times=times).table.set_index("time").loc[times]
    return {"cumhaz": table["estimate"].tolist(), "se": table["std_error"].tolist()}


def numbers_at_risk(case: Case) -> dict[str, Any]:
    """R writes 0 at time 0 by the literal formula; our table prints those seen from time zero there."""
    time, event, entry = _arguments(case)
    times = case.inputs["times"]
    table = kaplan_meier(time, event, entry=entry, times=times).table.set_index("time").loc[times]
    return {"n_risk": table["at_risk"].tolist(), "at_time_zero_plus": table["at_risk"].iloc[0]}


ANSWERS = {
    "kaplan_meier": curve,
    "km_quantile_ci": quantiles,
    "nelson_aalen": hazard,
    "at_risk_table": numbers_at_risk,
}
EXPECTED = {
    "kaplan_meier": curve_expected,
    "at_risk_table": lambda case: {"n_risk": [ANY, *case.expected["n_risk"][1:]]},
}
NOT_OURS = {"km.edge.zero_events": {"note": "a remark, not a number"}}
