"""Rates, their ratios, observed over expected, standardised rates, mean cumulative counts."""

from __future__ import annotations

from typing import Any

import numpy as np
from harness import Case, dataset

from outcomes.analysis.rates import (
    direct_standardisation,
    incidence_rate,
    mean_cumulative_count,
    overdispersion,
    rate_ratio,
    standardised_ratio,
)
from outcomes.analysis.survival import kaplan_meier

INTERVALS = {"garwood": "exact", "exact": "exact", "midp": "midp", "byar": "byar"}


def rate(case: Case) -> dict[str, Any]:
    events, exposure, per = (case.inputs[k] for k in ("events", "exposure", "per"))
    found = {}
    for theirs, ours in (("garwood", "exact"), ("midp", "midp"), ("byar", "byar")):
        row = incidence_rate(events, exposure, per=per, variance=ours, level=case.level).table.iloc[0]
        found |= {"rate": row["estimate"], f"{theirs}_lower": row["lower"], f"{theirs}_upper": row["upper"]}
    return found


def no_event(case: Case) -> dict[str, Any]:
    exposure = case.inputs["exposure"]
    upper = {level: incidence_rate(0, exposure, level=level).table["upper"].iloc[0] for level in (0.90, 0.95)}
    return {"one_sided_upper": upper[0.90], "two_sided_upper": upper[0.95]}


def ratio(case: Case) -> dict[str, Any]:
    counts = [case.inputs[k] for k in ("x1", "t1", "x0", "t0")]
    exact = rate_ratio(*counts, level=case.level).table.iloc[0]
    mid = rate_ratio(*counts, variance="midp", level=case.level).table.iloc[0]
    return {
        "ratio": exact["estimate"], "exact_lower": exact["lower"], "exact_upper": exact["upper"],
        "exact_p_doubled_tail": exact["p_value"], "midp_lower": mid["lower"], "midp_upper": mid["upper"],
        "midp_p": exact["p_midp"],
    }  # fmt: skip


def bleeds() -> tuple[Any, Any, Any]:
    """Bleeds and hours on support of every synthetic run, and whether it began in an arrest."""
    runs, events = dataset("synth_runs"), dataset("synth_events")
    counts = events[events["type"] == "bleed"].groupby("run_id").size().reindex(runs["run_id"], fill_value=0)
    return counts.to_numpy(), (runs["support_end_h"] - runs["entry_h"]).to_numpy(), runs["arrest"].to_numpy()


def overall(case: Case) -> dict[str, Any]:
    events, hours, _ = bleeds()
    table = {kind: incidence_rate(events, hours, variance=kind).table.iloc[0] for kind in ("exact", "quasi")}
    quasi, exact = table["quasi"], table["exact"]
    whole, every = (
        row for _, row in overdispersion(events, hours, group=["all"] * len(hours)).table.iterrows()
    )
    return {
        "log_rate_nb": float(np.log(every["estimate"])), "se_nb": every["std_error"], "theta": whole["theta"],
        "alpha": whole["alpha"], "loglik_nb": whole["log_likelihood"], "lr_alpha0": whole["statistic"],
        "lr_p_half": whole["p_value"],
        "n_runs": quasi["at_risk"], "events": quasi["events"], "dispersion_pearson": quasi["phi"],
        "log_rate_poisson": float(np.log(exact["estimate"])),
        "se_poisson": exact["std_error"] / exact["estimate"],
        "se_quasi": quasi["std_error"] / quasi["estimate"],
    }  # fmt: skip


def robust(case: Case) -> dict[str, Any]:
    events, hours, _ = bleeds()
    row = incidence_rate(events, hours, per=1000, variance="robust").table.iloc[0]
    poisson = incidence_rate(events, hours, per=1000, variance="exact").table.iloc[0]
    return {
        "rate_per_1000h": row["estimate"], "se_log_rate_robust": row["std_error"] / row["estimate"],
        "se_log_rate_poisson": poisson["std_error"] / poisson["estimate"], "lower": row["lower"],
        "upper": row["upper"],
    }  # fmt: skip


def by_arrest(case: Case) -> dict[str, Any]:
    events, hours, arrest = bleeds()
    yes = arrest == 1
    row = rate_ratio(events[yes], hours[yes], events[~yes], hours[~yes], variance="quasi").table.iloc[0]
    base = incidence_rate(int(events[~yes].sum()), float(hours[~yes].sum())).table.iloc[0]
    error = float(np.sqrt(row["phi"])) * base["std_error"] / base["estimate"]
    whole, no, other = (r for _, r in overdispersion(events, hours, group=arrest).table.iterrows())
    logs = [float(np.log(r["estimate"])) for r in (no, other)]
    return {"coef_quasi": [float(np.log(base["estimate"])), float(np.log(row["estimate"]))],
            "se_quasi": [error, row["std_error"]], "phi": row["phi"], "theta": whole["theta"],
            "coef_nb": [logs[0], logs[1] - logs[0]],
            "se_nb": [no["std_error"], float(np.hypot(no["std_error"], other["std_error"]))]}  # fmt: skip


def direct(case: Case) -> dict[str, Any]:
    values = [case.inputs[k] for k in ("counts", "population", "standard")]
    rows = {
        k: direct_standardisation(*values, interval=k).table.iloc[0]
        for k in ("fay-feuer", "tiwari", "dobson")
    }
    gamma = rows["fay-feuer"]
    return {
        "crude": gamma["crude"], "dsr": gamma["estimate"], "var": gamma["std_error"] ** 2,
        "fay_feuer_lower": gamma["lower"], "fay_feuer_upper": gamma["upper"],
        "tiwari_upper": rows["tiwari"]["upper"], "dobson_lower": rows["dobson"]["lower"],
        "dobson_upper": rows["dobson"]["upper"],
    }  # fmt: skip


