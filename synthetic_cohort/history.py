"""History before the illness, the state of shock in words, and the arrest before support."""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.given import given
from synthetic_cohort.hazards import Array


def add_history(out: pd.DataFrame, rng: np.random.Generator, run: pd.DataFrame, z: Array) -> None:
    """Yes-no columns of history and of the state before support, added in place."""
    n = len(out)
    kind = run["indication_group"].to_numpy()
    infarct, surgical = kind == "acute_myocardial_infarction", kind == "post_cardiotomy"

    def chance(share: Array | float) -> Array:
        return np.asarray(rng.random(n) < share)

    out["prior_myocardial_infarction"] = chance(np.where(infarct, 0.20, 0.15))
    out["prior_cabg"] = chance(0.08)
    out["prior_cardiac_surgery"] = out["prior_cabg"] | chance(np.where(surgical, 0.18, 0.06))
    out["prior_stroke"] = chance(0.08)
    out["diabetes"], out["hypertension"] = chance(0.28), chance(0.48)
    out["peripheral_artery_disease"] = chance(0.09)
    out["congenital_heart_disease"] = chance(np.where(surgical, 0.05, 0.015))
    out["heart_transplant_recipient"] = kind == "primary_graft_dysfunction_heart"
    out["durable_vad_before"] = chance(np.where(kind == "decompensated_chronic_heart_failure", 0.03, 0.0))
    out["aortic_arch_surgery"] = surgical & chance(0.12)
    out["preoperative_stroke_or_unconscious"] = surgical & chance(0.06)
    out["acute_coronary_syndrome"] = infarct | (chance(0.08) & (kind == "refractory_ventricular_arrhythmia"))
    out["stemi"] = infarct & chance(0.70)
    out["pci_done"] = infarct & chance(0.72)
    flow = (rng.random(n)[:, None] > [0.10, 0.18, 0.33]).sum(axis=1).astype(float)
    out["timi_flow_after_pci"] = np.where(out["pci_done"], flow, np.nan)
    out["on_rrt_at_zero"] = chance(np.where(out["chronic_kidney_disease"], 0.18, 0.04))
    out["acute_renal_failure"] = (out["creatinine_umol_l"] > 133.0) & ~chance(0.10)
    high = (out["bilirubin_umol_l"] >= 33.0) | (out["alt_u_l"] > 70.0) | (out["ast_u_l"] > 70.0)
    out["liver_failure"] = high & ~chance(0.15)
    out["cns_dysfunction"] = chance(
        np.where(run["had_arrest"], 0.22, 0.08) * np.exp(0.15 * np.clip(z, -2, 2))
    )
    out["confusion_at_presentation"] = chance(np.clip(0.40 + 0.10 * z, 0.05, 0.95))
    out["support_device_before"] = chance(0.20)
    worst = (out["lactate_mmol_l"] > 10.0) | run["is_ecpr"].to_numpy()
    out["shock_stage"] = np.select([worst, out["lactate_mmol_l"] > 5.0], ["E", "D"], "C")


def add_arrest(out: pd.DataFrame, rng: np.random.Generator, run: pd.DataFrame) -> None:
    """Arrest before support: place, rhythm, minutes; missing without an arrest. Added in place."""
    n = len(out)
    arrest, ecpr = run["had_arrest"].to_numpy(), run["is_ecpr"].to_numpy()
    outside = (run["arrest_location"] == "out_of_hospital").to_numpy()
    out["had_arrest"], out["extracorporeal_cpr"], out["compressions_at_cannulation"] = arrest, ecpr, ecpr
    out["arrest_location"] = run["arrest_location"]
    low = np.exp(rng.normal(np.log(np.where(ecpr, np.where(outside, 65.0, 42.0), 14.0)), 0.5, n))
    low = np.round(np.clip(low, 2.0, 190.0))
    none = np.round(np.clip(rng.exponential(np.where(outside, 4.0, 0.8), n), 0.0, 30.0))
    before = np.where(ecpr, low + none + rng.integers(0, 4, n), low + none + rng.exponential(300.0, n) + 25.0)
    out["low_flow_min"] = np.where(arrest, low, np.nan)
    out["no_flow_min"] = np.where(arrest, none, np.nan)
    out["arrest_onset_h"] = np.where(arrest, -np.round(before) / 60.0, np.nan)
    rhythms = np.array(["vf", "pulseless_vt", "pea", "asystole"])
    edges = np.where((ecpr & outside)[:, None], [0.62, 0.70, 0.90], [0.28, 0.38, 0.91])
    first = rhythms[(rng.random(n)[:, None] > edges).sum(axis=1)]
    out["first_rhythm"] = given(arrest, first)
    shockable = np.isin(first, ("vf", "pulseless_vt"))
    still = np.where(rng.random(n) < 0.75, shockable, rng.random(n) < 0.15)
    out["shockable_on_arrival"] = given(arrest & outside, still)
    way = np.round(np.clip(rng.normal(32.0, 10.0, n), 8.0, 90.0))
    out["call_to_arrival_min"] = np.where(arrest & outside, way, np.nan)
    out["witnessed"] = given(arrest, rng.random(n) < np.where(outside, 0.80, 0.95))
    out["bystander_cpr"] = given(arrest & outside, rng.random(n) < 0.70)
    out["rosc_before_pump"] = given(arrest, ~ecpr)
