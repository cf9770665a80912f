"""Units a declared column may have, and the exact factor to the canonical unit.

canonical = received × factor. Factors for mass to substance concentration follow the molar masses creatinine
113.12, bilirubin 584.67, lactate 90.078, glucose 180.156, urea 60.056 g/mol (nitrogen 28.014); pressures
follow UCUM (m[Hg] = 133.3220 kPa, 98.0665 Pa/cm[H2O]); pounds and inches by definition. Nothing converts a
prothrombin time or an INR into an activity: they are different quantities.
"""

from __future__ import annotations

from difflib import get_close_matches

from outcomes.errors import UsageError
from outcomes.scores.fields import Field

PER_WEIGHT = "per weight"
_KPA = 1.0 / 0.133322

_FACTORS: dict[str, dict[str, float]] = {
    "age": {"a": 1.0},
    "mass": {"kg": 1.0, "g": 0.001, "[lb_av]": 0.45359237},
    "length": {"cm": 1.0, "m": 100.0, "mm": 0.1, "[in_i]": 2.54},
    "body_mass_index": {"kg/m2": 1.0},
    "hours": {"h": 1.0, "min": 1.0 / 60.0, "d": 24.0},
    "minutes": {"min": 1.0, "h": 60.0, "s": 1.0 / 60.0},
    "airway_pressure": {"cm[H2O]": 1.0, "mbar": 1.0 / 0.980665, "kPa": 10.0 / 0.980665},
    "pressure": {"mm[Hg]": 1.0, "kPa": _KPA, "cm[H2O]": 0.0980665 * _KPA},
    "monovalent": {"mmol/L": 1.0, "meq/L": 1.0},
    "lactate": {"mmol/L": 1.0, "mg/dL": 10.0 / 90.078},
    "creatinine": {"umol/L": 1.0, "mg/dL": 10000.0 / 113.12},
    "bilirubin": {"umol/L": 1.0, "mg/dL": 10000.0 / 584.67},
    "glucose": {"mmol/L": 1.0, "mg/dL": 10.0 / 180.156},
    "urea": {"mmol/L": 1.0, "mg/dL": 10.0 / 60.056, "mg/dL{urea_nitrogen}": 10.0 / 28.014},
    "enzyme": {"U/L": 1.0, "ukat/L": 60.0},
    "platelets": {"10*9/L": 1.0, "10*3/uL": 1.0, "/uL": 0.001},
    "percent": {"%": 1.0, "1": 100.0},
    "filtration": {"mL/min/{1.73_m2}": 1.0},
    "urine": {"mL/d": 1.0, "L/d": 1000.0},
    "dose": {"ug/kg/min": 1.0, "mg/kg/h": 1000.0 / 60.0},
    "vasopressin": {"[iU]/kg/min": 1.0, "m[iU]/kg/min": 0.001},
}

# Rates that mean nothing without the weight: divided by it.
_PER_WEIGHT: dict[str, dict[str, float]] = {
    "dose": {"ug/min": 1.0, "mg/h": 1000.0 / 60.0},
    "vasopressin": {"[iU]/min": 1.0, "[iU]/h": 1.0 / 60.0},
}

_ALIASES = {
    "mmHg": "mm[Hg]",
    "cmH2O": "cm[H2O]",
    "years": "a",
    "year": "a",
    "lb": "[lb_av]",
    "in": "[in_i]",
    "mEq/L": "meq/L",
    "10^9/L": "10*9/L",
    "10^3/uL": "10*3/uL",
    "IU/L": "U/L",
    "[iU]/L": "U/L",
    "mcg/kg/min": "ug/kg/min",
    "mcg/min": "ug/min",
    "U/kg/min": "[iU]/kg/min",
    "mU/kg/min": "m[iU]/kg/min",
    "U/min": "[iU]/min",
    "U/h": "[iU]/h",
    "percent": "%",
    "hours": "h",
    "minutes": "min",
    "mL/day": "mL/d",
    "mL/min/1.73m2": "mL/min/{1.73_m2}",
}


def spelt(unit: str) -> str:
    """One spelling for a unit: both micro signs become u, everyday forms become UCUM.

    >>> spelt("µmol/L"), spelt("mmHg")
    ('umol/L', 'mm[Hg]')
    """
    plain = unit.strip().replace("µ", "u").replace("μ", "u")
    return _ALIASES.get(plain, plain)


def factor(field: Field, unit: str) -> tuple[float, bool]:
    """(factor, divide by weight too) from `unit` to the unit of `field`.

    Raises UsageError SCORE.UNIT-UNKNOWN if no exact conversion exists.

    >>> from outcomes.scores.fields import FIELDS
    >>> round(factor(FIELDS["creatinine_umol_l"], "mg/dL")[0], 4)
    88.4017
    """
    name = spelt(unit)
    if name == field.unit:
        return 1.0, False
    plain = _FACTORS.get(field.quantity, {})
    weighed = _PER_WEIGHT.get(field.quantity, {})
    if name in plain:
        return plain[name], False
    if name in weighed:
        return weighed[name], True
    known = sorted({*plain, *weighed, field.unit})
    near = get_close_matches(name, known, n=1)
    hint = f"did you mean {near[0]}? " if near else ""
    raise UsageError(
        "SCORE.UNIT-UNKNOWN",
        f"no exact conversion of {field.name} from {unit!r} to {field.unit}",
        todo=f"{hint}declare one of: {', '.join(known)}",
    )
