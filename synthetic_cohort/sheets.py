"""Exports as sheets of cells, before they are written."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from datetime import date, datetime

import numpy as np
import pandas as pd

from synthetic_cohort.clock import add_hours, local
from synthetic_cohort.cohort import Cohort

Cell = str | int | float | datetime | date | None


@dataclass
class Row:
    """One row of a sheet; run_no 0 belongs to no run of the cohort."""

    cells: list[Cell]
    run_no: int = 0


@dataclass
class Sheet:
    """titles: rows above the header. roles: what a column means -> its headers, for planting."""

    file: str
    name: str
    header: list[str]
    rows: list[Row]
    roles: dict[str, tuple[str, ...]] = field(default_factory=dict)
    titles: list[list[Cell]] = field(default_factory=list)

    @property
    def is_csv(self) -> bool:
        return self.file.endswith(".csv")

    def lines(self) -> list[int]:
        """Physical line (from 1) on which each row begins; in a CSV, line breaks inside cells count."""
        line = len(self.titles) + 2
        lines = []
        for row in self.rows:
            lines.append(line)
            line += 1 + (sum(c.count("\n") for c in row.cells if isinstance(c, str)) if self.is_csv else 0)
        return lines

    def place(self, header: str) -> int:
        return self.header.index(header)

    def get(self, row: Row, role: str) -> Cell:
        """The first cell of a role."""
        return row.cells[self.place(self.roles[role][0])]

    def put(self, row: Row, role: str, values: Sequence[Cell]) -> None:
        """Write one value for each header of the role."""
        for header, value in zip(self.roles[role], values, strict=True):
            row.cells[self.place(header)] = value


@dataclass(frozen=True)
class Form:
    """How a style writes things, for the planter.

    patterns: role -> one strftime pattern for each of its headers, None for a typed date cell, "%Y" for a
    typed year; the key "" holds the usual pattern. decimal_mark: None where numbers are typed. words: key ->
    the style's word. slips: role -> (factor to the unit that a hurried hand would use, lowest and highest
    value that the written unit allows).
    """

    patterns: dict[str, tuple[str | None, ...]]
    decimal_mark: str | None
    words: dict[str, Cell]
    slips: dict[str, tuple[float, float, float]]

    def moment(self, role: str, at: pd.Timestamp, month: str | None = None) -> list[Cell]:
        """Cells of a moment; `month` writes those two letters in place of the month."""
        cells: list[Cell] = []
        for pattern in self.patterns.get(role, self.patterns[""]):
            if pattern is None:
                cells.append(at.to_pydatetime())
            elif pattern == "%Y":
                cells.append(at.year)
            else:
                cells.append(at.strftime(pattern.replace("%m", month or "%m")))
        return cells

    def is_text(self, role: str) -> bool:
        """Whether moments of this role are written as text with a month."""
        return all(p is not None and p != "%Y" for p in self.patterns.get(role, self.patterns[""]))

    def number(self, value: float) -> Cell:
        if self.decimal_mark is None:
            return int(value) if value == int(value) else round(value, 6)
        return f"{value:.6g}".replace(".", self.decimal_mark)

    def value(self, cell: Cell) -> float | None:
        """The number in a cell, None if there is none."""
        if isinstance(cell, (int, float)):
            return float(cell)
        try:
            return float(str(cell).replace(self.decimal_mark or ".", ".")) if cell else None
        except ValueError:
            return None


@dataclass
class Tables:
    """All sheets of one export; the first holds one row a run."""

    style: str
    form: Form
    sheets: list[Sheet]
    flat: pd.DataFrame
    zone: str

    def sheet_with(self, role: str) -> Sheet | None:
        return next((s for s in self.sheets if role in s.roles), None)


Column = tuple[str, str, Sequence[Cell]]
"""Header, role ('' for none), cells."""


def build_sheet(
    file: str,
    name: str,
    columns: Sequence[Column],
    run_no: Sequence[int],
    titles: list[list[Cell]] | None = None,
) -> Sheet:
    """A sheet of columns of equal length. Several columns of one role are kept in order."""
    roles: dict[str, tuple[str, ...]] = {}
    for header, role, _ in columns:
        if role:
            roles[role] = (*roles.get(role, ()), header)
    rows = [Row(list(cells), int(n)) for n, *cells in zip(run_no, *(c for _, _, c in columns), strict=True)]
    return Sheet(file, name, [h for h, _, _ in columns], rows, roles, titles or [])


def flat_frame(cohort: Cohort) -> pd.DataFrame:
    """One row a run: the frames of that grain side by side, and moments as wall-clock time (*_at)."""
    person = cohort.person.drop(columns=["sex", "height_cm", "weight_kg", "birth_date", "frailty"])
    run = cohort.run.drop(
        columns=[
            "sex",
            "height_cm",
            "weight_kg",
            "end_h",
            "left_h",
            "left_alive",
            "death_h",
            "arrest_location",
            "had_arrest",
            "age_years",
        ]
    )
    flat = run.merge(person, on="person_no", how="left", validate="many_to_one")
    ending = cohort.ending.drop(columns=["true_end_kind", "entry_h"])
    for frame in (ending, cohort.recorded, cohort.follow_up, cohort.neuro):
        flat = flat.merge(frame, on="run_no", how="left", validate="one_to_one")
    flat["cpc_recorded"] = flat["cpc"].where(flat["is_recorded"].eq(True))
    flat["mrs_recorded"] = flat["mrs"].where(flat["is_recorded"].eq(True))
    for name, frame in (("n_events", cohort.complication), ("n_steps", cohort.weaning_step)):
        flat[name] = flat["run_no"].map(frame["run_no"].value_counts()).fillna(0).astype(int)
    hours = {
        "end_at": flat["end_h"],
        "discharge_at": flat["discharge_h"],
        "contact_at": flat["contact_h"],
        "register_death_at": flat["register_death_h"],
        "arrival_at": flat["entry_h"].where(flat["transferred_in"]),
        "decision_at": flat["decision_h"],
        "intubated_at": -flat["intubation_hours"],
        "arrest_at": flat["arrest_onset_h"],
    }
    for name, h in hours.items():
        flat[name] = wall(cohort, flat["start_utc"], h)
    return flat


def wall(cohort: Cohort, start_utc: pd.Series, hours: pd.Series) -> pd.Series:
    """Wall-clock moments so many hours after a start."""
    return local(add_hours(start_utc, hours), cohort.programme.zone)


def numbers(values: Sequence[float] | pd.Series, digits: int, mark: str) -> list[Cell]:
    """Numbers as text with a fixed count of digits; empty where missing.

    >>> numbers([1.25, float("nan")], 1, ",")
    ['1,2', '']
    """
    return ["" if pd.isna(v) else f"{v:.{digits}f}".replace(".", mark) for v in values]


def moments(values: pd.Series, pattern: str) -> list[Cell]:
    """Moments as text; empty where missing."""
    return ["" if pd.isna(v) else v.strftime(pattern) for v in values]


def coded(values: Sequence[object] | pd.Series, codes: dict[object, Cell], empty: Cell = "") -> list[Cell]:
    """Words of the style for our words; True and False are keys too. Missing gives `empty`."""
    return [empty if pd.isna(v) else codes[bool(v) if isinstance(v, np.bool_) else v] for v in values]


def with_tokens(
    cells: Sequence[Cell], rng: np.random.Generator, tokens: Sequence[str], share: float = 0.3
) -> list[Cell]:
    """Some of the empty cells say in a word that they are empty."""
    draw = rng.random(len(cells))
    pick = rng.integers(0, len(tokens), len(cells))
    return [
        tokens[p] if c in ("", None) and d < share else c for c, d, p in zip(cells, draw, pick, strict=True)
    ]
