"""What is read off a survival curve: its value at a time, its quantiles, and the area under it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis._input import Floats, binary, groups, number, probability
from outcomes.analysis._input import times as checked_times
from outcomes.analysis.intervals import all_lower, z_of
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.risk_set import TIES, Sample, empties_at, risk_set, sample, survival_steps
from outcomes.errors import NotEstimable

AT_COLUMNS = ("group", "time", "estimate", "std_error", "lower", "upper", "at_risk", "reason")
MEAN_COLUMNS = ("group", "time", "estimate", "std_error", "lower", "upper", "at_risk", "events", "reason")
QUANTILE_COLUMNS = ("group", "estimate", "lower", "upper", "reason")
FEW_AT_RISK = 10
FLAT = 1e-9  # half of a product of fractions is 0.49999999999999994 or 0.5000000000000001
_QUANTILE = "Brookmeyer R, Crowley J. Biometrics 1982;38:29-41."
_AREA = ("Irwin JO. J Hyg 1949;47:188-189.", "Karrison T. J Am Stat Assoc 1987;82:1169-1176.")
BEYOND = "the time asked for lies after the last observation"
EMPTY = "nobody was under observation at some time before"


def survival_at(result: Result, t: float) -> Result:
    """The curve of `kaplan_meier` read at t: one row a group.

    at_risk is exact: it stands in the curve if t was among its `times`, or follows from the next row if
    nobody left or entered between; otherwise it is missing with a caution. t after the last row of a curve
    that has not reached 0: beyond_follow_up. Fewer than ten at risk: a caution.

    >>> from outcomes.analysis.survival import kaplan_meier
    >>> r = survival_at(kaplan_meier([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1]), 2.5)
    >>> r.table[["estimate", "at_risk"]].round(4).iloc[0].tolist()
    [0.6667, 3.0]
    """
    moment = number(t, "t", least=0.0)
    rows = [_read(label, part, moment, result) for label, part in parts_of(result.table)]
    table = tidy(rows, AT_COLUMNS)
    notes = list(result.notes)
    if (table["at_risk"] < FEW_AT_RISK).fillna(False).any():
        notes.append(Caution("AT-RISK-LOW", "Fewer than ten were at risk at this time."))
    if (table["at_risk"].isna() & table["estimate"].notna()).any():
        notes.append(Caution("AT-RISK-UNKNOWN", "Ask for this time in the curve to have the number at risk."))
    return Result(table, result.method, result.counts, tuple(notes))


def parts_of(table: pd.DataFrame) -> Iterator[tuple[str, pd.DataFrame]]:
    """Groups in the order of the table."""
    for label in dict.fromkeys(str(v) for v in table["group"]):
        yield label, table[table["group"] == label].reset_index(drop=True)


def _read(label: str, part: pd.DataFrame, t: float, result: Result) -> dict[str, object]:
    place = int(np.searchsorted(part["time"].to_numpy(dtype=float), t, side="right")) - 1
    row: dict[str, object] = {"group": label, "time": t}
    if place < 0:
        return row | {"reason": "not_applicable"}
    cells = {name: part[name].iloc[place] for name in AT_COLUMNS if name not in ("group", "time")}
    found: dict[str, Any] = {name: None if pd.isna(v) else v for name, v in cells.items()}
    if float(part["time"].iloc[place]) == t or found["reason"] == "empty_group":
        return row | found
    if place + 1 == len(part):
        return row | _past_the_end(found)
    following = part.iloc[place + 1]
    nobody_moves = float(following["censored"]) == 0 and result.counts.get("late", 0) == 0
    found["at_risk"] = following["at_risk"] if nobody_moves else None
    if pd.isna(following["estimate"]) and found["estimate"] is not None:
        return row | {"reason": "empty_risk_set"}
    if found["estimate"] == 1.0:
        found |= _all_alive(found["at_risk"], result.method.level)
    return row | found


def _past_the_end(found: Mapping[str, object]) -> dict[str, object]:
    if found["estimate"] == 0.0:
        return {**found, "at_risk": 0.0}
    return {"at_risk": None, "reason": "beyond_follow_up"}


def _all_alive(n: Any, level: float) -> dict[str, object]:
    if n is None or float(n) < 1:
        return {"lower": None, "upper": None, "reason": "no_events"}
    return {"lower": float(all_lower(np.array([float(n)]), level)[0]), "upper": 1.0}


def median_time(result: Result, p: float = 0.5) -> Result:
    """First time at which S <= 1 − p, the midpoint where the curve is flat at 1 − p; limits by inverting the
    pointwise limits of the same curve. One row a group.

    A point or an upper limit that is not reached is missing with reason not_reached.
    Source: Brookmeyer & Crowley 1982.

    >>> from outcomes.analysis.survival import kaplan_meier
    >>> median_time(kaplan_meier([1, 2, 3, 4], [1, 1, 1, 1])).table["estimate"].tolist()
    [2.5]
    """
    height = 1 - probability(p, "p")
    rows = []
    for label, part in parts_of(result.table):
        row: dict[str, object] = {"group": label}
        if (part["reason"] == "empty_group").fillna(False).any():
            rows.append(row | {"reason": "empty_group"})
            continue
        steps = part[(part["events"] > 0).fillna(False)]
        time = steps["time"].to_numpy(dtype=float)
        for name in ("estimate", "lower", "upper"):
            row[name] = _first_below(time, steps[name].to_numpy(dtype=float, na_value=np.nan), height)
        if row["estimate"] is None:
            row |= {"lower": row["lower"], "upper": None}
        if row["upper"] is None:
            row["reason"] = "not_reached"
        rows.append(row)
    old = result.method
    method = Method("first time S ≤ 1−p, midpoint on a flat", "", "inversion of pointwise limits", old.level,
                    TIES, old.time_unit, (*old.citations, _QUANTILE))  # fmt: skip
    return Result(tidy(rows, QUANTILE_COLUMNS), method, result.counts, result.notes)


def _first_below(time: Floats, curve: Floats, height: float) -> float | None:
    usable = ~np.isnan(curve)
    t, s = time[usable], curve[usable]
    below = np.flatnonzero(s <= height + FLAT)
    if not len(below):
        return None
    first = int(below[0])
    if abs(s[first] - height) > FLAT:
        return float(t[first])
    after = np.flatnonzero(s < height - FLAT)
    return float((t[first] + t[after[0]]) / 2) if len(after) else float(t[first])


def restricted_mean(time: Any, event: Any, tau: float, *, entry: Any = None, weights: Any = None,
                    group: Any = None, level: float = 0.95, known_at: Any = None,
                    time_unit: str = "") -> Result:  # fmt: skip
    """Mean event-free time up to tau: the area under the Kaplan–Meier curve. One row a group.

    tau is chosen before looking and not after the last observation, unless the curve reaches 0. Limits
    mean ± z SE, cut to [0, tau]; none without an event (no_events). std_error is of the estimate.

    Raises InputRefused; NotEstimable no_runs, beyond_follow_up, empty_risk_set (with groups these are a row).

    >>> r = restricted_mean([1, 2, 2, 3, 4, 5], [1, 1, 0, 1, 0, 1], 5)
    >>> r.table[["estimate", "std_error"]].round(4).iloc[0].tolist()
    [3.3889, 0.6655]
    """
    end = number(tau, "tau", above=0.0)
    probability(level)
    n = len(checked_times(time))
    rows = sample(time, binary(event, n).astype(np.int64), entry, weights)
    out = []
    for label, inside in groups(group, n, known_at):
        area = area_to(rows.pick(inside & (rows.weight > 0)), end)
        if area.reason and group is None:
            raise NotEstimable(area.reason, BEYOND if area.reason == "beyond_follow_up" else EMPTY)
        out.append({"group": label} | _mean_row(area, end, level))
    method = Method("area under Kaplan–Meier to τ", "Greenwood type", "plain", level, TIES, time_unit, _AREA)
    found = {"n": int(rows.size), "events": int(rows.weight[rows.code > 0].sum())}
    return Result(tidy(out, MEAN_COLUMNS), method, found)


@dataclass(frozen=True)
class Area:
    """Area under a curve to tau with its variance; reason is a code if there is none."""

    mean: float = 0.0
    variance: float = 0.0
    events: float = 0.0
    n: float = 0.0
    reason: str = ""


def area_to(rows: Sample, tau: float) -> Area:
    """μ = ∫ S to tau, Var = Σ A(u)² d/(n(n−d)) with A(u) the area from u to tau; a term with A = 0 is 0."""
    if rows.size == 0:
        return Area(reason="empty_group")
    c = risk_set(rows).at_events()
    s, _ = survival_steps(c)
    keep = c.time <= tau
    at, n, d, s = c.time[keep], c.at_risk[keep], c.all_events[keep], s[keep]
    ended = bool(len(s)) and s[-1] <= 0
    events = float(d.sum())
    if not ended and tau > rows.time.max():
        return Area(events=events, n=rows.size, reason="beyond_follow_up")
    gap = empties_at(rows)
    if tau > gap and not (s[at <= gap] <= 0).any():
        return Area(events=events, n=rows.size, reason="empty_risk_set")
    pieces = np.diff(np.concatenate([[0.0], at, [tau]])) * np.concatenate([[1.0], s])
    rest = np.cumsum(pieces[::-1])[::-1][1:]
    counted = (rest > 0) & (n > d)
    terms = np.where(counted, rest**2 * d / (n * np.where(counted, n - d, 1.0)), 0.0)
    return Area(float(pieces.sum()), float(terms.sum()), events, rows.size)


def _mean_row(area: Area, tau: float, level: float) -> dict[str, object]:
    row: dict[str, object] = {"time": tau, "events": area.events, "at_risk": area.n}
    if area.reason:
        return row | {"reason": area.reason}
    row["estimate"] = area.mean
    if area.events == 0:
        return row | {"reason": "no_events"}
    if area.variance == 0:
        return row | {"reason": "no_nonevents"}
    error = float(np.sqrt(area.variance))
    half = z_of(level) * error
    low, high = max(0.0, area.mean - half), min(tau, area.mean + half)
    return row | {"std_error": error, "lower": low, "upper": high}
