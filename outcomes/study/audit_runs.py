"""The runs of the period, one line each: the internal profile's list that every count leads to."""

from __future__ import annotations

import pandas as pd

from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import counted, short_key


def runs_listed(audit: Audit) -> Answer:
    """One line a run.

    Key, year, ending, time on support, discharge, number of complication events, and what to look at in the
    record.
    """
    run = audit.current.run
    if run.empty:
        raise NotEstimable("no_runs", "No run is in this period.")
    events = (
        audit.current.complication.groupby("run_key")["n_events"].sum()
        if len(audit.current.complication)
        else pd.Series(dtype=float)
    )
    aside = (
        audit.current.missing[audit.current.missing["missing_kind"] == "set_aside"].groupby("run_key").size()
    )
    rows = []
    for record in run.sort_values(["run_year", "run_key"]).itertuples():
        rows.append(
            {
                "group": short_key(record.run_key),
                "year": str(record.run_year),
                "ended": _word(record.end_kind),
                "home": _fate(record.is_alive_at_discharge),
                "exposure": record.support_h,
                "events": int(events.get(record.run_key, 0)),
                "flag": _flag(record, int(aside.get(record.run_key, 0))),
            }
        )
    result = counted(
        rows,
        ["group", "exposure", "events", "year", "ended", "home", "flag"],
        words=("year", "ended", "home", "flag"),
    )
    layout = tuple(RowOf(f"r_{r['group']}", str(r["group"]), {"group": str(r["group"])}) for r in rows)
    columns = (
        ColumnOf("year", "Year", "word", ("year",)),
        ColumnOf("ended", "Ended", "word", ("ended",)),
        ColumnOf("time", "On support", "duration", ("exposure",)),
        ColumnOf("home", "Left hospital", "word", ("home",)),
        ColumnOf("events", "Complication events", "count", ("events",)),
        ColumnOf("flag", "To look at", "word", ("flag",)),
    )
    return Answer(
        {"runs": result}, {"runs_listed": TableOf("Runs of the period", "Run", "runs", layout, columns)}
    )


def _word(kind: object) -> str:
    return "not recorded" if pd.isna(kind) else str(kind).replace("_", " ")


def _fate(alive: object) -> str:
    return "not known" if pd.isna(alive) else "alive" if alive else "died"


def _flag(record: object, cells: int) -> str:
    flags = []
    if cells:
        flags.append("values set aside")
    if getattr(record, "is_transferred_in", False):
        flags.append("transferred in")
    if not getattr(record, "is_first_run", True):
        flags.append("later run")
    return ", ".join(flags) or "nothing"


ANALYSES = {"runs_listed": runs_listed}
