"""Planted defects are where the truth list says, read back by the csv module and openpyxl."""

from __future__ import annotations

import csv
import io
from collections import Counter
from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from synthetic_cohort import (
    DEFECT_KINDS,
    STYLES,
    Cohort,
    Defect,
    Export,
    generate,
    plant,
    tables_of,
    write_export,
)

pytestmark = pytest.mark.thorough

Page = dict[int, dict[str, Any]]
"""Physical line -> header -> cell."""

NOT_IN = {
    "north": {"event_of_unknown_run"},
    "plain": {"event_of_unknown_run", "event_long_before_start"},
    "south": {"death_before_end"},
}


@pytest.fixture(scope="module")
def cohort() -> Cohort:
    return generate(260, seed=41)


@pytest.fixture(scope="module")
def planted(cohort: Cohort, tmp_path_factory: pytest.TempPathFactory) -> dict[str, Export]:
    folder = tmp_path_factory.mktemp("planted")
    return {style: write_export(cohort, style, folder, 7, DEFECT_KINDS, each=2) for style in STYLES}


def read_pages(export: Export) -> dict[str, Page]:
    """Sheet name -> page; a CSV has one sheet without a name. Lines are counted in the file itself."""
    path = export.paths[0]
    if path.suffix == ".xlsx":
        book = openpyxl.load_workbook(path)
        pages = {}
        for page in book:
            head = 3 if page.title == "Episodes" else 1
            names = [c.value for c in page[head]]
            pages[page.title] = {
                cells[0].row: dict(zip(names, (c.value for c in cells), strict=True))
                for cells in page.iter_rows(min_row=head + 1)
            }
        return pages
    text = path.read_bytes().decode("utf-8-sig")
    # Line ends of rows are CR LF, line breaks inside cells a lone LF: count both as a line of the file.
    reader = csv.reader(
        io.StringIO(text, newline=""), delimiter=";" if path.name.startswith("north") else ","
    )
    names = next(reader)
    rows: Page = {}
    line = reader.line_num + 1
    for cells in reader:
        rows[line] = dict(zip(names, cells, strict=True))
        line = reader.line_num + 1
    return {"": rows}


def moment(value: Any) -> datetime:
    """Any way in which the styles write a moment."""
    if isinstance(value, datetime):
        return value
    for pattern in ("%d.%m.%Y %H:%M", "%d.%m.%Y", "%Y-%m-%dT%H:%M", "%Y-%m-%d", "%m/%d/%Y %I:%M %p"):
        try:
            return datetime.strptime(value, pattern)
        except ValueError:
            continue
    raise ValueError(value)


def number(value: Any) -> float:
    return float(str(value).replace(",", "."))


START = {"north": "On pump", "plain": "start", "south": "Flow on"}


def year(value: Any) -> int:
    return value if isinstance(value, int) else moment(value).year


def end_of(style: str, row: dict[str, Any]) -> datetime:
    if style == "north":
        return moment(f"{row['Off pump, day']} {row['Off pump, clock']}")
    return moment(row["end"] if style == "plain" else row["Flow off"])


def no_moment(value: Any) -> bool:
    with pytest.raises(ValueError):
        moment(value)
    return "13" in value


def pressure_turned(row: dict[str, Any], style: str) -> bool:
    if style == "north":
        high, low = row["BP [mmHg]"].split("/")
    else:
        high, low = (row["systolic"], row["diastolic"]) if style == "plain" else (row["SBP"], row["DBP"])
    return number(low) > number(high)


def slip_is_gross(style: str, column: str, value: float) -> bool:
    """Beyond the hard limits of the written unit: lactate 0.05 to 40 mmol/L, creatinine 5 to 3000 umol/L (or
    0.06 to 33 mg/dL), haemoglobin 15 to 250 g/L (or 1.5 to 25 g/dL)."""
    low, high = {
        "Lactate max 6h [mmol/L]": (0.05, 40.0),
        "lactate": (0.05, 40.0),
        "Creat max [µmol/L]": (5.0, 3000.0),
        "creatinine": (5.0, 3000.0),
        "Hb low [g/L]": (15.0, 250.0),
        "Creat mg/dL": (0.06, 33.0),
        "Hgb g/dL": (1.5, 25.0),
    }[column]
    return not low <= value <= high


