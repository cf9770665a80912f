"""What cells become: clocks, units, split and joined cells, ages, durations, sheets that share a table."""

from __future__ import annotations

from import_made import ROWS, SOURCE, Desk, Mapped, detail_file


def rows_with(column: str, cells: list[str]) -> list[str]:
    return [f"{row},{cell}" for row, cell in zip(ROWS, cells, strict=False)]


def test_hours_across_both_changes_of_clocks(desk: Desk) -> None:
    rows = [
        "1,A11,1960-05-01,M,80,2021-03-27 12:00,2021-03-28 12:00,Recovered,yes,4.5,",
        "2,A12,1960-05-01,M,80,2021-10-30 12:00,2021-10-31 12:00,LVAD,yes,4.5,",
        "3,A13,1960-05-01,M,80,2021-10-30 12:00,2021-10-31 02:30,Graft,yes,4.5,",
    ]
    code, out, _ = desk.bring(Mapped(), rows)
    assert code == 0 and "CELL.TIME-REPEATED (note)" in out
    assert desk.ask("select end_kind, end_h from record.support_end order by 1") == [
        ("durable_lvad", 25.0), ("recovery", 23.0), ("transplantation", 15.5),
    ]  # fmt: skip
    skipped = ROWS[0].replace("2021-03-05 10:00", "2021-03-28 02:30")
    code, out, _ = desk.bring(Mapped(), [skipped, *ROWS[1:]])
    assert code == 3 and "CELL.TIME-SKIPPED" in out


def test_units_split_cells_and_readings(desk: Desk) -> None:
    mapped = Mapped()
    mapped.columns["Weight"] = mapped.columns["Weight"].replace('"kg"', '"[lb_av]"')
    mapped.columns["Lactate"] = mapped.columns["Lactate"].replace('"mmol/L"', '"mg/dL"')
    mapped.columns["PaO2"] = 'field = "measurement.pao2", unit = "kPa", window = "pre_last", blank = "not recorded"'
    mapped.columns["BP"] = (
        'split = "/", fields = ["measurement.sbp", "measurement.dbp"], unit = "mm[Hg]", window = "pre_last", reading = "bp", '
        'missing = ["n/a"], blank = "not recorded"'
    )
    rows = [
        "1,A11,1960-05-01,M,176,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,45,,10,92/54",
        "2,A12,1960-05-01,M,176,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,45,,10,n/a",
        "3,A13,1960-05-01,M,176,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,45,,10,92",
        "4,A14,1960-05-01,M,176,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,45,,10,92/54/60",
        "5,A15,1960-05-01,M,176,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,45,,10,54/92",
        "6,A16,1960-05-01,M,176,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,45,,10,",
    ]
    code, out, err = desk.bring(mapped, rows, options=("--set-aside",))
    assert code == 0, err
    found = desk.ask("select analyte, round(value, 3), count(*) from record.measurement group by all order by all")
    assert found == [("dbp", 54.0, 1), ("lactate", 4.996, 6), ("pao2", 75.006, 6), ("sbp", 92.0, 1)]
    assert desk.ask("select round(weight_kg, 3) from record.support_run limit 1") == [(79.832,)]
    assert out.count("CELL.PARTS") == 4 and "CHECK.DIASTOLIC-NOT-BELOW-SYSTOLIC" in out


def test_date_and_time_columns_join_and_a_duration_stands_for_an_end(desk: Desk) -> None:
    mapped = Mapped()
    del mapped.columns["End"]
    mapped.columns["Start"] = 'join = ["Start time"], field = "support_run.start", blank = "defect"'
    mapped.columns["Hours"] = 'field = "support_end.duration", unit = "d", blank = "still on support"'
    header = mapped.header().replace("Start,", "Start,Start time,")
    rows = ["1,A11,1960-05-01,M,80,2021-03-01,10:00,Recovered,yes,4.5,,2.5", "2,A12,1960-05-01,M,80,2024-03-01,10:00,,,4.5,,"]
    code, out, err = desk.bring(mapped, "\n".join([header, *rows, ""]))
    assert code == 0, out + err
    assert desk.ask("select end_kind, end_h, open_days from record.support_end order by 1") == [("open", None, 30), ("recovery", 60.0, None)]


def test_a_unit_that_the_values_contradict_stops_the_import_with_its_evidence(desk: Desk) -> None:
    rows = [f"{i},A{i},1960-05-01,M,80,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,{35 + i % 9}," for i in range(1, 26)]
    code, _, err = desk.bring(Mapped(), rows, options=("--set-aside",))
    assert code == 3 and "UNIT.CONTRADICTED" in err and "mg/dL" in err and "25 values" in err
    assert "Lactate" in err and desk.state() == {}


def test_birth_date_birth_year_age_and_the_pool_of_ninety(desk: Desk) -> None:
    mapped = Mapped()
    mapped.columns["Born"] = 'field = "person.birth_year", blank = "not recorded"'
    rows = [row.replace(row.split(",")[2], row.split(",")[2][:4]) for row in ROWS]
    rows[1] = rows[1].replace("1950", "1929")
    assert desk.bring(mapped, rows)[0] == 0
    found = desk.ask("select age_years, age_is_uncertain, age_topcoded from record.support_run order by all")
    assert found == [(42, True, False), (52, True, False), (61, True, False), (90, True, True)]


