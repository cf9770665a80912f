"""Answers and refusals: eligibility in three values, missing apart from not applicable, nothing on doubt."""

import numpy as np
import pandas as pd
import pytest

from outcomes.errors import InputRefused, UsageError
from outcomes.scores.catalogue import our_catalogue
from outcomes.scores.engine import ANSWER_COLUMNS, compute

RUN = {
    "age_years": 64,
    "call_to_arrival_min": 25.0,
    "rhythm_shockable_at_arrival": True,
    "ph": 7.0,
    "is_extracorporeal_cpr": True,
    "arrest_location": "out_of_hospital",
    "had_first_rhythm_shockable": True,
    "nth_run": 1,
}


def tips(**change):
    return compute("tips65", pd.DataFrame([{**RUN, **change}])).iloc[0]


def code_of(call, *args, **more):
    with pytest.raises((UsageError, InputRefused)) as refused:
        call(*args, **more)
    return refused.value.code, str(refused.value)


def test_an_eligible_complete_run():
    found = tips()
    assert tuple(found.index) == ANSWER_COLUMNS
    assert (found["total"], found["class"], found["eligible"], found["predicted"]) == (4, "4", "yes", 0.488)
    assert found["predicted_horizon"] == "1 month" and found["prediction_evidence"] == "verified"
    assert found["eligibility_reason"] == "" and found["missing"] == "" and found["table"] == "ours"
    assert found["inputs_used"] == "age_years; call_to_arrival_min; rhythm_shockable_at_arrival; ph"


@pytest.mark.parametrize(
    ("change", "eligible", "reason"),
    [
        ({"age_years": 17}, "no", "aged 18 or more"),
        ({"is_extracorporeal_cpr": False}, "no", "extracorporeal resuscitation"),
        ({"arrest_location": "in_hospital"}, "no", "arrest out of hospital"),
        ({"had_first_rhythm_shockable": False}, "no", "shockable first rhythm"),
        ({"nth_run": 2}, "no", "first run"),
        ({"arrest_location": None}, "unknown", "arrest_location"),
        ({"arrest_location": "unknown"}, "unknown", "arrest_location"),
        ({"arrest_location": "other"}, "unknown", "arrest_location"),
        ({"arrest_location": None, "nth_run": 2}, "no", "first run"),
        ({"age_years": np.nan}, "unknown", "age_years"),
    ],
)
def test_eligibility_names_the_rule_or_the_field(change, eligible, reason):
    found = tips(**change)
    assert found["eligible"] == eligible and reason in found["eligibility_reason"]
    assert pd.isna(found["predicted"]) and pd.isna(found["prediction_evidence"])


@pytest.mark.parametrize(
    ("key", "field", "value"),
    [
        ("save", "is_extracorporeal_cpr", True),
        ("encourage", "is_acute_myocardial_infarction", False),
        ("pc_ecmo", "is_post_cardiotomy", False),
        ("iabp_shock_ii", "had_pci", False),
        ("be_alive", "is_acute_coronary_syndrome", False),
        ("cardshock", "is_cardiogenic_shock", False),
        ("bos_ma2", "shock_stage", "B"),
    ],
)
def test_outside_the_population_is_named_in_every_score(key, field, value):
    score = our_catalogue().score(key)
    frame = pd.DataFrame([{score.items[0].inputs[0]: None, field: value, "age_years": 50, "nth_run": 1}])
    found = compute(key, frame).iloc[0]
    assert found["eligible"] == "no" and found["eligibility_reason"].startswith("outside the population")


def test_a_missing_value_leaves_bounds_and_its_name():
    found = tips(ph=np.nan)
    assert pd.isna(found["total"]) and (found["total_low"], found["total_high"]) == (3, 4)
    assert found["missing"] == "ph" and pd.isna(found["class"]) and pd.isna(found["predicted"])


def test_class_without_total_if_both_ends_agree():
    """SAVE far below −10: one unknown item cannot leave class V; no prediction, the run is incomplete."""
    score = our_catalogue().score("save")
    worst = next(v for v in score.vectors if v.key == "SV2")
    frame = pd.DataFrame([{**worst.inputs, "dbp_mmhg": np.nan, "nth_run": 1, "is_extracorporeal_cpr": False}])
    found = compute("save", frame).iloc[0]
    assert pd.isna(found["total"]) and found["class"] == "V" and found["eligible"] == "yes"
    assert pd.isna(found["predicted"])


def test_a_missing_column_is_unknown_in_every_row_and_an_empty_frame_is_fine():
    frame = pd.DataFrame([RUN, RUN]).drop(columns="ph")
    assert compute("tips65", frame)["missing"].tolist() == ["ph", "ph"]
    none = compute("tips65", pd.DataFrame([RUN]).iloc[:0])
    assert len(none) == 0 and tuple(none.columns) == ANSWER_COLUMNS
    assert none.dtypes["total"] == "Int64"


def test_all_values_missing_gives_the_whole_range_and_no_warning():
    empty = pd.DataFrame({name: [None, None] for name in RUN})
    found = compute("tips65", empty)
    assert found["total_low"].tolist() == [0, 0] and found["total_high"].tolist() == [4, 4]


def test_declared_facts_hold_for_every_row():
    frame = pd.DataFrame([RUN, RUN]).drop(columns=["nth_run", "arrest_location"])
    assert set(compute("tips65", frame)["eligible"]) == {"unknown"}
    facts = {"nth_run": 1, "arrest_location": "out_of_hospital"}
    assert set(compute("tips65", frame, declared=facts)["eligible"]) == {"yes"}
    assert code_of(compute, "tips65", pd.DataFrame([RUN]), declared={"ph": 7.0})[0] == "SCORE.FIELD"


