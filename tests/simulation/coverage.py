"""Do intervals that say 95% hold the truth in 95 of 100 programmes?

    python tests/simulation/coverage.py --cohorts 1000 --runs 300 --seed 1

makes that many programmes with the synthetic cohort, each with transfers in on support (delayed entry), runs
still going at the extract (censoring) and several runs of some people (first runs are analysed), estimates
from the generator's own frames and counts how often the interval holds the generator's truth. The truth is
about the whole population: cumulative incidences are integrated over severity, indication and age, survival
and rates are means of a million simulated runs. The table is printed and written beside this file.

How a line is judged, by exact 99% limits of the share of programmes whose interval held:
  holds       the limits contain 95%
  not below   for exact intervals, which promise at least 95%: the limits do not lie below 95%
  shown       for comparison only
Rare endings (about two in a programme or fewer) are judged as exact ones: where none happened their upper
limit is the exact one, and counts of 0, 1, 2 cannot give 95% on the spot.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from functools import partial
from pathlib import Path

import numpy as np
import pandas as pd

ROOT = Path(__file__).resolve().parents[2]
if str(ROOT) not in sys.path:
    sys.path.append(str(ROOT))

from outcomes.analysis.competing import cumulative_incidence  # noqa: E402
from outcomes.analysis.rates import incidence_rate, proportion  # noqa: E402
from outcomes.analysis.survival import kaplan_meier, survival_at  # noqa: E402
from synthetic_cohort import Cohort, Settings, generate, truth  # noqa: E402

TABLE = Path(__file__).with_name("coverage_table.txt")
SURVIVAL_DAY, INCIDENCE_DAY = 30.0, 14.0
RATES = (
    ("air_entrainment", "exact", "not below"),  # rare: about two in a programme
    ("bleeding_cannulation_site", "robust", "holds"),  # frequent, and some people have many
    ("circuit_thrombosis", "robust", "holds"),  # frequent in long runs
    ("circuit_thrombosis", "exact", "shown"),
)
PER_DAYS = 1000.0
FEW = 3.0
LEVEL, JUDGED_AT = 0.95, 0.99
TRUTH_RUNS = 1_000_000

Found = dict[str, tuple[float, float, float]]


@dataclass(frozen=True)
class Aim:
    """What an interval is about: its truth, and how it is judged (holds, not below, shown)."""

    what: str
    true: float
    rule: str


def aims(runs: int, truth_runs: int = TRUTH_RUNS) -> list[Aim]:
    """Every line of the table with its truth, for programmes of `runs` runs."""
    known = truth(Settings(), (INCIDENCE_DAY, SURVIVAL_DAY), n=truth_runs)
    survival = known.survival.set_index("day")["probability"]
    out = [Aim(_survival_name(), float(survival[SURVIVAL_DAY]), "holds")]
    everyone = known.incidence[
        (known.incidence["group"] == "all") & (known.incidence["day"] == INCIDENCE_DAY)
    ]
    for row in everyone.itertuples():
        rule = "not below" if row.probability * runs < FEW else "holds"
        out.append(Aim(_incidence_name(row.ending), float(row.probability), rule))
    staying = known.on_support[
        (known.on_support["group"] == "all") & (known.on_support["day"] == INCIDENCE_DAY)
    ]
    out.append(Aim(_incidence_name("still supported"), float(staying["probability"].iloc[0]), "holds"))
    rate = known.rates.set_index("kind")["per_1000_days"]
    out += [Aim(_rate_name(kind, variance), float(rate[kind]), rule) for kind, variance, rule in RATES]
    return out


def _survival_name() -> str:
    return f"alive at day {SURVIVAL_DAY:g}, log-log"


def _incidence_name(ending: str) -> str:
    return f"{ending.replace('_', ' ')} by day {INCIDENCE_DAY:g}, log(-log(1-F))"


def _rate_name(kind: str, variance: str) -> str:
    return f"{kind.replace('_', ' ')} per 1,000 days, {variance}"


def estimated(cohort: Cohort) -> Found:
    """Estimate, lower and upper limit of every aim from one programme; NaN where there is none."""
    run = cohort.run
    first = (run["nth_run"] == 1).to_numpy()
    cut_h = ((_cutoff(cohort) - run["start_utc"]) / pd.Timedelta(hours=1)).to_numpy()
    death = cohort.follow_up["register_death_h"].to_numpy(dtype=float)
    entry = cohort.ending["entry_h"].to_numpy(dtype=float)
    watched = cohort.ending["observed_h"].to_numpy(dtype=float)
    ending = cohort.ending["end_kind"].replace("open", "").to_numpy()
    return dict(
        [
            _survival(np.where(np.isnan(death), cut_h, death)[first], ~np.isnan(death[first]), entry[first]),
            *_incidences(watched[first], ending[first], entry[first]),
            *_rates(cohort, first, watched - entry),
        ]
    )


def _cutoff(cohort: Cohort) -> pd.Timestamp:
    """Noon of the day of the extract, in UTC without its zone, as the starts are."""
    noon = pd.Timestamp(cohort.extract_date).replace(hour=12).tz_localize(cohort.programme.zone)
    return noon.tz_convert("UTC").tz_localize(None)


def _survival(
    time: np.ndarray, dead: np.ndarray, entry: np.ndarray
) -> tuple[str, tuple[float, float, float]]:
    at = SURVIVAL_DAY * 24
    row = survival_at(kaplan_meier(time, dead, entry=entry, times=[at]), at).table.iloc[0]
    return _survival_name(), _limits(row)


def _incidences(
    time: np.ndarray, ending: np.ndarray, entry: np.ndarray
) -> Iterator[tuple[str, tuple[float, float, float]]]:
    at = INCIDENCE_DAY * 24
    table = cumulative_incidence(time, ending, entry=entry, causes=ENDINGS, times=[at]).table
    for _, row in table[table["time"] == at].iterrows():
        yield _incidence_name(row["cause"]), _limits(row)


def _rates(
    cohort: Cohort, first: np.ndarray, hours: np.ndarray
) -> Iterator[tuple[str, tuple[float, float, float]]]:
    for kind, variance, _ in RATES:
        found = cohort.complication[cohort.complication["kind"] == kind]
        counted = found["run_no"].value_counts().reindex(cohort.run["run_no"], fill_value=0).to_numpy()
        row = incidence_rate(counted[first], hours[first] / 24, per=PER_DAYS, variance=variance).table.iloc[0]
        yield _rate_name(kind, variance), _limits(row)


ENDINGS = (
    "recovery", "durable_lvad", "transplantation", "death", "withdrawal", "temporary_pump", "crossover_vv",
    "transfer_out",
)  # fmt: skip


def _limits(row: pd.Series) -> tuple[float, float, float]:
    values = row[["estimate", "lower", "upper"]].to_numpy(dtype=float, na_value=np.nan)
    return float(values[0]), float(values[1]), float(values[2])


def one(number: int, runs: int, seed: int) -> Found:
    """The estimates of programme `number`; each has a seed of its own, so workers change nothing."""
    return estimated(generate(runs, seed * 1_000_000 + number))


def counted(aim: Aim, found: Sequence[Found]) -> dict[str, object]:
    """One line of the table."""
    values = np.array([f[aim.what] for f in found])
    known = ~np.isnan(values).any(axis=1)
    estimate, low, high = values[known].T
    held = int(((low <= aim.true) & (aim.true <= high)).sum())
    share = proportion(held, int(known.sum()), interval="exact", level=JUDGED_AT).table.iloc[0]
    above, below = share["upper"] >= LEVEL, share["lower"] <= LEVEL
    good = {"holds": above and below, "not below": above, "shown": True}[aim.rule]
    return {
        "what": aim.what, "true": aim.true, "mean": estimate.mean(), "width": (high - low).mean(),
        "programmes": int(known.sum()), "held": held, "coverage": share["estimate"],
        "lowest": share["lower"], "highest": share["upper"], "rule": aim.rule, "good": bool(good),
    }  # fmt: skip


def simulate(
    cohorts: int, runs: int, seed: int, *, workers: int = 1, truth_runs: int = TRUTH_RUNS
) -> pd.DataFrame:
    """The table of coverage, one row an interval."""
    work = partial(one, runs=runs, seed=seed)
    if workers > 1:
        with ProcessPoolExecutor(workers) as pool:
            found = list(pool.map(work, range(cohorts), chunksize=10))
    else:
        found = [work(i) for i in range(cohorts)]
    return pd.DataFrame([counted(aim, found) for aim in aims(runs, truth_runs)])


def printed(table: pd.DataFrame, cohorts: int, runs: int, seed: int) -> str:
    """The table as text."""
    head = (
        f"Coverage of 95% intervals in {cohorts} made-up programmes of {runs} runs (seed {seed}).\n"
        f"First runs; delayed entry; censored at the extract. Limits of the coverage are exact, 99%.\n\n"
        f"{'interval':<48}{'truth':>9}{'mean':>9}{'width':>9}{'held':>7}{'of':>7}{'coverage':>10}"
        f"{'99% limits':>17}  rule       verdict\n"
    )
    lines = []
    for r in table.itertuples():
        verdict = "-" if r.rule == "shown" else "yes" if r.good else "NO"
        lines.append(
            f"{r.what:<48}{r.true:>9.4f}{r.mean:>9.4f}{r.width:>9.4f}{r.held:>7}{r.programmes:>7}"
            f"{r.coverage:>10.3f}{r.lowest:>10.3f} {r.highest:.3f}  {r.rule:<11}{verdict}"
        )
    return head + "\n".join(lines) + "\n"


def main(arguments: Sequence[str] | None = None) -> int:
    """Print and write the table; 1 if a line is not as it should be."""
    parser = argparse.ArgumentParser(description="Coverage of 95%% intervals in made-up programmes.")
    parser.add_argument("--cohorts", type=int, default=1000)
    parser.add_argument("--runs", type=int, default=300)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--workers", type=int, default=2, help="processes; changes nothing but the time")
    parser.add_argument("--write", type=Path, default=TABLE, help="file for the table")
    given = parser.parse_args(arguments)
    table = simulate(given.cohorts, given.runs, given.seed, workers=given.workers)
    text = printed(table, given.cohorts, given.runs, given.seed)
    given.write.write_text(text, encoding="utf-8")
    print(text, end="")
    return 0 if table["good"].all() else 1


if __name__ == "__main__":
    raise SystemExit(main())
