"""Written exports: same bytes for a seed, times that lead back, mappings that name every column."""

from __future__ import annotations

import csv
import io
import time
import tomllib
from collections.abc import Iterator
from datetime import datetime
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import openpyxl
import pytest

from synthetic_cohort import DEFECT_KINDS, STYLES, Cohort, Export, generate, tables_of, write_export
from synthetic_cohort.write_north import ONSETS
from synthetic_cohort.xlsx_file import workbook_bytes

ZONE = ZoneInfo("Europe/Vienna")


@pytest.fixture(scope="module")
def cohort() -> Cohort:
    return generate(200, seed=31)


@pytest.fixture(scope="module")
def exports(cohort: Cohort, tmp_path_factory: pytest.TempPathFactory) -> dict[str, Export]:
    folder = tmp_path_factory.mktemp("exports")
    return {style: write_export(cohort, style, folder, seed=1) for style in STYLES}


def csv_rows(export: Export, separator: str) -> list[dict[str, str]]:
    text = export.paths[0].read_bytes().decode("utf-8-sig")
    return list(csv.DictReader(io.StringIO(text, newline=""), delimiter=separator))


def hours_between(start: datetime, end: datetime) -> float:
    """Elapsed hours between two wall-clock times of the zone."""
    return (end.replace(tzinfo=ZONE).timestamp() - start.replace(tzinfo=ZONE).timestamp()) / 3600.0


@pytest.mark.parametrize("style", STYLES)
def test_same_seed_same_bytes(cohort: Cohort, style: str, tmp_path: Path) -> None:
    first, second = tmp_path / "a", tmp_path / "b"
    first.mkdir()
    second.mkdir()
    one = write_export(cohort, style, first, 5, DEFECT_KINDS)
    two = write_export(generate(200, seed=31), style, second, 5, DEFECT_KINDS)
    assert one.paths[0].read_bytes() == two.paths[0].read_bytes()
    assert one.defects == two.defects
    assert one.mapping.read_bytes() == two.mapping.read_bytes()


def test_workbook_bytes_do_not_know_the_clock(cohort: Cohort, monkeypatch: pytest.MonkeyPatch) -> None:
    sheets = tables_of(cohort, "south").sheets
    now = workbook_bytes(sheets)
    later = time.localtime(time.time() + 86_400 * 400)
    monkeypatch.setattr(time, "localtime", lambda *_: later)
    assert workbook_bytes(sheets) == now


def test_north_is_messy_as_promised(exports: dict[str, Export]) -> None:
    data = exports["north"].paths[0].read_bytes()
    assert data.startswith(b"\xef\xbb\xbfSupport no.;")
    text = data.decode("utf-8-sig")
    assert "µmol/L" in text.split("\r\n")[0]
    assert ";unk;" in text and ";n/a;" in text
    rows = csv_rows(exports["north"], ";")
    assert any("\n" in r["Remarks"] for r in rows)
    assert any(";" in r["Remarks"] and '"' not in r["Remarks"] for r in rows)
    assert any(r["pH low"].startswith("7,") for r in rows)
    assert any("/" in r["BP [mmHg]"] for r in rows)


def test_times_of_north_lead_back_to_the_frames(cohort: Cohort, exports: dict[str, Export]) -> None:
    rows = csv_rows(exports["north"], ";")
    assert [r["Support no."] for r in rows] == [f"N{n:05d}" for n in cohort.run["run_no"]]
    first = cohort.complication.groupby(["run_no", "kind"])["onset_h"].min()
    onsets = 0
    for number, row, end_h in zip(cohort.run["run_no"], rows, cohort.ending["end_h"], strict=True):
        start = datetime.strptime(row["On pump"], "%d.%m.%Y %H:%M")
        if end_h == end_h:
            end = datetime.strptime(f"{row['Off pump, day']} {row['Off pump, clock']}", "%d.%m.%Y %H:%M")
            assert hours_between(start, end) == pytest.approx(end_h, abs=1e-6)
        else:
            assert row["Off pump, day"] == row["Off pump, clock"] == row["How it ended"] == ""
        for kind, header in ONSETS.items():
            if row[header]:
                onset = datetime.strptime(row[header], "%d.%m.%Y %H:%M")
                assert hours_between(start, onset) == pytest.approx(first[number, kind], abs=1e-6)
                onsets += 1
    assert onsets == len(first) > 100


def test_plain_holds_the_recorded_values(cohort: Cohort, exports: dict[str, Export]) -> None:
    rows = csv_rows(exports["plain"], ",")
    for row, lactate, sbp in zip(
        rows, cohort.recorded["lactate_mmol_l"], cohort.recorded["sbp_mmhg"], strict=True
    ):
        assert row["lactate"] == ("" if lactate != lactate else f"{lactate:.1f}")
        assert row["systolic"] == ("" if sbp != sbp else f"{sbp:.0f}")