Check = Callable[[str, Defect, dict[str, Any]], bool]
CHECKS: dict[str, Check] = {
    "unit_slip": lambda s, d, r: slip_is_gross(s, d.column, number(r[d.column])),
    "impossible_month": lambda s, d, r: no_moment(r[d.column]),
    "skipped_hour": lambda s, d, r: (
        moment(r[d.column]).month == 3 and (moment(r[d.column]).hour, moment(r[d.column]).minute) == (2, 30)
    ),
    "unknown_code": lambda s, d, r: r[d.column] in ("?x", "x9", 9),
    "cpc_out_of_range": lambda s, d, r: number(r[d.column]) == 7,
    "diastolic_above_systolic": lambda s, d, r: pressure_turned(r, s),
    "negative_platelets": lambda s, d, r: number(r[d.column]) < 0,
    "text_in_number": lambda s, d, r: r[d.column] in ("see chart", "high", "pending"),
    "spreadsheet_error": lambda s, d, r: r[d.column] in ("#REF!", "#VALUE!", "#DIV/0!"),
    "birth_after_start": lambda s, d, r: year(r[d.column]) > moment(r[START[s]]).year,
    "age_under_18": lambda s, d, r: 9 <= moment(r[START[s]]).year - year(r[d.column]) <= 12,
    "end_before_start": lambda s, d, r: end_of(s, r) < moment(r[START[s]]),
    "discharge_before_end": lambda s, d, r: moment(r[d.column]) < end_of(s, r),
    "died_yet_alive": lambda s, d, r: r[d.column] in ("y", "yes", 1),
    "death_before_end": lambda s, d, r: moment(r[d.column]) < end_of(s, r),
    "start_missing": lambda s, d, r: r[d.column] in ("", None),
    "end_without_kind": lambda s, d, r: r[d.column] in ("", None) and bool(end_of(s, r)),
    "event_of_unknown_run": lambda s, d, r: str(r[d.column]).startswith("nowhere-"),
}
OVER_ROWS = {"run_overlap", "identical_twin", "contradicting_twin", "event_long_before_start"}


def test_every_kind_is_checked_here() -> None:
    assert set(CHECKS) | OVER_ROWS == set(DEFECT_KINDS)


@pytest.mark.parametrize("style", STYLES)
def test_every_kind_is_planted_that_the_style_can_carry(planted: dict[str, Export], style: str) -> None:
    kinds = Counter(d.kind for d in planted[style].defects)
    assert set(kinds) == set(DEFECT_KINDS) - NOT_IN[style]
    double = {"run_overlap", "contradicting_twin"} | (
        {"diastolic_above_systolic"} if style != "north" else set()
    )
    for kind, count in kinds.items():
        assert count == (4 if kind in double else 2), kind


@pytest.mark.parametrize("style", STYLES)
def test_each_defect_stands_on_its_line(planted: dict[str, Export], style: str) -> None:
    export = planted[style]
    pages = read_pages(export)
    key = {"north": "Support no.", "plain": "run", "south": "Episode"}[style]
    for defect in export.defects:
        assert defect.file == export.paths[0].name
        row = pages[defect.sheet][defect.line]
        assert row[key if defect.sheet in ("", "Episodes") else "Ep."] == defect.run
        assert defect.column == "" or defect.column in row
        if defect.kind in CHECKS:
            assert CHECKS[defect.kind](style, defect, row), defect


