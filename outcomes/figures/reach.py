"""How far a curve can be relied on: after Pocock, Clayton and Altman, Lancet 2002;359:1686."""

from __future__ import annotations

from dataclasses import dataclass

import pandas as pd

LEAST_AT_RISK = 10
LEAST_SHARE = 0.10
STOP_BELOW = 5


@dataclass(frozen=True)
class Reach:
    """reliable_until: from this time on the line is dashed. stop: here it ends. None: not within the data."""

    reliable_until: float | None
    stop: float | None


def reach(curve: pd.DataFrame) -> Reach:
    """curve: one group in order of time with columns time and at_risk (just before that time).

    Dashed from the first time with fewer than 10 at risk, or fewer than a tenth of the start if that is
    more; ended at the first time with fewer than 5. Whoever is left after the last row counts, if events
    and censored are there to tell: a curve does not run on once all have left.
    """
    start = float(curve["at_risk"].max()) if len(curve) else 0.0
    seen = _with_those_left(curve)
    return Reach(_first_below(seen, max(LEAST_AT_RISK, LEAST_SHARE * start)), _first_below(seen, STOP_BELOW))


def _with_those_left(curve: pd.DataFrame) -> pd.DataFrame:
    """The curve with one row more: how many remain at risk just after its last time."""
    if curve.empty or not {"events", "censored"} <= set(curve.columns):
        return curve
    last = curve.iloc[[-1]]
    return pd.concat([curve, last.assign(at_risk=last["at_risk"] - last["events"] - last["censored"])])


def _first_below(curve: pd.DataFrame, limit: float) -> float | None:
    below = curve.loc[curve["at_risk"] < limit, "time"]
    return float(below.iloc[0]) if len(below) else None


def parts(curve: pd.DataFrame, end: float) -> tuple[pd.DataFrame, pd.DataFrame]:
    """The reliable part of a step curve and the dashed part, both cut at `end` and where too few remain.

    Each part ends with a row that carries its last step to the time where the part ends.
    """
    limits = reach(curve)
    last = end if limits.stop is None else min(end, limits.stop)
    turn = last if limits.reliable_until is None else min(last, limits.reliable_until)
    return _between(curve, None, turn), _between(curve, turn, last)


def _between(curve: pd.DataFrame, start: float | None, end: float) -> pd.DataFrame:
    if start is not None and start >= end:
        return curve.iloc[:0]
    before = curve[curve["time"] <= (end if start is None else start)]
    if before.empty:
        return curve.iloc[:0]
    inside = before if start is None else curve[(curve["time"] > start) & (curve["time"] < end)]
    if start is not None:
        inside = pd.concat([before.iloc[[-1]].assign(time=start), inside])
    inside = inside[inside["time"] < end]
    if inside.empty:
        return before.iloc[[-1]].assign(time=end)
    return pd.concat([inside, inside.iloc[[-1]].assign(time=end)], ignore_index=True)
