"""Two hundred made-up data sets against the definitions written out as loops, in exact fractions.

The oracle knows nothing of arrays, cumulative sums or sorted searches. The infinitesimal jackknife is the
derivative of the estimate by the weight of each run, taken by a complex step, which has no rounding.
"""

from __future__ import annotations

import math
from fractions import Fraction as F
from typing import Any

import numpy as np
import pytest

from outcomes.analysis.competing import cumulative_incidence
from outcomes.analysis.result import Result
from outcomes.analysis.survival import kaplan_meier, median_time, nelson_aalen, restricted_mean
from outcomes.errors import NotEstimable

pytestmark = pytest.mark.thorough

SETS = 200
Row = tuple[int, int, int]  # entry (0: seen from the start), time, cause (0 censored)


def made(seed: int) -> list[Row]:
    """1 to 30 runs, many ties; in every other set some enter late."""
    rng = np.random.default_rng([20260101, seed])
    n, latest = int(rng.integers(1, 31)), int(rng.choice([3, 8, 40]))
    rows = []
    for _ in range(n):
        time = int(rng.integers(0, latest + 1))
        entry = int(rng.integers(0, time)) if seed % 2 and time > 1 and rng.random() < 0.4 else 0
        rows.append((entry, time, int(rng.integers(0, 3))))
    return rows


def watched(rows: list[Row], t: int, weights: list[Any] | None = None) -> Any:
    """Summed weights of those seen before t and not gone before t; entry 0 is from the start."""
    w = weights or [1] * len(rows)
    return sum((v for (e, s, _), v in zip(rows, w, strict=True) if (e == 0 or e < t) and s >= t), 0)


def gone(rows: list[Row], t: int, causes: set[int], weights: list[Any] | None = None) -> Any:
    w = weights or [1] * len(rows)
    return sum((v for (_, s, c), v in zip(rows, w, strict=True) if s == t and c in causes), 0)


def event_times(rows: list[Row]) -> list[int]:
    return sorted({s for _, s, c in rows if c})


def gap(rows: list[Row]) -> float:
    """First end after which nobody is watched although someone enters later."""
    for t in sorted({s for _, s, _ in rows}):
        still = any((e == 0 or e <= t) and s > t for e, s, _ in rows)
        if not still and any(s > t for _, s, _ in rows):
            return t
    return math.inf


def survival(rows: list[Row], t: float, one: Any = F(1), weights: list[Any] | None = None) -> Any:
    s = one
    for u in event_times(rows):
        if u <= t:
            s = s * (one - one * gone(rows, u, {1, 2}, weights) / watched(rows, u, weights))
    return s


def incidence(
    rows: list[Row], cause: int, t: float, one: Any = F(1), weights: list[Any] | None = None
) -> Any:
    total, s = one * 0, one
    for u in event_times(rows):
        if u <= t:
            n = watched(rows, u, weights)
            total = total + s * gone(rows, u, {cause}, weights) / n
            s = s * (one - one * gone(rows, u, {1, 2}, weights) / n)
    return total


def greenwood(rows: list[Row], t: float) -> F:
    total = F(0)
    for u in event_times(rows):
        n, d = watched(rows, u), gone(rows, u, {1, 2})
        if u <= t and n > d:
            total += F(d, n * (n - d))
    return F(survival(rows, t) ** 2 * total)


def multinomial(rows: list[Row], cause: int, t: float) -> F:
    """Σ D² d/(n(n−d)) + Σ S(u−)² dk(n−dk)/n³ − 2 Σ D S(u−) dk/n²; a term with D = 0 is 0."""
    total, s, f = F(0), F(1), incidence(rows, cause, t)
    for u in event_times(rows):
        if u > t:
            break
        n, d, dk = watched(rows, u), gone(rows, u, {1, 2}), gone(rows, u, {cause})
        rest = f - incidence(rows, cause, u)
        total += s**2 * F(dk * (n - dk), n**3) - 2 * rest * s * F(dk, n**2)
        total += rest**2 * F(d, n * (n - d)) if rest else 0
        s *= 1 - F(d, n)
    return total


def jackknife(rows: list[Row], estimate: Any) -> float:
    """Σ over runs of the squared derivative by the run's weight."""
    step, total = 1e-30, 0.0
    for i in range(len(rows)):
        weights: list[Any] = [complex(1, step if i == j else 0) for j in range(len(rows))]
        total += (estimate(weights).imag / step) ** 2
    return total


def value(result: Result, t: float, column: str, cause: str = "") -> Any:
    table = result.table
    here = table[table["time"] == t]
    return (here[here["cause"] == cause] if cause else here)[column].iloc[0]


def arrays(rows: list[Row]) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    entry, time, cause = (np.array(v) for v in zip(*rows, strict=True))
    return entry, time, cause


