"""Mart survival: who died when, or until when somebody is known to be alive."""

from __future__ import annotations

import pytest
from text_table import SOURCE, marts, same

REGISTER = SOURCE.replace("unknown        ", "alive          ")
NEWS = SOURCE.replace("day of death", "day of news ")


def survival(table: str, source: str = SOURCE, **records: str) -> None:
    same(marts(source, **records), "mart.survival", table)


def test_death_on_support_is_dated_by_the_end_and_withdrawal_by_the_end_unless_known_better() -> None:
    survival(
        """
        run_key | died  | time_h | is_unknown_after_end
        a       | true  | 40     | false
        b       | true  | 50     | false
        c       | true  | 75     | false
        d       | false | 300    | false
        e       | false | 60     | true
        """,
        support_run="run_key\na\nb\nc\nd\ne",
        support_end="""
        run_key | end_h | end_kind
        a       | 40    | death
        b       | 50    | withdrawal
        c       | 60    | withdrawal
        d       | 60    | withdrawal
        e       | 60    | withdrawal
        """,
        hospital_outcome="""
        run_key | discharge_h | is_alive_at_discharge
        c       | 75          | false
        d       | 300         | true
        """,
        follow_up="run_key | vital_status | contact_h\ne | alive | 0",
    )


def test_of_the_living_the_last_contact_counts_never_less_than_support_or_discharge() -> None:
    survival(
        """
        run_key | died  | time_h | is_unknown_after_end
        a       | false | 100    | true
        b       | false | 400    | false
        c       | false | 720    | false
        d       | false | 72     | false
        e       | false | 30     | false
        """,
        support_run="""
        run_key | entry_h
        a       |
        b       |
        c       |
        d       |
        e       | 30
        """,
        support_end="""
        run_key | end_h | end_kind     | open_days
        a       | 100   | recovery     |
        b       | 100   | recovery     |
        c       | 100   | recovery     |
        d       |       | open         | 3
        e       | 20    | transfer_out |
        """,
        hospital_outcome="""
        run_key | discharge_h | is_alive_at_discharge
        b       | 400         | true
        c       | 400         | true
        """,
        follow_up="run_key | vital_status | contact_h\nb | alive | 0\nc | alive | 720",
    )


def test_a_death_after_discharge_comes_from_follow_up() -> None:
    survival(
        """
        run_key | died | time_h | time_low_h | time_high_h | is_news
        a       | true | 900    | 900        | 900         | false
        """,
        support_run="run_key\na",
        support_end="run_key | end_h | end_kind\na | 100 | recovery",
        hospital_outcome="run_key | discharge_h | is_alive_at_discharge\na | 400 | true",
        follow_up="run_key | vital_status | death_h\na | dead | 900",
    )


def test_a_news_date_is_an_upper_end_and_the_last_moment_alive_the_lower_one() -> None:
    survival(
        """
        run_key | died | time_h | time_low_h | time_high_h | is_news
        a       | true | 900    | 400        | 900         | true
        b       | true | 40     | 40         | 40          | false
        """,
        NEWS,
        support_run="run_key\na\nb",
        support_end="run_key | end_h | end_kind\na | 100 | recovery\nb | 40 | death",
        hospital_outcome="run_key | discharge_h | is_alive_at_discharge\na | 400 | true",
        follow_up="run_key | vital_status | death_h\na | dead | 900\nb | dead | 60",
    )


@pytest.mark.parametrize(
    ("day_30", "day_90", "day_180", "day_365", "hours"),
    [("true", "true", "true", "true", 8760), ("true", "true", "true", "false", 4320),
     ("true", "true", "false", "false", 2160), ("true", "false", "false", "false", 720),
     ("false", "false", "false", "false", 100)],
)  # fmt: skip
def test_in_a_register_no_death_means_alive_up_to_the_last_horizon_it_could_see(
    day_30: str, day_90: str, day_180: str, day_365: str, hours: int
) -> None:
    survival(
        f"run_key | died | time_h\na | false | {hours}",
        REGISTER,
        support_run="run_key | observable_to_day_30 | observable_to_day_90 | observable_to_day_180 | observable_to_day_365\n"
        f"a | {day_30} | {day_90} | {day_180} | {day_365}",
        support_end="run_key | end_h | end_kind\na | 100 | recovery",
    )


def test_a_register_never_makes_somebody_alive_who_is_known_to_be_dead() -> None:
    survival(
        """
        run_key | died  | time_h
        a       | false | 100
        b       | false | 400
        """,
        REGISTER,
        support_run="run_key\na\nb",
        support_end="run_key | end_h | end_kind\na | 100 | recovery\nb | 100 | recovery",
        hospital_outcome="run_key | discharge_h | is_alive_at_discharge\na | | false\nb | 400 | true",
        follow_up="run_key | vital_status | death_h\nb | dead |",
    )
