"""Marts run, ending and cohort_flow: text tables in, text tables out."""

from __future__ import annotations

from text_table import SOURCE, marts, same

ENDS = """
run_key | end_h | end_kind        | open_days
a       | 100   | recovery        |
b       | 50    | durable_lvad    |
c       | 60    | transplantation |
d       | 70    | death           |
e       | 80    | withdrawal      |
f       | 30    | temporary_pump  |
g       | 40    | crossover_vv    |
h       | 20    | transfer_out    |
i       |       | open            | 3
j       |       | open            | 0
k       | 24    | recovery        |
l       | 90    | recovery        |
"""
RUNS = """
run_key | transferred_in | entry_h
a       |                |
b       |                |
c       |                |
d       |                |
e       |                |
f       |                |
g       |                |
h       | true           | 2
i       |                |
j       |                |
k       |                | 24
l       | true           |
"""


def test_ending_maps_every_kind_to_its_cause_and_leaves_out_what_was_not_observed() -> None:
    con = marts(support_run=RUNS, support_end=ENDS)
    same(
        con,
        "mart.ending",
        """
        run_key | time_h | cause | pathway             | is_transferred_out | is_open
        a       | 100    | 1     | recovery            | false              | false
        b       | 50     | 2     | durable LVAD        | false              | false
        c       | 60     | 3     | transplantation     | false              | false
        d       | 70     | 4     | death or withdrawal | false              | false
        e       | 80     | 4     | death or withdrawal | false              | false
        f       | 30     | 5     | other exit          | false              | false
        g       | 40     | 5     | other exit          | false              | false
        h       | 20     | 0     | transfer out        | true               | false
        i       | 72     | 0     | still on support    | false              | true
        """,
    )


def test_run_is_transferred_in_by_flag_or_by_an_arrival_on_support() -> None:
    con = marts(
        support_run="""
        run_key | transferred_in | entry_h
        a       |                |
        b       | true           |
        c       |                | 6
        d       | false          |
        e       |                | 0
        """
    )
    same(
        con,
        "mart.run",
        """
        run_key | is_transferred_in | entry_h | end_kind | support_h
        a       | false             | 0       |          |
        b       | true              | 0       |          |
        c       | true              | 6       |          |
        d       | false             | 0       |          |
        e       | false             | 0       |          |
        """,
    )


def test_run_first_run_needs_a_certain_order_and_the_next_run_gives_the_pause() -> None:
    con = marts(
        person="""
        person_key | height_cm | order_is_uncertain
        p          | 200       | false
        q          |           | true
        """,
        support_run="""
        run_key | person_key | nth_run | hours_from_first_run | weight_kg | age_years | age_is_uncertain
        a       | p          | 1       | 0                    | 80        | 50        | true
        b       | p          | 2       | 250                  | 80        | 50        | false
        c       | q          | 1       | 0                    |           |           | false
        d       | r          |         |                      |           | 44        | false
        """,
        support_end="""
        run_key | end_h | end_kind
        a       | 100   | recovery
        b       | 10    | death
        """,
    )
    same(
        con,
        "mart.run",
        """
        run_key | is_first_run | supported_again_after_h | bmi_kg_m2 | age_low_years
        a       | true         | 150                     | 20        | 49
        b       | false        |                         | 20        | 50
        c       | false        |                         |           |
        d       | false        |                         |           | 44
        """,
    )


def test_run_carries_the_primary_indication_only_and_the_cpc() -> None:
    con = marts(
        support_run="run_key\na",
        indication="""
        run_key | is_primary | indication_group
        a       | true       | myocarditis
        a       | false      | pulmonary_embolism
        """,
        neuro_outcome="""
        run_key | scale | value
        a       | cpc   | 2
        a       | mrs   | 4
        """,
        pre_support_state="run_key | had_arrest\na | true",
    )
    same(
        con,
        "mart.run",
        """
        run_key | indication_group | cpc | had_arrest | is_extracorporeal_cpr
        a       | myocarditis      | 2   | true       | false
        """,
    )


def test_cohort_flow_counts_set_aside_runs_and_says_nothing_of_attempts_a_source_does_not_have() -> None:
    two = SOURCE + "south | unknown | day of news | alive | not in this source | 2021 | 2023\n"
    con = marts(
        two,
        support_run="run_key | person_key\na | p\nb | p",
        set_aside_run="run_key | person_key | source_key | nth_run | run_year\nc | q | north | 1 | 2021",
        cannulation_attempt="attempt_key | person_key | source_key | attempt_year | reason\nx | p | north | 2021 |",
    )
    same(
        con,
        "mart.cohort_flow",
        """
        source_key | stage_no | n
        north      | 1        | 3
        north      | 2        | 1
        north      | 3        | 2
        north      | 4        | 1
        north      | 5        | 1
        south      | 1        | 0
        south      | 2        | 0
        south      | 3        | 0
        south      | 4        | 0
        south      | 5        |
        """,
    )
