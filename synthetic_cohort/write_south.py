"""Style "south": a workbook with a title above the header, typed dates in the run sheet but date texts in the event
sheet, numeric codes explained in a sheet of their own, and the units of the United States.

Of the birth only the year is kept; of the time after, only the last contact.
"""

from __future__ import annotations

import pandas as pd

from synthetic_cohort.cohort import Cohort
from synthetic_cohort.complications import KIND_KEYS
from synthetic_cohort.settings import ENDINGS, GROUPS
from synthetic_cohort.sheets import Cell, Column, Form, Sheet, Tables, build_sheet, coded, flat_frame, moments, wall

FILE = "south_ledger.xlsx"
_TEXT = "%m/%d/%Y %I:%M %p"
_YES_NO: dict[object, Cell] = {True: 1, False: 0}
CAUSE_WORDS = {
    "decompensated_chronic_heart_failure": "long-standing failure", "acute_myocardial_infarction": "coronary",
    "post_cardiotomy": "after open heart", "refractory_ventricular_arrhythmia": "electrical storm",
    "valve_disease_acute": "valve", "pulmonary_embolism": "lung clot", "myocarditis": "inflammation",
    "primary_graft_dysfunction_heart": "new graft weak", "other": "anything else",
}  # fmt: skip
ENDING_WORDS = {
    "recovery": "explanted, heart better", "durable_lvad": "durable device", "transplantation": "transplanted",
    "death": "deceased while on", "withdrawal": "turned off", "temporary_pump": "temporary device",
    "crossover_vv": "lung support only", "transfer_out": "sent on",
}  # fmt: skip
EVENT_WORDS = {
    "bleeding_cannulation_site": "site oozing", "bleeding_gastrointestinal": "gut bleed", "bleeding_surgical_site": "chest bleed",
    "stroke": "brain event", "limb_ischaemia": "leg without blood", "vascular_injury": "artery torn",
    "differential_hypoxaemia": "blue head", "lv_distension": "ventricle full", "intracardiac_thrombus": "cavity clot",
    "haemolysis": "red plasma", "circuit_thrombosis": "fibrin in set", "infection_bloodstream": "positive cultures",
    "infection_respiratory": "chest infection", "renal_replacement": "dialysis begun", "arrest_on_support": "asystole on flow",
    "air_entrainment": "bubbles",
}  # fmt: skip
CONSEQUENCES: dict[object, Cell] = {"seen": 1, "treated": 2, "procedure": 3, "lasting_harm": 4, "fatal": 5}

