"""Mart score_input: worst values before support, pairs from one reading, and why a value is not there."""

from __future__ import annotations

from text_table import marts, same

FIVE = "run_key\na\nb\nc\nd\ne"


def test_worst_is_the_direction_of_the_analyte_and_only_before_support() -> None:
    con = marts(
        support_run="run_key\na\nb",
        measurement="""
        run_key | analyte     | window_label  | measurement_no | value | unit_as_received | value_as_received | reading
        a       | lactate     | pre_worst_6h  | 1              | 4     | mmol/L           | 4                 |
        a       | lactate     | pre_worst_24h | 1              | 9     | mmol/L           | 9                 |
        a       | lactate     | post_1h       | 1              | 20    | mmol/L           | 20                |
        a       | ph_arterial | pre_worst_6h  | 1              | 7.1   | [pH]             | 7.1               |
        a       | ph_arterial | pre_last      | 1              | 7.3   | [pH]             | 7.3               |
        a       | glucose     | admission     | 1              | 8     | mmol/L           | 8                 |
        a       | glucose     | pre_worst_6h  | 1              | 15    | mmol/L           | 15                |
        """,
    )
    same(
        con,
        "mart.score_input",
        """
        run_key | lactate_mmol_l | ph  | glucose_mmol_l | creatinine_umol_l
        a       | 9              | 7.1 | 8              |
        b       |                |     |                |
        """,
    )


def test_pulse_pressure_needs_one_reading_and_the_oxygen_ratio_one_window() -> None:
    con = marts(
        support_run="run_key\na\nb\nc",
        measurement="""
        run_key | analyte | window_label | measurement_no | value | unit_as_received | value_as_received | reading
        a       | sbp     | pre_last     | 1              | 90    | mm[Hg]           | 90                | bp
        a       | dbp     | pre_last     | 1              | 50    | mm[Hg]           | 50                | bp
        b       | sbp     | pre_last     | 1              | 90    | mm[Hg]           | 90                | bp
        b       | dbp     | pre_last     | 1              | 50    | mm[Hg]           | 50                | other
        c       | sbp     | pre_last     | 1              | 90    | mm[Hg]           | 90                |
        c       | dbp     | pre_last     | 1              | 50    | mm[Hg]           | 50                |
        a       | pao2    | pre_last     | 1              | 80    | mm[Hg]           | 80                |
        a       | fio2    | pre_last     | 1              | 0.5   | 1                | 0.5               |
        b       | pao2    | pre_last     | 1              | 80    | mm[Hg]           | 80                |
        b       | fio2    | admission    | 1              | 0.5   | 1                | 0.5               |
        """,
    )
    same(
        con,
        "mart.score_input",
        """
        run_key | pulse_pressure_mmhg | pao2_fio2_mmhg | sbp_mmhg
        a       | 40                  | 160            | 90
        b       |                     |                | 90
        c       |                     |                | 90
        """,
    )


def test_ventilation_is_known_from_the_flag_the_hours_or_a_question_that_does_not_arise() -> None:
    """Two fields lead to the hours of intubation; a run that lacks both still has one row."""
    con = marts(
        support_run=FIVE,
        pre_support_state="""
        run_key | ventilated_at_zero | intubation_hours
        a       | true               |
        b       |                    | 5
        c       |                    |
        d       | false              | 5
        """,
        missing_value="""
        run_key | field                              | missing_kind
        c       | pre_support_state.intubated_at     | not_applicable
        c       | pre_support_state.intubation_hours | not_recorded
        e       | pre_support_state.intubation_hours | not_recorded
        """,
    )
    same(
        con,
        "mart.score_input",
        """
        run_key | was_ventilated
        a       | true
        b       | true
        c       | false
        d       | false
        e       |
        """,
    )


def test_flags_from_indication_and_history() -> None:
    con = marts(
        support_run=FIVE,
        indication="""
        run_key | is_primary | indication_group
        a       | true       | acute_myocardial_infarction
        b       | true       | primary_graft_dysfunction_heart
        c       | true       | congenital_adult
        d       | true       | myocarditis
        """,
        history="""
        run_key | heart_transplant_recipient | prior_myocardial_infarction | prior_cabg
        a       |                            | true                        |
        d       | true                       | false                       | true
        e       | false                      | false                       | false
        """,
    )
    same(
        con,
        "mart.score_input",
        """
        run_key | has_indication | is_acute_myocardial_infarction | is_transplant_graft | is_congenital | prior_mi_or_cabg
        a       | true           | true                           | false               | false         | true
        b       | true           | false                          | true                | false         |
        c       | true           | false                          | false               | true          |
        d       | true           | false                          | true                | false         | true
        e       | false          |                                |                     |               | false
        """,
    )


def test_arrests_and_doses_take_the_worst_of_several_rows() -> None:
    con = marts(
        support_run="run_key\na\nb",
        arrest_episode="""
        run_key | episode_no | low_flow_min | first_rhythm | shockable_on_arrival
        a       | 1          | 20           | vf           | false
        a       | 2          | 45           | asystole     | true
        """,
        vasoactive_dose="""
        run_key | drug          | window_label | dose_no | dose | unit_as_received
        a       | noradrenaline | pre_last     | 1       | 0.2  | ug/kg/min
        a       | noradrenaline | pre_worst_6h | 1       | 0.5  | ug/kg/min
        a       | noradrenaline | post_1h      | 1       | 2    | ug/kg/min
        """,
    )
    same(
        con,
        "mart.score_input",
        """
        run_key | low_flow_min | rhythm_shockable_at_arrival | had_first_rhythm_shockable | noradrenaline_ug_kg_min
        a       | 45           | true                        | true                       | 0.5
        b       |              |                             |                            |
        """,
    )
