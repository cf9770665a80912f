"""How long each published score takes on a million rows, beside a pandas expression over the same columns.

Run by hand: python tests/benchmarks/score_speed.py [rows]. Prints seconds and their ratio; the aim is at most ten.
"""

from __future__ import annotations

import sys
from collections.abc import Callable
from functools import partial
from time import perf_counter

import numpy as np
import pandas as pd

from outcomes.scores.catalogue import chosen_options, our_catalogue
from outcomes.scores.engine import compute
from outcomes.scores.model import Score, under

ROWS = 1_000_000
TIMES = 3


def frame_of(score: Score, n: int) -> pd.DataFrame:
    """Random rows inside the hard limits of every input that the score reads under its default choices."""
    draw = np.random.default_rng(2)
    active = under(score, chosen_options(score, None))
    columns: dict[str, object] = {}
    for entry in active.inputs:
        field = entry.field
        if field.kind == "yes_no":
            columns[field.name] = draw.random(n) < 0.5
        elif field.kind == "choice":
            columns[field.name] = pd.Categorical.from_codes(
                draw.integers(0, len(field.choices), n), list(field.choices)
            )
        else:
            low, high = (0.0 if limit is None else limit for limit in (field.low, field.high))
            values = low + (high - low) * draw.random(n)
            columns[field.name] = values if field.kind == "number" else np.floor(values)
    return pd.DataFrame(columns)


def expression(frame: pd.DataFrame) -> pd.Series:
    """Points by one comparison a column: the least that pandas could do with the same columns."""
    first = frame.iloc[0]
    return sum((frame[name] == first[name]) * 3 for name in frame.columns) - 6


def fastest(call: Callable[[], object]) -> float:
    spent = []
    for _ in range(TIMES):
        start = perf_counter()
        call()
        spent.append(perf_counter() - start)
    return min(spent)


def main() -> None:
    n = int(sys.argv[1]) if len(sys.argv) > 1 else ROWS
    print(f"{n:,} rows; best of {TIMES}")
    print(f"{'score':<22}{'columns':>8}{'score, s':>10}{'pandas, s':>11}{'ratio':>7}")
    for score in our_catalogue().scores():
        if score.is_implemented:
            frame = frame_of(score, n)
            ours = fastest(partial(compute, score, frame))
            theirs = fastest(partial(expression, frame))
            print(f"{score.key:<22}{frame.shape[1]:>8}{ours:>10.2f}{theirs:>11.2f}{ours / theirs:>7.1f}")


if __name__ == "__main__":
    main()
