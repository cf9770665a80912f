"""Staging steps text and typed: trims, missing values, codes, numbers and moments by the declared grammar."""

from __future__ import annotations

from staging_tables import staged
from text_table import same

CODES = "piece_no | text | value\n0 | Yes | true\n0 | No | false\n0 | ? | not recorded\n0 | n/a | not applicable"


def test_text_trims_and_says_why_a_value_is_missing() -> None:
    con = staged(
        "text",
        pieces="piece_no | field | blank\n0 | history.diabetes | not recorded\n1 | history.diabetes | defect\n2 | history.diabetes | none",
        cells="""
        piece_no | text    | number | problem
        0        | " Yes " |        |
        0        | "  "    |        |
        0        |         |        |
        0        | unk     |        |
        0        | UNK     |        |
        1        |         |        |
        2        |         |        |
        2        | 1       | 1      |
        2        |         |        | formula
        """,
        tokens="piece_no | token\n0 | unk",
    )
    same(
        con,
        "staging.text",
        """
        line | word | missing_word
        1    | Yes  |
        2    |      | not recorded
        3    |      | not recorded
        4    | unk  | not recorded
        5    | UNK  |
        6    |      | defect
        7    |      | none
        8    | 1    |
        9    |      |
        """,
    )


def test_typed_codes_match_exactly_unless_case_is_to_be_ignored() -> None:
    con = staged(
        "typed",
        pieces="piece_no | field | ignore_case\n0 | history.diabetes | false\n1 | history.diabetes | true",
        cells="piece_no | text\n0 | Yes\n0 | yes\n0 | ?\n0 | n/a\n1 | YES\n1 | Yess",
        codes=CODES + "\n1 | yes | true",
    )
    same(
        con,
        "staging.typed",
        """
        line | coded | missing_word   | defect
        1    | true  |                |
        2    |       |                | CELL.CODE
        3    |       | not recorded   |
        4    |       | not applicable |
        5    | true  |                |
        6    |       |                | CELL.CODE
        """,
    )


def test_typed_a_list_value_called_none_is_a_value_where_the_list_has_it() -> None:
    con = staged(
        "typed",
        pieces="piece_no | field\n0 | support_end.device_implanted\n1 | support_end.decannulation_place",
        cells="piece_no | text\n0 | No device\n1 | Nowhere",
        codes="piece_no | text | value\n0 | No device | none\n1 | Nowhere | none",
    )
    same(con, "staging.typed", "line | coded | missing_word | defect\n1 | none | |\n2 | | none |")


def test_typed_numbers_follow_the_declared_marks_and_nothing_else() -> None:
    con = staged(
        "typed",
        pieces="""
        piece_no | field               | unit   | decimal_mark | thousands_mark
        0        | measurement.lactate | mmol/L | .            |
        1        | measurement.lactate | mmol/L | ,            | .
        """,
        cells="""
        piece_no | text             | number
        0        | 4.5              |
        0        | -0.5             |
        0        | 4,5              |
        0        | 1e3              |
        0        | 1_000            |
        0        | nan              |
        0        | １２             |
        0        | +4               |
        0        | .5               |
        0        | 1234567890123456 |
        0        | 4.5              | 4.5
        1        | 1.234,5          |
        1        | 1234,5           |
        1        | 12.34,5          |
        """,
    )
    same(
        con,
        "staging.typed",
        """
        line | received | defect
        1    | 4.5      |
        2    | -0.5     |
        3    |          | CELL.NUMBER
        4    |          | CELL.NUMBER
        5    |          | CELL.NUMBER
        6    |          | CELL.NUMBER
        7    |          | CELL.NUMBER
        8    |          | CELL.NUMBER
        9    |          | CELL.NUMBER
        10   |          | CELL.NUMBER
        11   | 4.5      |
        12   | 1234.5   |
        13   | 1234.5   |
        14   |          | CELL.NUMBER
        """,
    )


def test_typed_moments_follow_the_declared_order_of_day_and_month() -> None:
    con = staged(
        "typed",
        pieces="""
        piece_no | field             | pattern
        0        | support_run.start | DD.MM.YYYY HH:mm
        1        | support_run.start | MM/DD/YYYY hh:mm AM
        2        | support_run.start | YYYY-MM-DDTHH:mmZ
        """,
        cells="""
        piece_no | text                   | number | moment
        0        | 01.02.2021 08:30       |        |
        0        | 31.02.2021 08:30       |        |
        0        | 1.2.2021 08:30         |        |
        0        | 01.02.2021 24:00       |        |
        1        | 01/02/2021 12:05 AM    |        |
        1        | 01/02/2021 12:05 pm    |        |
        1        | 13/02/2021 08:30 AM    |        |
        2        | 2021-02-01T08:30+02:00 |        |
        2        | 2021-02-01T08:30-0330  |        |
        2        | 2021-02-01T08:30Z      |        |
        2        | 2021-02-01T08:30       |        |
        0        | 2021-02-01 08:30:00    |        | 2021-02-01 08:30:00
        0        | 44228                  | 44228  |
        """,
    )
    same(
        con,
        "staging.typed",
        """
        line | local_moment        | offset_minutes | defect
        1    | 2021-02-01 08:30:00 |                |
        2    |                     |                | CELL.DATE
        3    |                     |                | CELL.DATE
        4    |                     |                | CELL.DATE
        5    | 2021-01-02 00:05:00 |                |
        6    | 2021-01-02 12:05:00 |                |
        7    |                     |                | CELL.DATE
        8    | 2021-02-01 08:30:00 | 120            |
        9    | 2021-02-01 08:30:00 | -210           |
        10   | 2021-02-01 08:30:00 | 0              |
        11   |                     |                | CELL.DATE
        12   | 2021-02-01 08:30:00 |                |
        13   |                     |                | CELL.DATE
        """,
    )


def test_typed_where_every_moment_must_carry_its_offset_one_without_is_refused() -> None:
    con = staged(
        "typed",
        pieces="""
        piece_no | field             | pattern           | zone
        0        | support_run.start | YYYY-MM-DDTHH:mmZ | in cell
        1        | support_run.start | YYYY-MM-DDTHH:mm  | in cell
        2        | person.birth_date | YYYY-MM-DD        | in cell
        """,
        cells="""
        piece_no | text              | moment
        0        | 2021-02-01T08:30Z |
        0        |                   | 2021-02-01 08:30:00
        1        | 2021-02-01T08:30  |
        2        | 1960-02-01        |
        """,
    )
    same(con, "staging.typed", "line | defect\n1 |\n2 | CELL.DATE\n3 | CELL.DATE\n4 |")


def test_typed_problems_words_and_empty_cells() -> None:
    con = staged(
        "typed",
        pieces="piece_no | field | blank\n0 | complication_event.grade | not recorded\n1 | measurement.lactate | defect",
        cells="""
        piece_no | text                        | problem
        0        | 3b                          |
        0        | a longer remark than a word |
        0        | <b>                         |
        1        |                             |
        1        |                             | formula
        1        |                             | error
        1        |                             | merged
        """,
    )
    same(
        con,
        "staging.typed",
        """
        line | word                        | defect
        1    | 3b                          |
        2    | a longer remark than a word | CELL.WORD
        3    | <b>                         | CELL.WORD
        4    |                             | CELL.EMPTY
        5    |                             | CELL.FORMULA
        6    |                             | CELL.ERROR
        7    |                             | CELL.MERGED
        """,
    )
