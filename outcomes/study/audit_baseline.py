"""Who was supported: section 3 of the audit.

Known at the start; the columns by ending are description only.
"""

from __future__ import annotations

import numpy as np
import pandas as pd

from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import NotEstimable
from outcomes.study.answer import Answer, ColumnOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import ENDINGS, slug

DESCRIBED = Method(
    "median with 25th and 75th percentile (type 7), or x of those recorded",
    citations=("Hyndman RJ, Fan Y. Am Stat 1996;50:361-5.",),
)
MEASURES = {
    "age_years": "age, years",
    "weight_kg": "body mass, kg",
    "bmi_kg_m2": "body mass index, kg/m2",
    "lactate_mmol_l": "lactate before support, mmol/L",
    "ph": "pH before support",
    "bicarbonate_mmol_l": "bicarbonate before support, mmol/L",
    "creatinine_umol_l": "creatinine before support, umol/L",
    "low_flow_min": "low flow, min, those with an arrest",
}
FLAGS = {
    "is_female": "female",
    "had_arrest": "arrest before support",
    "is_extracorporeal_cpr": "started during resuscitation",
    "is_transferred_in": "transferred in on support",
    "has_acute_renal_failure": "acute renal failure before support",
    "has_liver_failure": "liver failure before support",
    "has_cns_dysfunction": "CNS dysfunction before support",
    "has_chronic_kidney_disease": "chronic kidney disease",
}


def baseline(audit: Audit) -> Answer:
    """Medians and shares, overall and by ending; missing kept apart in every cell by its own denominator."""
    frame = _frame(audit)
    if frame.empty:
        raise NotEstimable("no_runs", "No run is in this period.")
    groups = ["all", *[name for name in ENDINGS if (frame["pathway"] == name).any()]]
    measures = _measures(frame, groups)
    shares, labels = _shares(frame, groups)
    n_of = {g: len(frame) if g == "all" else int((frame["pathway"] == g).sum()) for g in groups}
    small = [g for g in groups if n_of[g] < 20]
    notes = (
        (Caution("N-LOW", "Groups with fewer than twenty runs: " + ", ".join(small) + "."),) if small else ()
    )
    return Answer(
        {"measures": Result(measures, DESCRIBED, n_of, notes), "shares": Result(shares, DESCRIBED, n_of)},
        {
            "measures": TableOf(
                "What was measured before support: median (25th to 75th percentile)",
                "Variable",
                "measures",
                _rows(MEASURES, measures),
                _columns(groups, n_of, measured=True),
            ),
            "shares": TableOf(
                "Who was supported: number of those recorded",
                "Variable",
                "shares",
                _rows(labels, shares),
                _columns(groups, n_of, measured=False),
            ),
        },
    )


def _frame(audit: Audit) -> pd.DataFrame:
    run, inputs = audit.current.run, audit.current.score_input
    wanted = [c for c in (*MEASURES, *FLAGS) if c in inputs.columns and c not in run.columns]
    frame = run.merge(inputs[["run_key", *wanted]], on="run_key", validate="one_to_one")
    frame["is_female"] = (
        (frame["sex_recorded"] == "female").where(frame["sex_recorded"].notna()).astype("boolean")
    )
    return frame


def _part(frame: pd.DataFrame, group: str) -> pd.DataFrame:
    return frame if group == "all" else frame[frame["pathway"] == group]


def _measures(frame: pd.DataFrame, groups: list[str]) -> pd.DataFrame:
    rows = []
    for name in MEASURES:
        if frame[name].notna().sum() == 0:
            continue
        for group in groups:
            values = _part(frame, group)[name].dropna().to_numpy(dtype=float)
            row: dict[str, object] = {
                "cause": name,
                "group": group,
                "events": len(values),
                "at_risk": len(_part(frame, group)),
            }
            if len(values):
                low, middle, high = np.quantile(values, [0.25, 0.5, 0.75])
                row |= {"estimate": float(middle), "lower": float(low), "upper": float(high)}
            else:
                row["reason"] = "not_recorded"
            rows.append(row)
    return tidy(rows, ["cause", "group", "estimate", "lower", "upper", "events", "at_risk", "reason"])


def _shares(frame: pd.DataFrame, groups: list[str]) -> tuple[pd.DataFrame, dict[str, str]]:
    rows: list[dict[str, object]] = []
    labels: dict[str, str] = {}
    kinds = sorted(
        frame["indication_group"].dropna().unique(),
        key=lambda k: (-int((frame["indication_group"] == k).sum()), k),
    )
    for name, label in FLAGS.items():
        if frame[name].notna().any():
            labels[name] = label
            rows += [_share(name, group, _part(frame, group)[name]) for group in groups]
    for kind in kinds:
        labels[f"reason_{kind}"] = "reason: " + str(kind).replace("_", " ")
        for group in groups:
            part = _part(frame, group)["indication_group"]
            rows.append(_share(f"reason_{kind}", group, (part == kind).where(part.notna()).astype("boolean")))
    return tidy(rows, ["cause", "group", "events", "at_risk", "reason"]), labels


def _share(name: str, group: str, values: pd.Series) -> dict[str, object]:
    known = int(values.notna().sum())
    row: dict[str, object] = {
        "cause": name,
        "group": group,
        "events": int(values.fillna(False).sum()),
        "at_risk": known,
    }
    return row if known else {"cause": name, "group": group, "reason": "not_recorded"}


def _rows(labels: dict[str, str], table: pd.DataFrame) -> tuple[RowOf, ...]:
    shown = set(table["cause"])
    return tuple(RowOf(slug(key), label, {"cause": key}) for key, label in labels.items() if key in shown)


def _columns(groups: list[str], n_of: dict[str, int], *, measured: bool) -> tuple[ColumnOf, ...]:
    columns = []
    for group in groups:
        heading = f"{'all' if group == 'all' else ENDINGS[group]} (N = {n_of[group]})"
        kind, fields = (
            ("quartiles_1", ("estimate", "lower", "upper")) if measured else ("x_of_n", ("events", "at_risk"))
        )
        columns.append(
            ColumnOf(
                slug(group),
                heading,
                kind,
                fields,
                {"group": group},
                over="" if group == "all" else "by ending, known only afterwards",
            )
        )
    return tuple(columns)


ANALYSES = {"baseline": baseline}
