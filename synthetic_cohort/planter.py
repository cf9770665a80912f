"""The state of one planting: which runs are taken, what was planted, and on which line it ended up."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
import pandas as pd

from synthetic_cohort.sheets import Cell, Row, Sheet, Tables


@dataclass(frozen=True, order=True)
class Defect:
    """One planted defect, or one place of it.

    line: physical line (from 1) in the file or sheet as written. column: header, "" if the whole row is
    meant. scope: what can no longer be used: "cell", "row" or "run". run: the run's identifier as written.
    """

    file: str
    sheet: str
    line: int
    column: str
    kind: str
    scope: str
    run: str


@dataclass
class Planter:
    """The state of one planting: which runs are taken and what was planted in which row."""

    tables: Tables
    rng: np.random.Generator
    used: set[int] = field(default_factory=set)
    found: list[tuple[str, Sheet, Row, str, str]] = field(default_factory=list)

    @property
    def runs(self) -> Sheet:
        return self.tables.sheets[0]

    def at(self, row: Row) -> pd.Series:
        """What is true of the run of this row."""
        flat = self.tables.flat
        return flat.iloc[int(np.searchsorted(flat["run_no"].to_numpy(), row.run_no))]

    def pick(self, suits: pd.Series, sheet: Sheet | None = None, *roles: str) -> Row | None:
        """A row of an untouched run for which `suits` (by flat row) holds and roles are filled."""
        flat = self.tables.flat
        alone = flat.groupby("person_no")["run_no"].transform("size") == 1
        allowed = set(flat.loc[suits & alone, "run_no"]) - self.used
        sheet = sheet or self.runs
        rows = [
            r
            for r in sheet.rows
            if r.run_no in allowed and all(self._filled(sheet, r, role) for role in roles)
        ]
        if not rows:
            return None
        row = rows[int(self.rng.integers(len(rows)))]
        self.used.add(row.run_no)
        return row

    def _filled(self, sheet: Sheet, row: Row, role: str) -> bool:
        return role in sheet.roles and all(
            row.cells[sheet.place(h)] not in (None, "") for h in sheet.roles[role]
        )

    def any_run(self) -> pd.Series:
        return pd.Series(True, index=self.tables.flat.index)

    def put(self, kind: str, sheet: Sheet, row: Row, role: str, values: Sequence[Cell], scope: str) -> None:
        """Write the wrong values and note the first column that they stand in."""
        sheet.put(row, role, values)
        self.found.append((kind, sheet, row, sheet.roles[role][0], scope))

    def note(self, kind: str, sheet: Sheet, row: Row, column: str, scope: str) -> None:
        self.found.append((kind, sheet, row, column, scope))

    def truth(self) -> list[Defect]:
        """Everything planted with its final line, in the order of files, sheets and lines."""
        lines = {
            id(s): {id(r): n for r, n in zip(s.rows, s.lines(), strict=True)} for s in self.tables.sheets
        }
        out = []
        for kind, sheet, row, column, scope in self.found:
            run = str(sheet.get(row, "run"))
            out.append(Defect(sheet.file, sheet.name, lines[id(sheet)][id(row)], column, kind, scope, run))
        return sorted(out)