# Header, column of the flat frame, factor to the written unit, digits, role.
_VALUES = (
    ("Wt lb", "weight_kg", 1 / 0.45359237, 1, "weight"), ("Ht in", "height_cm", 1 / 2.54, 1, ""),
    ("Lactic acid mg/dL", "lactate_mmol_l", 9.0078, 1, "lactate"), ("Lactic acid ED mg/dL", "lactate_admission_mmol_l", 9.0078, 1, ""),
    ("Art. pH", "ph", 1.0, 2, ""), ("Bicarb mEq/L", "bicarbonate_mmol_l", 1.0, 1, ""), ("Base exc. mEq/L", "base_excess_mmol_l", 1.0, 1, ""),
    ("pO2 mmHg", "pao2_mmhg", 1.0, 0, ""), ("pCO2 mmHg", "paco2_mmhg", 1.0, 0, ""), ("FiO2 fraction", "fio2", 1.0, 2, ""),
    ("O2 sat %", "spo2_percent", 1.0, 0, ""), ("Creat mg/dL", "creatinine_umol_l", 1 / 88.4016973125884, 2, "creatinine"),
    ("Creat ED mg/dL", "creatinine_admission_umol_l", 1 / 88.4016973125884, 2, ""), ("BUN mg/dL", "urea_mmol_l", 1 / 0.356964374955, 0, ""),
    ("T bili mg/dL", "bilirubin_umol_l", 1 / 17.1036653154771, 1, "bilirubin"), ("SGPT", "alt_u_l", 1.0, 0, ""), ("SGOT", "ast_u_l", 1.0, 0, ""),
    ("Glucose ED mg/dL", "glucose_admission_mmol_l", 1 / 0.0555074491002, 0, ""), ("Hgb g/dL", "haemoglobin_g_l", 0.1, 1, "haemoglobin"),
    ("Plts K/uL", "platelets_10_9_l", 1.0, 0, "platelets"), ("INR value", "inr", 1.0, 1, ""), ("PT act. %", "prothrombin_activity_percent", 1.0, 0, ""),
    ("CKMB U/L", "ck_mb_activity_u_l", 1.0, 0, ""), ("Alb g/dL", "albumin_g_l", 0.1, 1, ""), ("AG mEq/L", "anion_gap_mmol_l", 1.0, 1, ""),
    ("Coma score", "gcs_total", 1.0, 0, ""), ("Ej. fraction", "lvef_percent", 0.01, 2, ""), ("UOP mL/day", "urine_day_ml", 1.0, 0, ""),
    ("SBP", "sbp_mmhg", 1.0, 0, "pressure"), ("DBP", "dbp_mmhg", 1.0, 0, "pressure"), ("MAP", "map_mmhg", 1.0, 0, ""),
    ("Pulse", "heart_rate_per_min", 1.0, 0, ""), ("CVP mmHg", "cvp_mmhg", 1.0, 0, ""), ("PIP cmH2O", "peak_inspiratory_pressure_cmh2o", 1.0, 0, ""),
    ("Hours on vent before", "intubation_hours", 1.0, 1, ""), ("Norepi", "noradrenaline_ug_kg_min", 1.0, 2, ""), ("Epi", "adrenaline_ug_kg_min", 1.0, 2, ""),
    ("Dobut", "dobutamine_ug_kg_min", 1.0, 1, ""), ("Dopa", "dopamine_ug_kg_min", 1.0, 1, ""), ("Milr", "milrinone_ug_kg_min", 1.0, 2, ""),
    ("Levo", "levosimendan_ug_kg_min", 1.0, 2, ""), ("Vaso U/kg/min", "vasopressin_iu_kg_min", 1.0, 5, ""),
    ("Down time min", "no_flow_min", 1.0, 0, ""), ("CPR min", "low_flow_min", 1.0, 0, ""), ("911 to door min", "call_to_arrival_min", 1.0, 0, ""),
    ("Flow grade", "timi_flow_after_pci", 1.0, 0, ""),
)  # fmt: skip
_FLAGS = (
    ("Arrested", "had_arrest"), ("ECPR", "extracorporeal_cpr"), ("Vented", "ventilated_at_zero"), ("Shockable at door", "shockable_on_arrival"),
    ("Hx CKD", "chronic_kidney_disease"), ("AKI", "acute_renal_failure"), ("Shock liver", "liver_failure"), ("Neuro", "cns_dysfunction"),
    ("AMS", "confusion_at_presentation"), ("On HD", "on_rrt_at_zero"), ("Hx MI", "prior_myocardial_infarction"), ("Hx CABG", "prior_cabg"),
    ("Hx heart op", "prior_cardiac_surgery"), ("Hx CVA", "prior_stroke"), ("Hx DM", "diabetes"), ("Hx HTN", "hypertension"),
    ("CHD", "congenital_heart_disease"), ("Hx OHT", "heart_transplant_recipient"), ("Hx VAD", "durable_vad_before"), ("Arch", "aortic_arch_surgery"),
    ("CVA/coma pre-op", "preoperative_stroke_or_unconscious"), ("ACS y/n", "acute_coronary_syndrome"), ("PCI y/n", "pci_done"),
    ("MCS before", "support_device_before"), ("DPC", "leg_cannula"), ("R radial", "right_sided_monitoring"), ("Vent/unload", "unloading_at_start"),
    ("Came in on flow", "transferred_in"),
)  # fmt: skip


def south_tables(cohort: Cohort) -> Tables:
    """The sheets: runs, events, weaning steps, circuits, attempts, codes."""
    flat = flat_frame(cohort)
    title: list[list[Cell]] = [[f"{cohort.programme.short} - circulatory support ledger"], []]
    runs = build_sheet(FILE, "Episodes", _run_columns(flat), flat["run_no"].tolist(), title)
    sheets = [runs, _events(cohort, flat), _weaning(cohort, flat), _circuits(cohort, flat), _attempts(cohort), _codes()]
    return Tables("south", _form(), sheets, flat, cohort.programme.zone)


