"""What must hold of shares, rates, ratios and their limits, whatever the counts."""

from __future__ import annotations

import numpy as np
import pytest
from analysis_made import FEW, floats, has_no_nan
from hypothesis import given
from hypothesis import strategies as st

from outcomes.analysis.rates import (
    incidence_rate,
    proportion,
    proportion_difference,
    rate_ratio,
    standardised_ratio,
)

SHARES = ("wilson", "exact", "midp", "jeffreys")
COUNTS = ("exact", "midp", "byar")
LEVELS = st.sampled_from([0.8, 0.9, 0.95, 0.99])
EXPOSURE = st.floats(0.01, 1e6)


@st.composite
def share(draw: st.DrawFn) -> tuple[int, int]:
    n = draw(st.integers(1, 300))
    return draw(st.integers(0, n)), n


@FEW
@given(share(), st.sampled_from(SHARES), LEVELS)
def test_limits_of_a_share_are_mirrored(made: tuple[int, int], interval: str, level: float) -> None:
    x, n = made
    table = proportion(x, n, interval=interval, level=level).table
    has_no_nan(table)
    found = table.iloc[0]
    mirror = proportion(n - x, n, interval=interval, level=level).table.iloc[0]
    assert found["lower"] == pytest.approx(1 - mirror["upper"], abs=1e-12)
    assert found["upper"] == pytest.approx(1 - mirror["lower"], abs=1e-12)
    assert 0 <= found["lower"] <= found["estimate"] <= found["upper"] <= 1
    assert found["lower"] < found["upper"]
    assert (x > 0 or found["lower"] == 0) and (x < n or found["upper"] == 1)


@FEW
@given(share(), st.sampled_from(SHARES), LEVELS)
def test_limits_of_a_share_grow_with_the_count(made: tuple[int, int], interval: str, level: float) -> None:
    x, n = made
    here = proportion(x, n + 1, interval=interval, level=level).table.iloc[0]
    more = proportion(x + 1, n + 1, interval=interval, level=level).table.iloc[0]
    assert here["lower"] < more["lower"] and here["upper"] < more["upper"]


@FEW
@given(share(), st.sampled_from(SHARES))
def test_limits_of_a_share_widen_with_the_level_and_close_with_the_number(
    made: tuple[int, int], interval: str
) -> None:
    x, n = made
    narrow, wide = (proportion(x, n, interval=interval, level=v).table.iloc[0] for v in (0.9, 0.99))
    assert wide["lower"] <= narrow["lower"] and narrow["upper"] <= wide["upper"]
    many = proportion(10 * x, 10 * n, interval=interval, level=0.9).table.iloc[0]
    assert many["upper"] - many["lower"] < narrow["upper"] - narrow["lower"]


@FEW
@given(share())
def test_exact_limits_hold_mid_p_limits(made: tuple[int, int]) -> None:
    exact, mid = (proportion(*made, interval=v).table.iloc[0] for v in ("exact", "midp"))
    assert exact["lower"] <= mid["lower"] + 1e-12 and mid["upper"] <= exact["upper"] + 1e-12


@FEW
@given(share(), share(), st.sampled_from(["newcombe", "miettinen-nurminen"]))
def test_difference_changes_its_sign_with_the_order(
    one: tuple[int, int], two: tuple[int, int], interval: str
) -> None:
    table = proportion_difference(*one, *two, interval=interval).table
    has_no_nan(table)
    there, back = table.iloc[0], proportion_difference(*two, *one, interval=interval).table.iloc[0]
    assert there["estimate"] == pytest.approx(-back["estimate"], abs=1e-12)
    assert there["lower"] == pytest.approx(-back["upper"], abs=1e-7)
    assert -1 <= there["lower"] <= there["estimate"] <= there["upper"] <= 1


@FEW
@given(st.integers(0, 400), EXPOSURE, st.sampled_from(COUNTS), LEVELS)
def test_rate_scales_with_its_exposure(x: int, t: float, kind: str, level: float) -> None:
    table = incidence_rate(x, t, variance=kind, level=level).table
    has_no_nan(table)
    first = table.iloc[0]
    days = incidence_rate(x, t / 24, variance=kind, level=level).table.iloc[0]
    per = incidence_rate(x, t, variance=kind, level=level, per=1000).table.iloc[0]
    for name in ("estimate", "lower", "upper"):
        assert days[name] == pytest.approx(24 * first[name], rel=1e-12)
        assert per[name] == pytest.approx(1000 * first[name], rel=1e-12)
    assert 0 <= first["lower"] <= first["estimate"] <= first["upper"]
    assert first["lower"] < first["upper"]


