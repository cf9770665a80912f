"""Proportions and their differences, independent and paired."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd
from harness import Case

from outcomes.analysis.rates import paired_difference, proportion, proportion_difference
from outcomes.analysis.result import Result

NEVER = "never printed: another interval is"


def _pair(result: Result, low: str = "lower", high: str = "upper") -> list[Any]:
    row = result.table.iloc[0]
    return [row[low], row[high]]


def _absent(value: Any) -> bool:
    return all(v is pd.NA for v in np.atleast_1d(np.asarray(value, dtype=object)))


def one(case: Case) -> dict[str, Any]:
    x, n = case.inputs["x"], case.inputs["n"]
    names = {"wilson": "wilson", "clopper_pearson": "exact", "midp": "midp", "jeffreys": "jeffreys"}
    found: dict[str, Any] = {
        theirs: _pair(proportion(x, n, interval=ours, level=case.level)) for theirs, ours in names.items()
    }
    return found | {"p": proportion(x, n).table["estimate"].iloc[0]}


def difference(case: Case) -> dict[str, Any]:
    counts = [case.inputs[k] for k in ("x1", "n1", "x2", "n2")]
    newcombe = proportion_difference(*counts, test="fisher", level=case.level)
    score = proportion_difference(*counts, interval="miettinen-nurminen", level=case.level)
    row = newcombe.table.iloc[0]
    found = {
        "diff": row["estimate"],
        "newcombe": _pair(newcombe),
        "miettinen_nurminen": _pair(score),
        "risk_ratio": row["ratio"],
        "rr_katz_log": _pair(newcombe, "ratio_lower", "ratio_upper"),
        "fisher_p": row["p_value"],
    }
    # With a zero numerator there is no ratio, in the case as in ours.
    return {name: v for name, v in found.items() if name in case.expected or not _absent(v)}


def paired(case: Case) -> dict[str, Any]:
    counts = [case.inputs[k] for k in ("both", "first_only", "second_only", "neither")]
    result = paired_difference(*counts, level=case.level)
    row = result.table.iloc[0]
    return {"diff": row["estimate"], "newcombe_paired_method10": _pair(result), "p_exact": row["p_exact"],
            "p_midp": row["p_value"]}  # fmt: skip


NOT_OURS = {
    "proportion_ci": dict.fromkeys(("wilson_cc_yates", "agresti_coull_unclipped"), NEVER),
    "proportion_difference": dict.fromkeys(("wald", "agresti_caffo", "odds_ratio", "or_woolf"), NEVER),
    "mcnemar": dict.fromkeys(
        ("score_paired_uncorrected_phi", "chisq", "p_asymptotic", "chisq_cc_edwards", "p_cc"), NEVER
    ),
}
ANSWERS = {"proportion_ci": one, "proportion_difference": difference, "mcnemar": paired}
