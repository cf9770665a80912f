"""Facts about shock scores and descriptors, each with its source: weights, printed gaps, doses, units."""

import numpy as np
import pandas as pd
import pytest

from outcomes.errors import InputRefused
from outcomes.scores.catalogue import our_catalogue
from outcomes.scores.engine import compute


def total(key, run, **more):
    return compute(key, pd.DataFrame([run]), **more)["total"].iloc[0]


def answer(key, run, **more):
    return compute(key, pd.DataFrame([run]), **more).iloc[0]


# --- IABP-SHOCK II: Pöss J et al., J Am Coll Cardiol 2017;69:1913-1920 ---

IB_RUN = {
    "age_years": 60,
    "prior_stroke": False,
    "glucose_mmol_l": 8.0,
    "creatinine_umol_l": 100.0,
    "lactate_mmol_l": 3.0,
    "timi_flow_after_pci": 3,
    "had_pci": True,
    "is_acute_myocardial_infarction": True,
    "nth_run": 1,
}


def test_iabp_exactly_three_items_carry_two():
    score = our_catalogue().score("iabp_shock_ii")
    weights = sorted(max(row.points for row in item.rows) for item in score.items)
    assert weights == [1, 1, 1, 2, 2, 2] and sum(weights) == 9


def test_iabp_without_intervention_has_no_total():
    run = {**IB_RUN, "had_pci": False, "timi_flow_after_pci": np.nan}
    found = answer("iabp_shock_ii", run)
    assert pd.isna(found["total"]) and (found["total_low"], found["total_high"]) == (0, 2)
    assert found["not_applicable"] == "timi_flow_after_pci"
    assert found["eligible"] == "no"


@pytest.mark.parametrize(
    ("field", "unit", "at", "above"),
    [
        ("creatinine_umol_l", "mg/dL", 1.5, 1.51),
        ("creatinine_umol_l", "umol/L", 132.6, 132.7),
        ("glucose_mmol_l", "mg/dL", 191.0, 192.0),
        ("glucose_mmol_l", "mmol/L", 10.6, 10.7),
    ],
)
def test_iabp_limits_agree_in_both_printed_units(field, unit, at, above):
    """The abstract prints 132.6 µmol/L (1.5 mg/dL), 10.6 mmol/L (191 mg/dL): neither counts at the limit."""
    runs = pd.DataFrame([{**IB_RUN, field: at}, {**IB_RUN, field: above}])
    assert list(compute("iabp_shock_ii", runs, units={field: unit})["total"]) == [0, 1]


# --- BE-ALIVE: Tindale A, Panoulas V, Open Heart 2023;10:e002313; congress abstract for the other weight ---


def test_be_alive_arrest_weight_of_paper_and_abstract():
    run = {
        "base_excess_mmol_l": 0.0,
        "age_years": 60,
        "lactate_mmol_l": 1.0,
        "was_ventilated": False,
        "lv_function": "moderate",
        "had_arrest": True,
        "arrest_location": "out_of_hospital",
    }
    assert total("be_alive", run) == 3
    assert total("be_alive", run, options={"arrest_points": "one"}) == 2
    assert total("be_alive", {**run, "arrest_location": "in_hospital"}) == 1
    assert total("be_alive", {**run, "had_arrest": False, "arrest_location": None}) == 1


# --- BOS,MA2: Yamga E et al., J Am Heart Assoc 2023;12:e029232 ---


def test_bos_ma2_predicts_at_the_ends_only():
    printed = [c.probability for c in our_catalogue().score("bos_ma2").classes]
    assert printed == [0.005, None, 0.702]


# --- SOFA 1996: Vincent JL et al., as reprinted in Singer M et al., JAMA 2016 ---

SOFA_RUN = {
    "pao2_fio2_mmhg": 450.0,
    "was_ventilated": False,
    "platelets_10_9_l": 200.0,
    "bilirubin_umol_l": 10.0,
    "map_mmhg": 75.0,
    "dopamine_ug_kg_min": 0.0,
    "dobutamine_ug_kg_min": 0.0,
    "adrenaline_ug_kg_min": 0.0,
    "noradrenaline_ug_kg_min": 0.0,
    "gcs_total": 15,
    "creatinine_umol_l": 80.0,
    "urine_ml_day": 1500.0,
}


