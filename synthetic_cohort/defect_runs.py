"""Defects that spoil a whole run or a row: contradictions in time, twins, events of nobody."""

from __future__ import annotations

import pandas as pd

from synthetic_cohort.planter import Planter
from synthetic_cohort.sheets import Row

HOUR = pd.Timedelta(hours=1)


def age_under_18(p: Planter) -> None:
    """A birth eleven years before the start."""
    row = p.pick(p.any_run(), None, "birth")
    if row is not None:
        at = p.at(row)["start_local"] - pd.Timedelta(days=4100)
        p.put("age_under_18", p.runs, row, "birth", p.tables.form.moment("birth", at), "run")


def end_before_start(p: Planter) -> None:
    """Support ends five hours before it began. In a run without events, which would lie after it."""
    flat = p.tables.flat
    row = p.pick((flat["n_events"] == 0) & (flat["n_steps"] == 0), None, "end")
    if row is not None:
        p.put(
            "end_before_start",
            p.runs,
            row,
            "end",
            p.tables.form.moment("end", p.at(row)["start_local"] - 5 * HOUR),
            "run",
        )


def discharge_before_end(p: Planter) -> None:
    """Leaving hospital twenty hours before support ended."""
    flat = p.tables.flat
    row = p.pick(flat["end_kind"].isin(("recovery", "death")) & (flat["end_h"] > 30.0), None, "discharge")
    if row is not None:
        at = p.at(row)["end_at"] - 20 * HOUR
        p.put("discharge_before_end", p.runs, row, "discharge", p.tables.form.moment("discharge", at), "run")


def died_yet_alive(p: Planter) -> None:
    """Died on support, and left hospital alive."""
    row = p.pick(p.tables.flat["end_kind"] == "death", None, "alive")
    if row is not None:
        p.put("died_yet_alive", p.runs, row, "alive", [p.tables.form.words["alive"]], "run")


def death_before_end(p: Planter) -> None:
    """Came off support alive, three hours after death."""
    flat = p.tables.flat
    row = p.pick(
        (flat["end_kind"] == "recovery") & (flat["end_h"] > 10.0) & flat["register_death_at"].isna(),
        None,
        "end",
    )
    if row is not None and "death" in p.runs.roles:
        at = p.at(row)["end_at"] - 3 * HOUR
        p.put("death_before_end", p.runs, row, "death", p.tables.form.moment("death", at), "run")


def start_missing(p: Planter) -> None:
    """No start of support."""
    row = p.pick(p.any_run(), None, "start")
    if row is not None:
        p.put("start_missing", p.runs, row, "start", [None] * len(p.runs.roles["start"]), "run")


def end_without_kind(p: Planter) -> None:
    """Support ended, but it is not said how."""
    row = p.pick(p.tables.flat["end_kind"] == "recovery", None, "end_kind")
    if row is not None:
        p.put("end_without_kind", p.runs, row, "end_kind", [None], "run")


def run_overlap(p: Planter) -> None:
    """Of a person with two runs, the first ends an hour after the second has begun."""
    flat = p.tables.flat
    second = flat[(flat["nth_run"] == 2) & ~flat["run_no"].isin(p.used) & (flat["observed_h"] > 3.0)]
    for _, run in second.iterrows():
        first = flat[(flat["person_no"] == run["person_no"]) & (flat["nth_run"] == 1)]
        if first.empty or first["run_no"].iloc[0] in p.used:
            continue
        numbers = (int(first["run_no"].iloc[0]), int(run["run_no"]))
        p.used.update(numbers)
        rows = [next(r for r in p.runs.rows if r.run_no == n) for n in numbers]
        p.runs.put(rows[0], "end", p.tables.form.moment("end", run["start_local"] + HOUR))
        for row in rows:
            p.note("run_overlap", p.runs, row, p.runs.roles["start"][0], "run")
        return


def identical_twin(p: Planter) -> None:
    """A row that stands twice; the later one is noted."""
    row = p.pick(p.any_run())
    if row is not None:
        p.note("identical_twin", p.runs, _double(p, row), "", "row")


def contradicting_twin(p: Planter) -> None:
    """Two rows of one run that do not agree; both are noted."""
    row = p.pick(p.any_run(), None, "weight")
    if row is not None:
        twin = _double(p, row)
        value = p.tables.form.value(p.runs.get(row, "weight")) or 70.0
        p.runs.put(twin, "weight", [p.tables.form.number(round(value + 9.0, 1))])
        for one in (row, twin):
            p.note("contradicting_twin", p.runs, one, "", "run")


def _double(p: Planter, row: Row) -> Row:
    """A copy of the row, put somewhere below it."""
    twin = Row(list(row.cells), row.run_no)
    place = next(i for i, r in enumerate(p.runs.rows) if r is row)
    p.runs.rows.insert(int(p.rng.integers(place + 1, len(p.runs.rows) + 1)), twin)
    return twin


def event_of_unknown_run(p: Planter) -> None:
    """An event of a run that no sheet knows. Only where events have rows of their own."""
    sheet = p.tables.sheet_with("onset")
    if sheet is None or sheet is p.runs or not sheet.rows:
        return
    model = sheet.rows[int(p.rng.integers(len(sheet.rows)))]
    row = Row(list(model.cells), 0)
    number = sum(1 for kind, *_ in p.found if kind == "event_of_unknown_run")
    sheet.put(row, "run", [f"nowhere-{number + 1}"])
    sheet.rows.insert(int(p.rng.integers(len(sheet.rows) + 1)), row)
    p.note("event_of_unknown_run", sheet, row, sheet.roles["run"][0], "row")


def event_long_before_start(p: Planter) -> None:
    """An onset two years before support: a slip in the year."""
    sheet = p.tables.sheet_with("onset")
    if sheet is None:
        return
    row = p.pick(p.any_run(), sheet, "onset")
    if row is not None:
        at = p.at(row)["start_local"] - pd.Timedelta(days=730)
        scope = "cell" if sheet is p.runs else "row"
        p.put("event_long_before_start", sheet, row, "onset", p.tables.form.moment("onset", at), scope)
