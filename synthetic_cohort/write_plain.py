"""Style "plain": one small tidy CSV, UTF-8, ISO times in local time, one row a run."""

from __future__ import annotations

from synthetic_cohort.cohort import Cohort
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
)

FILE = "plain_runs.csv"
_AT, _DAY = "%Y-%m-%dT%H:%M", "%Y-%m-%d"
_YES_NO: dict[object, Cell] = {True: "yes", False: "no"}

_VALUES = (
    ("height_cm", "height_cm", 0, ""),
    ("weight_kg", "weight_kg", 1, "weight"),
    ("lactate", "lactate_mmol_l", 1, "lactate"),
    ("ph", "ph", 2, ""),
    ("bicarbonate", "bicarbonate_mmol_l", 1, ""),
    ("creatinine", "creatinine_umol_l", 0, "creatinine"),
    ("bilirubin", "bilirubin_umol_l", 0, "bilirubin"),
    ("alt", "alt_u_l", 0, ""),
    ("platelets", "platelets_10_9_l", 0, "platelets"),
    ("systolic", "sbp_mmhg", 0, "pressure"),
    ("diastolic", "dbp_mmhg", 0, "pressure"),
    ("airway_peak", "peak_inspiratory_pressure_cmh2o", 0, ""),
    ("intubation_hours", "intubation_hours", 1, ""),
    ("low_flow_min", "low_flow_min", 0, ""),
)


def plain_tables(cohort: Cohort) -> Tables:
    """The sheet of the export."""
    flat = flat_frame(cohort)
    columns: list[Column] = [
        ("run", "run", [f"P{n}" for n in flat["run_no"]]),
        ("person", "person", [f"H{n}" for n in flat["person_no"]]),
        ("born", "birth", moments(flat["birth_date"], _DAY)),
        ("sex", "sex", list(flat["sex"])),
        ("start", "start", moments(flat["start_local"], _AT)),
        ("arrival", "", moments(flat["arrival_at"], _AT)),
        ("indication", "cause", list(flat["indication_group"])),
        ("plan", "", list(flat["intended_pathway"])),
        ("arrest", "", coded(flat["had_arrest"], _YES_NO)),
        ("during_compressions", "", coded(flat["extracorporeal_cpr"], _YES_NO)),
        ("ventilated", "", coded(flat["ventilated_at_zero"], _YES_NO)),
        ("chronic_kidney_disease", "", coded(flat["chronic_kidney_disease"], _YES_NO)),
        ("acute_renal_failure", "", coded(flat["acute_renal_failure"], _YES_NO)),
        ("liver_failure", "", coded(flat["liver_failure"], _YES_NO)),
        ("cns_dysfunction", "", coded(flat["cns_dysfunction"], _YES_NO)),
        ("arterial_return", "", list(flat["arterial_return"])),
    ]
    columns += [(header, role, numbers(flat[name], digits, ".")) for header, name, digits, role in _VALUES]
    columns += [
        ("end", "end", moments(flat["end_at"], _AT)),
        ("ending", "end_kind", ["" if k == "open" else k for k in flat["end_kind"]]),
        ("discharge", "discharge", moments(flat["discharge_at"], _AT)),
        ("alive", "alive", coded(flat["is_alive_at_discharge"], _YES_NO)),
        ("death", "death", moments(flat["register_death_at"], _AT)),
        ("cpc", "cpc", numbers(flat["cpc_recorded"], 0, ".")),
    ]
    return Tables(
        "plain",
        _form(),
        [build_sheet(FILE, "", columns, flat["run_no"].tolist())],
        flat,
        cohort.programme.zone,
    )


def _form() -> Form:
    return Form(
        patterns={"": (_AT,), "birth": (_DAY,)},
        decimal_mark=".",
        words={"alive": "yes", "unknown_code": "x9", "text": "high", "error": "#VALUE!"},
        slips={"lactate": (9.0078, 0.05, 40.0), "creatinine": (1 / 88.4017, 5.0, 3000.0)},
    )