def test_south_has_typed_dates_and_date_texts(cohort: Cohort, exports: dict[str, Export]) -> None:
    book = openpyxl.load_workbook(exports["south"].paths[0])
    assert book.sheetnames == ["Episodes", "Events", "Flow trials", "Circuits", "Never on flow", "Legend"]
    page = book["Episodes"]
    header = [c.value for c in page[3]]
    assert page.cell(2, 1).value is None
    start, end, exit_code = (header.index(h) + 1 for h in ("Flow on", "Flow off", "Exit code"))
    for line, (begun, end_h) in enumerate(
        zip(cohort.run["start_local"], cohort.ending["end_h"], strict=True), start=4
    ):
        assert page.cell(line, start).value == begun.to_pydatetime()
        if end_h == end_h:
            assert hours_between(page.cell(line, start).value, page.cell(line, end).value) == pytest.approx(
                end_h, abs=1e-6
            )
            assert isinstance(page.cell(line, exit_code).value, int)
    events = list(book["Events"].iter_rows(min_row=2, values_only=True))
    assert len(events) == len(cohort.complication)
    assert all(isinstance(e[2], str) and e[2][-2:] in ("AM", "PM") for e in events)


def test_south_converts_its_units(cohort: Cohort) -> None:
    sheet = tables_of(cohort, "south").sheets[0]
    at = (
        sheet.place("BUN mg/dL"),
        sheet.place("Creat mg/dL"),
        sheet.place("Wt lb"),
        sheet.place("Ej. fraction"),
    )
    for row, (_, true) in zip(sheet.rows, cohort.recorded.iterrows(), strict=True):
        bun, creatinine, weight, fraction = (row.cells[i] for i in at)
        # Urea nitrogen: 2 x 14.007 g/mol, so that 1 mmol/L of urea is 2.8014 mg/dL; creatinine 113.12 g/mol.
        assert bun is None or bun == pytest.approx(true["urea_mmol_l"] * 2.8014, abs=0.51)
        assert creatinine is None or creatinine == pytest.approx(
            true["creatinine_umol_l"] * 0.011312, abs=0.0051
        )
        assert weight is None or weight == pytest.approx(true["weight_kg"] / 0.45359237, abs=0.051)
        assert fraction is None or fraction == pytest.approx(true["lvef_percent"] / 100.0)


def sheets_of_mapping(export: Export) -> Iterator[dict[str, Any]]:
    for file in tomllib.loads(export.mapping.read_text(encoding="utf-8"))["file"]:
        yield from file["sheet"]


@pytest.mark.parametrize("style", STYLES)
def test_mapping_names_every_column_once(cohort: Cohort, exports: dict[str, Export], style: str) -> None:
    written = tables_of(cohort, style).sheets
    for sheet in sheets_of_mapping(exports[style]):
        names = [*sheet.get("run", []), *sheet.get("person", []), *sheet.get("leave_out", [])]
        if sheet["row_is"] == "code list":
            names = [sheet["code"], sheet["meaning"]]
        for column in sheet.get("column", []):
            names += [column["header"], *column.get("join", [])]
        page = written[sheet["position"] - 1]
        assert sorted(names) == sorted(page.header), sheet["key"]
        assert sheet["header_line"] == len(page.titles) + 1


@pytest.mark.parametrize("style", STYLES)
def test_mapping_knows_every_code(cohort: Cohort, exports: dict[str, Export], style: str) -> None:
    """Every word in a coded column, by way of the code sheet where there is one, leads somewhere."""
    written = tables_of(generate(1000, seed=8), style).sheets
    sheets = list(sheets_of_mapping(exports[style]))
    lists = {
        s["key"]: {
            str(r.cells[0]): r.cells[1]
            for r in written[s["position"] - 1].rows[s["rows"][0] - 2 : s["rows"][1] - 1]
        }
        for s in sheets
        if s["row_is"] == "code list"
    }
    seen = 0
    for sheet in sheets:
        page = written[sheet["position"] - 1]
        for column in (c for c in sheet.get("column", []) if "codes" in c):
            words = {str(r.cells[page.place(column["header"])]) for r in page.rows} - {"", "None"}
            if "codes_from" in column:
                words = {str(lists[column["codes_from"]][w]) for w in words}
                assert set(lists[column["codes_from"]].values()) == set(column["codes"])
            assert words <= set(column["codes"]), column["header"]
            seen += len(words)
    assert seen > 20


def test_mapping_bears_the_dates_of_the_cohort(tmp_path: Path) -> None:
    export = write_export(generate(20, seed=1, start_year=2018, years=2), "south", tmp_path, 1)
    source = tomllib.loads(export.mapping.read_text(encoding="utf-8"))["source"]
    assert [d.isoformat() for d in source["period"]] == ["2018-01-01", "2019-12-31"]
    assert source["extract_date"].isoformat() == source["vital_status_checked"].isoformat() == "2019-12-31"
    assert {c["valid_from_year"] for c in source["complication"]} == {2018}


def test_unknown_style_is_refused(cohort: Cohort, tmp_path: Path) -> None:
    with pytest.raises(ValueError, match="north, plain, south"):
        write_export(cohort, "west", tmp_path, 1)
