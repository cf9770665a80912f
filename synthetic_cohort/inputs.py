"""What was known before support: every quantity that the usual pre-support scores ask for.

Severity pulls lactate, pH, bicarbonate, creatinine, coma score and vasoactive doses in the directions that
published cohorts show; how strongly is a project choice. Column names carry the unit.
"""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.clock import TwiceHours, stream
from synthetic_cohort.hazards import Array
from synthetic_cohort.history import add_arrest, add_history
from synthetic_cohort.settings import Settings

# Share of gaps, missing completely at random. Prothrombin activity is not measured where INR is used.
GAPS = {
    "lactate_mmol_l": 0.03,
    "lactate_admission_mmol_l": 0.08,
    "ph": 0.03,
    "bicarbonate_mmol_l": 0.04,
    "base_excess_mmol_l": 0.05,
    "pao2_mmhg": 0.04,
    "paco2_mmhg": 0.04,
    "fio2": 0.06,
    "spo2_percent": 0.05,
    "creatinine_umol_l": 0.02,
    "creatinine_admission_umol_l": 0.06,
    "urea_mmol_l": 0.05,
    "bilirubin_umol_l": 0.06,
    "alt_u_l": 0.08,
    "ast_u_l": 0.08,
    "glucose_admission_mmol_l": 0.05,
    "haemoglobin_g_l": 0.02,
    "platelets_10_9_l": 0.03,
    "inr": 0.05,
    "prothrombin_activity_percent": 0.60,
    "ck_mb_activity_u_l": 0.50,
    "albumin_g_l": 0.15,
    "anion_gap_mmol_l": 0.10,
    "gcs_total": 0.08,
    "lvef_percent": 0.10,
    "urine_day_ml": 0.15,
    "temperature_cel": 0.05,
    "cvp_mmhg": 0.30,
    "heart_rate_per_min": 0.02,
    "peak_inspiratory_pressure_cmh2o": 0.05,
    "low_flow_min": 0.05,
    "no_flow_min": 0.35,
    "shock_stage": 0.05,
    "confusion_at_presentation": 0.08,
    "sbp_mmhg": 0.02,
    "first_rhythm": 0.08,
    "weight_kg": 0.02,
    "height_cm": 0.04,
}


def input_frame(run: pd.DataFrame, twice: TwiceHours, seed: int, settings: Settings) -> pd.DataFrame:
    """One row a run with every input, complete. What cannot be asked of a run is missing here too: coronary
    flow without an intervention, airway pressure without ventilation, arrest times without an arrest."""
    rng = stream(seed, "inputs")
    z = run["z"].to_numpy() * settings.z_inputs
    out = run[["run_no", "sex", "age_years", "weight_kg", "height_cm"]].copy()
    _add_blood(out, rng, run, z)
    _add_organs(out, rng, run, z)
    _add_circulation(out, rng, run, z)
    _add_doses(out, rng, z)
    add_history(out, rng, run, z)
    add_arrest(out, rng, run)
    out["intubation_hours"] = 0.0 - twice.hours_after(run["start_utc"], -out["intubation_hours"])
    out["arrest_onset_h"] = twice.hours_after(run["start_utc"], out["arrest_onset_h"])
    return out


def recorded_inputs(inputs: pd.DataFrame, run: pd.DataFrame, seed: int, settings: Settings) -> pd.DataFrame:
    """The same with gaps: at random, and mostly no blood pressure for those cannulated in compressions."""
    rng = stream(seed, "gaps")
    out = inputs.copy()
    if not settings.has_missing:
        return out
    for column, share in GAPS.items():
        gap = rng.random(len(out)) < share
        out[column] = out[column].astype(object if out[column].dtype == bool else out[column].dtype).mask(gap)
    out["egfr_ml_min_1_73m2"] = out["egfr_ml_min_1_73m2"].mask(out["creatinine_admission_umol_l"].isna())
    silent = out["sbp_mmhg"].isna() | (run["is_ecpr"].to_numpy() & (rng.random(len(out)) < 0.6))
    for column in ("sbp_mmhg", "dbp_mmhg", "map_mmhg"):
        out[column] = out[column].mask(silent)
    return out


def lognormal(
    rng: np.random.Generator, median: Array | float, sd: float, n: int, shift: Array | float = 0.0
) -> Array:
    """Lognormal draws; shift is added on the log scale."""
    return np.asarray(np.exp(np.log(median) + shift + rng.normal(0.0, sd, n)))


