"""A hundred made-up data sets against lifelines, statsmodels and scipy, where those are known to be right.

Left aside on purpose: lifelines' limits at S = 0 and 1, its median and its Aalen–Johansen (which moves tied
times at random); statsmodels' Jeffreys limits at 0 and n, its mid-P rate limits at 0 and its incidence where
the last risk set is used up. Those differ from the definitions, which tests/properties holds us to.
"""

from __future__ import annotations

import warnings
from typing import Any

import numpy as np
import pytest
from lifelines import KaplanMeierFitter, NelsonAalenFitter
from scipy.stats import binomtest
from statsmodels.duration.survfunc import CumIncidenceRight, SurvfuncRight
from statsmodels.stats.contingency_tables import mcnemar
from statsmodels.stats.proportion import confint_proportions_2indep, proportion_confint
from statsmodels.stats.rates import confint_poisson

from outcomes.analysis.competing import cumulative_incidence
from outcomes.analysis.rates import incidence_rate, paired_difference, proportion, proportion_difference
from outcomes.analysis.survival import kaplan_meier, nelson_aalen

pytestmark = pytest.mark.thorough

SEEDS = range(100)


def made(seed: int, *, late: bool) -> tuple[Any, Any, Any]:
    """10 to 80 runs, times in whole or in fine hours, a third censored, some entering early but late."""
    rng = np.random.default_rng([20260102, seed])
    n = int(rng.integers(10, 81))
    time = rng.exponential(60, n)
    time = np.ceil(time / 6) if seed % 2 else np.round(time, 3) + 0.001
    cause = rng.choice([0, 1, 2], n, p=[0.34, 0.4, 0.26])
    entry = np.where(rng.random(n) < 0.3, rng.random(n) * 0.5 * time, 0.0) if late else np.zeros(n)
    return np.floor(entry * 100) / 100, time, cause


def columns(table: Any, at: Any, *names: str) -> list[Any]:
    rows = table.set_index("time").loc[at]
    return [rows[name].to_numpy(dtype=float, na_value=np.nan) for name in names]


@pytest.mark.parametrize("late", [False, True])
def test_survival_against_statsmodels(late: bool) -> None:
    compared = 0
    for seed in SEEDS:
        entry, time, cause = made(seed, late=late)
        theirs = SurvfuncRight(time, cause > 0, entry=entry if late else None)
        at = np.asarray(theirs.surv_times)
        table = kaplan_meier(time, cause > 0, entry=entry).table
        s, error, n = columns(table, at, "estimate", "std_error", "at_risk")
        known = ~np.isnan(s)
        assert np.allclose(s[known], theirs.surv_prob[known], rtol=0, atol=1e-12)
        assert np.array_equal(n, theirs.n_risk)
        inside = known & (s > 0)
        assert np.allclose(error[inside], theirs.surv_prob_se[inside], rtol=1e-9)
        compared += int(inside.sum())
    assert compared > 1000


@pytest.mark.parametrize("late", [False, True])
def test_survival_against_lifelines(late: bool) -> None:
    compared = 0
    for seed in SEEDS:
        entry, time, cause = made(seed, late=late)
        fitter = KaplanMeierFitter()
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # of tiny early risk sets, which are compared all the same
            try:
                fitter.fit(time, cause > 0, entry=entry if late else None)
            except ValueError:
                continue  # it refuses some data with late entry
        at = np.unique(time[cause > 0])
        table = kaplan_meier(time, cause > 0, entry=entry).table
        s, low, high = columns(table, at, "estimate", "lower", "upper")
        theirs = fitter.survival_function_.loc[at].to_numpy()[:, 0]
        limits = fitter.confidence_interval_.loc[at].to_numpy()
        known = ~np.isnan(s)
        assert np.allclose(s[known], theirs[known], rtol=0, atol=1e-10)
        inside = known & (s > 1e-9) & (s < 1)
        assert np.allclose(low[inside], limits[inside, 0], rtol=1e-7, atol=1e-10)
        assert np.allclose(high[inside], limits[inside, 1], rtol=1e-7, atol=1e-10)
        compared += int(inside.sum())
    assert compared > 1000