@pytest.mark.parametrize("style", STYLES)
def test_twins_and_overlaps_span_rows(cohort: Cohort, planted: dict[str, Export], style: str) -> None:
    page = read_pages(planted[style])["Episodes" if style == "south" else ""]
    by_kind: dict[str, list[Defect]] = {}
    for defect in planted[style].defects:
        by_kind.setdefault(defect.kind, []).append(defect)
    for twin in by_kind["identical_twin"]:
        same = [n for n, row in page.items() if row == page[twin.line]]
        assert len(same) == 2 and max(same) == twin.line
    contradicting = by_kind["contradicting_twin"]
    for run in {d.run for d in contradicting}:
        one, two = (page[d.line] for d in contradicting if d.run == run)
        assert sum(one[h] != two[h] for h in one) == 1
    overlap = sorted(d.line for d in by_kind["run_overlap"])
    person = {"north": "Record", "plain": "person", "south": "Chart"}[style]
    assert len({page[n][person] for n in overlap}) == 2
    for name in {page[n][person] for n in overlap}:
        first, second = (page[n] for n in overlap if page[n][person] == name)
        assert moment(second[START[style]]) < end_of(style, first)


@pytest.mark.parametrize("style", ["north", "south"])
def test_events_long_before_the_start(cohort: Cohort, planted: dict[str, Export], style: str) -> None:
    pages = read_pages(planted[style])
    starts = (
        {row["Episode"]: row["Flow on"] for row in pages["Episodes"].values()} if style == "south" else {}
    )
    for defect in (d for d in planted[style].defects if d.kind == "event_long_before_start"):
        row = pages[defect.sheet][defect.line]
        start = moment(starts[defect.run] if style == "south" else row["On pump"])
        assert (start - moment(row[defect.column])).days == pytest.approx(730, abs=1)
        assert defect.scope == ("row" if style == "south" else "cell")


@pytest.mark.parametrize("style", STYLES)
def test_nothing_else_differs_from_the_clean_export(
    cohort: Cohort, planted: dict[str, Export], style: str, tmp_path: Path
) -> None:
    clean = read_pages(write_export(cohort, style, tmp_path, 7))
    spoilt = read_pages(planted[style])
    for sheet, page in spoilt.items():
        marked = {d.line for d in planted[style].defects if d.sheet == sheet}
        rest = [row for line, row in page.items() if line not in marked]
        known = Counter(tuple(map(str, row.values())) for row in clean[sheet].values())
        twins = Counter(tuple(map(str, row.values())) for row in rest) - known
        assert not twins, f"{style} {sheet}: rows changed that the truth does not name"
    assert not set(spoilt) ^ set(clean)


@pytest.mark.parametrize("style", STYLES)
def test_one_defect_a_run(planted: dict[str, Export], style: str) -> None:
    kinds: dict[str, set[str]] = {}
    for defect in planted[style].defects:
        if not defect.run.startswith("nowhere"):
            kinds.setdefault(defect.run, set()).add(defect.kind)
    assert all(len(k) == 1 for k in kinds.values())


def test_planting_leaves_the_tables_alone(cohort: Cohort) -> None:
    tables = tables_of(cohort, "plain")
    before = [list(row.cells) for row in tables.sheets[0].rows]
    spoilt, truth = plant(tables, 3)
    assert [row.cells for row in tables.sheets[0].rows] == before
    assert [row.cells for row in spoilt.sheets[0].rows] != before
    assert truth == plant(tables, 3)[1] != plant(tables, 4)[1]


def test_no_kinds_no_defects_and_unknown_kinds_are_refused(cohort: Cohort) -> None:
    tables = tables_of(cohort, "plain")
    assert plant(tables, 3, ())[1] == []
    with pytest.raises(ValueError, match="rust"):
        plant(tables, 3, ("rust",))


def test_scopes_and_lines_are_told(planted: dict[str, Export]) -> None:
    defects = planted["north"].defects
    assert {d.scope for d in defects} == {"cell", "row", "run"}
    assert list(defects) == sorted(defects)