def test_a_child_is_refused_however_the_age_is_given(desk: Desk) -> None:
    code, out, _ = desk.bring(Mapped(), [ROWS[0].replace("1960", "2005"), *ROWS[1:]])
    assert code == 3 and "CHECK.UNDER-18 (run)" in out
    mapped = Mapped()
    mapped.columns["Born"] = 'field = "support_run.age_years", blank = "not recorded"'
    rows = [row.replace(row.split(",")[2], str(age)) for row, age in zip(ROWS, (60, 17, 96, 18), strict=True)]
    code, out, _ = desk.bring(mapped, rows, options=("--set-aside",))
    assert code == 0 and "CHECK.UNDER-18 (run)" in out
    assert desk.ask("select age_years, age_topcoded from record.support_run order by 1") == [(18, False), (60, False), (90, True)]


def test_two_run_sheets_may_share_a_record_table(desk: Desk) -> None:
    mapped = Mapped()
    mapped.columns["Diabetic"] = 'field = "history.diabetes", codes = { y = "true" }, blank = "not recorded"'
    second = {"Stroke before": 'field = "history.prior_stroke", codes = { y = "true", n = "false" }, blank = "not recorded"'}
    mapped.more = detail_file("before", second, row_is="run")
    code, out, err = desk.bring(mapped, rows_with("Diabetic", ["y", "", "y", ""]), "Run,Stroke before\n1,y\n2,n\n3,\n")
    assert code == 0, out + err
    found = desk.ask("select diabetes, prior_stroke from record.history order by all")
    assert found == [(True, True), (True, None), (None, False)]


def test_two_events_of_one_run_with_the_same_defect_are_both_taken_care_of(desk: Desk) -> None:
    mapped = Mapped(columns={k: v for k, v in Mapped().columns.items() if k != "Stroke"})
    events = {
        "What": 'field = "complication_event.kind", codes = { s = "stroke" }, blank = "defect"',
        "At": 'field = "complication_event.onset", blank = "defect"',
        "Over": 'field = "complication_event.resolved", blank = "not recorded"',
    }
    mapped.more = detail_file("events", events, row_is="event")
    body = "Run,What,At,Over\n1,s,2021-03-02 10:00,2021-03-01 11:00\n1,s,2021-03-04 10:00,2021-03-01 12:00\n"
    code, out, err = desk.bring(mapped, [row.rsplit(",", 1)[0] for row in ROWS], body, options=("--set-aside",))
    assert code == 0, out + err
    assert out.count("CHECK.RESOLVED-BEFORE-ONSET") == 2
    assert desk.ask("select onset_h, resolved_h from record.complication_event order by 1") == [(24.0, None), (72.0, None)]


def test_a_sheet_with_nothing_but_the_start_makes_runs(desk: Desk) -> None:
    mapped = Mapped(columns={k: Mapped().columns[k] for k in ("Sex", "Start", "End", "How")})
    code, out, err = desk.bring(mapped, ["1,A11,M,2021-03-01 10:00,2021-03-05 10:00,Recovered"])
    assert code == 0, out + err
    assert desk.ask("select run_year, observable_to_day_365 from record.support_run") == [(2021, True)]


def test_a_source_without_persons_has_one_person_a_run_if_it_says_so(desk: Desk) -> None:
    mapped = Mapped(person="[]")
    rows = [",".join([row.split(",")[0], *row.split(",")[2:]]) for row in ROWS]
    code, _, err = desk.bring(mapped, rows)
    assert code == 2 and "persons" in err
    mapped.person = '[]\npersons = "one run each"'
    code, out, err = desk.bring(mapped, rows)
    assert code == 0, out + err
    assert desk.ask("select count(distinct person_key) from record.support_run") == [(4,)]


def test_an_offset_in_the_cell_wins_over_the_declared_zone(desk: Desk) -> None:
    mapped = Mapped(source=SOURCE | {"time_zone": '"in cell"'}, file=Mapped().file | {"pattern": '"YYYY-MM-DD HH:mmZ"'})
    row = "1,A11,1960-05-01,M,80,2021-03-01 10:00+01:00,2021-03-01 10:00Z,Recovered,yes,4.5,"
    assert desk.bring(mapped, [row])[0] == 0
    assert desk.ask("select end_h from record.support_end") == [(1.0,)]
    code, out, _ = desk.bring(mapped, [row.replace("10:00Z", "11:00")])
    assert code == 3 and "CELL.DATE" in out


def test_where_somebody_went_says_whether_alive_and_still_in_hospital_says_neither(desk: Desk) -> None:
    mapped = Mapped()
    mapped.columns["Home"] = (
        'field = "hospital_outcome.discharge_to", codes = { home = "home", dead = "died", here = "still_inpatient" }, blank = "not recorded"'
    )
    rows = [row.replace(",yes,", f",{where},").replace(",no,", ",dead,") for row, where in zip(ROWS, ("home", "", "here", ""), strict=True)]
    code, out, err = desk.bring(mapped, rows)
    assert code == 0, out + err
    found = desk.ask("select is_alive_at_discharge, is_still_inpatient, discharge_to from record.hospital_outcome order by all")
    assert found == [(False, False, "died"), (True, False, "home"), (None, True, None)]


def test_an_event_long_after_support_is_set_aside_and_its_absence_is_not_a_no(desk: Desk) -> None:
    late = ROWS[0] + "2021-03-20 10:00"
    code, out, _ = desk.bring(Mapped(), [late, *ROWS[1:]], options=("--set-aside",))
    assert code == 0 and "CHECK.LONG-AFTER-END (cell) runs/runs line 2, Stroke" in out
    assert desk.ask("select count(*) from record.complication_event") == [(1,)]
    assert desk.ask("select missing_kind, count(*) from record.missing_value where field = 'complication.stroke' group by 1 order by 1") == [
        ("none", 2), ("set_aside", 1),
    ]  # fmt: skip