@FEW
@given(st.integers(0, 400), st.sampled_from(COUNTS))
def test_limits_of_a_count_grow_with_it(x: int, kind: str) -> None:
    here, more = (incidence_rate(v, 1.0, variance=kind).table.iloc[0] for v in (x, x + 1))
    assert here["lower"] < more["lower"] or x == 0
    assert here["upper"] < more["upper"]


@FEW
@given(st.lists(st.tuples(st.integers(0, 5), st.floats(0.5, 50)), min_size=2, max_size=30))
def test_rate_of_runs_is_the_rate_of_their_totals(made: list[tuple[int, float]]) -> None:
    x, t = (np.array(v, dtype=float) for v in zip(*made, strict=True))
    table = incidence_rate(x, t, variance="exact").table
    has_no_nan(table)
    runs, total = table.iloc[0], incidence_rate(int(x.sum()), float(t.sum())).table.iloc[0]
    for name in ("estimate", "lower", "upper"):
        assert runs[name] == pytest.approx(total[name], rel=1e-12)
    assert runs["affected"] == (x > 0).sum() and runs["at_risk"] == len(x)


@FEW
@given(st.lists(st.tuples(st.integers(0, 5), st.floats(0.5, 50)), min_size=50, max_size=60))
def test_every_run_twice_halves_the_robust_variance(made: list[tuple[int, float]]) -> None:
    x, t = (np.array(v, dtype=float) for v in zip(*made, strict=True))
    if x.sum() == 0:
        return
    once = incidence_rate(x, t, variance="robust").table.iloc[0]
    twice = incidence_rate(np.tile(x, 2), np.tile(t, 2), variance="robust").table.iloc[0]
    assert once["estimate"] == pytest.approx(twice["estimate"], rel=1e-12)
    assert once["std_error"] ** 2 == pytest.approx(2 * twice["std_error"] ** 2, rel=1e-9)


@FEW
@given(st.lists(st.tuples(st.integers(0, 5), st.floats(0.5, 50)), min_size=12, max_size=30))
def test_order_of_runs_changes_no_rate(made: list[tuple[int, float]]) -> None:
    x, t = (np.array(v, dtype=float) for v in zip(*made, strict=True))
    who = np.arange(len(x)) // 2
    first = incidence_rate(x, t, cluster=who).table
    back = incidence_rate(x[::-1], t[::-1], cluster=who[::-1]).table
    for name in ("estimate", "lower", "upper", "phi"):
        assert np.allclose(floats(first[name]), floats(back[name]), rtol=1e-9, equal_nan=True)


@FEW
@given(st.integers(1, 40), EXPOSURE, st.integers(1, 40), EXPOSURE, st.sampled_from(["exact", "midp"]))
def test_ratio_of_rates_is_inverted_with_the_order(x1: int, t1: float, x0: int, t0: float, kind: str) -> None:
    there = rate_ratio(x1, t1, x0, t0, variance=kind).table.iloc[0]
    back = rate_ratio(x0, t0, x1, t1, variance=kind).table.iloc[0]
    assert there["estimate"] == pytest.approx(1 / back["estimate"], rel=1e-9)
    assert there["lower"] == pytest.approx(1 / back["upper"], rel=1e-6)
    assert there["p_value"] == pytest.approx(back["p_value"], rel=1e-6)
    assert there["lower"] <= there["estimate"] <= there["upper"]


@FEW
@given(st.integers(0, 200), st.floats(0.1, 300), st.sampled_from(COUNTS))
def test_observed_over_expected_is_a_rate_per_expected(x: int, e: float, kind: str) -> None:
    ratio = standardised_ratio(x, e, interval=kind).table.iloc[0]
    rate = incidence_rate(x, e, variance=kind).table.iloc[0]
    for name in ("estimate", "lower", "upper"):
        assert ratio[name] == pytest.approx(rate[name], rel=1e-12)
