"""Facts about the scores made for ECMO, each with its source: steps, probabilities, conventions, units."""

import numpy as np
import pandas as pd
import pytest

from outcomes.scores.catalogue import our_catalogue
from outcomes.scores.engine import compute, item_table

SAVE_RUN = {
    "age_years": 45,
    "weight_kg": 80.0,
    "is_myocarditis": False,
    "is_refractory_vt_vf": False,
    "is_transplant_graft": False,
    "is_congenital": False,
    "has_liver_failure": False,
    "has_cns_dysfunction": False,
    "has_acute_renal_failure": False,
    "has_chronic_kidney_disease": False,
    "intubation_hours": 5.0,
    "was_ventilated": True,
    "peak_inspiratory_pressure_cmh2o": 25.0,
    "had_arrest": False,
    "dbp_mmhg": 50.0,
    "pulse_pressure_mmhg": 30.0,
    "bicarbonate_mmol_l": 20.0,
    "is_extracorporeal_cpr": False,
    "nth_run": 1,
}


def total(key, run, **more):
    return compute(key, pd.DataFrame([run]), **more)["total"].iloc[0]


def answer(key, run, **more):
    return compute(key, pd.DataFrame([run]), **more).iloc[0]


# --- SAVE: Schmidt M et al., Eur Heart J 2015;36:2246-56 (points second-hand or from memory) ---


@pytest.mark.parametrize("failure", ["has_liver_failure", "has_cns_dysfunction", "has_acute_renal_failure"])
def test_save_each_organ_failure_takes_exactly_three(failure):
    assert total("save", SAVE_RUN) - total("save", {**SAVE_RUN, failure: True}) == 3


@pytest.mark.parametrize(("younger", "older", "step"), [(38, 39, 3), (52, 53, 1), (62, 63, 3)])
def test_save_age_steps(younger, older, step):
    low, high = ({**SAVE_RUN, "age_years": age} for age in (older, younger))
    assert total("save", high) - total("save", low) == step


def test_save_acute_and_chronic_renal_failure_both_count():
    """Needed for the published minimum of −35."""
    both = {**SAVE_RUN, "has_acute_renal_failure": True, "has_chronic_kidney_disease": True}
    assert total("save", SAVE_RUN) - total("save", both) == 9


def test_save_weight_is_not_monotone_as_printed():
    light, middle, heavy = (total("save", {**SAVE_RUN, "weight_kg": kg}) for kg in (60.0, 75.0, 95.0))
    assert (middle - light, middle - heavy) == (1, 2)


def test_save_convention_total_of_five():
    """Class I is remembered as above 5; secondary renderings put 5 into class I."""
    five = {**SAVE_RUN, "age_years": 38, "weight_kg": 90.0, "dbp_mmhg": 39.0, "pulse_pressure_mmhg": 25.0}
    five |= {"peak_inspiratory_pressure_cmh2o": 20.0, "weight_kg": 65.0}
    assert total("save", five) == 5
    default, other = answer("save", five), answer("save", five, options={"total_five": "class_i"})
    assert (default["class"], default["predicted"]) == ("II", 0.58)
    assert (other["class"], other["predicted"]) == ("I", 0.75)


def test_save_convention_exactly_65_kg():
    run = {**SAVE_RUN, "weight_kg": 65.0}
    second = total("save", run, options={"weight_65": "second_row"})
    assert second - total("save", run) == 1
    assert total("save", {**run, "weight_kg": 65.1}) == second


def test_save_convention_diastolic_points():
    """A secondary script gives 1; the published maximum of 17 needs 3."""
    assert total("save", SAVE_RUN) - total("save", SAVE_RUN, options={"diastolic_points": "one"}) == 2


def test_save_not_ventilated_leaves_the_pressure_open_unless_a_convention_says_otherwise():
    run = {**SAVE_RUN, "was_ventilated": False}
    run |= {"intubation_hours": np.nan, "peak_inspiratory_pressure_cmh2o": np.nan}
    left_open = answer("save", run)
    assert pd.isna(left_open["total"])
    assert left_open["total_high"] - left_open["total_low"] == 3
    assert left_open["missing"] == ""
    assert left_open["not_applicable"] == "intubation_hours; peak_inspiratory_pressure_cmh2o"
    zero = total("save", run, options={"pip_without_ventilation": "zero"})
    three = total("save", run, options={"pip_without_ventilation": "three"})
    assert (zero, three) == (left_open["total_low"], left_open["total_high"])
    wide = answer("save", run, options={"not_intubated": "interval"})
    assert (wide["total_low"], wide["total_high"]) == (zero - 4, three)


