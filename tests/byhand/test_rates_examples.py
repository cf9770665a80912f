"""Rates and ratios on a few events. Limits are quantiles of χ² or roots, given to twelve digits."""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import numpy as np
import pytest

from outcomes.analysis._person import person_variance
from outcomes.analysis.rates import incidence_rate, rate_by_band, standardised_ratio

COUNTS, HOURS = [0, 5, 0, 0, 1], [40, 100, 60, 20, 30]
Z = 1.959963984540054


def near(value: F | float) -> Any:
    return pytest.approx(float(value), rel=1e-11)


@pytest.mark.parametrize(
    ("interval", "lower", "upper"),
    [
        # ½χ²(0.025; 6)/1.2 and ½χ²(0.975; 8)/1.2
        ("exact", 0.515560102413, 7.30606089145),
        # m with P(X>=4|m) + ½P(X=3|m) = 0.025, and with P(X<=2|m) + ½P(X=3|m) = 0.025
        ("midp", 0.635913581498, 6.80372434031),
        # 3(1 − 1/27 − z/(3√3))³/1.2 and 4(1 − 1/36 + z/6)³/1.2
        ("byar", 0.502477142475, 7.30447033062),
    ],
)
def test_three_events_in_one_and_a_fifth(interval: str, lower: float, upper: float) -> None:
    found = incidence_rate(3, 1.2, variance=interval).table.iloc[0]
    assert found["estimate"] == near(F(5, 2))
    assert (found["lower"], found["upper"]) == (near(lower), near(upper))


@pytest.mark.parametrize(
    # −ln 0.025; −ln 0.05 (½e^−m = 0.025); (1 − 1/9 + z/3)³
    ("interval", "upper"),
    [("exact", 3.68887945411), ("midp", 2.99573227355), ("byar", 3.66801183217)],
)
def test_no_event_has_an_upper_limit(interval: str, upper: float) -> None:
    found = incidence_rate(0, 1, variance=interval).table.iloc[0]
    assert (found["estimate"], found["lower"]) == (0, 0)
    assert found["upper"] == near(upper)


def test_rule_of_three_is_one_sided() -> None:
    # Two-sided 90% is one-sided 95%: −ln 0.05.
    assert incidence_rate(0, 1, level=0.90).table["upper"].iloc[0] == near(2.99573227355)


def test_three_per_thousand_hours() -> None:
    # 3 events in 500 + 700 hours: 3/1200·1000 = 5/2.
    found = incidence_rate([1, 2], [500, 700], per=1000).table.iloc[0]
    assert found["estimate"] == near(F(5, 2)) and found["exposure"] == 1200 and found["events"] == 3
    assert found["lower"] == near(0.515560102413)


def test_dispersion_of_five_runs() -> None:
    # Rate 6/250 = 3/125; expected 24/25, 12/5, 36/25, 12/25, 18/25;
    # φ = (24/25 + (13/5)²/(12/5) + 36/25 + 12/25 + (7/25)²/(18/25))/4 = 209/144.
    found = incidence_rate(COUNTS, HOURS).table.iloc[0]
    assert found["estimate"] == near(F(3, 125))
    assert found["phi"] == near(F(209, 144)) and float(F(209, 144)) == near(1.45138888889)


def test_log_error_of_a_rate_is_poisson_unless_asked() -> None:
    # 1/√6 on the log scale.
    found = incidence_rate(COUNTS, HOURS).table.iloc[0]
    assert found["std_error"] / found["estimate"] == near(0.408248290464)


def test_robust_error_of_ten_runs() -> None:
    # Residuals n − rT: −24/25, 13/5, −36/25, −12/25, 7/25; squares add to 6290/625;
    # over 6²: 0.528730134904². The five runs twice: half of it, times 10/9 for fewer than fifty runs.
    squares = sum(r * r for r in (F(-24, 25), F(13, 5), F(-36, 25), F(-12, 25), F(7, 25)))
    assert squares == F(6290, 625)
    assert math.sqrt(squares / 36) == near(0.528730134904)
    found = incidence_rate(COUNTS * 2, HOURS * 2, variance="robust").table.iloc[0]
    error = math.sqrt(float(squares / 72 * F(10, 9)))
    assert found["std_error"] / found["estimate"] == near(error)
    assert found["lower"] == near(3 / 125 * math.exp(-Z * error))
    assert found["upper"] == near(3 / 125 * math.exp(Z * error))


