"""Which runs are counted, and how complete the records are: sections 1 and 2 of the audit."""

from __future__ import annotations

from typing import Any

import pandas as pd

from outcomes.analysis.result import Caution, Result
from outcomes.cohort.frames import Cohort
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, TableOf
from outcomes.study.audit_data import Audit
from outcomes.study.shape import counted, run_list

# Variables of the completeness table: field, label. Only those that some source carries are shown.
VARIABLES = (
    ("person.birth_date", "age"),
    ("person.birth_year", "age"),
    ("support_run.age_years", "age"),
    ("person.sex_recorded", "sex"),
    ("support_run.weight_kg", "body mass"),
    ("person.height_cm", "height"),
    ("indication.group", "reason for support"),
    ("support_run.intended_pathway", "plan at start"),
    ("pre_support_state.had_arrest", "arrest before support"),
    ("cannulation.arterial_return", "arterial return"),
    ("cannulation.leg_cannula", "leg cannula"),
    ("cannulation.right_sided_monitoring", "right-sided monitoring"),
    ("measurement.lactate", "lactate before support"),
    ("measurement.ph_arterial", "pH before support"),
    ("measurement.bicarbonate", "bicarbonate before support"),
    ("measurement.creatinine", "creatinine before support"),
    ("measurement.sbp", "systolic pressure before support"),
    ("measurement.dbp", "diastolic pressure before support"),
    ("measurement.platelets", "platelets before support"),
    ("measurement.peak_inspiratory_pressure", "airway pressure before support"),
    ("hospital_outcome.discharge", "time of discharge or death in hospital"),
    ("hospital_outcome.is_alive_at_discharge", "alive at discharge"),
    ("follow_up.contact", "last contact"),
    ("follow_up.vital_status", "alive or dead at last contact"),
    ("neuro_outcome.cpc", "CPC grade"),
)

OF_SURVIVORS = "CPC grade"  # asked of those who left hospital alive


def who_is_counted(audit: Audit) -> Answer:
    """Stages from the records read to the people whose survival is followed; what left each and why."""
    cohort = audit.current
    stages = _stages(audit)
    result = counted(stages, ["group", "events", "at_risk", "why"], words=("why",))
    rows = tuple(RowOf(str(s["group"]), str(s["label"]), {"group": str(s["group"])}) for s in stages)
    columns = (
        ColumnOf("left", "Left", "count", ("events",)),
        ColumnOf("reason", "Reason", "word", ("why",)),
        ColumnOf("remaining", "Remaining", "count", ("at_risk",)),
    )
    special, cautions = _cannot_tell(audit)
    table = TableOf(
        "Who is counted, step by step",
        "Step",
        "steps",
        rows,
        columns,
        links={("first", "remaining"): "first_runs", ("period", "remaining"): "all_runs"},
    )
    listed = [r for r in special if r["keys"] is not None and len(r["keys"])]
    lists = {f"list_{r['group']}": run_list(str(r["label"]), r["keys"]) for r in listed}
    lists["all_runs"] = run_list("Runs of the period", cohort.run["run_key"])
    lists["first_runs"] = run_list("First runs", cohort.run.loc[cohort.run["is_first_run"], "run_key"])
    return Answer(
        {"steps": result, "lines": counted(special, ["group", "events", "reason", "why"], words=("why",))},
        {"who": table, "special": _special_layout(special, listed)},
        {"who_steps": FigureOf("steps", "Who is counted", "who")},
        facts={"any_repeat": bool((cohort.run["nth_run"].fillna(1) > 1).any())},
        cautions=cautions,
        lists=lists,
    )


def _special_layout(special: list[dict[str, Any]], listed: list[dict[str, Any]]) -> TableOf:
    return TableOf(
        "Runs that need a word of their own",
        "Kind",
        "lines",
        tuple(RowOf(str(r["group"]), str(r["label"]), {"group": str(r["group"])}) for r in special),
        (
            ColumnOf("runs", "Runs", "count", ("events",)),
            ColumnOf("treatment", "How they are treated", "word", ("why",)),
        ),
        links={(str(r["group"]), "runs"): f"list_{r['group']}" for r in listed},
    )


def _stages(audit: Audit) -> list[dict[str, object]]:
    cohort = audit.current
    n_runs, n_aside = len(cohort.run), len(cohort.set_aside)
    n_elsewhere = len(audit.whole.run) + len(audit.whole.set_aside) - n_runs - n_aside
    n_first = int(cohort.run["is_first_run"].sum())
    named = len(audit.whole.run) + len(audit.whole.set_aside)
    return [
        {"group": "named", "label": "runs named by the sources", "events": 0, "why": "", "at_risk": named},
        {
            "group": "of_period",
            "label": "runs that began in the period",
            "events": n_elsewhere,
            "why": "began in another year",
            "at_risk": n_runs + n_aside,
        },
        {
            "group": "period",
            "label": "runs in the store",
            "events": n_aside,
            "why": "set aside whole: key, start, end or ending could not be used",
            "at_risk": n_runs,
        },
        {
            "group": "first",
            "label": "first runs, one a person",
            "events": n_runs - n_first,
            "why": "later run of the same person, or the first run is set aside or in another year",
            "at_risk": n_first,
        },
    ]


_SPECIAL = {
    "later_runs": ("later runs of a person", "counted for endings and complications, not for survival"),
    "no_first_run": (
        "later runs whose first run is not in this period",
        "the person is not in survival; bounds are given there",
    ),
    "open": ("still on support at the extract", "censored then; never counted as survivors"),
    "transferred_in": ("transferred in on support", "observed from arrival on, if that time is known"),
    "unknown_entry": (
        "transferred in at an unknown time",
        "in no curve and no rate: how long they had to survive is unknown",
    ),
    "transferred_out": (
        "transferred out on support",
        "censored at transfer; their later fate is unknown here",
    ),
}


