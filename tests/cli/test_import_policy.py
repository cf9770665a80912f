"""Import end to end: strict and set-aside policy, reconciliation, twins, the same file again, conflicts."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

from import_made import BAD_ROW, ROWS, Desk, Mapped


def reconciled(out: str) -> tuple[int, int, int, int]:
    """The line of counts; read = accepted + set aside + duplicates is checked here."""
    found = re.search(r"Rows read (\d+) = accepted (\d+) \+ set aside (\d+) \+ duplicates (\d+)", out)
    assert found, out
    read, accepted, aside, duplicates = (int(n) for n in found.groups())
    assert read == accepted + aside + duplicates
    return read, accepted, aside, duplicates


def test_good_rows_are_stored_and_can_be_read_back(desk: Desk) -> None:
    code, out, err = desk.bring(Mapped(), ROWS)
    assert (code, err) == (0, ""), err
    assert reconciled(out) == (4, 4, 0, 0)
    assert "Runs: 4 new" in out
    rows = desk.marts("select end_kind, end_h, age_years, weight_kg, run_year from mart.run order by run_year, end_h")
    assert rows == [
        ("death", 24.0, 70, 60.0, 2021), ("recovery", 96.0, 60, 80.0, 2021),
        ("transplantation", 84.0, 42, 70.0, 2022), ("durable_lvad", 168.0, 52, 90.0, 2022),
    ]  # fmt: skip
    assert desk.leftovers() == []


def test_strict_refuses_everything_and_stores_nothing(desk: Desk) -> None:
    code, out, err = desk.bring(Mapped(), [*ROWS, BAD_ROW])
    assert code == 3
    assert "IMPORT.REFUSED" in err and "CHECK.END-BEFORE-START" in out
    assert "line 6" in out
    assert desk.state() == {}
    assert desk.leftovers() == []


def test_set_aside_stores_the_good_rows_and_keeps_the_others_countable(desk: Desk) -> None:
    code, out, _ = desk.bring(Mapped(), [*ROWS, BAD_ROW], options=("--set-aside",))
    assert code == 0
    assert reconciled(out) == (5, 4, 1, 0)
    assert desk.ask("select count(*) from record.support_run") == [(4,)]
    assert desk.ask("select source_key, nth_run, run_year from record.set_aside_run") == [("north", 1, 2022)]
    assert desk.ask("select code, effect, line from ledger.finding where effect <> 'note'") == [("CHECK.END-BEFORE-START", "run", 6)]


def test_a_wrong_cell_sets_aside_the_cell_and_says_why_the_value_is_missing(desk: Desk) -> None:
    row = "5,A15,1975-05-01,M,75,2022-07-01 10:00,2022-07-09 10:00,Recovered,yes,2;2,"
    code, out, _ = desk.bring(Mapped(), [*ROWS, row], options=("--set-aside",))
    assert code == 0 and reconciled(out) == (5, 5, 0, 0)
    assert desk.ask("select missing_kind, count(*) from record.missing_value where field = 'measurement.lactate.pre_worst_6h' group by 1 order by 1") == [
        ("not_recorded", 1), ("set_aside", 1),
    ]  # fmt: skip


def test_a_bad_row_without_a_key_does_not_hide_the_others(desk: Desk) -> None:
    """Its start is no date either, so that it is refused as a whole run that has no name."""
    nameless = ",A16,1975-05-01,M,75,soon,2022-07-09 10:00,Recovered,yes,2,"
    code, out, _ = desk.bring(Mapped(), [*ROWS, BAD_ROW, nameless], options=("--set-aside",))
    assert code == 0
    assert "KEY.EMPTY" in out and "CHECK.END-BEFORE-START" in out
    assert reconciled(out) == (6, 4, 2, 0)


def test_identical_twins_are_kept_once(desk: Desk) -> None:
    code, out, _ = desk.bring(Mapped(), [*ROWS, ROWS[0]])
    assert code == 0 and reconciled(out) == (5, 4, 0, 1)
    assert "ROW.TWIN (note)" in out


def test_twins_that_differ_are_both_set_aside(desk: Desk) -> None:
    other = ROWS[0].replace(",80,", ",81,")
    assert desk.bring(Mapped(), [*ROWS, other])[0] == 3
    code, out, _ = desk.bring(Mapped(), [*ROWS, other], options=("--set-aside",))
    assert code == 0 and reconciled(out) == (5, 3, 2, 0)
    assert out.count("ROW.TWINS-DIFFER") == 2


def test_one_run_that_names_two_persons_is_set_aside(desk: Desk) -> None:
    other = ROWS[0].replace(",A11,", ",A99,")
    code, out, _ = desk.bring(Mapped(), [*ROWS, other], options=("--set-aside",))
    assert code == 0 and reconciled(out) == (5, 3, 2, 0)
    assert "KEY.PERSONS-DIFFER" in out


def test_the_same_file_again_changes_no_byte(stocked: Desk) -> None:
    before = stocked.state()
    code, out, _ = stocked.bring(Mapped(), ROWS)
    assert code == 0 and "Already imported as batch 1" in out
    assert stocked.state() == before
    code, out, _ = stocked.bring(Mapped(), ROWS, options=("--replace",))
    assert code == 0 and stocked.state() == before


def test_the_same_rows_in_another_order_and_with_other_line_ends_change_no_byte(stocked: Desk) -> None:
    before = stocked.state()
    body = "\r\n".join([Mapped().header(), *reversed(ROWS), ""])
    code, out, _ = stocked.bring(Mapped(), body)
    assert code == 0 and "Nothing new" in out and "0 new, 4 unchanged, 0 replaced" in out
    assert stocked.state() == before


def test_the_order_of_rows_leaves_no_trace_in_the_content(tmp_path: Path, capsys: Any) -> None:
    """Two runs of one person that disagree on her height and sex: the first run decides, in whatever line it stands."""
    mapped = Mapped()
    mapped.columns["Height"] = 'field = "person.height_cm", unit = "cm", blank = "not recorded"'
    first = "1,A11,1960-05-01,M,80,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,4.5,,170"
    second = "2,A11,1960-05-01,F,80,2022-03-01 10:00,2022-03-05 10:00,Recovered,yes,4.5,,180"
    found = []
    for number, rows in enumerate(([first, second], [second, first])):
        folder = tmp_path / str(number)
        folder.mkdir()
        desk = Desk(folder, capsys)
        assert desk.bring(mapped, rows)[0] == 0
        found.append(desk.ask("select sex_recorded, height_cm from record.person"))
    assert found == [[("male", 170.0)], [("male", 170.0)]]


def test_a_changed_row_conflicts_and_with_replace_the_earlier_hash_is_kept(stocked: Desk) -> None:
    before = stocked.state()
    changed = [ROWS[0].replace(",4.5,", ",4.6,"), *ROWS[1:]]
    code, out, err = stocked.bring(Mapped(), changed)
    assert code == 3 and "ROW.CONFLICT" in err and "line 2" in out
    assert stocked.state() == before
    code, out, _ = stocked.bring(Mapped(), changed, options=("--replace",))
    assert code == 0 and "0 new, 3 unchanged, 1 replaced" in out
    assert stocked.ask("select value from record.measurement order by 1") == [(3.2,), (4.6,), (9.1,)]
    replaced = stocked.ask("select batch_no, table_name, length(earlier_hash) from ledger.replaced")
    assert replaced == [(2, "measurement", 32)]


def test_a_changed_property_of_the_person_conflicts_too(stocked: Desk) -> None:
    changed = [ROWS[0].replace(",M,", ",F,"), *ROWS[1:]]
    code, _, err = stocked.bring(Mapped(), changed)
    assert code == 3 and "ROW.CONFLICT" in err
    code, _, _ = stocked.bring(Mapped(), changed, options=("--replace",))
    assert code == 0
    assert stocked.ask("select sex_recorded, count(*) from record.person group by 1 order by 1") == [("female", 3), ("male", 1)]


def test_a_value_that_arrives_later_takes_its_reason_away(stocked: Desk) -> None:
    assert stocked.ask("select count(*) from record.missing_value where field like 'measurement.lactate%'") == [(1,)]
    filled = [*ROWS[:3], ROWS[3].replace("yes,,", "yes,5.5,")]
    code, _, _ = stocked.bring(Mapped(), filled, options=("--replace",))
    assert code == 0
    assert stocked.ask("select count(*) from record.missing_value where field like 'measurement.lactate%'") == [(0,)]
    assert stocked.ask("select count(*) from record.measurement") == [(4,)]


def test_check_stores_nothing_and_says_what_would_be_refused(desk: Desk) -> None:
    code, out, _ = desk.bring(Mapped(), [*ROWS, BAD_ROW], verb="check")
    assert code == 3 and "4 good, 1 would be set aside" in out
    assert desk.state() == {} and desk.leftovers() == []
    assert desk.bring(Mapped(), ROWS, verb="check", options=("--rules",))[0] == 0


def test_findings_as_files_and_the_result_as_json(desk: Desk) -> None:
    listed = desk.folder / "findings.json"
    code, out, _ = desk.bring(Mapped(), [*ROWS, BAD_ROW], options=("--set-aside", "--json", "--findings", str(listed)))
    assert code == 0
    body = json.loads(out)
    assert body["rows"] == {"rows_read": 5, "rows_accepted": 4, "rows_set_aside": 1, "rows_duplicate": 0}
    assert [f["code"] for f in json.loads(listed.read_text())] == [f["code"] for f in body["findings"]]