def test_robust_limits_of_five_runs_are_poisson_with_a_caution() -> None:
    result = incidence_rate(COUNTS, HOURS, variance="robust")
    assert result.method.variance == "Poisson" and len(result.notes) == 1
    assert result.table["lower"].iloc[0] == result.table["lower_poisson"].iloc[0]


def test_quasi_poisson_error_of_five_runs() -> None:
    # √(φ/6) = √(209/864).
    found = incidence_rate(COUNTS, HOURS, variance="quasi").table.iloc[0]
    assert found["std_error"] / found["estimate"] == near(0.49183142249)
    assert math.sqrt(F(209, 864)) == near(0.49183142249)


def test_robust_error_without_the_factor_from_fifty_runs_on() -> None:
    # Ten times the five runs: Σ squares and x grow tenfold, so SE² is a tenth.
    found = incidence_rate(COUNTS * 10, HOURS * 10, variance="robust").table.iloc[0]
    assert found["std_error"] / found["estimate"] == near(0.528730134904 / math.sqrt(10))


def test_residuals_are_summed_by_person_first() -> None:
    # Persons 1, 1, 2, 3, 3: 41/25, −36/25, −5/25; squares 3002/625 over 36; factor 3/2 for three persons.
    assert math.sqrt(F(3002, 625) / 36) == near(0.365270067515)
    residual = np.array([-24, 65, -36, -12, 7]) / 25 / 6
    assert math.sqrt(person_variance(residual, np.array([0, 0, 1, 2, 2]))) == near(
        0.365270067515 * math.sqrt(1.5)
    )


def test_robust_error_of_twelve_persons() -> None:
    # The same five runs of three persons, four times over with other persons: SE² a quarter, factor 12/11.
    who = [f"{k}{p}" for k in range(4) for p in "aabcc"]
    found = incidence_rate(COUNTS * 4, HOURS * 4, variance="robust", cluster=who).table.iloc[0]
    assert found["std_error"] / found["estimate"] == near(0.365270067515 / 2 * math.sqrt(12 / 11))


def test_influence_of_persons_on_a_proportion() -> None:
    # 1,1,0,1,0,0 of persons 1,1,2,3,4,4: p = 1/2, residuals by person 1, −½, ½, −1: squares 5/2 over 36;
    # 0.263523138347² ; with 4/3: 0.304290309725². Binomial: ¼/6.
    residual = np.array([0.5, 0.5, -0.5, 0.5, -0.5, -0.5]) / 6
    error = math.sqrt(person_variance(residual, np.array([0, 0, 1, 2, 3, 3])))
    assert error == near(0.304290309725) and error / math.sqrt(4 / 3) == near(0.263523138347)
    assert (F(5, 2) / 36) / (F(1, 4) / 6) == F(5, 3)


@pytest.mark.parametrize(
    ("interval", "lower", "upper"),
    [
        ("exact", 0.868695304352, 2.38760059789),
        ("byar", 0.86819974642, 2.38772889517),
        ("midp", 0.897713853165, 2.33914828923),
    ],
)
def test_seventeen_observed_where_eleven_and_a_half_were_expected(
    interval: str, lower: float, upper: float
) -> None:
    found = standardised_ratio(17, 11.4, interval=interval).table.iloc[0]
    assert found["estimate"] == near(F(85, 57)) and float(F(85, 57)) == near(1.49122807018)
    assert (found["lower"], found["upper"]) == (near(lower), near(upper))


def test_bands_of_exposure_add_up_and_an_event_on_the_edge_is_early() -> None:
    # Runs of 20, 50 and 68 h: 20 + 24 + 24 = 68 early hours, 26 + 44 = 70 later; one event at 24.0 h (early).
    table = rate_by_band([20, 50, 68], [1, 1, 2], [24.0, 30, 60], edges=[0, 24], per=1000).table
    assert table["exposure"].tolist() == [68, 70] and table["events"].tolist() == [1, 2]
    assert table["estimate"].tolist() == [near(F(250, 17)), near(F(200, 7))]
    assert incidence_rate(3, 138, per=1000).table["estimate"].iloc[0] == near(F(500, 23))
