"""Defects that spoil one cell."""

from __future__ import annotations

import pandas as pd

from synthetic_cohort.clock import local
from synthetic_cohort.planter import Planter
from synthetic_cohort.sheets import Row


def unit_slip(p: Planter) -> None:
    """A value in the unit that the column is not in, so far off that no patient has it."""
    form = p.tables.form
    roles = sorted(r for r in form.slips if r in p.runs.roles)
    role = roles[int(p.rng.integers(len(roles)))]
    factor, low, high = form.slips[role]

    def slipped(row: Row) -> float | None:
        value = form.value(p.runs.get(row, role))
        return None if value is None else float(f"{value * factor:.3g}")

    wrong = {r.run_no: v for r in p.runs.rows if (v := slipped(r)) is not None and (v > high or v < low)}
    row = p.pick(p.tables.flat["run_no"].isin(wrong))
    if row is not None:
        p.put("unit_slip", p.runs, row, role, [form.number(wrong[row.run_no])], "cell")


def impossible_month(p: Planter) -> None:
    """A month 13. In the discharge where it is text, else in the onset of an event."""
    form = p.tables.form
    if form.is_text("discharge"):
        row = p.pick(p.any_run(), None, "discharge")
        if row is not None:
            p.put(
                "impossible_month",
                p.runs,
                row,
                "discharge",
                form.moment("discharge", p.at(row)["discharge_at"], "13"),
                "cell",
            )
        return
    events = p.tables.sheet_with("onset")
    row = p.pick(p.any_run(), events, "onset") if events else None
    if events is not None and row is not None:
        at = p.at(row)["start_local"] + pd.Timedelta(hours=1)
        p.put("impossible_month", events, row, "onset", form.moment("onset", at, "13"), "row")


def skipped_hour(p: Planter) -> None:
    """A discharge in the hour that the clocks left out in spring."""
    gaps = _skipped(p)
    left = p.tables.flat["discharge_at"]
    soon = [
        left.notna() & (g > p.tables.flat["end_at"]) & (g < p.tables.flat["end_at"] + pd.Timedelta(days=200))
        for g in gaps
    ]
    for gap, suits in zip(gaps, soon, strict=True):
        row = p.pick(suits, None, "discharge") if suits.any() else None
        if row is not None:
            p.put("skipped_hour", p.runs, row, "discharge", p.tables.form.moment("discharge", gap), "cell")
            return


def _skipped(p: Planter) -> list[pd.Timestamp]:
    """Half past in each wall-clock hour that did not exist during the cohort's time."""
    start = p.tables.flat["start_utc"]
    hours = pd.Series(pd.date_range(start.min().floor("h"), start.max() + pd.Timedelta(days=30), freq="h"))
    wall = local(hours, p.tables.zone)
    return [t - pd.Timedelta(minutes=30) for t in wall[wall.diff() > pd.Timedelta(hours=1)]]


def unknown_code(p: Planter) -> None:
    """A word for the sex that no list explains."""
    row = p.pick(p.any_run(), None, "sex")
    if row is not None:
        p.put("unknown_code", p.runs, row, "sex", [p.tables.form.words["unknown_code"]], "cell")


def cpc_out_of_range(p: Planter) -> None:
    """A cerebral performance category of 7."""
    row = p.pick(p.any_run(), None, "cpc")
    if row is not None:
        p.put("cpc_out_of_range", p.runs, row, "cpc", [p.tables.form.number(7)], "cell")


def diastolic_above_systolic(p: Planter) -> None:
    """Systolic and diastolic pressure changed over; both columns are wrong where there are two."""
    row = p.pick(p.any_run(), None, "pressure")
    if row is None:
        return
    headers = p.runs.roles["pressure"]
    cells = [row.cells[p.runs.place(h)] for h in headers]
    turned = ["/".join(reversed(str(cells[0]).split("/")))] if len(cells) == 1 else list(reversed(cells))
    p.runs.put(row, "pressure", turned)
    for header in headers:
        p.note("diastolic_above_systolic", p.runs, row, header, "cell")


def negative_platelets(p: Planter) -> None:
    """A platelet count below zero."""
    row = p.pick(p.any_run(), None, "platelets")
    if row is not None:
        value = p.tables.form.value(p.runs.get(row, "platelets"))
        p.put(
            "negative_platelets", p.runs, row, "platelets", [p.tables.form.number(-(value or 90.0))], "cell"
        )


def text_in_number(p: Planter) -> None:
    """Words where a number belongs."""
    row = p.pick(p.any_run(), None, "bilirubin")
    if row is not None:
        p.put("text_in_number", p.runs, row, "bilirubin", [p.tables.form.words["text"]], "cell")


def spreadsheet_error(p: Planter) -> None:
    """An error of the spreadsheet program in place of a number."""
    row = p.pick(p.any_run(), None, "creatinine")
    if row is not None:
        p.put("spreadsheet_error", p.runs, row, "creatinine", [p.tables.form.words["error"]], "cell")


def birth_after_start(p: Planter) -> None:
    """A birth two years after the start of support."""
    row = p.pick(p.any_run(), None, "birth")
    if row is not None:
        at = p.at(row)["start_local"] + pd.Timedelta(days=800)
        p.put("birth_after_start", p.runs, row, "birth", p.tables.form.moment("birth", at), "cell")