def _form() -> Form:
    return Form(
        patterns={"": (_TEXT,), "start": (None,), "end": (None,), "discharge": (None,), "birth": ("%Y",)},
        decimal_mark=None,
        words={"alive": 1, "unknown_code": 9, "text": "pending", "error": "#DIV/0!"},
        slips={"creatinine": (88.4017, 0.06, 33.0), "haemoglobin": (10.0, 1.5, 25.0)},
    )


def _episode(run_no: pd.Series) -> list[Cell]:
    return [f"E-{n:04d}" for n in run_no]


def typed(values: pd.Series, digits: int) -> list[Cell]:
    """Numbers as typed cells, whole ones as integers; empty where missing."""
    return [None if pd.isna(v) else (int(round(v)) if digits == 0 else round(float(v), digits)) for v in values]


def _dates(values: pd.Series) -> list[Cell]:
    return [None if pd.isna(v) else v.to_pydatetime() for v in values]


def _codes_of(words: dict[str, str], keys: tuple[str, ...]) -> dict[object, Cell]:
    return {key: i for i, key in enumerate((k for k in keys if k in words), start=1)}


_GROUP_KEYS = tuple(g.key for g in GROUPS)
CAUSES = _codes_of(CAUSE_WORDS, _GROUP_KEYS)
ENDS = {**_codes_of(ENDING_WORDS, ENDINGS), "open": None}
EVENTS = _codes_of(EVENT_WORDS, KIND_KEYS)


def _run_columns(flat: pd.DataFrame) -> list[Column]:
    columns: list[Column] = [
        ("Episode", "run", _episode(flat["run_no"])), ("Chart", "person", [f"C{r}" for r in flat["record_number"]]),
        ("Nickname", "", [f"{a[:2]}{b[:3]}" for a, b in zip(flat["first_name"], flat["last_name"], strict=True)]),
        ("YOB", "birth", [d.year for d in flat["birth_date"]]), ("Sex code", "sex", coded(flat["sex"], {"female": 2, "male": 1})),
        ("Reason code", "cause", coded(flat["indication_group"], CAUSES)),
        ("Flow on", "start", _dates(flat["start_local"])), ("Flow off", "end", _dates(flat["end_at"])),
        ("Exit code", "end_kind", coded(flat["end_kind"], ENDS, None)),
        ("Goal", "", coded(flat["intended_pathway"], {"recovery": "R", "decision": "D", "durable_lvad": "L", "transplantation": "T"})),
        ("Reached us", "", _dates(flat["arrival_at"])),
        ("Arrest where", "", coded(flat["arrest_location"], {"out_of_hospital": 1, "emergency_department": 2, "in_hospital": 3}, None)),
        ("Rhythm", "", coded(flat["first_rhythm"], {"vf": "VF", "pulseless_vt": "pVT", "pea": "PEA", "asystole": "flat"}, None)),
        ("Shock class", "", coded(flat["shock_stage"], {"C": "C", "D": "D", "E": "E"}, None)),
        ("LV", "", coded(flat["lv_function"], {"normal": "nl", "mild": "mild", "moderate": "mod", "severe": "sev"}, None)),
        ("Return", "", coded(flat["arterial_return"], {"femoral": "F", "axillary": "A", "central": "C"}, None)),
    ]  # fmt: skip
    columns += [(header, role, typed(flat[name] * factor, digits)) for header, name, factor, digits, role in _VALUES]
    columns += [(header, "", coded(flat[name], _YES_NO, None)) for header, name in _FLAGS]
    columns += [
        ("Out of hospital", "discharge", _dates(flat["discharge_at"])), ("Alive out", "alive", coded(flat["is_alive_at_discharge"], _YES_NO, None)),
        ("CPC at exit", "cpc", typed(flat["cpc_recorded"], 0)), ("mRS at exit", "", typed(flat["mrs_recorded"], 0)),
        ("Last heard", "", _dates(flat["contact_at"])), ("Status then", "", coded(flat["vital_status"], {"alive": "A", "dead": "D"}, None)),
        ("Heard by", "", coded(flat["contact_kind"], {"clinic": "visit", "phone": "call", "letter": "mail"}, None)),
    ]  # fmt: skip
    return columns


