"""Staging steps moment, value and finding: clocks, units, hours from the start, ages, limits."""

from __future__ import annotations

from staging_tables import staged
from text_table import same

START = "run_no | start_utc | start_local | sheet_no | line\n1 | 2021-03-01 10:00 | 2021-03-01 11:00 | 0 | 1"


def test_moment_becomes_utc_and_marks_what_the_change_of_clocks_skipped_or_repeated() -> None:
    con = staged(
        "moment",
        pieces="""
        piece_no | field             | pattern           | zone
        0        | support_run.start | YYYY-MM-DD HH:mm  | Europe/Vienna
        1        | support_run.start | YYYY-MM-DD HH:mmZ | Europe/Vienna
        2        | support_run.start | YYYY-MM-DD HH:mmZ | in cell
        """,
        cells="""
        piece_no | text
        0        | 2021-03-01 11:00
        0        | 2021-07-01 11:00
        0        | 2021-03-28 01:59
        0        | 2021-03-28 02:30
        0        | 2021-03-28 03:00
        0        | 2021-10-31 01:59
        0        | 2021-10-31 02:30
        0        | 2021-10-31 03:00
        1        | 2021-10-31 02:30+02:00
        2        | 2021-03-28 02:30+0100
        """,
    )
    same(
        con,
        "staging.moment",
        """
        line | utc                 | clock
        1    | 2021-03-01 10:00:00 |
        2    | 2021-07-01 09:00:00 |
        3    | 2021-03-28 00:59:00 |
        4    | 2021-03-28 01:30:00 | CELL.TIME-SKIPPED
        5    | 2021-03-28 01:00:00 |
        6    | 2021-10-30 23:59:00 |
        7    | 2021-10-31 01:30:00 | CELL.TIME-REPEATED
        8    | 2021-10-31 02:00:00 |
        9    | 2021-10-31 00:30:00 |
        10   | 2021-03-28 01:30:00 |
        """,
    )


def test_value_hours_are_elapsed_hours_to_the_minute_across_the_change_of_clocks() -> None:
    con = staged(
        "value",
        pieces="piece_no | field | pattern\n0 | support_end.end | YYYY-MM-DD HH:mm\n1 | pre_support_state.intubated_at | YYYY-MM-DD HH:mm",
        starts="run_no | start_utc | start_local | sheet_no | line\n1 | 2021-03-28 00:00 | 2021-03-28 01:00 | 0 | 1",
        cells="""
        piece_no | run_no | text
        0        | 1      | 2021-03-28 04:00
        0        | 1      | 2021-03-29 01:20
        1        | 1      | 2021-03-27 22:00
        1        | 1      | 2021-03-28 04:00
        0        | 2      | 2021-03-28 04:00
        """,
    )
    same(
        con,
        "staging.value",
        """
        line | amount  | defect
        1    | 2       |
        2    | 23.3333 |
        3    | 3       |
        4    | -2      | CELL.TIME
        5    |         |
        """,
    )


def test_value_ages_in_completed_years_by_the_local_day_of_the_start() -> None:
    con = staged(
        "value",
        pieces="piece_no | field | pattern\n0 | person.birth_date | DD.MM.YYYY\n1 | person.birth_year | ",
        starts=START,
        cells="""
        piece_no | text
        0        | 01.03.1961
        0        | 02.03.1961
        0        | 29.02.1960
        0        | 02.03.2021
        0        | 01.01.1890
        1        | 1961
        1        | 1961.5
        1        | 2022
        """,
    )
    same(
        con,
        "staging.value",
        """
        line | amount | defect
        1    | 60     |
        2    | 59     |
        3    | 61     |
        4    | -1     | CELL.BIRTH
        5    | 131    | CELL.BIRTH
        6    | 60     |
        7    | 59.5   | CELL.WHOLE
        8    | -1     | CELL.BIRTH
        """,
    )


def test_value_units_and_hard_limits_in_the_canonical_unit() -> None:
    con = staged(
        "value",
        pieces="""
        piece_no | field                    | unit
        0        | support_run.weight_kg    | lb
        1        | measurement.map          | kPa
        2        | measurement.creatinine   | mg/dL
        3        | measurement.glucose      | mg/dL
        4        | measurement.temperature  | [degF]
        5        | support_end.duration     | d
        6        | arrest_episode.low_flow_min | min
        7        | history.ckd_stage        | 1
        8        | support_run.age_years    | 1
        """,
        cells="""
        piece_no | text
        0        | 176
        1        | 10
        2        | 1
        2        | 100
        3        | 90
        4        | 98.6
        5        | 2.5
        6        | 361
        7        | 2.5
        7        | 6
        8        | 17
        """,
        starts=START,
    )
    same(
        con,
        "staging.value",
        """
        line | amount  | defect
        1    | 79.8323 |
        2    | 75.0064 |
        3    | 88.4017 |
        4    | 8840.17 | CELL.LIMIT
        5    | 4.99567 |
        6    | 37      |
        7    | 60      |
        8    | 361     | CELL.LIMIT
        9    | 2.5     | CELL.WHOLE
        10   | 6       | CELL.LIMIT
        11   | 17      |
        """,
    )


def test_finding_gives_place_effect_shape_and_the_unit_that_would_fit_never_the_value() -> None:
    con = staged(
        "finding",
        pieces="""
        piece_no | field                  | unit   | pattern          | row_is
        0        | measurement.lactate    | mmol/L |                  | run
        1        | support_run.start      |        | YYYY-MM-DD HH:mm | run
        2        | support_end.end        |        | YYYY-MM-DD HH:mm | detail
        3        | measurement.glucose    | mmol/L |                  | run
        4        | weaning_step.study     |        | YYYY-MM-DD HH:mm | run
        """,
        cells="""
        piece_no | text
        0        | Ä4,5x
        1        | 01.02.2021
        2        | later
        3        | 180
        3        | 45
        4        | never
        1        | 2021-10-31 02:30
        0        | 4.5
        """,
        starts=START,
    )
    same(
        con,
        "staging.finding",
        """
        line | header   | code               | effect | shape            | plausible_as
        1    | column 0 | CELL.NUMBER        | cell   | A9,9a            |
        2    | column 1 | CELL.DATE          | run    | 99.99.9999       |
        3    | column 2 | CELL.DATE          | row    | aaaaa            |
        4    | column 3 | CELL.LIMIT         | cell   | 999              | mg/dL
        5    | column 3 | CELL.UNUSUAL       | note   | 99               |
        6    | column 4 | CELL.DATE          | cell   | aaaaa            |
        7    | column 1 | CELL.TIME-REPEATED | note   | 9999-99-99 99:99 |
        """,
    )
