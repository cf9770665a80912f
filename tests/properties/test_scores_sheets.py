"""Reserved scores, the gate before an observed/expected, conventions, printed sheets, units."""

import pickle

import pandas as pd
import pytest

from outcomes.errors import InputRefused, UsageError
from outcomes.scores.catalogue import list_scores, our_catalogue
from outcomes.scores.conventions import open_conventions, option_sets
from outcomes.scores.engine import compute
from outcomes.scores.fields import FIELDS
from outcomes.scores.gate import DeclaredCheck, usable_for_expectation
from outcomes.scores.sheet import CAUTION, describe_score, input_table
from outcomes.scores.units import factor

RUN = {"age_years": 64, "ph": 7.0, "nth_run": 1}
RESERVED = [s.key for s in our_catalogue().scores() if not s.is_implemented]


def code_of(call, *args, **more):
    with pytest.raises((UsageError, InputRefused)) as refused:
        call(*args, **more)
    return refused.value.code, str(refused.value)


@pytest.mark.parametrize("key", RESERVED)
def test_reserved_scores_say_what_is_missing_and_reserve_their_inputs(key):
    code, text = code_of(compute, key, pd.DataFrame([RUN]))
    assert code == "SCORE.NOT-IMPLEMENTED" and "not implemented: point table not verified" in text
    sheet = describe_score(key)
    assert sheet.missing and sheet.missing[0] in text
    assert len(input_table(key)) >= 1 and sheet.points == ()
    assert usable_for_expectation(key).code == "reserved"


def test_the_reserved_scores_are_named():
    assert {"rescue_ihca", "modified_save", "remember", "predict_va_ecmo", "hope"} <= set(RESERVED)
    assert {"ami_ecmo", "ecls_shock_risk", "ecmo_accepts", "worku_2019", "pre_ecpr", "tlr"} <= set(RESERVED)
    listed = list_scores()
    assert list(listed["key"]) == sorted(listed["key"]) and set(listed["status"]) == {
        "implemented",
        "reserved",
    }


def test_gate_by_evidence():
    answers = {key: usable_for_expectation(key).code for key in our_catalogue().keys if key not in RESERVED}
    assert answers == {
        "be_alive": "no_probability",
        "bos_ma2": "partial_probability",
        "cardshock": "unchecked",
        "encourage": "unchecked",
        "iabp_shock_ii": "unchecked",
        "pc_ecmo": "verified",
        "save": "unchecked",
        "shock_stage": "descriptor",
        "sofa": "descriptor",
        "tips65": "verified",
        "vasoactive_inotropic": "descriptor",
    }
    lines = usable_for_expectation("encourage").unchecked
    assert "item prothrombin: from memory" in lines and not any(line.startswith("class") for line in lines)


def test_gate_opens_by_a_declared_check_of_this_very_table():
    check = DeclaredCheck("save", "2024-05-01", "data manager")
    opened = usable_for_expectation("save", [check])
    assert opened.is_usable and "2024-05-01 by data manager" in opened.reason and opened.unchecked
    assert not usable_for_expectation("encourage", [check]).is_usable
    same = DeclaredCheck("save", "2024-05-01", "data manager", our_catalogue().score("save").text_hash)
    assert usable_for_expectation("save", [same]).is_usable
    old = DeclaredCheck("save", "2024-05-01", "data manager", "0" * 64)
    assert usable_for_expectation("save", [old]).code == "check_outdated"
    assert code_of(DeclaredCheck, "save", "yesterday", "someone")[0] == "SCORE.CHECK"
    assert code_of(DeclaredCheck, "save", "2024-05-01", " ")[0] == "SCORE.CHECK"


def test_open_conventions_change_something_and_are_listed():
    listed = open_conventions("save")
    assert set(listed["convention"]) == {
        "total_five",
        "weight_65",
        "diastolic_points",
        "pip_without_ventilation",
        "not_intubated",
        "liver_failure_source",
        "renal_failure_source",
    }
    assert listed.groupby("convention")["is_default"].sum().eq(1).all()
    assert len(option_sets("save")) == 1 + len(listed) - listed["is_default"].sum()
    assert open_conventions("tips65").empty


@pytest.mark.parametrize("key", our_catalogue().keys)
def test_every_sheet_can_be_printed(key):
    sheet = describe_score(key)
    assert sheet.caution == CAUTION and sheet.citation["text"] and sheet.long_name
    if key in RESERVED:
        return
    assert sheet.distrust and sheet.points and sheet.inputs and sheet.population_text
    assert all(line["evidence"] for line in (*sheet.points, *sheet.classes, *sheet.population))
    assert all(line["when"] for line in sheet.points)
    assert {x["field"] for x in sheet.inputs} <= set(FIELDS)
    assert pickle.loads(pickle.dumps(sheet)) == sheet


def test_input_fields_carry_unit_window_and_direction():
    table = input_table("save").set_index("input")
    assert tuple(table.loc["dbp_mmhg", ["unit", "window", "worst"]]) == ("mm[Hg]", "pre_worst_6h", "min")
    assert tuple(table.loc["bicarbonate_mmol_l", ["low", "high"]]) == (1.0, 60.0)


@pytest.mark.parametrize(
    ("field", "unit", "expected"),
    [
        # Published conversion tables and UCUM: 88.4, 17.1, 9.01, 18.02, 0.357, 7.5006; pounds by definition.
        ("creatinine_umol_l", "mg/dL", 88.4),
        ("bilirubin_umol_l", "mg/dL", 17.1),
        ("lactate_mmol_l", "mg/dL", 1 / 9.01),
        ("glucose_mmol_l", "mg/dL", 1 / 18.02),
        ("urea_mmol_l", "mg/dL{urea_nitrogen}", 0.357),
        ("urea_mmol_l", "mg/dL", 0.1665),
        ("pao2_mmhg", "kPa", 7.5006),
        ("bicarbonate_mmol_l", "mEq/L", 1.0),
        ("platelets_10_9_l", "10^3/uL", 1.0),
        ("platelets_10_9_l", "/uL", 0.001),
        ("weight_kg", "lb", 0.45359),
        ("height_cm", "in", 2.54),
        ("alt_u_l", "ukat/L", 60.0),
    ],
)
def test_unit_factors(field, unit, expected):
    assert factor(FIELDS[field], unit)[0] == pytest.approx(expected, rel=5e-4)


def test_no_conversion_of_a_ratio_into_an_activity():
    """Prothrombin time, INR and activity are different quantities (common practice)."""
    for unit in ("s", "{INR}"):
        assert code_of(factor, FIELDS["prothrombin_activity_percent"], unit)[0] == "SCORE.UNIT-UNKNOWN"