def test_mapped_columns_need_a_unit_where_there_is_one():
    frame = pd.DataFrame([RUN]).rename(columns={"call_to_arrival_min": "call", "ph": "first_ph"})
    maps = {"call_to_arrival_min": "call", "ph": "first_ph"}
    code, text = code_of(compute, "tips65", frame, columns=maps)
    assert code == "SCORE.UNIT-UNDECLARED" and "call" in text
    found = compute("tips65", frame, columns=maps, units={"call_to_arrival_min": "min"})
    assert found["total"].iloc[0] == 4


@pytest.mark.parametrize(
    ("more", "code", "hint"),
    [
        ({"units": {"call_to_arrival_min": "mim"}}, "SCORE.UNIT-UNKNOWN", "did you mean min"),
        ({"units": {"call_to_arival_min": "min"}}, "SCORE.FIELD", "did you mean call_to_arrival_min"),
        ({"columns": {"ph": "pH_art"}}, "SCORE.COLUMN", "did you mean"),
        ({"options": {"no_such": "x"}}, "SCORE.OPTION", "no convention"),
    ],
)
def test_misspelt_declarations_are_refused_with_the_nearest(more, code, hint):
    frame = pd.DataFrame([RUN]).assign(pH_arterial=7.0)
    got, text = code_of(compute, "tips65", frame, **more)
    assert got == code and hint in text


def test_misspelt_names_offer_the_nearest():
    assert "did you mean encourage?" in code_of(compute, "encurage", pd.DataFrame([RUN]))[1]
    assert code_of(compute, "SAVE", pd.DataFrame([RUN]))[0] == "SCORE.UNKNOWN"
    text = code_of(compute, "save", pd.DataFrame([RUN]), options={"total_five": "clas_ii"})[1]
    assert "did you mean class_ii?" in text


@pytest.mark.parametrize(
    ("change", "code"),
    [
        ({"ph": 70.0}, "INPUT.SCORE_HARD_LIMIT"),
        ({"age_years": -1}, "INPUT.SCORE_HARD_LIMIT"),
        ({"call_to_arrival_min": np.inf}, "INPUT.SCORE_HARD_LIMIT"),
        ({"nth_run": 1.5}, "INPUT.SCORE_VALUE_KIND"),
        ({"ph": "7.2"}, "INPUT.SCORE_VALUE_KIND"),
        ({"ph": True}, "INPUT.SCORE_VALUE_KIND"),
        ({"rhythm_shockable_at_arrival": "yes"}, "INPUT.SCORE_VALUE_KIND"),
        ({"rhythm_shockable_at_arrival": 2}, "INPUT.SCORE_VALUE_KIND"),
        ({"arrest_location": "street"}, "INPUT.SCORE_VALUE_KIND"),
        ({"age_years": None, "age_low": 60, "age_high": 50}, "INPUT.SCORE_INTERVAL"),
    ],
)
def test_impossible_values_are_refused_without_showing_them(change, code):
    frame = pd.DataFrame([{**RUN, **change}])
    got, text = code_of(compute, "tips65", frame)
    assert got == code
    assert "street" not in text and "70" not in text


def test_a_foreign_frame_is_refused():
    assert code_of(compute, "save", pd.DataFrame({"x": [1.0]}))[0] == "SCORE.NO-INPUT"
    twin = pd.DataFrame([[7.0, 7.1]], columns=["ph", "ph"])
    assert code_of(compute, "tips65", twin)[0] == "SCORE.COLUMN"


@pytest.mark.parametrize("make", ["float", "Int64", "boolean", "category", "object", "pyarrow"])
def test_every_sensible_column_type_gives_the_same_answer(make):
    frame = pd.DataFrame([RUN, {**RUN, "ph": np.nan, "arrest_location": "in_hospital"}])
    expected = compute("tips65", frame)
    flags = ["rhythm_shockable_at_arrival", "is_extracorporeal_cpr", "had_first_rhythm_shockable"]
    change = {
        "float": {name: "float64" for name in [*flags, "age_years", "nth_run"]},
        "Int64": {"age_years": "Int64", "nth_run": "Int64", "ph": "Float64"},
        "boolean": dict.fromkeys(flags, "boolean"),
        "category": {"arrest_location": "category"},
        "object": dict.fromkeys(frame.columns, object),
        "pyarrow": {"ph": "double[pyarrow]", "age_years": "int64[pyarrow]", flags[0]: "bool[pyarrow]"},
    }[make]
    pd.testing.assert_frame_equal(compute("tips65", frame.astype(change)), expected)


@pytest.mark.parametrize(("age", "points"), [(64.99, 1), (65.0, 0)])
def test_age_counts_in_completed_years(age, points):
    """A convention: the printed brackets (18-38, 39-52) presuppose whole years."""
    assert tips(age_years=age)["total"] == 3 + points


def test_a_recorded_sex_that_no_table_gives_points_to_leaves_the_item_open():
    found = compute("pc_ecmo", pd.DataFrame({"sex": ["other", "unknown", "female"]}))
    assert (found["total_high"] - found["total_low"]).tolist() == [17, 17, 16]
    assert "sex" in found["missing"].iloc[0] and "sex" not in found["missing"].iloc[2]
