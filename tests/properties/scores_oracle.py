"""A second, slow reading of the score tables: straight from the TOML, one run at a time, in plain Python.

It shares nothing with the engine but the file, so that both would have to be wrong in the same way.
"""

import tomllib
from fractions import Fraction

from outcomes.resources import score_files

TOML = {key: tomllib.loads(text) for key, text, _ in score_files()}
FACTORS = {
    ("creatinine_umol_l", "mg/dL"): Fraction(1000000, 11312),
    ("bilirubin_umol_l", "mg/dL"): Fraction(1000000, 58467),
    ("glucose_mmol_l", "mg/dL"): Fraction(10000, 180156),
    ("urea_mmol_l", "mg/dL{urea_nitrogen}"): Fraction(10000, 28014),
}


def in_force(part, chosen):
    return not part.get("only_with") or any(f"{k}={v}" in part["only_with"] for k, v in chosen.items())


def default_options(data):
    return {c["key"]: c["default"] for c in data.get("convention", [])}


def _inside(value, band, scale):
    exact = Fraction(str(value)) if isinstance(value, float) else Fraction(value)
    tests = {
        "at_least": lambda bound: exact >= bound,
        "above": lambda bound: exact > bound,
        "at_most": lambda bound: exact <= bound,
        "below": lambda bound: exact < bound,
    }
    return all(holds(Fraction(str(band[k])) * scale) for k, holds in tests.items() if k in band)


def _holds(test, run):
    value = run[test["input"]]
    if "is" in test:
        return value == test["is"]
    if "is_any" in test:
        return value in test["is_any"]
    return _inside(value, test, FACTORS.get((test["input"], test.get("unit")), Fraction(1)))


def item_points(item, run, chosen):
    """Points of one item for a run in which every value is known."""
    if "points_per_unit" in item:
        return item["points_per_unit"] * run[item["input"]]
    if "yes" in item:
        return item["yes"] if run[item["input"]] else item["no"]
    if "values" in item:
        return next(
            r["points"] for r in item["values"] if run[item["input"]] in r.get("is_any", [r.get("is")])
        )
    if "cases" in item:
        for row in (row for row in item["cases"] if in_force(row, chosen)):
            if all(_holds(test, run) for test in row["when"]):
                return row["points"]
        return item["otherwise"]
    scale = FACTORS.get((item["input"], item.get("unit")), Fraction(1))
    rows = [row for row in item["bands"] if in_force(row, chosen)]
    return next(row["points"] for row in rows if _inside(run[item["input"]], row, scale))


def total(key, run, options=None):
    """The total of a complete run."""
    data = TOML[key]
    chosen = {**default_options(data), **(options or {})}
    items = [item for item in data["item"] if in_force(item, chosen)]
    return data.get("constant", 0) + sum(item_points(item, run, chosen) for item in items)
