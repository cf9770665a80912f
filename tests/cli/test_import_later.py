"""Later batches: follow-up without a start column, further runs of known people, several sources in one store."""

from __future__ import annotations

from import_made import BAD_ROW, FOLLOW_UP, ROWS, SOURCE, Desk, Mapped, detail_file, late_mapping

LATE = "Run,Status,Seen,Died on\n1,alive,2024-05-01 12:00,\n3,dead,,2023-06-01 12:00\n"
SECOND = "9,A11,1960-05-01,M,84,2022-03-01 10:00,2022-03-03 10:00,Recovered,yes,4,"


def test_late_follow_up_without_a_start_column_is_timed_by_the_calendar_file(stocked: Desk) -> None:
    code, out, err = stocked.bring(late_mapping(), LATE)
    assert code == 0, out + err
    rows = stocked.ask(
        """select r.run_year, f.vital_status, f.contact_h, f.death_h from record.follow_up f
        join record.support_run r using (run_key) order by 1"""
    )
    assert rows == [(2021, "alive", 8760.0, None), (2022, "dead", None, 396 * 24 + 2.0)]
    assert stocked.ask("select kind from record.complication_coverage") == [("stroke",)]
    assert stocked.ask("select count(*) from record.support_run") == [(4,)]


def test_follow_up_of_a_run_that_nobody_knows_is_set_aside_and_its_identifier_forgotten(stocked: Desk) -> None:
    code, out, _ = stocked.bring(late_mapping(), LATE + "77,alive,2024-05-01 12:00,\n")
    assert code == 3 and "KEY.UNKNOWN-RUN" in out and "line 4" in out
    code, _, _ = stocked.bring(late_mapping(), LATE + "77,alive,2024-05-01 12:00,\n", options=("--set-aside",))
    assert code == 0 and stocked.ask("select count(*) from record.follow_up") == [(2,)]
    assert '"77"' not in stocked.link.read_text()


def test_follow_up_of_a_run_that_was_set_aside_finds_no_run(desk: Desk) -> None:
    assert desk.bring(Mapped(), [*ROWS, BAD_ROW], options=("--set-aside",))[0] == 0
    code, out, _ = desk.bring(late_mapping(), LATE + "5,alive,2024-05-01 12:00,\n", options=("--set-aside",))
    assert code == 0 and "KEY.UNKNOWN-RUN" in out
    orphans = desk.ask("select count(*) from record.follow_up where run_key not in (select run_key from record.support_run)")
    assert orphans == [(0,)]


def test_without_the_calendar_file_late_follow_up_finds_no_start(stocked: Desk) -> None:
    stocked.calendar.unlink()
    code, out, _ = stocked.bring(late_mapping(), LATE)
    assert code == 3 and out.count("KEY.UNKNOWN-RUN") == 2
    code, out, err = stocked.bring(Mapped(source=SOURCE | {"extent": '"addition"'}), [ROWS[0].replace(",4.5,", ",4.6,")], options=("--replace",))
    assert code == 0, out + err
    assert stocked.ask("select count(*) from record.person where order_is_uncertain") == [(0,)]


def test_a_second_run_a_year_later_is_the_second_by_the_calendar_file(stocked: Desk) -> None:
    mapped = Mapped(source=SOURCE | {"extent": '"addition"'})
    code, out, err = stocked.bring(mapped, [SECOND])
    assert code == 0, out + err
    rows = stocked.ask(
        """select r.nth_run, r.hours_from_first_run, p.order_is_uncertain, r.weight_kg from record.support_run r
        join record.person p using (person_key) where r.person_key in (select person_key from record.support_run where nth_run = 2)
        order by 1"""
    )
    assert rows == [(1, 0.0, False, 80.0), (2, 365 * 24.0, False, 84.0)]


def test_without_the_calendar_file_the_order_is_uncertain_and_no_run_is_called_the_first(desk: Desk) -> None:
    declined = Mapped(source=SOURCE | {"calendar": '"decline"'})
    assert desk.bring(declined, ROWS)[0] == 0
    assert not desk.calendar.exists()
    code, out, err = desk.bring(Mapped(source=declined.source | {"extent": '"addition"'}), [SECOND])
    assert code == 0, out + err
    rows = desk.ask(
        """select r.run_year, r.nth_run, r.hours_from_first_run, p.order_is_uncertain
        from record.support_run r join record.person p using (person_key) where p.order_is_uncertain order by 1"""
    )
    assert rows == [(2021, 1, 0.0, True), (2022, None, None, True)]


