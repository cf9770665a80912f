"""The draft of a mapping: what it proposes, what it leaves open, and that no value of a cell gets into it."""

from __future__ import annotations

import csv
import io
import random
import re
import tomllib

import openpyxl
import pytest

from outcomes.errors import UsageError
from outcomes.intake.draft import draft_mapping
from outcomes.intake.mapping_file import read_mapping

HEADERS = [
    "Run no", "Record no", "Name", "DOB", "Sex", "Weight kg", "Flow on", "Flow off", "How support ended", "Lactate", "BP",
    "stroke - first onset", "Remarks", "Ward",
]  # fmt: skip
SECRETS = ("Eichelhart", "Zaunkoenig", "wrote to", "7654321", "1951", "kept by the aunt", "Sondercode")


def _rows(n: int = 60) -> list[list[str]]:
    source = random.Random(4)
    rows = []
    for i in range(n):
        day = 1 + i % 28
        rows.append([
            f"R{i:03d}", str(7654000 + 321 + i), "Eichelhart Zaunkoenig", f"03/{day:02d}/1951", "MF"[i % 2], str(60 + i % 30),
            f"04/{day:02d}/2023 08:15 AM", f"05/{day:02d}/2023 09:30 PM", ["weaned", "died on support"][i % 2] if i else "Sondercode",
            f"{source.uniform(20, 90):.1f}", f"{90 + i % 9}/{50 + i % 7}", f"04/{day:02d}/2023 11:00 AM" if i % 9 == 0 else "",
            f"wrote to the aunt {i}", f"kept by the aunt {i}",
        ])  # fmt: skip
    return rows


def _csv(rows: list[list[str]], headers: list[str] = HEADERS) -> bytes:
    buffer = io.StringIO()
    csv.writer(buffer, lineterminator="\n").writerows([headers, *rows])
    return buffer.getvalue().encode("utf-8")


def _columns(text: str) -> dict[str, dict[str, object]]:
    body = tomllib.loads(text)
    return {c["header"]: c for f in body["file"] for s in f["sheet"] for c in s.get("column", [])}


def test_fields_patterns_and_codes_are_proposed_with_their_evidence() -> None:
    text, _ = draft_mapping([_csv(_rows())], "made")
    made = _columns(text)
    assert made["DOB"]["field"] == "person.birth_date"
    assert made["DOB"]["pattern"] == "MM/DD/YYYY"
    assert made["Flow on"]["pattern"] == "MM/DD/YYYY hh:mm AM"
    assert made["Sex"]["codes"] == {"F": "female", "M": "male"}
    assert made["How support ended"]["codes"] == {"weaned": "recovery", "died on support": "death"}
    assert made["stroke - first onset"]["field"] == "complication.stroke"
    assert made["BP"]["split"] == "/"
    assert re.search(r"values have a second part above 12", text)


def test_a_unit_that_the_header_does_not_say_is_guessed_with_its_evidence_and_a_contradicted_one_is_left_open() -> None:
    made = _columns(draft_mapping([_csv(_rows())], "made")[0])
    assert made["Lactate"]["unit"] == "mg/dL"
    headers = ["Lactate mmol/L" if h == "Lactate" else h for h in HEADERS]
    text, _ = draft_mapping([_csv(_rows(), headers)], "made")
    assert _columns(text)["Lactate mmol/L"]["unit"] == "?"
    assert "the header says mmol/L" in text


def test_day_or_month_first_is_left_open_when_no_value_proves_it() -> None:
    rows = [[*r[:3], "03/04/1951", *r[4:]] for r in _rows()]
    assert _columns(draft_mapping([_csv(rows)], "made")[0])["DOB"]["pattern"] == "?"


def test_no_value_of_a_cell_is_in_the_draft() -> None:
    text, _ = draft_mapping([_csv(_rows())], "made")
    for secret in SECRETS:
        assert secret not in text
    assert "1 x Aaaaaaaaaa" in text


def test_private_columns_stay_out_and_keys_are_recognised() -> None:
    sheet = tomllib.loads(draft_mapping([_csv(_rows())], "made")[0])["file"][0]["sheet"][0]
    assert sheet["leave_out"] == ["Name", "Remarks"]
    assert sheet["run"] == ["Run no"]
    assert sheet["person"] == ["Record no"]


def test_a_draft_is_refused_until_every_mark_is_settled_and_accepted_then() -> None:
    text, marks = draft_mapping([_csv(_rows())], "made")
    assert marks == text.count('"?"') > 15
    with pytest.raises(UsageError) as refused:
        read_mapping(text)
    assert refused.value.code == "MAPPING.UNSETTLED"
    mapping = read_mapping(_settled(text))
    assert mapping.source.key == "made"
    assert "complication.stroke" in mapping.carried_fields


def _settled(text: str) -> str:
    answers = {
        "identifiers": '"made"', "period": "[2023-01-01, 2023-12-31]", "extract_date": "2024-03-31", "extent": '"whole"',
        "time_zone": '"Europe/Vienna"', "plan_written": '"unknown"', "vital_status_checked": "2024-03-31",
        "vital_status_date": '"day of death"', "no_death_means": '"unknown"', "attempts": '"not in this source"',
        "calendar": '"keep"', "events_kept": '"first"', "looked_until_hours_after_end": "0", "definition": '"our own"',
        "valid_from_year": "2023", "window": '"pre_undated"', "means": '"not recorded"', "field": '"complication_event.grade"',
    }  # fmt: skip
    for key, answer in answers.items():
        text = re.sub(rf'^{key} = "\?"$', f"{key} = {answer}", text, flags=re.MULTILINE)
    text = text.replace('fields = ["?", "?"]', 'fields = ["measurement.sbp", "measurement.dbp"]\nunit = "mm[Hg]"\nreading = "bp"')
    return re.sub(r'^unit = "\?"$', 'unit = "mg/dL"', text, flags=re.MULTILINE)


@pytest.mark.parametrize("header", ['He said "no"', "back\\slash", "Größe = ?", "[file]", "#", "{{x}}", "ключ"])
def test_any_header_gives_valid_toml(header: str) -> None:
    headers = [*HEADERS[:-1], header]
    text, _ = draft_mapping([_csv(_rows(), headers)], "made")
    assert header in _columns(text) or header in tomllib.loads(text)["file"][0]["sheet"][0]["leave_out"]


def test_the_same_file_gives_the_same_draft() -> None:
    assert draft_mapping([_csv(_rows())], "made") == draft_mapping([_csv(_rows())], "made")


def test_a_code_sheet_becomes_two_lists_and_its_columns_use_them(tmp_path) -> None:
    book = openpyxl.Workbook()
    runs = book.active
    runs.append(["Run no", "Record no", "How ended"])
    for i in range(40):
        runs.append([f"R{i}", f"P{i}", 1 + i % 3])
    codes = book.create_sheet("codes")
    for row in (["code", "meaning"], [1, "weaned"], [2, "died on support"], [3, "LVAD"], [None, None], [1, "myocarditis"], [2, "arrest"]):
        codes.append(row)
    book.save(tmp_path / "b.xlsx")
    text, _ = draft_mapping([(tmp_path / "b.xlsx").read_bytes()], "made")
    sheets = tomllib.loads(text)["file"][0]["sheet"]
    assert [s["rows"] for s in sheets if s["row_is"] == "code list"] == [[2, 4], [6, 7]]
    ended = _columns(text)["How ended"]
    assert ended["codes_from"] == "sheet2_list1"
    assert ended["codes"] == {"weaned": "recovery", "died on support": "death", "LVAD": "durable_lvad"}
