"""Ratios of rates: two groups, and observed over expected."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.optimize import brentq
from scipy.stats import beta, binom, poisson

from outcomes.analysis._input import (
    Floats,
    binary,
    number,
    one_of,
    predictions,
    probability,
    same_length,
    whole_count,
)
from outcomes.analysis._person import FEW_PERSONS, few_repeats, persons, too_few
from outcomes.analysis.intervals import log_limits, z_of
from outcomes.analysis.rate import DISPERSED, INTERVALS, MANY_RUNS, SPREAD, Runs, count_limits
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.errors import NotEstimable

COLUMNS = (
    "estimate", "std_error", "lower", "upper", "p_value", "p_midp", "events", "exposure", "events_reference",
    "exposure_reference", "phi", "reason",
)  # fmt: skip
CONDITIONAL = {
    "exact": ("Clopper-Pearson", "Przyborowski J, Wilenski H. Biometrika 1940;31:313-323."),
    "midp": ("mid-P", "Breslow NE, Day NE. Statistical Methods in Cancer Research II. IARC, 1987."),
}


def rate_ratio(events: Any, exposure: Any, events_reference: Any, exposure_reference: Any, *,
               variance: str = "auto", cluster: Any = None, cluster_reference: Any = None,
               level: float = 0.95, time_unit: str = "") -> Result:  # fmt: skip
    """Rate of a group over the rate of a reference group.

    Each pair is two totals, or one value a run. variance: exact (conditional binomial, Clopper–Pearson),
    midp; robust (log ratio, by run or by person) or quasi, which need one value a run in both groups;
    auto: robust if both have at least 10 runs and φ exceeds 1.5, else exact. Robust limits need ten runs
    (people) in each group.

    Columns: estimate, std_error (of the log ratio), lower, upper, p_value (exact, twice the smaller tail,
    at most 1), p_midp, events, exposure, events_reference, exposure_reference, phi, reason. No event in
    the reference group: estimate and upper limit are missing (not_reached), the lower limit stands.

    Raises InputRefused; NotEstimable no_runs, zero_exposure, no_events (in either group).

    >>> r = rate_ratio(4, 0.9, 2, 1.1).table.iloc[0]
    >>> [round(float(r[c]), 6) for c in ("estimate", "lower", "upper")]
    [2.444444, 0.35033, 27.02297]
    """
    probability(level)
    one_of(variance, "variance", ("auto", *CONDITIONAL, *SPREAD))
    pair = _Pair(Runs.checked(events, exposure, cluster),
                 Runs.checked(events_reference, exposure_reference, cluster_reference))  # fmt: skip
    pair.check()
    kind, notes = pair.choose(variance)
    exact, mid = pair.p_values()
    row: dict[str, object] = {
        "p_value": exact, "p_midp": mid, "events": pair.one.total, "exposure": pair.one.time,
        "events_reference": pair.ref.total, "exposure_reference": pair.ref.time, "phi": pair.phi(),
    }  # fmt: skip
    if pair.ref.total > 0:
        row["estimate"] = pair.one.rate / pair.ref.rate
        if pair.one.total > 0:
            row["std_error"] = float(np.sqrt(1 / pair.one.total + 1 / pair.ref.total))
    if kind in SPREAD:
        error = pair.log_error(kind)
        row |= {"std_error": error} | log_limits(pair.one.rate / pair.ref.rate, error, level)
        words, source = SPREAD[kind]
        name = "quasi-Poisson" if kind == "quasi" else "robust by " + ("run" if cluster is None else "person")
    else:
        row |= pair.conditional(kind, level)
        (words, source), name = CONDITIONAL[kind], "conditional binomial"
    method = Method("ratio of rates", name, words, level, "", time_unit, (source,))
    found = {"events": int(pair.one.total), "events_reference": int(pair.ref.total)}
    return Result(tidy([row], COLUMNS), method, found, notes)


@dataclass(frozen=True)
class _Pair:
    one: Runs
    ref: Runs

    def check(self) -> None:
        if self.one.time <= 0 or self.ref.time <= 0:
            raise NotEstimable("zero_exposure", "one of the groups was never at risk")
        if self.one.total + self.ref.total == 0:
            raise NotEstimable("no_events", "there is no event in either group")

    @property
    def single(self) -> bool:
        return self.one.single or self.ref.single

    def phi(self) -> float | None:
        """Pearson's φ about the two rates; None without one value a run or with three runs at most."""
        n = int((self.one.t > 0).sum() + (self.ref.t > 0).sum())
        if self.single or n < 3:
            return None
        parts = [g.pearson() for g in (self.one, self.ref) if g.total > 0]
        return sum(parts) / (n - 2)

    def choose(self, variance: str) -> tuple[str, tuple[Caution, ...]]:
        if variance in CONDITIONAL:
            return variance, ()
        if self.single or self.one.total == 0 or self.ref.total == 0:
            return "exact", ()
        size = min(persons(g.who, len(g.x)) for g in (self.one, self.ref))
        if variance == "auto":
            phi, runs = self.phi(), min(len(self.one.x), len(self.ref.x))
            spread = phi is not None and phi > DISPERSED and runs >= MANY_RUNS and size >= FEW_PERSONS
            return ("robust" if spread else "exact"), (*few_repeats(self.one.who), *few_repeats(self.ref.who))
        return ("exact", (too_few(),)) if size < FEW_PERSONS else (variance, ())

    def log_error(self, kind: str) -> float:
        if kind == "quasi":
            phi = self.phi() or 1.0
            return float(np.sqrt(phi * (1 / self.one.total + 1 / self.ref.total)))
        return float(np.hypot(self.one.log_error("robust"), self.ref.log_error("robust")))

    def conditional(self, kind: str, level: float) -> dict[str, object]:
        """Limits from those of the share of all events that fell into the first group."""
        x, n = int(self.one.total), int(self.one.total + self.ref.total)
        tail = (1 - level) / 2
        if kind == "exact":
            low = float(beta.ppf(tail, x, n - x + 1)) if x else 0.0
            high = float(beta.isf(tail, x + 1, n - x)) if x < n else 1.0
        else:
            low = _root(lambda p: binom.sf(x, n, p) + 0.5 * binom.pmf(x, n, p) - tail) if x else 0.0
            high = _root(lambda p: binom.cdf(x - 1, n, p) + 0.5 * binom.pmf(x, n, p) - tail) if x < n else 1.0
        scale = self.ref.time / self.one.time
        if high >= 1:
            return {"lower": low / (1 - low) * scale, "reason": "not_reached"}
        return {"lower": low / (1 - low) * scale, "upper": high / (1 - high) * scale}

    def p_values(self) -> tuple[float, float]:
        x, n = int(self.one.total), int(self.one.total + self.ref.total)
        share = self.one.time / (self.one.time + self.ref.time)
        smaller = float(min(binom.cdf(x, n, share), binom.sf(x - 1, n, share)))
        return min(1.0, 2 * smaller), min(1.0, 2 * (smaller - 0.5 * float(binom.pmf(x, n, share))))