def observed(case: Case) -> dict[str, Any]:
    if case.method == "smr":
        o, e = case.inputs["observed"], case.inputs["expected"]
    else:
        rates, population = case.inputs["reference_rates"], case.inputs["population"]
        o, e = sum(case.inputs["counts"]), float(np.dot(rates, population))
    found = {}
    for theirs, ours in (("exact", "exact"), ("byar", "byar"), ("midp", "midp")):
        row = standardised_ratio(o, e, interval=ours, level=case.level).table.iloc[0]
        found |= {f"{theirs}_lower": row["lower"], f"{theirs}_upper": row["upper"]}
    found |= {"observed": row["events"], "expected": row["expected"], "smr": row["estimate"],
              "chisq_p_exact_doubled": row["p_value"]}  # fmt: skip
    if "log_normal_lower" in case.expected:
        log = standardised_ratio(o, e, variance_expected=0).table.iloc[0]
        found |= {"log_normal_lower": log["lower"], "log_normal_upper": log["upper"]}
    return found


def predicted(case: Case) -> dict[str, Any]:
    frame = case.data()
    y, p = case.column("y", frame).astype(int), case.column("p", frame)
    row = standardised_ratio(y, p).table.iloc[0]
    byar = standardised_ratio(y, p, interval="byar").table.iloc[0]
    return {
        "observed": row["events"], "expected": row["expected"], "oe": row["estimate"],
        "var_binomial": row["variance"], "poisson_exact_ci": [row["lower"], row["upper"]],
        "byar_ci": [byar["lower"], byar["upper"]],
        "binomial_var_ci": [row["given_lower"], row["given_upper"]],
        "p_upper_poisson_binomial": row["p_at_least"], "p_lower_poisson_binomial": row["p_at_most"],
        "p_two_sided_midp": row["p_given"],
    }  # fmt: skip


def _mean(case: Case, frame: Any, time: str, event: Any, terminal: Any) -> Any:
    """Tables of the mean count and of the terminal event; a run ends at its last row."""
    frame = frame.assign(hit=np.asarray(event, dtype=bool), last=np.asarray(terminal, dtype=int))
    ends = frame.groupby("id").agg(end=(time, "max"), last=("last", "max")).reset_index()
    hits, times = frame[frame["hit"]], case.inputs["times"]
    count = mean_cumulative_count(
        hits["id"], hits[time], run=ends["id"], end=ends["end"], terminal=ends["last"], times=times
    )
    curve = kaplan_meier(ends["end"], ends["last"], times=times)
    return count.table.set_index("time").loc[times], curve.table.set_index("time").loc[times]


def mean_count(case: Case) -> dict[str, Any]:
    frame = case.data()
    table, _ = _mean(case, frame, case.inputs.get("stop", "time"), frame["status"] == 1, 0)
    names = {"mcf": "estimate", "se_lawless_nadeau": "std_error", "se_survfit_robust": "std_error",
             "log_lower": "lower", "log_upper": "upper"}  # fmt: skip
    return {theirs: table[ours].tolist() for theirs, ours in names.items() if theirs in case.expected}


def mean_count_with_death(case: Case) -> dict[str, Any]:
    if isinstance(case.dataset, list):
        return support_events(case)
    frame = case.data()
    event, terminal = frame["status"] == 1, frame["status"].isin((2, 3))
    table, curve = _mean(case, frame, "stop", event, terminal)
    return {"mean_events": table["estimate"].tolist(), "se_ghosh_lin": table["std_error"].tolist(),
            "survival": curve["estimate"].tolist()}  # fmt: skip


def support_events(case: Case) -> dict[str, Any]:
    runs = case.data("synth_runs")
    events = dataset("synth_events").query(case.inputs["event"])
    events, times = events[events["run_id"].isin(runs["run_id"])], case.inputs["times"]
    ended = runs["support_end"] != 0
    count = mean_cumulative_count(
        events["run_id"], events["time_h"], run=runs["run_id"], end=runs["support_end_h"], terminal=ended,
        times=times,
    )  # fmt: skip
    table = count.table.set_index("time").loc[times]
    curve = kaplan_meier(runs["support_end_h"], ended, times=times).table.set_index("time").loc[times]
    return {"mean_events": table["estimate"].tolist(), "se_ghosh_lin": table["std_error"].tolist(),
            "on_support": curve["estimate"].tolist()}  # fmt: skip


NAIVE = "censors the terminal event; never printed"
ANSWERS = {
    "incidence_rate": rate,
    "incidence_rate_zero": no_event,
    "rate_ratio": ratio,
    "overdisp.synth.overall": overall,
    "overdisp.synth.robust": robust,
    "overdisp.synth.arrest": by_arrest,
    "direct_standardisation": direct,
    "indirect_standardisation": observed,
    "smr": observed,
    "oe_ratio": predicted,
    "mcf": mean_count,
    "mcf_terminal": mean_count_with_death,
}
NOT_OURS = {
    "incidence_rate_zero": {"rule_of_three": "an approximation of the one-sided limit"},
    "rate_ratio": {
        "exact_p_R_minlike": "the P value by smaller probabilities; ours is twice the smaller tail",
        "wald_lower": "exact limits are printed", "wald_upper": "exact limits are printed",
    },
    "oe_ratio": dict.fromkeys(("z_binomial", "z_poisson"), "exact P values are printed"),
    "mcf": {"se_poisson_naive": "treats the events of one run as independent"},
    "mcf_terminal": {"naive_nelson_death_censored": NAIVE, "naive_nelson_support_end_censored": NAIVE},
}  # fmt: skip
