"""Weaning studies in steps of flow, and circuit configurations as intervals."""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.clock import TwiceHours, stream

FLOWS = (4.0, 2.5, 1.3)
RECORDED = 0.70
"""Share of planned decannulations with a recorded study."""


def weaning_frame(run: pd.DataFrame, ending: pd.DataFrame, twice: TwiceHours, seed: int) -> pd.DataFrame:
    """One row a step: run_no, study_h, flow_l_min, map_mmhg, cvp_mmhg, lvef_percent, lvot_vti_cm,
    lateral_s_prime_cm_s, result ('passed' in the last study of those that came off, else 'failed')."""
    rng = stream(seed, "weaning")
    kind, end = ending["end_kind"].to_numpy(), ending["observed_h"].to_numpy()
    weaned = kind == "recovery"
    long_enough = end > 30.0
    last = np.flatnonzero(weaned & long_enough & (rng.random(len(run)) < RECORDED))
    failed = np.flatnonzero((end > 72.0) & (rng.random(len(run)) < np.where(weaned, 0.25, 0.30)))
    rows = np.concatenate([last, failed])
    passed = np.concatenate([np.ones(len(last), dtype=bool), np.zeros(len(failed), dtype=bool)])
    before = np.where(passed, rng.uniform(1.0, 8.0, len(rows)), rng.uniform(12.0, 40.0, len(rows)))
    study = twice.hours_after(run["start_utc"].iloc[rows].reset_index(drop=True), end[rows] - before)
    studies = pd.DataFrame({"row": rows, "study_h": np.minimum(study, end[rows]), "passed": passed})
    steps = studies.loc[studies.index.repeat(len(FLOWS))].reset_index(drop=True)
    n = len(steps)
    low = np.tile(np.arange(len(FLOWS)), len(studies)) / (len(FLOWS) - 1)
    good = steps["passed"].to_numpy()
    gain = np.where(good, 1.0, 0.35) * low
    out = pd.DataFrame(
        {
            "run_no": run["run_no"].to_numpy()[steps["row"]],
            "study_h": steps["study_h"],
            "flow_l_min": np.tile(FLOWS, len(studies)),
            "map_mmhg": np.round(
                np.clip(72.0 - np.where(good, 2.0, 12.0) * low + rng.normal(0, 6, n), 40, 120)
            ),
            "cvp_mmhg": np.round(np.clip(9.0 + np.where(good, 2.0, 6.0) * low + rng.normal(0, 2, n), 1, 28)),
            "lvef_percent": np.round(np.clip(19.0 + 11.0 * gain + rng.normal(0, 4, n), 5, 60)),
            "lvot_vti_cm": np.round(np.clip(7.5 + 5.0 * gain + rng.normal(0, 1.2, n), 2, 24), 1),
            "lateral_s_prime_cm_s": np.round(np.clip(4.2 + 3.0 * gain + rng.normal(0, 0.8, n), 2, 14), 1),
            "result": np.where(good, "passed", "failed"),
        }
    )
    order = out.assign(step=-out["flow_l_min"]).sort_values(["run_no", "study_h", "step"], kind="stable")
    return order.drop(columns="step").reset_index(drop=True)


def configuration_frame(run: pd.DataFrame, ending: pd.DataFrame, complication: pd.DataFrame) -> pd.DataFrame:
    """Intervals that tile support without gap: run_no, config, from_h, to_h (missing while open).

    V-A throughout, but V-AV from half an hour after a first differential hypoxaemia on.
    """
    lack = complication[complication["kind"] == "differential_hypoxaemia"].groupby("run_no")["onset_h"].min()
    change = run["run_no"].map(lack).to_numpy(dtype=float) + 0.5
    end, seen = ending["end_h"].to_numpy(dtype=float), ending["observed_h"].to_numpy(dtype=float)
    changes = change < seen - 1.0
    first = pd.DataFrame(
        {"run_no": run["run_no"], "config": "va", "from_h": 0.0, "to_h": np.where(changes, change, end)}
    )
    then = pd.DataFrame({"run_no": run["run_no"], "config": "vav", "from_h": change, "to_h": end})[changes]
    return pd.concat([first, then]).sort_values(["run_no", "from_h"]).reset_index(drop=True)
