"""Style "north": one wide CSV with semicolons, byte-order mark, decimal comma, SI units and identifiers.

The end of support stands in two columns, systolic and diastolic pressure in one cell, and each complication
has a column for its first onset. An end that is missing means that support goes on.
"""

from __future__ import annotations

import pandas as pd

from synthetic_cohort.clock import stream
from synthetic_cohort.cohort import Cohort
from synthetic_cohort.complications import KIND_KEYS
from synthetic_cohort.names import remarks
from synthetic_cohort.sheets import (
    Cell,
    Column,
    Form,
    Tables,
    build_sheet,
    coded,
    flat_frame,
    moments,
    numbers,
    wall,
    with_tokens,
)

FILE = "north_supports.csv"
KPA = 7.5006375541921
MBAR = 1.01971621298
_AT, _DAY, _CLOCK = "%d.%m.%Y %H:%M", "%d.%m.%Y", "%H:%M"
YES_NO: dict[object, Cell] = {True: "y", False: "n"}
CAUSES: dict[object, Cell] = {
    "acute_myocardial_infarction": "INF",
    "decompensated_chronic_heart_failure": "CHF",
    "myocarditis": "MYO",
    "refractory_ventricular_arrhythmia": "ARR",
    "post_cardiotomy": "SURG",
    "valve_disease_acute": "VAL",
    "pulmonary_embolism": "PE",
    "primary_graft_dysfunction_heart": "GRAFT",
    "other": "OTH",
}
PLANS: dict[object, Cell] = {
    "recovery": "own heart",
    "decision": "see later",
    "durable_lvad": "pump",
    "transplantation": "new heart",
}
ENDS: dict[object, Cell] = {
    "recovery": "came off",
    "durable_lvad": "durable pump",
    "transplantation": "new heart",
    "death": "died on it",
    "withdrawal": "stopped",
    "temporary_pump": "short-term pump",
    "crossover_vv": "changed to VV",
    "transfer_out": "moved away",
    "open": "",
}
PLACES: dict[object, Cell] = {
    "this_centre_cathlab": "cath",
    "this_centre_icu": "icu",
    "this_centre_theatre": "theatre",
    "this_centre_ed": "emergency",
    "other_hospital_by_our_team": "outside, us",
    "other_hospital_by_others": "outside, them",
}
RHYTHMS: dict[object, Cell] = {"vf": "VF", "pulseless_vt": "VT", "pea": "PEA", "asystole": "ASY"}
ARREST_PLACES: dict[object, Cell] = {
    "out_of_hospital": "street",
    "emergency_department": "ED",
    "in_hospital": "ward",
}
RETURNS: dict[object, Cell] = {"femoral": "groin", "axillary": "armpit", "central": "chest"}
ONSETS = {
    "bleeding_cannulation_site": "Bleed cannula, first",
    "bleeding_gastrointestinal": "Bleed gut, first",
    "bleeding_surgical_site": "Bleed wound, first",
    "stroke": "Stroke, first",
    "limb_ischaemia": "Cold limb, first",
    "vascular_injury": "Vessel injury, first",
    "differential_hypoxaemia": "Upper-body hypoxia, first",
    "lv_distension": "LV stretched, first",
    "intracardiac_thrombus": "Clot in heart, first",
    "haemolysis": "Haemolysis, first",
    "circuit_thrombosis": "Clot in circuit, first",
    "infection_bloodstream": "Blood culture pos., first",
    "infection_respiratory": "Pneumonia, first",
    "renal_replacement": "Kidney machine, first",
    "arrest_on_support": "Arrest on pump, first",
    "air_entrainment": "Air in circuit, first",
}

