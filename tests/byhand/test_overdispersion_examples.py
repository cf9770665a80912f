"""Do runs differ more than one rate allows? The negative binomial fit and its Poisson limit."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy.stats import nbinom, poisson

from outcomes.analysis.rates import overdispersion
from outcomes.errors import NotEstimable

COUNTS = [0, 0, 0, 4] * 3


def rows(result: Any) -> list[Any]:
    return [row for _, row in result.table.iterrows()]


def test_dispersion_is_where_the_probabilities_are_largest() -> None:
    # Equal hours: the rate is 12/12 = 1 whatever θ is; φ = 12·(3·1 + 9)/4/11 = 36/11.
    whole, every = rows(overdispersion(COUNTS, [1.0] * 12))
    assert every["estimate"] == pytest.approx(1.0, rel=1e-12) and whole["phi"] == pytest.approx(36 / 11)
    near = whole["theta"] * np.linspace(0.99, 1.01, 2001)
    likelihood = nbinom.logpmf(np.array(COUNTS)[:, None], near, near / (near + 1)).sum(axis=0)
    assert whole["log_likelihood"] == pytest.approx(likelihood.max(), rel=1e-10)
    assert abs(near[likelihood.argmax()] / whole["theta"] - 1) < 1e-4
    # LR against Poisson(1); half the tail of χ² on 1 is erfc(√(x/2))/2.
    gain = 2 * (whole["log_likelihood"] - poisson.logpmf(COUNTS, 1).sum())
    assert whole["statistic"] == pytest.approx(gain, rel=1e-9)
    assert whole["p_value"] == pytest.approx(math.erfc(math.sqrt(gain / 2)) / 2, rel=1e-9)
    # Information of the log rate with θ known: Σ μ/(1 + μ/θ).
    assert every["std_error"] == pytest.approx(math.sqrt((1 + 1 / whole["theta"]) / 12), rel=1e-12)


def test_runs_that_differ_less_than_chance_are_poisson() -> None:
    whole, every = rows(overdispersion([1] * 12, [1.0] * 12))
    assert whole["alpha"] == 0 and whole["statistic"] == 0 and whole["p_value"] == 0.5
    assert every["std_error"] == pytest.approx(math.sqrt(1 / 12))


def test_group_without_events_keeps_its_row() -> None:
    _, first, second = rows(overdispersion([0, 0, 0, *COUNTS], [2.0] * 15, group=["a"] * 3 + ["b"] * 12))
    assert first["estimate"] == 0 and first["reason"] == "no_events"
    assert second["estimate"] == pytest.approx(0.5)


@pytest.mark.parametrize(
    ("events", "hours", "code"),
    [([], [], "no_runs"), ([0, 0], [0, 0], "zero_exposure"), ([0, 0, 0], [1, 1, 1], "no_events"),
     ([1, 2], [1, 1], "one_run")],
)  # fmt: skip
def test_nothing_to_see(events: list[int], hours: list[float], code: str) -> None:
    with pytest.raises(NotEstimable) as told:
        overdispersion(events, hours)
    assert told.value.reason_code == code


def test_one_run_far_from_all_others_still_has_an_answer() -> None:
    whole, every = rows(overdispersion([500] + [0] * 30, [1e-3] + [1e3] * 30))
    assert np.isfinite([float(whole["alpha"]), float(every["estimate"])]).all()