def test_save_pressures_during_compressions_are_not_applicable_not_missing():
    run = {**SAVE_RUN, "had_compressions_at_cannulation": True}
    run |= {"dbp_mmhg": np.nan, "pulse_pressure_mmhg": np.nan}
    found = answer("save", run)
    assert pd.isna(found["total"]) and found["missing"] == ""
    assert found["not_applicable"] == "dbp_mmhg; pulse_pressure_mmhg"
    assert found["total_high"] - found["total_low"] == 5
    assert answer("save", {**run, "had_compressions_at_cannulation": False})["not_applicable"] == ""


@pytest.mark.parametrize(
    ("labs", "fails"),
    [
        ({"bilirubin_umol_l": 32.9, "alt_u_l": 70.0, "ast_u_l": 70.0}, False),
        ({"bilirubin_umol_l": 33.0, "alt_u_l": 70.0, "ast_u_l": 70.0}, True),
        ({"bilirubin_umol_l": 10.0, "alt_u_l": 70.1, "ast_u_l": np.nan}, True),
        ({"bilirubin_umol_l": 10.0, "alt_u_l": 10.0, "ast_u_l": 71.0}, True),
    ],
)
def test_save_liver_failure_by_laboratory(labs, fails):
    """Bilirubin at least 33 µmol/L or ALT or AST above 70 U/L (from memory)."""
    measured = total("save", {**SAVE_RUN, **labs}, options={"liver_failure_source": "measured"})
    assert total("save", SAVE_RUN) - measured == (3 if fails else 0)
    either = total(
        "save",
        {**SAVE_RUN, **labs, "has_liver_failure": True},
        options={"liver_failure_source": "either"},
    )
    assert total("save", SAVE_RUN) - either == 3


@pytest.mark.parametrize(("mg_dl", "fails"), [(1.5, False), (1.51, True)])
def test_save_renal_failure_by_creatinine(mg_dl, fails):
    """Creatinine above 1.5 mg/dL (second-hand)."""
    run = {**SAVE_RUN, "creatinine_umol_l": mg_dl}
    found = total(
        "save",
        run,
        units={"creatinine_umol_l": "mg/dL"},
        options={"renal_failure_source": "measured"},
    )
    assert total("save", SAVE_RUN) - found == (3 if fails else 0)


# --- PC-ECMO: Biancari F et al., J Thorac Cardiovasc Surg 2020;159:1844 ---


def test_pc_ecmo_observed_mortality_falls_twice():
    printed = {c.key: c.probability for c in our_catalogue().score("pc_ecmo").classes}
    assert list(printed.values()) == [0.456, 0.405, 0.511, 0.578, 0.707, 0.683, 0.775, 0.897]
    assert printed["1"] < printed["0"] and printed["5"] < printed["4"]


PC_RUN = {
    "age_years": 65,
    "sex": "male",
    "prior_cardiac_surgery": False,
    "lactate_mmol_l": 5.0,
    "aortic_arch_surgery": False,
    "preoperative_stroke_or_unconscious": False,
    "is_post_cardiotomy": True,
    "nth_run": 1,
}


def test_pc_ecmo_lactate_convention_reads_the_other_window():
    run = {**PC_RUN, "lactate_mmol_l_pre_last": 7.0}
    del run["lactate_mmol_l"]
    run["lactate_mmol_l_pre_worst_6h"] = 5.0
    default = answer("pc_ecmo", run)
    last = answer("pc_ecmo", run, options={"lactate_window": "last"})
    assert last["total"] - default["total"] == 2
    assert "lactate_mmol_l_pre_worst_6h" in default["inputs_used"]
    assert "lactate_mmol_l_pre_last" in last["inputs_used"]