def _root(function: Any) -> float:
    return float(brentq(function, 0.0, 1.0, xtol=1e-15, rtol=1e-14))


OE_COLUMNS = (
    "estimate", "lower", "upper", "p_value", "given_lower", "given_upper", "p_given", "p_at_least",
    "p_at_most", "events", "expected", "variance", "reason",
)  # fmt: skip


def standardised_ratio(observed: Any, expected: Any, *, variance_expected: Any = None,
                       interval: str = "exact", level: float = 0.95) -> Result:  # fmt: skip
    """Observed / expected with limits of the observed count; expected is treated as known.

    observed, expected: two numbers; or outcomes (0 or 1) and predicted probabilities, shape (n,). interval:
    exact (Garwood), midp, byar. variance_expected (0 or more): limits on the log scale with it, instead.

    Columns: estimate, lower, upper, p_value (Poisson, twice the smaller tail, at most 1), events,
    expected. With predictions also: given_lower and given_upper, normal limits given the predictions, not
    below 0; variance Σp(1−p); p_at_least and p_at_most, exact tails of the observed count; p_given,
    two-sided mid-P.

    Raises InputRefused; NotEstimable no_runs, zero_expected.

    >>> r = standardised_ratio(17, 11.4).table.iloc[0]
    >>> [round(float(r[c]), 4) for c in ("estimate", "lower", "upper")]
    [1.4912, 0.8687, 2.3876]
    """
    probability(level)
    one_of(interval, "interval", tuple(INTERVALS))
    predicted = None
    if np.ndim(observed) > 0 or np.ndim(expected) > 0:
        predicted = predictions(expected, None, "expected")
        hit = same_length(len(predicted), binary(observed, None, "observed"), "observed", "the predictions")
        if not len(predicted):
            raise NotEstimable("no_runs", "no run has a prediction")
        x, e = int(hit.sum()), float(predicted.sum())
    else:
        x, e = whole_count(observed, "observed"), number(expected, "expected", least=0.0)
    if e == 0:
        raise NotEstimable("zero_expected", "nothing was expected")
    tails = float(min(poisson.cdf(x, e), poisson.sf(x - 1, e)))
    row: dict[str, object] = {"estimate": x / e, "events": x, "expected": e, "p_value": min(1.0, 2 * tails)}
    (words, source), name = INTERVALS[interval], "Poisson in O"
    if variance_expected is not None and x > 0:
        spread = number(variance_expected, "variance_expected", least=0.0)
        row |= log_limits(x / e, float(np.sqrt(1 / x + spread / e**2)), level)
        words, name = "log", "Poisson in O, variance of E added"
    else:
        low, high = count_limits(x, interval, level)
        row |= {"lower": low / e, "upper": high / e}
    if predicted is not None:
        row |= _given(x, predicted, level)
    method = Method(
        "O/E, E known" if name == "Poisson in O" else "O/E", name, words, level, citations=(source,)
    )
    return Result(tidy([row], OE_COLUMNS), method, {"events": x})


def _given(x: int, p: Floats, level: float) -> dict[str, object]:
    """What the predictions themselves say about the observed count."""
    e, variance = float(p.sum()), float(np.sum(p * (1 - p)))
    masses = poisson_binomial(p)
    above, below, at = float(masses[x:].sum()), float(masses[: x + 1].sum()), float(masses[x])
    half = z_of(level) * float(np.sqrt(variance)) / e
    row: dict[str, object] = {
        "variance": variance, "p_at_least": min(1.0, above), "p_at_most": min(1.0, below),
        "p_given": min(1.0, 2 * (min(above, below) - at / 2)),
    }  # fmt: skip
    if variance > 0:
        row |= {"given_lower": max(0.0, x / e - half), "given_upper": x / e + half}
    return row


def poisson_binomial(p: Floats) -> Floats:
    """Probability of 0, 1, … n events of independent chances p, by convolution.

    >>> [round(float(v), 4) for v in poisson_binomial(np.array([0.2, 0.5, 0.8]))]
    [0.08, 0.42, 0.42, 0.08]
    """
    masses = np.zeros(len(p) + 1)
    masses[0] = 1.0
    for i, chance in enumerate(np.sort(p)):
        masses[1 : i + 2] = masses[1 : i + 2] * (1 - chance) + masses[: i + 1] * chance
        masses[0] *= 1 - chance
    return masses
