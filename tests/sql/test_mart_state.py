"""Mart state_interval: stays of a run, without a gap and without an overlap."""

from __future__ import annotations

import duckdb
from text_table import marts, same

RECORDS = {
    "support_run": "run_key | entry_h\na |\nb |\nc |\nd |\ne |\nf |\ng | 12\nh |\ni | 20",
    "support_end": """
        run_key | end_h | end_kind     | open_days
        a       | 100   | recovery     |
        b       | 40    | death        |
        c       | 50    | recovery     |
        d       | 60    | transfer_out |
        e       |       | open         | 2
        f       | 70    | recovery     |
        g       | 80    | durable_lvad |
        h       | 30    | withdrawal   |
        i       | 20    | recovery     |
        """,
    "hospital_outcome": """
        run_key | discharge_h | is_alive_at_discharge
        a       | 300         | true
        b       | 40          | false
        c       | 90          | false
        f       | 70          | true
        g       | 200         | true
        h       | 45          | false
        """,
    "follow_up": """
        run_key | vital_status | contact_h | death_h
        a       | alive        | 720       |
        f       | alive        | 720       |
        g       | dead         |           | 500
        """,
}


def states() -> duckdb.DuckDBPyConnection:
    return marts(**RECORDS)


def test_stays_of_every_way_through_a_run() -> None:
    same(
        states(),
        "mart.state_interval",
        """
        run_key | state       | from_h | to_h | next_state
        a       | on support  | 0      | 100  | in hospital
        a       | in hospital | 100    | 300  | discharged
        a       | discharged  | 300    | 720  |
        b       | on support  | 0      | 40   | dead
        c       | on support  | 0      | 50   | in hospital
        c       | in hospital | 50     | 90   | dead
        d       | on support  | 0      | 60   |
        e       | on support  | 0      | 48   |
        f       | on support  | 0      | 70   | discharged
        f       | discharged  | 70     | 720  |
        g       | on support  | 12     | 80   | in hospital
        g       | in hospital | 80     | 200  | discharged
        g       | discharged  | 200    | 500  | dead
        h       | on support  | 0      | 30   | in hospital
        h       | in hospital | 30     | 45   | dead
        """,
        order="run_key, from_h",
    )


def test_intervals_of_a_run_are_contiguous_and_name_the_state_that_follows() -> None:
    con = states()
    broken = con.execute(
        """select run_key from (
          select run_key, to_h, next_state, from_h,
            lead(from_h) over w as next_from, lead(state) over w as following
          from mart.state_interval window w as (partition by run_key order by from_h))
        where to_h <= from_h or next_from <> to_h or following <> next_state"""
    ).fetchall()
    assert broken == []
