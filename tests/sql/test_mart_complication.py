"""Marts complication_episode and complication_count: what is one episode, and who is at risk for how long."""

from __future__ import annotations

import duckdb
from text_table import marts, same

COVERAGE = "source_key | kind | events_kept | looked_until_h | definition | valid_from_year\n" + "\n".join(
    f"north | {kind} | all | 0 | own list | 2021"
    for kind in ("stroke", "limb_ischaemia", "differential_hypoxaemia", "infection_other", "renal_replacement", "circuit_thrombosis")
)


def counts(**records: str) -> duckdb.DuckDBPyConnection:
    return marts(complication_coverage=COVERAGE, **records)


def test_a_record_within_the_gap_belongs_to_the_episode_and_exactly_at_the_gap_a_new_one_begins() -> None:
    con = marts(
        support_run="run_key\na\nb",
        complication_event="""
        run_key | event_no | kind               | onset_h
        a       | 1        | stroke             | 10
        a       | 2        | stroke             | 33.9
        a       | 3        | stroke             | 57.9
        a       | 4        | stroke             | 70
        b       | 1        | stroke             | 5
        b       | 2        | stroke             |
        b       | 3        | circuit_thrombosis | 5
        b       | 4        | circuit_thrombosis | 5.5
        """,
    )
    same(
        con,
        "mart.complication_episode",
        """
        run_key | kind               | episode_no | onset_h | n_records
        a       | stroke             | 1          | 10      | 2
        a       | stroke             | 2          | 57.9    | 2
        b       | circuit_thrombosis | 1          | 5       | 1
        b       | circuit_thrombosis | 2          | 5.5     | 1
        b       | stroke             | 1          | 5       | 1
        """,
    )


def test_every_run_has_a_row_for_every_kind_its_source_carries_zeros_included() -> None:
    con = counts(
        support_run="run_key\na",
        support_end="run_key | end_h | end_kind\na | 100 | recovery",
        cannulation="run_key | arterial_return | right_sided_monitoring\na | femoral | true",
    )
    same(
        con,
        "mart.complication_count",
        """
        kind                    | is_at_risk | n_events | hours_at_risk | hours_to_first
        circuit_thrombosis      | true       | 0        | 100           | 100
        differential_hypoxaemia | true       | 0        | 100           | 100
        infection_other         | true       | 0        | 52            | 52
        limb_ischaemia          | true       | 0        | 100           | 100
        renal_replacement       | true       | 0        | 100           | 100
        stroke                  | true       | 0        | 100           | 100
        """,
        order="kind",
    )


def test_events_before_during_and_after_support() -> None:
    """Stroke counts up to 168 h after the end, in a column of its own; what lies later is not attributed."""
    con = counts(
        support_run="run_key | entry_h\na |\nb |\nc |\nd |\ne |\nf |\ng | 20",
        support_end="run_key | end_h | end_kind\n" + "\n".join(f"{k} | 100 | recovery" for k in "abcdefg"),
        complication_event="""
        run_key | event_no | kind   | onset_h
        a       | 1        | stroke | 30
        a       | 2        | stroke | 60
        b       | 1        | stroke | -5
        b       | 2        | stroke | 50
        c       | 1        | stroke | 100
        d       | 1        | stroke | 100.5
        e       | 1        | stroke | 268
        f       | 1        | stroke | 268.5
        g       | 1        | stroke | 10
        g       | 2        | stroke | 40
        """,
    )
    same(
        con,
        "(from mart.complication_count where kind = 'stroke')",
        """
        run_key | not_at_risk_because    | n_events | n_before | n_after_end | hours_at_risk | hours_to_first | first_onset_h
        a       |                        | 2        | 0        | 0           | 100           | 30             | 30
        b       | present before support | 1        | 1        | 0           | 0             | 0              | 50
        c       |                        | 1        | 0        | 0           | 100           | 100            | 100
        d       |                        | 0        | 0        | 1           | 100           | 100            |
        e       |                        | 0        | 0        | 1           | 100           | 100            |
        f       |                        | 0        | 0        | 0           | 100           | 100            |
        g       |                        | 1        | 0        | 0           | 80            | 20             | 40
        """,
        order="run_key",
    )


def test_infections_count_from_48_h_and_short_runs_are_never_at_risk() -> None:
    con = counts(
        support_run="run_key\na\nb\nc\nd",
        support_end="run_key | end_h | end_kind\na | 100 | recovery\nb | 48 | recovery\nc | 100 | recovery\nd | 100 | recovery",
        complication_event="""
        run_key | event_no | kind            | onset_h
        a       | 1        | infection_other | 47.9
        c       | 1        | infection_other | 48
        d       | 1        | infection_other | 0
        """,
    )
    same(
        con,
        "(from mart.complication_count where kind = 'infection_other')",
        """
        run_key | not_at_risk_because                | n_events | n_too_early | at_risk_from_h | hours_at_risk | hours_to_first
        a       |                                    | 0        | 1           | 48             | 52            | 52
        b       | support ended before being at risk | 0        | 0           | 48             | 0             | 0
        c       |                                    | 1        | 0           | 48             | 52            | 0
        d       | present before support             | 0        | 0           | 48             | 0             | 0
        """,
        order="run_key",
    )


def test_who_is_not_at_risk_says_why() -> None:
    con = counts(
        support_run="run_key\na\nb\nc\nd\ne\nf\ng",
        support_end="run_key | end_h | end_kind\n" + "\n".join(f"{k} | 100 | recovery" for k in "abcdef"),
        cannulation="""
        run_key | arterial_return | right_sided_monitoring
        a       | central         | true
        b       |                 | false
        c       | femoral         |
        d       | femoral         | true
        e       | femoral         | true
        f       | femoral         | true
        g       | femoral         | true
        """,
        pre_support_state="run_key | on_rrt_at_zero\nd | true\ne | false",
        history="run_key | dialysis_dependent\ne | true",
        missing_value="""
        run_key | field                       | missing_kind
        f       | complication.limb_ischaemia | set_aside
        e       | complication.limb_ischaemia | none
        """,
    )
    same(
        con,
        "(from mart.complication_count where kind in ('limb_ischaemia', 'differential_hypoxaemia', 'renal_replacement') and not is_at_risk)",
        """
        run_key | kind                    | not_at_risk_because
        a       | limb_ischaemia          | other return site
        b       | differential_hypoxaemia | no right-sided monitoring
        b       | limb_ischaemia          | return site not recorded
        c       | differential_hypoxaemia | monitoring not recorded
        d       | renal_replacement       | on renal replacement at start
        e       | renal_replacement       | on renal replacement at start
        f       | limb_ischaemia          | not recorded
        g       | differential_hypoxaemia | end of support not recorded
        g       | limb_ischaemia          | end of support not recorded
        g       | renal_replacement       | end of support not recorded
        """,
    )


def test_a_declaration_holds_from_its_year_on() -> None:
    con = marts(
        complication_coverage="""
        source_key | kind   | events_kept | looked_until_h | definition | valid_from_year
        north      | stroke | first       | 0              | old list   | 2020
        north      | stroke | all         | 24             | new list   | 2022
        """,
        support_run="run_key | run_year\na | 2019\nb | 2020\nc | 2021\nd | 2022\ne | 2023",
        support_end="run_key | end_h | end_kind\n" + "\n".join(f"{k} | 10 | recovery" for k in "abcde"),
    )
    same(
        con,
        "mart.complication_count",
        """
        run_key | events_kept | looked_until_h
        b       | first       | 0
        c       | first       | 0
        d       | all         | 24
        e       | all         | 24
        """,
        order="run_key",
    )
