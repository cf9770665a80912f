"""Several runs of one person: influences are summed over a person's runs before they are squared."""

from __future__ import annotations

import numpy as np

from outcomes.analysis._input import Codes, Floats
from outcomes.analysis.result import Caution

FEW_PERSONS, SMALL_SAMPLE = 10, 50


def summed(values: Floats, who: Codes | None) -> Floats:
    """Sum over each person's rows (axis 0); the rows themselves if every row is a person."""
    if who is None:
        return values
    total = np.zeros((int(who.max()) + 1, *values.shape[1:]))
    np.add.at(total, who, values)
    return total[np.unique(who)]


def persons(who: Codes | None, n: int) -> int:
    return n if who is None else len(np.unique(who))


def small_sample(g: int) -> float:
    """G/(G−1) for fewer than 50 persons, else 1."""
    return g / (g - 1) if 1 < g < SMALL_SAMPLE else 1.0


def person_variance(influence: Floats, who: Codes | None) -> float:
    """Σ over persons of (Σ influence)², times G/(G−1) for fewer than 50 persons."""
    total = summed(influence, who)
    return float(np.sum(total**2)) * small_sample(len(total))


def too_few(where: str = "") -> Caution:
    return Caution(
        "FEW-PERSONS",
        f"Fewer than ten people{f' in {where}' if where else ''}: the interval treats runs as independent.",
    )


def few_repeats(who: Codes | None) -> tuple[Caution, ...]:
    """Caution if someone has several runs but fewer than ten do."""
    if who is None:
        return ()
    again = int((np.bincount(who) > 1).sum())
    text = "Fewer than ten people have a second run: compare with first runs only."
    return (Caution("REPEATS", text),) if 0 < again < FEW_PERSONS else ()
