"""Every planted defect is found at its line, and nothing else is refused: both messy styles, end to end."""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from outcomes.intake.mapping import Mapping
from outcomes.intake.mapping_file import read_mapping
from outcomes.store.importing import Request, run_import
from outcomes.store.recover import Places
from synthetic_cohort import generate, write_export
from synthetic_cohort.defects import DEFECT_KINDS

RUNS = 110


@pytest.mark.parametrize(("style", "seed"), [("north", 4), ("south", 5), ("plain", 6)])
def test_each_planted_defect_is_found_at_its_line_and_nothing_else_is_refused(
    style: str, seed: int, tmp_path: Path
) -> None:
    export = write_export(generate(RUNS, seed), style, tmp_path, seed, DEFECT_KINDS)
    mapping = read_mapping(export.mapping.read_text(encoding="utf-8"))
    request = Request(
        Places.beside(tmp_path / "s.duckdb"), mapping, {mapping.files[0].key: export.paths[0]},
        set_aside=True, store_it=False,
    )  # fmt: skip
    done = run_import(request)
    sheets = _sheet_keys(mapping, export.paths[0])
    planted = {(sheets.get(d.sheet, d.sheet), d.line) for d in export.defects}
    told = {(f.sheet, f.line) for f in done.findings if f.effect != "note" or f.code == "ROW.TWIN"}
    assert len(export.defects) >= 12
    assert {p for p in planted if p not in told} == set()
    assert {t for t in told if t not in planted} == set()


def _sheet_keys(mapping: Mapping, path: Path) -> dict[str, str]:
    """Sheet as the truth list names it -> key in the mapping; sheets of a workbook go by position."""
    sheets = [s for f in mapping.files for s in f.sheets if s.row_is != "code list"]
    if path.suffix != ".xlsx":
        return {"": sheets[0].key}
    names = openpyxl.load_workbook(path, read_only=True).sheetnames
    return {names[s.position - 1]: s.key for s in sheets}
