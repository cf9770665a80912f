"""The quantities a score may read: canonical name, kind, unit, hard limits.

A score table names a field; what the field means, its unit and what is impossible stand here once. A table
of a site may bring a field of its own (kind, unit and limits in the table). Hard limits are physical or
arithmetical impossibilities (project choice), not merely unusual values.
"""

from __future__ import annotations

from dataclasses import dataclass

KINDS = ("number", "whole", "completed_years", "yes_no", "choice")
NUMERIC_KINDS = ("number", "whole", "completed_years")

# When a value was taken. "run": a property of the run or the person, no time attached.
WINDOWS = (
    "run",
    "admission",
    "hospital_arrival",
    "pre_worst_6h",
    "pre_worst_24h",
    "pre_last",
    "before_sedation",
    "at_cannulation",
    "after_pci",
    "icu_first_24h",
    "post_1h",
    "post_6h",
    "post_12h",
)
WORST = ("none", "max", "min", "last", "first", "any")


@dataclass(frozen=True)
class Field:
    """One input quantity. `quantity` picks the unit table; limits are in `unit`, both ends allowed."""

    name: str
    kind: str
    unit: str = ""
    quantity: str = ""
    low: float | None = None
    high: float | None = None
    choices: tuple[str, ...] = ()

    @property
    def is_numeric(self) -> bool:
        return self.kind in NUMERIC_KINDS

    @property
    def needs_unit(self) -> bool:
        """Counts, grades and pH have no unit to get wrong."""
        return self.kind in ("number", "completed_years") and self.unit != "1"


def _number(name: str, unit: str, quantity: str, low: float, high: float) -> Field:
    return Field(name, "number", unit, quantity, low, high)


def _dose(drug: str, high: float) -> Field:
    return _number(f"{drug}_ug_kg_min", "ug/kg/min", "dose", 0.0, high)


_NUMBERS = (
    Field("age_years", "completed_years", "a", "age", 0.0, 120.0),
    _number("weight_kg", "kg", "mass", 20.0, 400.0),
    _number("height_cm", "cm", "length", 80.0, 250.0),
    _number("bmi_kg_m2", "kg/m2", "body_mass_index", 8.0, 100.0),
    _number("intubation_hours", "h", "hours", 0.0, 8760.0),
    _number("peak_inspiratory_pressure_cmh2o", "cm[H2O]", "airway_pressure", 0.0, 100.0),
    _number("sbp_mmhg", "mm[Hg]", "pressure", 0.0, 300.0),
    _number("dbp_mmhg", "mm[Hg]", "pressure", 0.0, 200.0),
    _number("map_mmhg", "mm[Hg]", "pressure", 0.0, 250.0),
    _number("pulse_pressure_mmhg", "mm[Hg]", "pressure", 0.0, 200.0),
    _number("bicarbonate_mmol_l", "mmol/L", "monovalent", 1.0, 60.0),
    _number("base_excess_mmol_l", "mmol/L", "monovalent", -40.0, 40.0),
    _number("anion_gap_mmol_l", "mmol/L", "monovalent", -20.0, 80.0),
    _number("lactate_mmol_l", "mmol/L", "lactate", 0.05, 40.0),
    _number("creatinine_umol_l", "umol/L", "creatinine", 5.0, 3000.0),
    _number("bilirubin_umol_l", "umol/L", "bilirubin", 0.0, 1500.0),
    _number("urea_mmol_l", "mmol/L", "urea", 0.2, 120.0),
    _number("glucose_mmol_l", "mmol/L", "glucose", 0.2, 110.0),
    _number("alt_u_l", "U/L", "enzyme", 0.0, 60000.0),
    _number("ast_u_l", "U/L", "enzyme", 0.0, 60000.0),
    _number("ph", "1", "none", 6.3, 8.0),
    _number("platelets_10_9_l", "10*9/L", "platelets", 0.0, 2500.0),
    _number("prothrombin_activity_percent", "%", "percent", 0.0, 200.0),
    _number("lvef_percent", "%", "percent", 0.0, 90.0),
    _number("spo2_percent", "%", "percent", 0.0, 100.0),
    _number("egfr_ml_min_1_73m2", "mL/min/{1.73_m2}", "filtration", 0.0, 250.0),
    _number("pao2_mmhg", "mm[Hg]", "pressure", 5.0, 760.0),
    _number("fio2", "1", "none", 0.21, 1.0),
    _number("pao2_fio2_mmhg", "mm[Hg]", "pressure", 5.0, 3620.0),
    _number("urine_ml_day", "mL/d", "urine", 0.0, 20000.0),
    _number("call_to_arrival_min", "min", "minutes", 0.0, 1440.0),
    _dose("dopamine", 60.0),
    _dose("dobutamine", 60.0),
    _dose("adrenaline", 10.0),
    _dose("noradrenaline", 10.0),
    _dose("milrinone", 3.0),
    _dose("levosimendan", 1.0),
    _number("vasopressin_u_kg_min", "[iU]/kg/min", "vasopressin", 0.0, 0.01),
    Field("gcs_total", "whole", "1", "none", 3.0, 15.0),
    Field("timi_flow_after_pci", "whole", "1", "none", 0.0, 3.0),
    Field("nth_run", "whole", "1", "none", 1.0, 20.0),
    Field("n_vasoactive_drugs", "whole", "1", "none", 0.0, 20.0),
    Field("n_support_devices", "whole", "1", "none", 0.0, 10.0),
)

_CHOICES = (
    Field("sex", "choice", choices=("female", "male")),
    Field(
        "arrest_location",
        "choice",
        choices=("out_of_hospital", "emergency_department", "in_hospital", "none"),
    ),
    Field("lv_function", "choice", choices=("normal", "mild", "moderate", "severe")),
    Field("shock_stage", "choice", choices=("A", "B", "C", "D", "E")),
)

_YES_NO = (
    "is_acute_myocardial_infarction",
    "is_acute_coronary_syndrome",
    "is_myocarditis",
    "is_refractory_vt_vf",
    "is_transplant_graft",
    "is_congenital",
    "is_post_cardiotomy",
    "is_extracorporeal_cpr",
    "is_after_durable_vad",
    "is_cardiogenic_shock",
    "is_vasoactive_list_complete",
    "had_arrest",
    "had_compressions_at_cannulation",
    "had_pci",
    "had_first_rhythm_shockable",
    "had_confusion_at_presentation",
    "was_ventilated",
    "has_acute_renal_failure",
    "has_liver_failure",
    "has_cns_dysfunction",
    "has_chronic_kidney_disease",
    "was_sedated_at_coma_score",
    "prior_stroke",
    "prior_mi_or_cabg",
    "prior_cardiac_surgery",
    "aortic_arch_surgery",
    "descending_aortic_surgery",
    "preoperative_stroke_or_unconscious",
    "support_before_surgery",
    "rhythm_shockable_at_arrival",
)

FIELDS: dict[str, Field] = {
    field.name: field for field in (*_NUMBERS, *_CHOICES, *(Field(name, "yes_no") for name in _YES_NO))
}

# Age known only within limits, as from a year of birth.
INTERVAL_COLUMNS = {"age_years": ("age_low", "age_high")}