def _cannot_tell(audit: Audit) -> tuple[list[dict[str, Any]], tuple[Caution, ...]]:
    """Lines for what an audit must name.

    Later runs, open runs, transfers, attempts, people without a first run.
    """
    run = audit.current.run
    later = run[~run["is_first_run"]]
    runs = {
        "later_runs": later,
        "no_first_run": later[~later["person_key"].isin(run.loc[run["is_first_run"], "person_key"])],
        "open": run[run["end_kind"] == "open"],
        "transferred_in": run[run["is_transferred_in"]],
        "unknown_entry": run[run["has_unknown_entry"].fillna(False).astype(bool)],
        "transferred_out": run[run["end_kind"] == "transfer_out"],
    }
    lines = [_line(key, label, runs[key], treatment) for key, (label, treatment) in _SPECIAL.items()]
    lines.append(_attempts(audit.current))
    if runs["open"].empty:
        return lines, ()
    said = "Some runs were still on support at the extract; they are censored, not survivors."
    return lines, (Caution("OPEN", said),)


def _line(key: str, label: str, rows: pd.DataFrame, treatment: str) -> dict[str, object]:
    return {"group": key, "label": label, "events": len(rows), "why": treatment, "keys": rows["run_key"]}


def _attempts(cohort: Cohort) -> dict[str, object]:
    told = cohort.source["attempts"] == "included"
    line: dict[str, object] = {"group": "attempts", "label": "attempts that never reached flow", "keys": None}
    if not told.any():
        return {
            **line,
            "events": None,
            "reason": "not_recorded",
            "why": "not in the sources: a share of all attempts cannot be given",
        }
    n = cohort.flow.loc[cohort.flow["stage_no"] == 5, "n"].sum()
    return {**line, "events": int(n), "why": "not in any denominator of runs"}


def completeness(audit: Audit) -> Answer:
    """Recorded, missing, not applicable and set aside for every variable that we use and a source carries."""
    result = missing_table(audit.current)
    labels = {str(g): str(g) for g in result.table["group"]}
    rows = tuple(RowOf(f"v{i}", label, {"group": label}) for i, label in enumerate(labels.values()))
    columns = (
        ColumnOf("recorded", "Recorded", "count", ("events",)),
        ColumnOf("missing", "Not recorded", "count", ("missing",)),
        ColumnOf("not_applicable", "Does not apply", "count", ("not_applicable",)),
        ColumnOf("set_aside", "Set aside", "count", ("set_aside",)),
        ColumnOf("not_carried", "Source has no such column", "count", ("not_carried",)),
        ColumnOf("share", "Not recorded, of those it applies to", "x_of_n", ("lacking", "applies")),
    )
    worst = result.table.sort_values(["share", "group"], ascending=[False, True])
    over = worst[(worst["share"] > 0.1)]["group"].tolist()
    notes = (
        (Caution("MISS", "More than a tenth is missing for: " + ", ".join(map(str, over)) + "."),)
        if over
        else ()
    )
    return Answer(
        {"completeness": Result(result.table, result.method, result.counts, notes)},
        {
            "completeness": TableOf(
                "How complete the records are, worst first", "Variable", "completeness", rows, columns
            )
        },
        facts={
            "complete": not over,
            "worst": str(worst["group"].iloc[0]) if len(worst) and worst["share"].iloc[0] > 0 else "",
        },
    )


def missing_table(cohort: Cohort) -> Result:
    """One row a variable.

    Columns: events (recorded), missing, not_applicable, set_aside, not_carried, lacking, applies, share.
    """
    rows = []
    runs = cohort.run[["run_key", "source_key"]]
    for label in dict.fromkeys(label for _, label in VARIABLES):
        fields = [f for f, name in VARIABLES if name == label]
        asked = (
            runs[cohort.run["is_alive_at_discharge"].fillna(False).astype(bool)]
            if label == OF_SURVIVORS
            else runs
        )
        rows.append(_variable(cohort, asked, label, fields))
    shown = [r for r in rows if r["carried"]]
    shown.sort(key=lambda r: (-float(r["share"]), str(r["group"])))
    return counted(
        [{k: v for k, v in r.items() if k != "carried"} for r in shown],
        [
            "group",
            "events",
            "missing",
            "not_applicable",
            "set_aside",
            "not_carried",
            "lacking",
            "applies",
            "share",
        ],
    )


def _variable(cohort: Cohort, runs: pd.DataFrame, label: str, fields: list[str]) -> dict[str, float | str]:
    carried = set(cohort.carried.loc[cohort.carried["field"].isin(fields), "source_key"])
    inside = runs["source_key"].isin(carried)
    stem = cohort.missing["field"].str.split(".").str[:2].str.join(".")
    of_runs = cohort.missing[stem.isin(fields) & cohort.missing["run_key"].isin(runs["run_key"])]
    worst = of_runs.groupby("run_key")["missing_kind"].agg(lambda kinds: sorted(kinds)[-1])
    counts = worst.value_counts()
    n = int(inside.sum())
    missing, aside, apart = (int(counts.get(k, 0)) for k in ("not_recorded", "set_aside", "not_applicable"))
    apart += int(counts.get("none", 0))
    applies = n - apart
    lacking = missing + aside
    return {
        "group": label,
        "events": n - missing - aside - apart,
        "missing": missing,
        "not_applicable": apart,
        "set_aside": aside,
        "not_carried": len(runs) - n,
        "carried": bool(carried),
        "lacking": lacking,
        "applies": applies,
        "share": lacking / applies if applies else 0.0,
    }


ANALYSES = {"who_is_counted": who_is_counted, "completeness": completeness}