def _events(cohort: Cohort, flat: pd.DataFrame) -> Sheet:
    events = cohort.complication
    start = flat.set_index("run_no")["start_utc"].reindex(events["run_no"]).reset_index(drop=True)
    columns: list[Column] = [
        ("Ep.", "run", _episode(events["run_no"])), ("Event code", "event", coded(events["kind"], EVENTS)),
        ("Seen at", "onset", moments(wall(cohort, start, events["onset_h"]), _TEXT)),
        ("Over at", "", moments(wall(cohort, start, events["resolved_h"]), _TEXT)),
        ("Weight 1-5", "", coded(events["consequence"], CONSEQUENCES)),
    ]  # fmt: skip
    return build_sheet(FILE, "Events", columns, events["run_no"].tolist())


def _weaning(cohort: Cohort, flat: pd.DataFrame) -> Sheet:
    steps = cohort.weaning_step
    start = flat.set_index("run_no")["start_utc"].reindex(steps["run_no"]).reset_index(drop=True)
    columns: list[Column] = [
        ("Ep.", "run", _episode(steps["run_no"])), ("Trial at", "", moments(wall(cohort, start, steps["study_h"]), _TEXT)),
        ("Flow mL/min", "", typed(steps["flow_l_min"] * 1000.0, 0)), ("MAP", "", typed(steps["map_mmhg"], 0)),
        ("CVP", "", typed(steps["cvp_mmhg"], 0)), ("EF", "", typed(steps["lvef_percent"], 0)),
        ("VTI mm", "", typed(steps["lvot_vti_cm"] * 10.0, 0)), ("S prime", "", typed(steps["lateral_s_prime_cm_s"], 1)),
        ("Verdict", "", coded(steps["result"], {"passed": "ok", "failed": "no"})),
    ]  # fmt: skip
    return build_sheet(FILE, "Flow trials", columns, steps["run_no"].tolist())


def _circuits(cohort: Cohort, flat: pd.DataFrame) -> Sheet:
    parts = cohort.configuration
    start = flat.set_index("run_no")["start_utc"].reindex(parts["run_no"]).reset_index(drop=True)
    columns: list[Column] = [
        ("Ep.", "run", _episode(parts["run_no"])), ("Layout", "", coded(parts["config"], {"va": "V-A", "vav": "V-AV"})),
        ("From", "", moments(wall(cohort, start, parts["from_h"]), _TEXT)), ("Until", "", moments(wall(cohort, start, parts["to_h"]), _TEXT)),
    ]  # fmt: skip
    return build_sheet(FILE, "Circuits", columns, parts["run_no"].tolist())


def _attempts(cohort: Cohort) -> Sheet:
    tries = cohort.attempt
    columns: list[Column] = [
        ("Chart", "", [f"C{r}" for r in tries["record_number"]]), ("Tried at", "", moments(tries["at_local"], _TEXT)),
        ("Why no flow", "", coded(tries["reason"], {"no_access": "access", "no_flow": "no flow", "died_before_flow": "died",
                                                    "injury": "vessel", "other": "misc"})),
    ]  # fmt: skip
    return build_sheet(FILE, "Never on flow", columns, [0] * len(tries))


def _codes() -> Sheet:
    """Three lists one under the other in one sheet; the mapping says which rows belong to which."""
    pairs: list[tuple[Cell, Cell]] = []
    for codes, words in ((CAUSES, CAUSE_WORDS), (ENDS, ENDING_WORDS), (EVENTS, EVENT_WORDS)):
        pairs += [(number, words[str(key)]) for key, number in codes.items() if number is not None]
    return build_sheet(FILE, "Legend", [("No.", "", [a for a, _ in pairs]), ("Stands for", "", [b for _, b in pairs])], [0] * len(pairs))
