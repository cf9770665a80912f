"""The coverage command: what it counts, and (slow) a smaller run of it.

It is loaded by its path: its file has the name of a well-known package.
"""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import numpy as np
import pandas as pd
import pytest

HERE = Path(__file__).parent


@pytest.fixture(scope="module")
def simulation() -> ModuleType:
    spec = importlib.util.spec_from_file_location("interval_coverage_command", HERE / "coverage.py")
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


def test_the_committed_table_has_no_line_that_fails(simulation: ModuleType) -> None:
    text = (HERE / "coverage_table.txt").read_text(encoding="utf-8")
    lines = [line for line in text.splitlines() if " by day " in line or "alive" in line or " per " in line]
    assert len(lines) == 1 + len(simulation.ENDINGS) + 1 + len(simulation.RATES)
    assert {line.split()[-1] for line in lines} == {"yes", "-"}
    assert text.startswith("Coverage of 95% intervals in ")


def test_three_programmes_have_every_estimate_once_and_in_bounds(simulation: ModuleType) -> None:
    names = {simulation._survival_name()}
    names |= {simulation._incidence_name(e) for e in (*simulation.ENDINGS, "still supported")}
    names |= {simulation._rate_name(kind, variance) for kind, variance, _ in simulation.RATES}
    for number in range(3):
        found = simulation.one(number, runs=60, seed=5)
        assert set(found) == names
        for estimate, low, high in found.values():
            assert np.isnan(estimate) or low <= estimate <= high
        shares = [found[simulation._incidence_name(e)][0] for e in (*simulation.ENDINGS, "still supported")]
        assert sum(shares) == pytest.approx(1, abs=1e-12)


def test_first_runs_delayed_entry_and_the_extract_are_taken_from_the_frames(simulation: ModuleType) -> None:
    """Survival by the same definitions, counted directly where nobody is censored before day 30."""
    cohort = simulation.generate(400, 9)
    found = simulation.estimated(cohort)[simulation._survival_name()][0]
    run = cohort.run[(cohort.run["nth_run"] == 1) & (cohort.run["entry_h"] == 0)]
    old = run[run["start_utc"] < pd.Timestamp(cohort.extract_date) - pd.Timedelta(days=31)]
    alive = (old["death_h"].fillna(np.inf) > 30 * 24).mean()
    assert found == pytest.approx(alive, abs=0.03)


@pytest.mark.parametrize(
    ("rule", "held", "good"),
    [
        ("holds", 950, True), ("holds", 920, False), ("holds", 980, False),
        ("not below", 980, True), ("not below", 920, False), ("shown", 500, True),
    ],
)  # fmt: skip
def test_the_verdict_fails_where_it_must(simulation: ModuleType, rule: str, held: int, good: bool) -> None:
    found = [{"x": (0.5, 0.4, 0.6)}] * held + [{"x": (0.5, 0.51, 0.6)}] * (1000 - held)
    line = simulation.counted(simulation.Aim("x", 0.5, rule), found)
    assert (line["held"], line["good"]) == (held, good)


@pytest.mark.slow
def test_smaller_run_holds(simulation: ModuleType) -> None:
    table = simulation.simulate(100, 200, 11)
    assert table["good"].all(), simulation.printed(table, 100, 200, 11)
    # Ninety of a hundred must be found out: limits at 95% around a truth that is half a width away.
    shifted = simulation.Aim(simulation._survival_name(), float(table["true"].iloc[0]) + 0.06, "holds")
    found = [simulation.one(i, runs=200, seed=11) for i in range(100)]
    assert not simulation.counted(shifted, found)["good"]
