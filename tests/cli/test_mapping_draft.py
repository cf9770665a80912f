"""The draft of a mapping as a whole: valid, refused until settled, accepted then, the same for the same file."""

from __future__ import annotations

import os
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest
from draft_made import RUNS, as_csv, as_workbook, columns, draft, rows, said, settled, sheets, with_columns

from outcomes.cli import main
from outcomes.errors import DataRefused, UsageError
from outcomes.intake.draft import draft_mapping
from outcomes.intake.mapping_file import read_mapping, unsettled

RUN_FILE = as_csv(RUNS, rows())


def test_a_draft_is_refused_until_every_mark_is_settled_and_accepted_then() -> None:
    text, marks = draft_mapping([RUN_FILE], "made")
    assert marks == text.count('"?"') == len(unsettled(tomllib.loads(text))) > 15
    assert f"{marks} questions are open." in text
    with pytest.raises(UsageError) as refused:
        read_mapping(text)
    assert refused.value.code == "MAPPING.UNSETTLED"
    mapping = read_mapping(settled(text))
    assert mapping.source.key == "made"
    assert {"complication.stroke", "measurement.sbp", "support_end.kind"} <= mapping.carried_fields


def test_nothing_that_no_value_shows_is_answered() -> None:
    source = tomllib.loads(draft(RUN_FILE))["source"]
    complication = source.pop("complication")[0]
    assert source.pop("key") == "made"
    assert len(source) == 11 and set(source.values()) == {"?"}
    assert complication.pop("kinds") == ["stroke"]
    assert set(complication.values()) == {"?"} and len(complication) == 4


def test_every_question_has_a_comment_above_it() -> None:
    lines = draft(RUN_FILE).splitlines()
    asked = [i for i, line in enumerate(lines) if line.endswith('= "?"')]
    assert asked and all(lines[i - 1].startswith("# ") for i in asked)


def test_every_column_of_the_file_has_its_place() -> None:
    data = with_columns({"Ward": ["north", "south"] * 30, "Free": [f"he went home and came back {i}" for i in range(60)], "Empty": [""] * 60})
    sheet = read_mapping(settled(draft(data), {"field": '"complication_event.grade"'})).files[0].sheets[0]
    assert sheet.listed == {*RUNS, "Ward", "Free", "Empty"}


def test_blank_cells_are_asked_once_a_group_and_full_columns_together() -> None:
    many = {f"{kind} - first onset": ["04/15/2023 11:00 AM", ""] * 30 for kind in ("haemolysis", "limb ischaemia")}
    data = with_columns({**many, "Creatinine mg/dL": ["1.5", "2.5", ""] * 20, "Platelets K/uL": ["110", "", "150"] * 20})
    groups = [set(g["columns"]) for g in sheets(draft(data))[0]["blank"]]
    assert {"haemolysis - first onset", "limb ischaemia - first onset", "stroke - first onset"} in groups
    assert {"Creatinine mg/dL", "Platelets K/uL"} in groups
    assert groups[-1] == {"DOB", "Sex", "Weight kg", "Flow on", "Flow off", "How support ended", "Lactate", "BP"}
    assert sum(map(len, groups)) == len(set().union(*groups))


def test_an_end_that_may_still_be_open_is_a_group_of_its_own() -> None:
    data = with_columns({"Flow off": ["05/13/2023 09:30 PM", ""] * 30, "CPC": ["1", "2", ""] * 20})
    groups = {tuple(g["columns"]) for g in sheets(draft(data))[0]["blank"]}
    assert ("Flow off",) in groups and ("CPC",) in groups
    assert "still on support" in said(draft(data))


HOSTILE = ['He said "no"', "back\\slash", "Größe = ?", "?", "[file]", "#", "{{x}}", "ключ", "a\nb", "t\tab", "'''", '"""', "codes = 1", "\u00a0b", "x\u00adx"]  # fmt: skip


