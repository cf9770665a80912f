"""Hop 4, second half: marts become validated frames. The only place where SQL becomes pandas."""

from __future__ import annotations

from dataclasses import dataclass, replace

import duckdb
import pandas as pd

from outcomes.errors import OutcomesError

# Kind of each column by the end of its name or by its name; anything else is text.
_NUMBER_ENDS = (
    "_h",
    "_m2",
    "_kg",
    "_cm",
    "_mmhg",
    "_mmol_l",
    "_umol_l",
    "_u_l",
    "_10_9_l",
    "_percent",
    "_kg_min",
    "_min",
    "_cmh2o",
    "_hours",
    "_ml_day",
)
_WHOLE = (
    "nth_run",
    "run_year",
    "age_years",
    "age_low_years",
    "cause",
    "cpc",
    "open_days",
    "n",
    "stage_no",
    "episode_no",
    "n_records",
    "n_events",
    "n_before",
    "n_after_end",
    "n_too_early",
    "timi_flow_after_pci",
    "gcs_total",
)
_NUMBERS = (
    "lactate_mmol_l_admission",
    "lactate_mmol_l_pre_last",
    "creatinine_umol_l_admission",
    "ph",
    "fio2",
    "hours_at_risk",
    "hours_to_first",
    "value",
    "egfr_ml_min_1_73m2",
)
_FLAGS = (
    "died",
    "had_arrest",
    "was_ventilated",
    "transferred_in",
    "leg_cannula",
    "right_sided_monitoring",
    "prior_stroke",
    "prior_cardiac_surgery",
    "prior_mi_or_cabg",
    "aortic_arch_surgery",
    "preoperative_stroke_or_unconscious",
    "rhythm_shockable_at_arrival",
    "plan_is_from_start",
    "age_topcoded",
)


# A column of mart.score_input for one window: the name of the quantity and then the window.
_ASKED = ("_pre_worst_6h", "_pre_worst_24h", "_hospital_arrival")


def kind_of(column: str) -> str:
    """pandas type of a mart column by its name.

    >>> kind_of("end_h"), kind_of("is_open"), kind_of("run_key"), kind_of("gcs_total_pre_worst_24h")
    ('Float64', 'boolean', 'string', 'Int64')
    """
    column = next((column.removesuffix(end) for end in _ASKED if column.endswith(end)), column)
    if column in _FLAGS or column.startswith(("is_", "has_", "had_", "was_", "observable_")):
        return "boolean"
    if column in _WHOLE:
        return "Int64"
    if column in _NUMBERS or column.endswith(_NUMBER_ENDS):
        return "Float64"
    return "string"


def check_frame(frame: pd.DataFrame, key: tuple[str, ...]) -> pd.DataFrame:
    """Nullable types by name, sorted by key; raises OutcomesError INTERNAL.GRAIN if the key is not unique."""
    cast = frame.astype({c: kind_of(c) for c in frame.columns})
    if cast.duplicated(list(key)).any():
        raise OutcomesError("INTERNAL.GRAIN", f"the grain {', '.join(key)} is not unique")
    return cast.sort_values(list(key), ignore_index=True)


@dataclass(frozen=True)
class Cohort:
    """Frames of one store, each at the grain of its mart, and what is needed to say where they came from.

    run, ending, survival, score_input: one row a run. complication: run x kind. state: run x stay. flow:
    source x stage. missing: run x field. score_window: run x quantity x window that a score asks for, where
    the value is of another time. carried: (source, field) that a source has at all. batches: one row an
    import. findings: one row a finding of the ledger. kinds: complication vocabulary with definition and
    gaps.
    """

    run: pd.DataFrame
    ending: pd.DataFrame
    survival: pd.DataFrame
    complication: pd.DataFrame
    state: pd.DataFrame
    score_input: pd.DataFrame
    score_window: pd.DataFrame
    flow: pd.DataFrame
    missing: pd.DataFrame
    set_aside: pd.DataFrame
    carried: pd.DataFrame
    source: pd.DataFrame
    coverage: pd.DataFrame
    batches: pd.DataFrame
    findings: pd.DataFrame
    kinds: pd.DataFrame
    measurement: pd.DataFrame
    fingerprint: str


_QUERIES: dict[str, tuple[str, tuple[str, ...]]] = {
    "run": ("select * from mart.run", ("run_key",)),
    "ending": ("select * from mart.ending", ("run_key",)),
    "survival": ("select * from mart.survival", ("run_key",)),
    "complication": ("select * from mart.complication_count", ("run_key", "kind")),
    "state": ("select * from mart.state_interval", ("run_key", "from_h")),
    "score_input": ("select * from mart.score_input", ("run_key",)),
    "score_window": (
        "select run_key, quantity, asked, fit from mart.score_window where fit <> 'own'",
        ("run_key", "quantity", "asked"),
    ),
    "flow": ("select * from mart.cohort_flow", ("source_key", "stage_no")),
    "missing": ("select * from record.missing_value", ("run_key", "field")),
    "set_aside": ("select * from record.set_aside_run", ("run_key",)),
    "carried": ("select * from ledger.carried", ("source_key", "field")),
    "source": (
        "select source_key, plan_written, vital_status_date, no_death_means, attempts from record.source",
        ("source_key",),
    ),
    "coverage": (
        "select source_key, kind, events_kept, looked_until_h, definition,"
        " valid_from_year::varchar as valid_from_year from record.complication_coverage",
        ("source_key", "kind", "valid_from_year"),
    ),
    "kinds": (
        "select kind, label, family, gap_h, window_h, from_h, at_risk, source"
        " from vocabulary.complication_kind",
        ("kind",),
    ),
    "measurement": (
        "select run_key, analyte, window_label, measurement_no::varchar as measurement_no, value"
        " from record.measurement",
        ("run_key", "analyte", "window_label", "measurement_no"),
    ),
}


def load_cohort(con: duckdb.DuckDBPyConnection) -> Cohort:
    """All frames of a connection made by `open_marts`."""
    frames = {name: check_frame(con.execute(query).df(), key) for name, (query, key) in _QUERIES.items()}
    batches = con.execute("select * from ledger.batch order by batch_no").df()
    findings = con.execute("select * from ledger.finding order by all").df()
    row = con.execute("select fingerprint from ledger.store").fetchone()
    return Cohort(**frames, batches=batches, findings=findings, fingerprint=str(row[0]) if row else "")


_BY_RUN = (
    "run",
    "ending",
    "survival",
    "complication",
    "state",
    "score_input",
    "score_window",
    "missing",
    "measurement",
)


def select_runs(cohort: Cohort, run_keys: pd.Series) -> Cohort:
    """The same cohort with only these runs; what belongs to a source as a whole stays."""
    keys = set(run_keys)
    kept = {name: _only(getattr(cohort, name), keys) for name in _BY_RUN}
    return replace(cohort, **kept)


def _only(frame: pd.DataFrame, keys: set[str]) -> pd.DataFrame:
    return frame[frame["run_key"].isin(keys)].reset_index(drop=True)