def test_a_person_whose_first_run_is_set_aside_keeps_the_number_of_the_second(desk: Desk) -> None:
    first = ROWS[0].replace("2021-03-05", "2021-02-05")
    code, _, _ = desk.bring(Mapped(), [first, *ROWS[1:], SECOND], options=("--set-aside",))
    assert code == 0
    assert desk.ask("select nth_run, hours_from_first_run from record.support_run where nth_run > 1") == [(2, 365 * 24.0)]
    assert desk.ask("select nth_run from record.set_aside_run") == [(1,)]


def test_a_start_that_cannot_be_read_makes_the_order_uncertain(desk: Desk) -> None:
    first = ROWS[0].replace("2021-03-01 10:00", "spring")
    assert desk.bring(Mapped(), [first, *ROWS[1:], SECOND], options=("--set-aside",))[0] == 0
    rows = desk.ask("select r.nth_run, p.order_is_uncertain from record.support_run r join record.person p using (person_key) where r.run_year = 2022 order by 1 nulls first")
    assert rows[0] == (None, True) and rows[1:] == [(1, False), (1, False)]


def test_two_sources_in_one_store_keep_their_own_meaning(stocked: Desk) -> None:
    south = Mapped(source=SOURCE | {"key": '"south"', "identifiers": '"south"', "no_death_means": '"alive"'})
    code, _, err = stocked.bring(south, ROWS)
    assert code == 0, err
    assert stocked.ask("select source_key, count(*) from record.support_run group by 1 order by 1") == [("north", 4), ("south", 4)]
    assert stocked.ask("select source_key, no_death_means from record.source order by 1") == [("north", "unknown"), ("south", "alive")]
    assert stocked.ask("select count(distinct person_key) from record.support_run") == [(8,)]


def test_another_meaning_of_a_known_source_is_refused_and_with_replace_it_is_stored(stocked: Desk) -> None:
    before = stocked.state()
    other = Mapped(source=SOURCE | {"no_death_means": '"alive"'})
    code, _, err = stocked.bring(other, ROWS)
    assert code == 3 and "SOURCE.CHANGED" in err and stocked.state() == before
    assert stocked.bring(other, ROWS, options=("--replace",))[0] == 0
    assert stocked.ask("select no_death_means from record.source") == [("alive",)]


def test_a_new_attempt_is_something_new(desk: Desk) -> None:
    mapped = Mapped(source=SOURCE | {"attempts": '"included"'})
    tried = {
        "When": 'field = "cannulation_attempt.at", blank = "defect"',
        "Why": 'field = "cannulation_attempt.reason", codes = { a = "no_access" }, blank = "not recorded"',
    }
    mapped.more = detail_file("tries", tried, row_is="attempt")
    one, two = "Run,When,Why\nx1,2021-02-01 10:00,a\n", "Run,When,Why\nx1,2021-02-01 10:00,a\nx2,2022-02-01 10:00,\n"
    assert desk.bring(mapped, ROWS, one)[0] == 0
    code, out, _ = desk.bring(mapped, ROWS, two)
    assert code == 0 and "Stored as batch 2" in out
    assert desk.ask("select attempt_year, reason from record.cannulation_attempt order by 1") == [(2021, "no_access"), (2022, None)]


def test_a_contact_kind_alone_is_follow_up_too(stocked: Desk) -> None:
    kinds = {"How": 'field = "follow_up.contact_kind", codes = { p = "phone" }, blank = "not recorded"'}
    mapping = late_mapping().replace(detail_file("late", FOLLOW_UP), detail_file("late", kinds))
    code, out, err = stocked.bring(mapping, "Run,How\n1,p\n")
    assert code == 0, out + err
    assert stocked.ask("select contact_kind, vital_status from record.follow_up") == [("phone", None)]


def test_a_later_extract_with_the_same_rows_only_sees_further(stocked: Desk) -> None:
    """Which days could be seen moves with the extract; that is neither a conflict nor nothing."""
    assert stocked.ask("select count(*) from record.support_run where observable_to_day_365") == [(4,)]
    early = Mapped(source=SOURCE | {"vital_status_checked": "2022-07-01"})
    code, out, err = stocked.bring(early, ROWS)
    assert code == 0 and "0 new, 4 unchanged, 0 replaced" in out and "Stored as batch 2" in out, out + err
    assert stocked.ask("select count(*) from record.support_run where observable_to_day_365") == [(2,)]
    before = stocked.state()
    code, out, _ = stocked.bring(Mapped(source=early.source | {"extract_date": "2024-04-01"}), ROWS)
    assert code == 0 and "Nothing new" in out and stocked.state() == before