@pytest.mark.parametrize(
    ("change", "points"),
    [
        ({"noradrenaline_ug_kg_min": 0.1}, 3),
        ({"noradrenaline_ug_kg_min": 0.11}, 4),
        ({"dopamine_ug_kg_min": 5.0}, 2),
        ({"dopamine_ug_kg_min": 5.1}, 3),
        ({"dobutamine_ug_kg_min": 0.5}, 2),
        ({"map_mmhg": 69.0}, 1),
        ({"pao2_fio2_mmhg": 150.0}, 2),
        ({"pao2_fio2_mmhg": 150.0, "was_ventilated": True}, 3),
        ({"urine_ml_day": 499.0}, 3),
        ({"urine_ml_day": 199.0}, 4),
    ],
)
def test_sofa_rows(change, points):
    assert total("sofa", {**SOFA_RUN, **change}) == points


def test_sofa_kidney_by_creatinine_alone():
    run = {**SOFA_RUN, "urine_ml_day": np.nan}
    assert pd.isna(total("sofa", run))
    assert total("sofa", run, options={"renal_item": "creatinine_alone"}) == 0


def test_sofa_ratio_from_pressure_and_fraction():
    run = {**SOFA_RUN, "pao2_mmhg": 90.0, "fio2": 0.5}
    del run["pao2_fio2_mmhg"]
    assert total("sofa", run) == 2


# --- Vasoactive-inotropic score: Gaies MG et al., Pediatr Crit Care Med 2010;11:234-238 (from memory) ---

DRUGS = {
    "dopamine_ug_kg_min": 3.0,
    "dobutamine_ug_kg_min": 7.0,
    "adrenaline_ug_kg_min": 0.05,
    "milrinone_ug_kg_min": 0.375,
    "vasopressin_u_kg_min": 0.0005,
    "noradrenaline_ug_kg_min": 0.3,
}


def test_vis_doubles_with_every_rate():
    twice = {name: 2 * rate for name, rate in DRUGS.items()}
    key = "vasoactive_inotropic"
    assert total(key, twice) == pytest.approx(2 * total(key, DRUGS), abs=1e-9)


@pytest.mark.parametrize(("rate", "unit"), [(0.03, "U/min"), (1.8, "U/h"), (0.4, "mU/kg/min")])
def test_vis_vasopressin_units(rate, unit):
    """0.03 U/min at 75 kg is 4 points, not 300 (arithmetic)."""
    run = dict.fromkeys(DRUGS, 0.0) | {"vasopressin_u_kg_min": rate, "weight_kg": 75.0}
    found = total("vasoactive_inotropic", run, units={"vasopressin_u_kg_min": unit})
    assert found == pytest.approx(4.0)


def test_vis_vasopressin_per_minute_without_weight_is_refused():
    run = dict.fromkeys(DRUGS, 0.0) | {"vasopressin_u_kg_min": 0.03}
    for weight in ({}, {"weight_kg": np.nan}):
        with pytest.raises(InputRefused) as refused:
            total("vasoactive_inotropic", run | weight, units={"vasopressin_u_kg_min": "U/min"})
        assert refused.value.code == "INPUT.SCORE_WEIGHT_MISSING"


def test_vis_empty_dose_is_zero_only_if_the_list_is_complete():
    run = {"dopamine_ug_kg_min": 5.0, "noradrenaline_ug_kg_min": 0.1}
    found = answer("vasoactive_inotropic", run)
    assert pd.isna(found["total"]) and found["total_low"] == pytest.approx(15.0)
    assert "vasopressin_u_kg_min" in found["missing"]
    assert total("vasoactive_inotropic", run | {"is_vasoactive_list_complete": True}) == pytest.approx(15.0)


# --- Shock stage: Naidu SS et al., J Am Coll Cardiol 2022; operational cut-offs PMC9652191 table 1 ---


def test_shock_stage_is_the_clinicians_unless_asked():
    run = {"shock_stage": "C", "lactate_mmol_l": 12.0, "ph": 7.1}
    assert answer("shock_stage", run)["class"] == "C"
    computed = answer("shock_stage", run, options={"stage_source": "computed"})
    assert computed["class"] == "E" and computed["total"] == 5


def test_be_alive_mildly_impaired_or_better_takes_one_away():
    totals = compute(
        "be_alive",
        pd.DataFrame({"lv_function": ["normal", "mild", "moderate", "severe"]}),
        declared={
            "base_excess_mmol_l": 0.0,
            "age_years": 60,
            "lactate_mmol_l": 1.0,
            "was_ventilated": False,
            "had_arrest": False,
        },
    )["total"]
    assert totals.tolist() == [-1, -1, 1, 3]