def test_weights_and_hazard_against_lifelines() -> None:
    for seed in SEEDS:
        _, time, cause = made(seed, late=False)
        weight = np.random.default_rng(seed).integers(1, 4, len(time))
        fitter = KaplanMeierFitter().fit(time, cause > 0, weights=weight)
        at = np.unique(time[cause > 0])
        (s,) = columns(kaplan_meier(time, cause > 0, weights=weight).table, at, "estimate")
        assert np.allclose(s, fitter.survival_function_.loc[at].to_numpy()[:, 0], rtol=0, atol=1e-10)
        hazard = NelsonAalenFitter(nelson_aalen_smoothing=False).fit(time, cause > 0)
        (h,) = columns(nelson_aalen(time, cause > 0).table, at, "estimate")
        assert np.allclose(h, hazard.cumulative_hazard_.loc[at].to_numpy()[:, 0], rtol=1e-10)


def test_incidence_against_statsmodels() -> None:
    compared = 0
    for seed in SEEDS:
        _, time, cause = made(seed, late=False)
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # a division by zero where the last risk set is used up
            theirs = CumIncidenceRight(time, cause)
        table = cumulative_incidence(time, cause, causes=[1, 2]).table
        for k in range(1, len(theirs.cinc) + 1):
            part = table[table["cause"] == str(k)]
            here = np.isin(theirs.times, np.unique(time[cause > 0]))  # they also print times of censoring
            f, error = columns(part, theirs.times[here], "estimate", "std_error")
            value, spread = theirs.cinc[k - 1][here], theirs.cinc_se[k - 1][here]
            known = ~np.isnan(spread) & ~np.isnan(error)
            assert np.allclose(f, value, rtol=0, atol=1e-12)
            assert np.allclose(error[known], spread[known], rtol=1e-8, atol=1e-10)
            compared += int(known.sum())
    assert compared > 2000


def test_shares_against_statsmodels_and_scipy() -> None:
    rng = np.random.default_rng(20260103)
    for _ in range(100):
        n = int(rng.integers(1, 200))
        x, level = int(rng.integers(0, n + 1)), float(rng.choice([0.8, 0.9, 0.95, 0.99]))
        for ours, theirs in (("wilson", "wilson"), ("exact", "beta"), ("jeffreys", "jeffreys")):
            if theirs == "jeffreys" and x in (0, n):
                continue
            found = proportion(x, n, interval=ours, level=level).table.iloc[0]
            low, high = proportion_confint(x, n, alpha=1 - level, method=theirs)
            assert found["lower"] == pytest.approx(low, rel=1e-9, abs=1e-12)
            assert found["upper"] == pytest.approx(high, rel=1e-9, abs=1e-12)
        for name in ("wilson", "exact"):
            limits = binomtest(x, n).proportion_ci(level, method=name)
            found = proportion(x, n, interval=name, level=level).table.iloc[0]
            assert found["lower"] == pytest.approx(limits.low, rel=1e-8, abs=1e-10)
            assert found["upper"] == pytest.approx(limits.high, rel=1e-8, abs=1e-10)


def test_difference_of_shares_against_statsmodels() -> None:
    rng = np.random.default_rng(20260104)
    for _ in range(100):
        n1, n2 = (int(v) for v in rng.integers(2, 150, 2))
        x1, x2 = int(rng.integers(0, n1 + 1)), int(rng.integers(0, n2 + 1))
        low, high = confint_proportions_2indep(x1, n1, x2, n2, method="newcomb", compare="diff")
        found = proportion_difference(x1, n1, x2, n2).table.iloc[0]
        assert found["lower"] == pytest.approx(low, abs=1e-10)
        assert found["upper"] == pytest.approx(high, abs=1e-10)
        b, c = int(rng.integers(0, 30)), int(rng.integers(1, 30))
        exact = mcnemar([[3, b], [c, 5]], exact=True).pvalue
        assert paired_difference(3, b, c, 5).table["p_exact"].iloc[0] == pytest.approx(exact, rel=1e-10)


def test_rates_against_statsmodels() -> None:
    rng = np.random.default_rng(20260105)
    for _ in range(100):
        x, t = int(rng.integers(0, 120)), float(rng.uniform(0.1, 5000))
        # Its root of the mid-P equation carries five to seven digits.
        for ours, theirs, digits in (("exact", "exact-c", 1e-10), ("midp", "midp-c", 1e-5)):
            if x == 0 and theirs == "midp-c":
                continue
            found = incidence_rate(x, t, variance=ours).table.iloc[0]
            low, high = confint_poisson(x, t, method=theirs)
            assert found["upper"] == pytest.approx(float(high), rel=digits)
            assert found["lower"] == pytest.approx(float(np.nan_to_num(low)), rel=digits, abs=1e-12)