@pytest.mark.parametrize("block", range(10))
def test_curve_hazard_and_area(block: int) -> None:
    for seed in range(block * SETS // 10, (block + 1) * SETS // 10):
        rows = made(seed)
        entry, time, cause = arrays(rows)
        curve = kaplan_meier(time, cause > 0, entry=entry)
        hazard = nelson_aalen(time, cause > 0, entry=entry)
        h = spread = F(0)
        for u in event_times(rows):
            n, d = watched(rows, u), gone(rows, u, {1, 2})
            h, spread = h + F(d, n), spread + F(d, n**2)
            assert value(curve, u, "at_risk") == n and value(curve, u, "events") == d
            if u > gap(rows):
                assert value(curve, u, "reason") == "empty_risk_set"
                continue
            s = survival(rows, u)
            assert value(curve, u, "estimate") == pytest.approx(float(s), abs=1e-12)
            assert value(hazard, u, "estimate") == pytest.approx(float(h), rel=1e-12)
            assert value(hazard, u, "std_error") ** 2 == pytest.approx(float(spread), rel=1e-12)
            if s:
                assert value(curve, u, "std_error") ** 2 == pytest.approx(
                    float(greenwood(rows, u)), rel=1e-10
                )
        _check_area(rows, max(1, int(time.max()) - 1))


def _check_area(rows: list[Row], tau: int) -> None:
    entry, time, cause = arrays(rows)
    lost = tau > gap(rows) and survival(rows, gap(rows)) > 0
    open_end = tau > time.max() and survival(rows, tau) > 0
    if lost or open_end:
        with pytest.raises(NotEstimable):
            restricted_mean(time, cause > 0, tau, entry=entry)
        return
    found = restricted_mean(time, cause > 0, tau, entry=entry).table.iloc[0]
    # Every step has whole ends, so the area is a sum over whole hours.
    height = [survival(rows, t) for t in range(tau)]
    assert found["estimate"] == pytest.approx(float(sum(height)), rel=1e-12)
    total = F(0)
    for u in event_times(rows):
        n, d = watched(rows, u), gone(rows, u, {1, 2})
        rest = sum(height[u:], F(0)) if u < tau else F(0)
        total += rest**2 * F(d, n * (n - d)) if rest and n > d else 0
    if total:
        assert found["std_error"] ** 2 == pytest.approx(float(total), rel=1e-10)


@pytest.mark.parametrize("block", range(10))
def test_incidence_and_its_variance(block: int) -> None:
    for seed in range(block * SETS // 10, (block + 1) * SETS // 10):
        rows = made(seed)
        entry, time, cause = arrays(rows)
        found = cumulative_incidence(time, cause, entry=entry, causes=[1, 2])
        for u in event_times(rows):
            for k in (1, 2):
                if u > gap(rows) and survival(rows, gap(rows)) > 0:
                    assert value(found, u, "reason", str(k)) == "empty_risk_set"
                    continue
                f = incidence(rows, k, u)
                assert value(found, u, "estimate", str(k)) == pytest.approx(float(f), abs=1e-12)
                if f < 1:
                    error = value(found, u, "std_error", str(k))
                    assert error**2 == pytest.approx(float(multinomial(rows, k, u)), rel=1e-8, abs=1e-14)


@pytest.mark.parametrize("seed", range(24))
def test_jackknife_is_the_derivative_by_each_run(seed: int) -> None:
    rows = made(seed)
    entry, time, cause = arrays(rows)
    found = cumulative_incidence(time, cause, entry=entry, causes=[1, 2], variance="infinitesimal_jackknife")
    for u in event_times(rows):
        # After the last of the risk set S = 0, and the derivative of a ratio over no one says nothing.
        if u > gap(rows) or survival(rows, u) == 0:
            break
        for k in (1, 2):
            theirs = jackknife(rows, lambda w, k=k, u=u: incidence(rows, k, u, complex(1), w))
            assert value(found, u, "std_error", str(k)) ** 2 == pytest.approx(theirs, rel=1e-9, abs=1e-15)
        theirs = jackknife(rows, lambda w, u=u: survival(rows, u, complex(1), w))
        ours = value(found, u, "std_error", "still supported") ** 2
        assert ours == pytest.approx(theirs, rel=1e-9, abs=1e-15)


@pytest.mark.parametrize("p", [0.25, 0.5, 0.75])
def test_quantile_by_its_definition(p: float) -> None:
    for seed in range(SETS):
        rows = made(seed)
        entry, time, cause = arrays(rows)
        height, last = F(1) - F(p), gap(rows)
        at = [u for u in event_times(rows) if u <= last]
        found = median_time(kaplan_meier(time, cause > 0, entry=entry), p).table["estimate"].iloc[0]
        below = [u for u in at if survival(rows, u) <= height]
        if not below:
            assert not isinstance(found, float)
            continue
        expected = F(below[0])
        if survival(rows, below[0]) == height:
            further = [u for u in at if survival(rows, u) < height]
            expected = F(below[0] + further[0], 2) if further else expected
        assert found == float(expected), seed