def test_pc_ecmo_exclusions_of_the_later_analysis():
    silent = answer("pc_ecmo", PC_RUN)
    assert silent["eligible"] == "yes" and silent["predicted"] == 0.511
    strict = answer("pc_ecmo", PC_RUN, options={"later_exclusions": "must_be_recorded"})
    assert strict["eligible"] == "unknown"
    assert "descending_aortic_surgery" in strict["eligibility_reason"]
    out = answer("pc_ecmo", {**PC_RUN, "is_after_durable_vad": True})
    assert out["eligible"] == "no" and "durable VAD" in out["eligibility_reason"]
    assert pd.isna(out["predicted"]) and out["total"] == 2


def test_pc_ecmo_54_mg_dl_does_not_reach_6_mmol_l():
    """The abstract prints 6.0 mmol/L (54 mg/dL); 54 mg/dL is 5.995 mmol/L."""
    totals = compute(
        "pc_ecmo",
        pd.DataFrame([{**PC_RUN, "lactate_mmol_l": value} for value in (54.0, 54.1)]),
        units={"lactate_mmol_l": "mg/dL"},
    )["total"]
    assert list(totals) == [2, 4]


# --- TiPS65: Okada Y et al., JAMA Netw Open 2020;3(11):e2022920; predictions of PMID 36442597 ---


def test_tips65_probability_strictly_rises_and_is_not_survival():
    score = our_catalogue().score("tips65")
    printed = [c.probability for c in score.classes]
    assert printed == [0.016, 0.045, 0.12, 0.262, 0.488]
    assert (np.diff(printed) > 0).all()
    assert score.event == "favourable_neurology"


def test_tips65_printed_ranges_hold_the_means():
    for c in our_catalogue().score("tips65").classes:
        if c.printed_low is not None:
            assert c.printed_low < c.probability < c.printed_high


# --- ENCOURAGE: Muller G et al., Intensive Care Med 2016;42:370-378 ---

EN_RUN = {
    "age_years": 50,
    "sex": "male",
    "bmi_kg_m2": 24.0,
    "gcs_total": 15,
    "creatinine_umol_l": 100.0,
    "lactate_mmol_l": 1.0,
    "prothrombin_activity_percent": 80.0,
    "is_acute_myocardial_infarction": True,
    "nth_run": 1,
}


def test_encourage_lactate_of_eight():
    """The abstract: 2-8 gives 8, above 8 gives 11; a study script codes exactly 8 as 11."""
    run = {**EN_RUN, "lactate_mmol_l": 8.0}
    assert total("encourage", run) == 8
    assert total("encourage", run, options={"lactate_eight": "eleven"}) == 11


@pytest.mark.parametrize(("mg_dl", "points"), [(1.69, 0), (1.70, 5)])
def test_encourage_creatinine_is_compared_at_full_precision(mg_dl, points):
    """1.70 mg/dL is 150.28 µmol/L and above 150; 1.69 is 149.4 (arithmetic)."""
    run = {**EN_RUN, "creatinine_umol_l": mg_dl}
    assert total("encourage", run, units={"creatinine_umol_l": "mg/dL"}) == points


def test_encourage_coma_score_convention():
    run = {**EN_RUN, "gcs_total_before_sedation": 14, "gcs_total_pre_worst_24h": 3}
    del run["gcs_total"]
    assert total("encourage", run) == 0
    assert total("encourage", run, options={"coma_score": "worst"}) == 6


def test_encourage_body_mass_index_from_weight_and_height():
    run = {**EN_RUN, "weight_kg": 81.0, "height_cm": 180.0}
    del run["bmi_kg_m2"]
    assert total("encourage", run) == 0, "81 kg at 1.80 m is exactly 25.0"
    assert total("encourage", {**run, "weight_kg": 82.0}) == 6


def test_encourage_classes_as_printed():
    printed = {c.key: c.probability for c in our_catalogue().score("encourage").classes}
    assert printed == {"0-12": 0.8, "13-18": 0.58, "19-22": 0.25, "23-27": 0.2, "28 or more": 0.07}


def test_item_table_traces_one_total():
    points = item_table("save", pd.DataFrame([SAVE_RUN]))
    assert points["points_low"].sum() - 6 == total("save", SAVE_RUN)
    assert list(points["item"][:4]) == ["myocarditis", "refractory_vt_vf", "transplant", "congenital"]
