"""Exposures that begin after time zero: landmark, Mantel–Byar test, Simon–Makuch curves.

An exposure known only later (an implant, a wean) is no group from time zero: its members had to live
until then.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from outcomes.analysis._input import (
    Floats,
    binary,
    entries,
    floats_or_missing,
    need_rows,
    number,
    same_length,
)
from outcomes.analysis._input import times as checked_times
from outcomes.analysis.logrank import logrank
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.survival import kaplan_meier
from outcomes.errors import InputRefused

NOT_YET, EXPOSED = "not yet exposed", "exposed"
FLOW_COLUMNS = ("group", "events", "reason")
_LANDMARK = (
    "Anderson JR, Cain KC, Gelber RD. J Clin Oncol 1983;1:710-719.",
    "Dafni U. Circ Cardiovasc Qual Outcomes 2011;4:363-371.",
)
_BYAR = "Mantel N, Byar DP. J Am Stat Assoc 1974;69:81-86."
_MAKUCH = "Simon R, Makuch RW. Stat Med 1984;3:35-44."
_IMM = Caution("IMM", "The curve of an exposure follows runs from their switch on: 'as if nobody switched'.")


@dataclass(frozen=True)
class Landmark:
    """Those under observation and event-free at a stated time.

    kept: bool, shape (n,). time, event, exposed: of the kept runs, shape (m,); time restarts at the
    landmark; exposed is the status there. flow: a Result with a row a stage (group: words, events: number
    of runs).
    """

    at: float
    kept: npt.NDArray[np.bool_]
    time: Floats
    event: npt.NDArray[np.int64]
    exposed: npt.NDArray[np.bool_]
    flow: Result


def landmark(time: Any, event: Any, at: float, *, exposure_time: Any = None, entry: Any = None,
             time_unit: str = "") -> Landmark:  # fmt: skip
    """The runs to analyse from a landmark chosen before looking.

    time, event, exposure_time, entry: shape (n,). Kept are runs with entry < at < time. exposure_time:
    when the exposure began, missing (NaN) if it never did; exposed means at or before the landmark.
    Whatever is estimated from the kept runs is conditional on reaching the landmark.

    Raises InputRefused; NotEstimable no_runs if there is no run, or nobody reaches the landmark.
    Source: Anderson, Cain & Gelber 1983.

    >>> found = landmark([2, 8, 9, 12], [1, 0, 1, 1], 5, exposure_time=[1, 4, None, 6])
    >>> found.time.tolist(), found.exposed.tolist()
    ([3.0, 4.0, 7.0], [True, False, False])
    """
    moment = number(at, "at", least=0.0)
    t = checked_times(time)
    need_rows(len(t))
    died, e, switch = binary(event, len(t)), entries(entry, t), switches(exposure_time, len(t))
    reached = t > moment
    kept = reached & (e < moment) if moment > 0 else reached & np.isneginf(e)
    exposed = switch <= moment
    stages = {
        "all runs": len(t), "event at or before the landmark": int((~reached & died).sum()),
        "censored at or before the landmark": int((~reached & ~died).sum()),
        "seen only from after the landmark": int((reached & ~kept).sum()),
        "kept": int(kept.sum()), "kept and exposed": int((kept & exposed).sum()),
    }  # fmt: skip
    flow = tidy([{"group": g, "events": n} for g, n in stages.items()], FLOW_COLUMNS)
    need_rows(int(kept.sum()))
    method = Method(f"landmark at {moment:g}", time_unit=time_unit, citations=_LANDMARK)
    return Landmark(
        moment, kept, t[kept] - moment, died[kept].astype(np.int64), exposed[kept], Result(flow, method)
    )


def switches(values: Any, n: int) -> Floats:
    """Times of a switch, infinity for never (missing)."""
    if values is None:
        return np.full(n, np.inf)
    found: Floats = same_length(n, floats_or_missing(values, "exposure_time"), "exposure_time")
    if (found < 0).any():
        raise InputRefused("negative_time", "exposure_time has a negative value")
    return np.where(np.isnan(found), np.inf, found)


@dataclass(frozen=True)
class _Split:
    """Rows (start, stop] with the current exposure; an exposure counts from just after its switch."""

    start: Floats
    stop: Floats
    event: npt.NDArray[np.int64]
    exposed: npt.NDArray[np.bool_]
    run: npt.NDArray[np.int64]


def split_at_switch(time: Any, event: Any, exposure_time: Any, entry: Any) -> _Split:
    t = checked_times(time)
    need_rows(len(t))
    died, e, switch = binary(event, len(t)), entries(entry, t), switches(exposure_time, len(t))
    begin = np.where(np.isneginf(e), 0.0, e)
    from_start = (switch <= begin) | (switch <= 0)
    changes = ~from_start & (switch < t)
    run = np.arange(len(t))
    first_stop = np.where(changes, switch, t)
    first_event = died & ~changes
    return _Split(
        np.concatenate([begin, switch[changes]]), np.concatenate([first_stop, t[changes]]),
        np.concatenate([first_event, died[changes]]).astype(np.int64),
        np.concatenate([from_start, np.ones(int(changes.sum()), dtype=bool)]),
        np.concatenate([run, run[changes]]),
    )  # fmt: skip


def mantel_byar(time: Any, event: Any, exposure_time: Any, *, entry: Any = None, strata: Any = None,
                time_unit: str = "") -> Result:  # fmt: skip
    """Test of an exposure that begins at its own time: a log-rank test by current exposure.

    exposure_time: missing (NaN) if it never began; a run counts as exposed after it. Columns as in
    `logrank`; the groups are 'exposed' and 'not yet exposed'; n counts stretches of runs.

    Raises InputRefused; NotEstimable no_runs, one_group (nobody, or everybody, is exposed throughout),
    no_events, no_overlap. Source: Mantel & Byar 1974.
    """
    rows = split_at_switch(time, event, exposure_time, entry)
    layer = None if strata is None else np.asarray(strata, dtype=object)[rows.run]
    exposed = np.where(rows.exposed, EXPOSED, NOT_YET)
    found = logrank(rows.stop, rows.event, exposed, entry=rows.start, strata=layer, time_unit=time_unit)
    method = replace(found.method, estimator="Mantel–Byar: log-rank by current exposure", citations=(_BYAR,))
    return replace(found, method=method, counts={**found.counts, "n": int(rows.run.max()) + 1})


def simon_makuch(time: Any, event: Any, exposure_time: Any, *, entry: Any = None,
                 times: Sequence[float] | None = None, interval: str = "log-log", level: float = 0.95,
                 time_unit: str = "") -> Result:  # fmt: skip
    """Kaplan–Meier by current exposure: each run belongs to 'not yet exposed' until its switch, then to
    'exposed'.

    It reads "as if nobody switched" and is the survival of no group of people; early risk sets of the
    exposed are small. Columns as in `kaplan_meier`. Raises InputRefused; NotEstimable no_runs. Source:
    Simon & Makuch 1984.
    """
    rows = split_at_switch(time, event, exposure_time, entry)
    exposed = np.where(rows.exposed, EXPOSED, NOT_YET)
    found = kaplan_meier(rows.stop, rows.event, entry=rows.start, group=exposed, times=times,
                         interval=interval, level=level, time_unit=time_unit)  # fmt: skip
    name = "Simon–Makuch: Kaplan–Meier by current exposure"
    method = replace(found.method, estimator=name, citations=(_MAKUCH, *found.method.citations))
    return replace(found, method=method, notes=(_IMM, *found.notes))
