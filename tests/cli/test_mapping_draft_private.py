"""What a draft may show of the cells: headers, frequent short codes, rounded quartiles; planted values never."""

from __future__ import annotations

import random
import tomllib

import pytest
from draft_made import RUNS, as_csv, as_workbook, columns, draft, rows, said, sheets, with_columns

from outcomes.findings import shape_of

NAMES = ("Eichelhart", "Zaunkoenig")


def _many(*frequent: str, rare: str = "", times: int = 1, n: int = 60) -> list[str]:
    cells = [frequent[i % len(frequent)] for i in range(n - times if rare else n)]
    return [*cells, *[rare] * times] if rare else cells


def test_names_numbers_births_and_comments_are_not_in_the_draft() -> None:
    text = draft(with_columns({"Insurance": [str(7654000 + i) for i in range(60)], "Case letter": [f"sent to Dr. Moorwall {i}" for i in range(60)]}))
    for secret in (*NAMES, "R001", "P101", "1951", "wrote to", "aunt", "76540", "Moorwall", "2023 "):
        assert secret not in text
    assert {"Insurance", "Name", "Remarks", "Case letter"} <= set(sheets(text)[0]["leave_out"])


@pytest.mark.parametrize("rare", ["Sondercode", "weaned at home", "x-77"])
def test_a_rare_code_appears_as_count_and_shape(rare: str) -> None:
    text = draft(with_columns({"How support ended": _many("weaned", "died on support", rare=rare, times=4)}))
    assert rare not in text
    assert f"4 x {shape_of(rare)}" in said(text)
    assert columns(text)["How support ended"]["codes"] == {"died on support": "death", "weaned": "recovery"}
    seen_five_times = draft(with_columns({"How support ended": _many("weaned", "died on support", rare=rare, times=5)}))
    assert columns(seen_five_times)["How support ended"]["codes"][rare] == "?"


@pytest.mark.parametrize(
    "caught",
    ["bed 12345", "a@b.org", "12.03.2021", "2021-03-12", "Dr Moorwall", "seen by Prof. Ahorn", "Frau Zaun", "herr Zaun", "a code of 25 characters.."],
)
def test_one_cell_that_may_name_a_person_hides_all_codes_of_its_column(caught: str) -> None:
    text = draft(with_columns({"How support ended": _many("weaned", "died on support", rare=caught, times=8)}))
    assert columns(text)["How support ended"]["codes"] == "?"
    assert caught not in text and "weaned" not in text and "died on support" not in text


def test_codes_are_shown_by_how_many_there_are_and_how_often_they_differ() -> None:
    def shown(n_codes: int, n: int) -> bool:
        return "way00" in draft(with_columns({"How support ended": _many(*(f"way{i:02d}" for i in range(n_codes)), n=n)}))

    assert shown(12, 60) and shown(13, 66)
    assert not shown(13, 65), "13 of 65 are 20 %"
    assert shown(30, 160) and not shown(31, 320)


def test_quartiles_are_rounded_and_need_ten_values() -> None:
    source = random.Random(7)
    values = [f"{source.uniform(21.11, 88.88):.2f}" for _ in range(60)]
    text = draft(with_columns({"Lactate": values}))
    assert not any(value in text for value in values)
    few = draft(with_columns({"Lactate": [*values[:9], *[""] * 51]}))
    assert "too few values" in said(few) and columns(few)["Lactate"]["unit"] == "?"
    assert "median about" in said(draft(with_columns({"Lactate": [*values[:10], *[""] * 50]})))


def test_a_list_of_names_beside_short_codes_shows_no_name() -> None:
    runs = [["Run no", "Record no", "How ended", "Reason"], *([f"R{i}", f"P{i}", 1 + i % 2, "AB"] for i in range(40))]
    staff = [["code", "meaning"], ["AB", "Eichelhart Anna"], ["CD", "Zaunkoenig Bert"]]
    text = draft(as_workbook(runs, staff))
    assert [s["row_is"] for s in sheets(text)] == ["run", "code list"]
    assert not any(name in text for name in (*NAMES, "Anna", "Bert"))


def test_runs_beside_names_are_no_code_list() -> None:
    runs = [["Run no", "Record no", "Sex"], *([f"R{i}", f"P{i}", "MF"[i % 2]] for i in range(40))]
    names = [["Run no", "Kept under"], *([f"R{i}", f"Eichelhart{chr(97 + i % 26)}"] for i in range(40))]
    text = draft(as_workbook(runs, names))
    assert [s["row_is"] for s in sheets(text)] == ["run", "run"]
    assert "Eichelhart" not in text


def test_meanings_of_a_list_are_shown_if_known_or_frequent() -> None:
    ended = [["Run no", "Record no", "How ended"], *([f"R{i}", f"P{i}", 4 if i == 5 else 1 + i % 3] for i in range(40))]
    lists = [["code", "meaning"], [1, "weaned"], [2, "died on support"], [3, "frequent way"], [4, "secret way"]]
    text = draft(as_workbook(ended, lists))
    assert columns(text)["How ended"]["codes"] == {"died on support": "death", "frequent way": "?", "weaned": "recovery"}
    assert "secret way" not in text and "1 meanings of the list are not shown" in said(text)


def test_a_list_with_a_title_before_a_name_is_not_shown_at_all() -> None:
    ended = [["Run no", "Record no", "How ended"], *([f"R{i}", f"P{i}", 1 + i % 2] for i in range(40))]
    lists = [["code", "meaning"], [1, "weaned"], [2, "died on support"], [3, "ask Dr Moorwall"]]
    text = draft(as_workbook(ended, lists))
    assert "Moorwall" not in text and "weaned" not in text


def test_the_values_of_the_made_file_are_nowhere_but_as_codes() -> None:
    text = draft(with_columns({}))
    allowed = {"M", "F", "weaned", "died on support"}
    cells = {cell for row in rows() for cell in row if len(cell) > 3} - allowed
    assert not [cell for cell in cells if cell in text]


def test_hidden_codes_are_described_by_what_they_are_likely_to_mean() -> None:
    kinds = ["bleeding at the cannulation site", "stroke", "an event that nobody knows"]
    events = as_csv(["Run no", "When", "Event"], [[f"R{i % 20:03d}", "04/15/2023", kinds[i % 3]] for i in range(60)])
    text = draft(as_csv(RUNS, rows()), events)
    assert columns(text)["Event"]["codes"] == "?"
    assert "some are longer than 24 characters" in said(text)
    assert "likely to mean: bleeding_cannulation_site, stroke " in said(text)
    assert not any(f'"{kind}"' in text for kind in kinds if kind != "stroke") and "bleeding at the" not in text
    assert tomllib.loads(text)["source"]["complication"][0]["kinds"] == ["bleeding_cannulation_site", "stroke"]


def test_known_words_for_missing_are_shown_however_rare() -> None:
    made = columns(draft(with_columns({"Sex": _many("M", "F", rare="unk", times=2)})))["Sex"]
    assert made["codes"] == {"F": "female", "M": "male", "unk": "not recorded"}


def test_codes_of_a_column_without_a_field_are_shown_only_if_they_say_nothing() -> None:
    text = draft(with_columns({"Seen by": ["Moorwall", "Ahorn"] * 30, "Flagged": ["Yes", "No"] * 30}))
    assert columns(text)["Seen by"] == {"header": "Seen by", "field": "?"}
    assert "Moorwall" not in text and "it holds 2 different codes" in said(text)
    assert 'codes = { "No" = ..., "Yes" = ... }' in said(text)