def _add_blood(out: pd.DataFrame, rng: np.random.Generator, run: pd.DataFrame, z: Array) -> None:
    n = len(out)
    ecpr, arrest = run["is_ecpr"].to_numpy(), run["had_arrest"].to_numpy()
    lactate = lognormal(rng, np.select([ecpr, arrest], [11.0, 6.5], 5.2), 0.51, n, 0.55 * z)
    out["lactate_mmol_l"] = np.round(np.clip(lactate, 0.6, 30.0), 1)
    out["lactate_admission_mmol_l"] = np.round(np.clip(lactate * lognormal(rng, 0.75, 0.3, n), 0.5, 30.0), 1)
    ph = np.select([ecpr, arrest], [7.05, 7.18], 7.26) + 0.14 * (-0.55 * z + 0.835 * rng.standard_normal(n))
    out["ph"] = np.round(np.clip(ph, 6.65, 7.60), 2)
    out["bicarbonate_mmol_l"] = np.round(
        np.clip(18.5 + 5.0 * (-0.5 * z + 0.866 * rng.standard_normal(n)), 5.0, 36.0), 1
    )
    base = 0.93 * (out["bicarbonate_mmol_l"] - 24.4 + 14.8 * (out["ph"] - 7.4))
    out["base_excess_mmol_l"] = np.round(np.clip(base, -35.0, 15.0), 1)
    carbon = out["bicarbonate_mmol_l"] / (0.0307 * 10 ** (out["ph"] - 6.1))
    out["paco2_mmhg"] = np.round(np.clip(carbon, 16.0, 118.0), 1)
    out["pao2_mmhg"] = np.round(np.clip(lognormal(rng, 105.0, 0.5, n, -0.1 * z), 32.0, 550.0), 1)
    out["fio2"] = np.round(np.clip(0.7 + 0.08 * z + rng.normal(0, 0.2, n), 0.21, 1.0), 2)
    out["spo2_percent"] = np.round(np.clip(93.0 - 2.0 * z + rng.normal(0, 5.0, n), 55.0, 100.0))
    out["haemoglobin_g_l"] = np.round(np.clip(rng.normal(110.0, 22.0, n), 52.0, 185.0))
    out["platelets_10_9_l"] = np.round(np.clip(lognormal(rng, 175.0, 0.45, n), 15.0, 590.0))
    inr = np.clip(lognormal(rng, 1.45, 0.28, n, 0.1 * z), 0.9, 5.8)
    out["inr"] = np.round(inr, 1)
    out["prothrombin_activity_percent"] = np.round(np.clip(95.0 / inr + rng.normal(0, 8.0, n), 12.0, 118.0))
    out["anion_gap_mmol_l"] = np.round(
        np.clip(9.0 + 0.8 * out["lactate_mmol_l"] + rng.normal(0, 3.0, n), 4.0, 44.0), 1
    )


def _add_organs(out: pd.DataFrame, rng: np.random.Generator, run: pd.DataFrame, z: Array) -> None:
    n = len(out)
    chronic = rng.random(n) < np.where(
        run["indication_group"] == "decompensated_chronic_heart_failure", 0.25, 0.10
    )
    out["chronic_kidney_disease"] = chronic
    creatinine = lognormal(rng, np.where(chronic, 190.0, 115.0), 0.38, n, 0.3 * z)
    out["creatinine_umol_l"] = np.round(np.clip(creatinine, 36.0, 880.0))
    out["creatinine_admission_umol_l"] = np.round(
        np.clip(creatinine * lognormal(rng, 0.85, 0.2, n), 34.0, 880.0)
    )
    out["egfr_ml_min_1_73m2"] = np.round(_filtration(out), 0)
    out["urea_mmol_l"] = np.round(
        np.clip(lognormal(rng, np.where(chronic, 15.0, 9.0), 0.45, n, 0.15 * z), 2.0, 58.0), 1
    )
    out["bilirubin_umol_l"] = np.round(np.clip(lognormal(rng, 18.0, 0.7, n, 0.15 * z), 3.0, 380.0))
    out["alt_u_l"] = np.round(np.clip(lognormal(rng, 80.0, 1.2, n, 0.3 * z), 8.0, 9500.0))
    out["ast_u_l"] = np.round(np.clip(out["alt_u_l"] * lognormal(rng, 1.4, 0.4, n), 8.0, 9900.0))
    out["ck_mb_activity_u_l"] = np.round(np.clip(lognormal(rng, 70.0, 0.9, n), 6.0, 990.0))
    out["glucose_admission_mmol_l"] = np.round(np.clip(lognormal(rng, 10.5, 0.35, n, 0.1 * z), 2.5, 38.0), 1)
    out["albumin_g_l"] = np.round(np.clip(rng.normal(29.0, 6.0, n), 11.0, 48.0))
    out["urine_day_ml"] = np.round(np.clip(lognormal(rng, 900.0, 0.8, n, -0.3 * z), 0.0, 4800.0), -1)
    score = np.where(run["is_ecpr"], 3.0, 12.5 + 4.5 * (-0.35 * z + 0.937 * rng.standard_normal(n)))
    out["gcs_total"] = np.round(np.clip(score, 3.0, 15.0))