# Header, column of the flat frame, factor to the written unit, digits, role.
_VALUES = (
    ("Lactate max 6h [mmol/L]", "lactate_mmol_l", 1.0, 1, "lactate"),
    ("Lactate admission [mmol/L]", "lactate_admission_mmol_l", 1.0, 1, ""),
    ("pH low", "ph", 1.0, 2, ""),
    ("HCO3 low [mmol/L]", "bicarbonate_mmol_l", 1.0, 1, ""),
    ("BE [mmol/L]", "base_excess_mmol_l", 1.0, 1, ""),
    ("PaO2 [kPa]", "pao2_mmhg", 1 / KPA, 1, ""),
    ("PaCO2 [kPa]", "paco2_mmhg", 1 / KPA, 1, ""),
    ("FiO2 [%]", "fio2", 100.0, 0, ""),
    ("SpO2 low [%]", "spo2_percent", 1.0, 0, ""),
    ("Creat max [µmol/L]", "creatinine_umol_l", 1.0, 0, "creatinine"),
    ("Creat admission [µmol/L]", "creatinine_admission_umol_l", 1.0, 0, ""),
    ("Urea max [mmol/L]", "urea_mmol_l", 1.0, 1, ""),
    ("Bili max [µmol/L]", "bilirubin_umol_l", 1.0, 0, "bilirubin"),
    ("ALT [U/L]", "alt_u_l", 1.0, 0, ""),
    ("AST [U/L]", "ast_u_l", 1.0, 0, ""),
    ("Glucose admission [mmol/L]", "glucose_admission_mmol_l", 1.0, 1, ""),
    ("Hb low [g/L]", "haemoglobin_g_l", 1.0, 0, "haemoglobin"),
    ("Plt low [G/L]", "platelets_10_9_l", 1.0, 0, "platelets"),
    ("INR", "inr", 1.0, 1, ""),
    ("PT low [%]", "prothrombin_activity_percent", 1.0, 0, ""),
    ("CK-MB [U/L]", "ck_mb_activity_u_l", 1.0, 0, ""),
    ("Anion gap [mmol/L]", "anion_gap_mmol_l", 1.0, 1, ""),
    ("GCS low", "gcs_total", 1.0, 0, ""),
    ("EF [%]", "lvef_percent", 1.0, 0, ""),
    ("GFR admission", "egfr_ml_min_1_73m2", 1.0, 0, ""),
    ("Urine 24h [mL]", "urine_day_ml", 1.0, 0, ""),
    ("Temp [C]", "temperature_cel", 1.0, 1, ""),
    ("NOR [ug/kg/min]", "noradrenaline_ug_kg_min", 1.0, 2, ""),
    ("ADR [ug/kg/min]", "adrenaline_ug_kg_min", 1.0, 2, ""),
    ("DOB [ug/kg/min]", "dobutamine_ug_kg_min", 1.0, 1, ""),
    ("DOP [ug/kg/min]", "dopamine_ug_kg_min", 1.0, 1, ""),
    ("MIL [ug/kg/min]", "milrinone_ug_kg_min", 1.0, 2, ""),
    ("LEVO [ug/kg/min]", "levosimendan_ug_kg_min", 1.0, 2, ""),
    ("VASO [mU/kg/min]", "vasopressin_iu_kg_min", 1000.0, 2, ""),
)
_FLAGS = (
    ("CKD", "chronic_kidney_disease"),
    ("Kidney failing", "acute_renal_failure"),
    ("Liver failing", "liver_failure"),
    ("Brain affected", "cns_dysfunction"),
    ("Confused at first", "confusion_at_presentation"),
    ("On dialysis", "on_rrt_at_zero"),
    ("Old infarct", "prior_myocardial_infarction"),
    ("Old bypass", "prior_cabg"),
    ("Old heart surgery", "prior_cardiac_surgery"),
    ("Old stroke", "prior_stroke"),
    ("Born with heart defect", "congenital_heart_disease"),
    ("Has graft", "heart_transplant_recipient"),
    ("Has durable pump", "durable_vad_before"),
    ("Arch surgery", "aortic_arch_surgery"),
    ("Stroke or coma before surgery", "preoperative_stroke_or_unconscious"),
    ("ACS", "acute_coronary_syndrome"),
    ("STEMI", "stemi"),
    ("PCI", "pci_done"),
    ("Balloon or pump before", "support_device_before"),
)


def north_tables(cohort: Cohort) -> Tables:
    """The sheet of the export."""
    flat = flat_frame(cohort)
    rng = stream(cohort.seed, "north")
    columns: list[Column] = [*_identity(flat), *_start(flat), *_arrest(flat)]
    for header, name, factor, digits, role in _VALUES:
        columns.append(
            (header, role, with_tokens(numbers(flat[name] * factor, digits, ","), rng, ("n/a", "unk")))
        )
    columns += _circulation(flat)
    columns += [(header, "", coded(flat[name], YES_NO)) for header, name in _FLAGS]
    columns += [*_ending(flat), *_outcome(flat), *_onsets(cohort, flat)]
    columns.append(("Remarks", "", list(remarks(rng, len(flat)))))
    sheet = build_sheet(FILE, "", columns, flat["run_no"].tolist())
    return Tables("north", _form(), [sheet], flat, cohort.programme.zone)


def _form() -> Form:
    return Form(
        patterns={"": (_AT,), "end": (_DAY, _CLOCK), "birth": (_DAY,)},
        decimal_mark=",",
        words={"alive": "y", "unknown_code": "?x", "text": "see chart", "error": "#REF!"},
        slips={
            "lactate": (9.0078, 0.05, 40.0),
            "creatinine": (1 / 88.4017, 5.0, 3000.0),
            "haemoglobin": (0.1, 15.0, 250.0),
        },
    )


def _identity(flat: pd.DataFrame) -> list[Column]:
    return [
        ("Support no.", "run", [f"N{n:05d}" for n in flat["run_no"]]),
        ("Record", "person", list(flat["record_number"])),
        ("Family name", "", list(flat["last_name"])),
        ("Given name", "", list(flat["first_name"])),
        ("Tel.", "", list(flat["phone"])),
        ("Born", "birth", moments(flat["birth_date"], _DAY)),
        ("Sex", "sex", coded(flat["sex"], {"female": "w", "male": "m"})),
    ]