@pytest.mark.parametrize("header", HOSTILE)
@pytest.mark.parametrize("cells", [["7", "8"], ["", ""], ["\"", "#"]])
def test_any_header_gives_valid_toml_and_can_be_settled(header: str, cells: list[str]) -> None:
    text = draft(with_columns({header: cells * 30}))
    tomllib.loads(text)
    answers = {"field": '"neuro_outcome.cpc"', "unit": '"cm"', "BP.unit": '"mm[Hg]"'}
    assert header.strip() in read_mapping(settled(text, answers)).files[0].sheets[0].listed


def test_the_same_file_gives_the_same_draft_whatever_the_hash_seed() -> None:
    code = (
        "import sys; sys.path.insert(0, 'tests/cli'); from draft_made import RUNS, as_csv, draft, rows;"
        "print(draft(as_csv(RUNS, rows()), as_csv(RUNS, rows(30))))"
    )
    root = Path(__file__).parents[2]
    printed = [
        subprocess.run(
            [sys.executable, "-c", code], cwd=root, capture_output=True, check=True,
            env={**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": str(root)},
        ).stdout
        for seed in ("1", "2")
    ]  # fmt: skip
    assert printed[0] == printed[1] and len(printed[0]) > 3000


def test_a_table_that_cannot_be_read_is_named_and_left_out() -> None:
    data = as_workbook([RUNS, *rows()], [["How to use this book"], [], ["a", "a", "b"], ["c", "c", "d"]], [["run", "why"]])
    text = draft(data)
    assert [s["position"] for s in sheets(text)] == [1]
    assert "Sheet 2 is left out: it cannot be read as a table (READ.HEADER-TWIN)" in said(text)
    assert "Sheet 3 is left out: it holds no rows" in said(text)


def test_a_key_that_cannot_be_one_and_a_file_without_headers_are_refused() -> None:
    with pytest.raises(UsageError) as refused:
        draft_mapping([RUN_FILE], "North ward")
    assert refused.value.code == "MAPPING.KEY"
    body = [[f"name{i % 7}", ["one", "two"][i % 2], ["left", "right"][i % 2]] for i in range(30) if i % 7 or i == 0]
    with pytest.raises(DataRefused) as stopped:
        draft(as_csv(body[0], body[1:]))
    assert stopped.value.code == "DRAFT.HEADER"
    assert "name0" not in str(stopped.value)


def test_a_question_mark_may_be_a_word_for_a_missing_value() -> None:
    text = draft(with_columns({"Creatinine mg/dL": ["1.5", "?", "2.5"] * 20}))
    assert tomllib.loads(text)["file"][0]["missing"] == ["?"]
    read_mapping(settled(text))


def test_the_command_writes_a_draft_once_and_says_how_many_questions(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    source, target = tmp_path / "runs.csv", tmp_path / "made.toml"
    source.write_bytes(RUN_FILE)
    asked = ["mapping", "draft", str(source), "--key", "made", "--out", str(target)]
    assert main(asked) == 0
    text, marks = draft_mapping([RUN_FILE], "made")
    assert target.read_text(encoding="utf-8") == text
    assert target.stat().st_mode & 0o777 == 0o600
    assert f"{marks} questions" in capsys.readouterr().out
    assert main(asked) == 2
    assert main(["mapping", "check", str(target)]) == 2
    assert "MAPPING.UNSETTLED" in capsys.readouterr().err
    target.write_text(settled(text), encoding="utf-8")
    assert main(["mapping", "check", str(target)]) == 0


def test_the_form_of_the_file_is_written_with_its_evidence() -> None:
    body = [[f"R{i}", "Größe", f"{i},5"] for i in range(30)]
    text = draft(as_csv(["Run no", "Ort", "Gewicht kg"], body, ";").decode().encode("cp1252"))
    file = tomllib.loads(text)["file"][0]
    assert (file["kind"], file["encoding"], file["separator"], file["decimal_mark"]) == ("csv", "cp1252", ";", ",")
    assert "guessed: line 2 is not valid UTF-8" in said(text) and "guessed: 3 cells in 31 of 31 lines" in said(text)
    wide = as_csv(RUNS, rows()).decode().encode("utf-16")
    assert tomllib.loads(draft(wide))["file"][0]["encoding"] == "utf-16"
    assert columns(draft(wide)) == columns(draft(RUN_FILE))