def _filtration(out: pd.DataFrame) -> Array:
    """Estimated filtration rate by the creatinine equation of 2021 (coefficients from memory)."""
    female = (out["sex"] == "female").to_numpy()
    ratio = out["creatinine_umol_l"].to_numpy() / 88.4 / np.where(female, 0.7, 0.9)
    power = np.where(female, -0.241, -0.302)
    rate = 142.0 * np.minimum(ratio, 1.0) ** power * np.maximum(ratio, 1.0) ** -1.2
    return np.asarray(
        np.clip(rate * 0.9938 ** out["age_years"].to_numpy() * np.where(female, 1.012, 1.0), 5.0, 120.0)
    )


def _add_circulation(out: pd.DataFrame, rng: np.random.Generator, run: pd.DataFrame, z: Array) -> None:
    n = len(out)
    out["sbp_mmhg"] = np.round(np.clip(84.0 - 4.0 * z + rng.normal(0, 14.0, n), 40.0, 170.0))
    gap = np.clip(rng.normal(34.0, 10.0, n), 9.0, 90.0)
    out["dbp_mmhg"] = np.round(np.clip(out["sbp_mmhg"] - gap, 20.0, 110.0))
    out["map_mmhg"] = np.round((out["sbp_mmhg"] + 2.0 * out["dbp_mmhg"]) / 3.0)
    out["heart_rate_per_min"] = np.round(np.clip(rng.normal(106.0, 24.0, n), 30.0, 205.0))
    out["cvp_mmhg"] = np.round(np.clip(rng.normal(14.0, 5.0, n), 2.0, 29.0))
    out["temperature_cel"] = np.round(np.clip(rng.normal(36.1, 1.0, n), 30.2, 40.5), 1)
    right = (run["indication_group"] == "pulmonary_embolism").to_numpy()
    lvef = np.where(right, 48.0, 20.0) - 2.0 * z + rng.normal(0, 8.0, n)
    out["lvef_percent"] = np.round(np.clip(lvef, 5.0, 65.0))
    out["lv_function"] = np.select(
        [out["lvef_percent"] < 30, out["lvef_percent"] < 42, out["lvef_percent"] < 52],
        ["severe", "moderate", "mild"],
        "normal",
    )
    ventilated = run["is_ecpr"].to_numpy() | (rng.random(n) < 0.82)
    out["ventilated_at_zero"] = ventilated
    hours = np.clip(np.where(run["is_ecpr"], rng.exponential(1.2, n), rng.exponential(16.0, n)), 0.0, 400.0)
    out["intubation_hours"] = np.where(ventilated, np.round(hours, 1), np.nan)
    pressure = np.round(np.clip(rng.normal(26.0, 5.5, n), 11.0, 44.0))
    out["peak_inspiratory_pressure_cmh2o"] = np.where(ventilated, pressure, np.nan)


def _add_doses(out: pd.DataFrame, rng: np.random.Generator, z: Array) -> None:
    """Vasoactive doses at the highest in the 6 h before support; 0 is not given."""
    n = len(out)
    for drug, share, median, top, digits in (
        ("noradrenaline_ug_kg_min", 0.85, 0.25, 1.9, 2),
        ("adrenaline_ug_kg_min", 0.35, 0.12, 1.9, 2),
        ("dobutamine_ug_kg_min", 0.45, 6.0, 19.5, 1),
        ("dopamine_ug_kg_min", 0.08, 6.0, 19.5, 1),
        ("milrinone_ug_kg_min", 0.12, 0.35, 0.74, 2),
        ("levosimendan_ug_kg_min", 0.04, 0.1, 0.2, 2),
        ("vasopressin_iu_kg_min", 0.25, 0.0004, 0.001, 5),
    ):
        given = rng.random(n) < share
        dose = np.round(np.clip(lognormal(rng, median, 0.5, n, 0.45 * z), 10.0**-digits, top), digits)
        out[drug] = np.where(given, dose, 0.0)