def _start(flat: pd.DataFrame) -> list[Column]:
    return [
        ("On pump", "start", moments(flat["start_local"], _AT)),
        ("Cause", "cause", coded(flat["indication_group"], CAUSES)),
        ("Height [m]", "", numbers(flat["height_cm"] / 100.0, 2, ",")),
        ("Weight [kg]", "weight", numbers(flat["weight_kg"], 1, ",")),
        ("Aim on day 0", "", coded(flat["intended_pathway"], PLANS)),
        ("Cannulated", "", coded(flat["cannulated_where"], PLACES)),
        ("Came on pump", "", coded(flat["transferred_in"], YES_NO)),
        ("Arrived here", "", moments(flat["arrival_at"], _AT)),
        ("Decided", "", moments(flat["decision_at"], _AT)),
        ("Stage", "", coded(flat["shock_stage"], {"C": "C", "D": "D", "E": "E"})),
        ("Return via", "", coded(flat["arterial_return"], RETURNS)),
        ("Leg line", "", coded(flat["leg_cannula"], YES_NO)),
        ("Right wrist line", "", coded(flat["right_sided_monitoring"], YES_NO)),
        ("LV drained at start", "", coded(flat["unloading_at_start"], YES_NO)),
    ]


def _arrest(flat: pd.DataFrame) -> list[Column]:
    return [
        ("Arrest", "", coded(flat["had_arrest"], YES_NO)),
        ("Arrest place", "", coded(flat["arrest_location"], ARREST_PLACES)),
        ("First rhythm", "", coded(flat["first_rhythm"], RHYTHMS)),
        ("No flow [min]", "", numbers(flat["no_flow_min"], 0, ",")),
        ("Low flow [min]", "", numbers(flat["low_flow_min"], 0, ",")),
        ("Pump in CPR", "", coded(flat["extracorporeal_cpr"], YES_NO)),
        ("CPR while cannulating", "", coded(flat["compressions_at_cannulation"], YES_NO)),
        ("Shockable on arrival", "", coded(flat["shockable_on_arrival"], YES_NO)),
        ("Call to door [min]", "", numbers(flat["call_to_arrival_min"], 0, ",")),
        ("Pulse back before pump", "", coded(flat["rosc_before_pump"], YES_NO)),
    ]


def _circulation(flat: pd.DataFrame) -> list[Column]:
    pairs = [
        f"{s:.0f}/{d:.0f}" if s == s else "" for s, d in zip(flat["sbp_mmhg"], flat["dbp_mmhg"], strict=True)
    ]
    return [
        ("BP [mmHg]", "pressure", list(pairs)),
        ("Tube placed", "", moments(flat["intubated_at"], _AT)),
        ("Ventilated", "", coded(flat["ventilated_at_zero"], YES_NO)),
        ("Airway peak [mbar]", "", numbers(flat["peak_inspiratory_pressure_cmh2o"] / MBAR, 1, ",")),
        (
            "LV by eye",
            "",
            coded(flat["lv_function"], {"normal": "0", "mild": "1", "moderate": "2", "severe": "3"}),
        ),
        ("TIMI after", "", numbers(flat["timi_flow_after_pci"], 0, ",")),
    ]


def _ending(flat: pd.DataFrame) -> list[Column]:
    return [
        ("Off pump, day", "end", moments(flat["end_at"], _DAY)),
        ("Off pump, clock", "end", moments(flat["end_at"], _CLOCK)),
        ("How it ended", "end_kind", coded(flat["end_kind"], ENDS)),
        ("Planned end", "", coded(flat["end_planned"], YES_NO)),
        (
            "Artery closed",
            "",
            coded(
                flat["arterial_repair"],
                {"open_repair": "sutured", "closure_device": "plug", "pressure": "pressed"},
            ),
        ),
    ]


def _outcome(flat: pd.DataFrame) -> list[Column]:
    words: dict[object, Cell] = {
        "home": "home",
        "rehabilitation": "rehab",
        "other_acute_hospital": "hospital",
        "died": "died",
        "still_inpatient": "still here",
    }
    return [
        ("Left hospital", "discharge", moments(flat["discharge_at"], _AT)),
        ("Left alive", "alive", coded(flat["is_alive_at_discharge"], YES_NO)),
        ("Left to", "", coded(flat["discharge_to"], words)),
        ("CPC", "cpc", numbers(flat["cpc_recorded"], 0, ",")),
        ("Death in register", "death", moments(flat["register_death_at"], _AT)),
    ]


def _onsets(cohort: Cohort, flat: pd.DataFrame) -> list[Column]:
    first = cohort.complication.groupby(["run_no", "kind"])["onset_h"].min().unstack()
    out: list[Column] = []
    for kind in KIND_KEYS:
        hours = (
            flat["run_no"].map(first[kind]) if kind in first else pd.Series(float("nan"), index=flat.index)
        )
        role = "onset" if kind == "stroke" else ""
        out.append((ONSETS[kind], role, moments(wall(cohort, flat["start_utc"], hours.astype(float)), _AT)))
    return out
